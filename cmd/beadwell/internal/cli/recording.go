package cli

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"sync"

	"beadwell/calib"
	"beadwell/calib/session"
	"beadwell/calib/track"
)

// source finds the settings of recordings and reads them.
type source struct {
	app     *app
	file    string // of --session; empty: session.toml beside the track
	flags   *settingFlags
	samples bool // the samples themselves are needed, whatever memory that takes
	inspect bool // a first look: an unknown unit or rate is no error

	folderLock sync.Mutex
	folders    map[string]folderSettings
	above      map[string]*session.Tracks // track lists of folders further up
	alone      bool                       // of companions, which have none of their own

	lock        sync.Mutex
	backgrounds map[string]*track.Recording // read before, by path
	free        map[freeKey]*freeOnce       // measured before
}

// folderSettings are what a folder says of its recordings.
type folderSettings struct {
	settings *session.Settings
	tracks   *session.Tracks
	base     string        // folder of the track list
	free     []session.Row // of the track list, about recordings with the laser off
}

// loaded is one recording with its settings.
type loaded struct {
	path      string // as on the command line
	recording *track.Recording
	settings  *session.Settings
	// background is the recording of the noise that the settings name, if they do.
	background *track.Recording
	// freeBead are what the recordings of the free bead that the settings name say of its drag.
	freeBead []*calib.FreeBeadDrag
	// companions are the recordings that the settings name to join a diagnosis.
	companions []calib.Companion
	// gathered is what is known of a recording that is too long for the memory; nil for others.
	gathered *calib.Gatherer
}

// options adds what was read beside the recording to the choices.
func (l loaded) options(o calib.Options) calib.Options {
	o.Background, o.FreeBead, o.Companions, o.Gathered = l.background, l.freeBead, l.companions, l.gathered
	return o
}

// load reads the recordings of one file: one, or one for each bead in it.
func (s *source) load(ctx context.Context, path string) ([]loaded, error) {
	folder, err := s.folder(path)
	if err != nil {
		return nil, err
	}
	before, err := s.merged(folder, path, "", nil)
	if err != nil {
		return nil, err
	}
	options, err := s.readOptions(path, before)
	if err != nil {
		return nil, err
	}
	gathered := s.keepTo(&options, before)
	recordings, err := s.readWithStage(ctx, path, options, before)
	if err != nil {
		return nil, err
	}
	all := make([]loaded, len(recordings))
	for i, recording := range recordings {
		all[i] = loaded{path: path, recording: recording}
		if recording.InParts {
			all[i].gathered = gathered
		}
		if all[i].settings, err = s.merged(folder, path, recording.Bead, headerSettings(recording, before)); err != nil {
			return nil, err
		}
		if err := checkEffects(recording, all[i].settings); err != nil && !s.inspect && !s.alone {
			return nil, err
		}
		if err := s.addOthers(ctx, path, &all[i]); err != nil {
			return nil, err
		}
		s.findFreeBeads(folder, path, recording.Bead, all[i].settings)
		if all[i].freeBead, err = s.freeBeads(ctx, path, recording.Bead, all[i].settings); err != nil {
			return nil, err
		}
	}
	return all, nil
}

// keepTo makes the reader keep to the memory that the settings allow: a recording that needs more goes through what is
// returned, stretch by stretch. It is nil without a limit, and where the samples themselves are needed.
func (s *source) keepTo(options *track.Options, settings *session.Settings) *calib.Gatherer {
	limit, ok := settings.Lookup("recording.max_memory", "")
	if !ok || s.inspect || s.samples {
		return nil
	}
	options.MaxMemory = int64(limit.Value.SI)
	limitHeap(options.MaxMemory - programSize)
	gathered := calib.NewGatherer(options.MaxMemory)
	options.Part = gathered.Part
	return gathered
}

func (s *source) read(ctx context.Context, path string, options track.Options) ([]*track.Recording, error) {
	read := func() ([]*track.Recording, error) { return track.ReadFile(ctx, path, options) }
	if path == "-" {
		read = func() ([]*track.Recording, error) { return track.Read(ctx, s.app.In, options) }
	}
	recordings, err := read()
	var one *track.Error
	if err != nil && ctx.Err() == nil && !errors.As(err, &one) {
		return nil, fileError(path, "check the name, and that the file may be read", withoutName(err))
	}
	return recordings, err
}

// folder gives what stands in session.toml and tracks.csv beside a track, each folder read once. A track list in a folder further
// up that names the track goes before one beside it that does not.
func (s *source) folder(path string) (folderSettings, error) {
	if path == "-" {
		return s.ownFolder("-")
	}
	beside := filepath.Dir(path)
	found, err := s.ownFolder(beside)
	if err != nil || len(found.rows(path)) > 0 {
		return found, err
	}
	here, err := filepath.Abs(beside)
	if err != nil {
		return found, nil // without a working folder there is nothing further up
	}
	for at, base := here, beside; filepath.Dir(at) != at; {
		at, base = filepath.Dir(at), filepath.Join(base, "..")
		above := found
		above.base, above.tracks = base, s.listAbove(base)
		if len(above.rows(path)) > 0 {
			above.free = freeRows(above.tracks)
			return above, nil
		}
	}
	return found, nil
}

// ownFolder reads what stands in a folder.
func (s *source) ownFolder(folder string) (folderSettings, error) {
	s.folderLock.Lock()
	defer s.folderLock.Unlock()
	if known, ok := s.folders[folder]; ok {
		return known, nil
	}
	found, err := s.loadFolder(folder)
	if err != nil {
		return folderSettings{}, settingsError(err)
	}
	if s.folders == nil {
		s.folders = map[string]folderSettings{}
	}
	s.folders[folder] = found
	return found, nil
}

// listAbove reads the track list of a folder further up; one that cannot be read may be of something else, and counts as none.
func (s *source) listAbove(folder string) *session.Tracks {
	s.folderLock.Lock()
	defer s.folderLock.Unlock()
	if list, ok := s.above[folder]; ok {
		return list
	}
	list, err := session.LoadTracks(filepath.Join(folder, session.TracksName))
	if err != nil {
		list = nil
	}
	if s.above == nil {
		s.above = map[string]*session.Tracks{}
	}
	s.above[folder] = list
	return list
}

func (s *source) loadFolder(folder string) (found folderSettings, err error) {
	found.base = folder
	if folder != "-" {
		found.tracks, err = session.LoadTracks(filepath.Join(folder, session.TracksName))
		if err != nil && !errors.Is(err, fs.ErrNotExist) {
			return found, err
		}
		found.free = freeRows(found.tracks)
	}
	if s.file != "" {
		found.settings, err = session.Load(s.file)
		return found, err
	}
	if folder == "-" {
		return found, nil
	}
	found.settings, err = session.Load(filepath.Join(folder, session.FileName))
	if errors.Is(err, fs.ErrNotExist) {
		err = nil
	}
	return found, err
}

// merged puts the settings of one recording together.
func (s *source) merged(folder folderSettings, path, bead string, header *session.Settings) (*session.Settings, error) {
	sources := session.Sources{Header: header, Session: folder.settings, Flags: &s.flags.settings}
	if row, ok := folder.tracks.Row(folder.name(path), bead); ok {
		sources.Row = row.Settings
	}
	settings, err := session.ForTrack(sources)
	if err != nil {
		return nil, settingsError(err)
	}
	return settings, nil
}

// name is a track as the track list of the folder names it.
func (f folderSettings) name(path string) string {
	if name, err := filepath.Rel(f.base, path); err == nil {
		return name
	}
	return filepath.Base(path)
}

// rows are those of the track list about a track.
func (f folderSettings) rows(path string) []session.Row { return f.tracks.RowsOf(f.name(path)) }

// missingTrack is the error of a row about a file that is not there.
func missingTrack(folder folderSettings, row session.Row) error {
	return inputError("correct the name, or take the row out", fmt.Errorf("%s:%d: file %q is not there", filepath.Join(folder.base, session.TracksName), row.Line, row.File))
}

// tellMissing says which recordings of the track lists beside the tracks are not there.
func (s *source) tellMissing(tracks []string) {
	told := map[string]bool{}
	for _, path := range tracks {
		folder, err := s.folder(path)
		if err != nil || folder.tracks == nil || told[folder.base] {
			continue // the calibration tells of the error
		}
		told[folder.base] = true
		for _, row := range folder.tracks.Rows {
			if _, err := os.Stat(filepath.Join(folder.base, filepath.FromSlash(row.File))); errors.Is(err, fs.ErrNotExist) {
				s.app.say("beadwell: %s", missingTrack(folder, row))
			}
		}
	}
}

// freeRows are the rows of a track list about free beads.
func freeRows(tracks *session.Tracks) []session.Row {
	var rows []session.Row
	if tracks == nil {
		return nil
	}
	for _, row := range tracks.Rows {
		if role, ok := row.Settings.Lookup("role", ""); ok && role.Word == calib.RoleFree {
			rows = append(rows, row)
		}
	}
	return rows
}

// readOptions turns the settings that matter for reading into the reader's options.
func (s *source) readOptions(path string, settings *session.Settings) (track.Options, error) {
	o := track.Options{Name: path, Inspect: s.inspect, Columns: map[string]string{}}
	word := func(key string) string {
		setting, _ := settings.Lookup(key, "")
		return setting.Word
	}
	o.Delimiter, o.Decimal, o.Bead = word("recording.delimiter"), word("recording.decimal"), word("recording.bead")
	if o.TimeUnit = word("recording.time_unit"); o.TimeUnit == "frames" {
		o.TimeUnit = "frame"
	}
	if limit, ok := settings.Lookup("recording.max_text", ""); ok {
		o.MaxBytes = int64(limit.Value.SI)
	}
	if rate, ok := settings.Lookup("recording.rate", ""); ok {
		o.Rate, o.RateForced = rate.Value.SI, rate.Origin == session.FromFlag
	}
	for _, column := range []string{"time", "x", "y", "z"} {
		if named, ok := settings.Lookup("recording.columns", column); ok {
			o.Columns[column] = named.Word
		}
	}
	if named, ok := settings.Lookup("recording.columns", "stage"); ok {
		o.Keep = []string{named.Word}
	}
	return o, setUnit(&o, settings)
}

// setUnit gives the reader the unit of the positions, one for the file.
func setUnit(o *track.Options, settings *session.Settings) error {
	for _, axis := range []string{"", "x", "y", "z"} {
		unit, ok := settings.Lookup("recording.unit", axis)
		if !ok || unit.Axis != axis {
			continue
		}
		if o.Unit != "" && o.Unit != unit.Word {
			return settingsError(&session.Error{Where: unit.Where, Key: "recording.unit", Text: unit.Text,
				Problem: fmt.Sprintf("is the unit of %s, while other axes have %q", axis, o.Unit),
				Hint:    "state units that differ from axis to axis in the header of the file, such as x (um),z (V)"})
		}
		o.Unit, o.UnitForced = unit.Word, unit.Origin == session.FromFlag
	}
	return nil
}

// headerSettings are what the recording says of itself. A unit or a rate that
// a setting gave to the reader is not repeated.
func headerSettings(recording *track.Recording, before *session.Settings) *session.Settings {
	header := &session.Settings{}
	keep := func(key, axis, text, where string) {
		if err := header.Set(key, axis, text, session.FromHeader, where); err != nil {
			return // a unit that settings have no word for, such as pm, needs none
		}
	}
	for _, axis := range recording.Axes {
		if _, stated := before.Lookup("recording.unit", axis.Name); !stated && axis.Unit != "" {
			keep("recording.unit", axis.Name, axis.Unit, "column "+strconv.Quote(axis.Header))
		}
	}
	if recording.RateOrigin != "setting" && recording.Rate > 0 && !math.IsInf(recording.Rate, 0) {
		keep("recording.rate", "", strconv.FormatFloat(recording.Rate, 'g', -1, 64)+" Hz", recording.RateOrigin)
	}
	return header
}

// settingsError gives an error of the settings its exit status. A settings
// file that cannot be opened is one too.
func settingsError(err error) error {
	remedy := ""
	if errors.Is(err, os.ErrNotExist) {
		remedy = "beadwell init FOLDER writes a session.toml to fill in"
	}
	return &failure{status: StatusUsage, code: codeSettings, err: err, remedy: remedy}
}

// withoutName is an error of reading a file without the name that stands in front of it.
func withoutName(err error) error {
	if inner := errors.Unwrap(err); inner != nil {
		return inner
	}
	return err
}
