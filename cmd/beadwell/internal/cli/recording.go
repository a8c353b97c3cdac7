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

	"beadwell/calib/session"
	"beadwell/calib/track"
)

// source finds the settings of recordings and reads them.
type source struct {
	app     *app
	file    string // of --session; empty: session.toml beside the track
	flags   *settingFlags
	inspect bool // a first look: an unknown unit or rate is no error
	folders map[string]folderSettings

	lock        sync.Mutex
	backgrounds map[string]*track.Recording // read before, by path
}

// folderSettings are what a folder says of its recordings.
type folderSettings struct {
	settings *session.Settings
	tracks   *session.Tracks
}

// loaded is one recording with its settings.
type loaded struct {
	path      string // as on the command line
	recording *track.Recording
	settings  *session.Settings
	// background is the recording of the noise that the settings name, if they do.
	background *track.Recording
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
	recordings, err := s.readWithStage(ctx, path, options, before)
	if err != nil {
		return nil, err
	}
	all := make([]loaded, len(recordings))
	for i, recording := range recordings {
		all[i] = loaded{path: path, recording: recording}
		if all[i].settings, err = s.merged(folder, path, recording.Bead, headerSettings(recording, before)); err != nil {
			return nil, err
		}
		if err := checkEffects(recording, all[i].settings); err != nil && !s.inspect {
			return nil, err
		}
		if all[i].background, err = s.background(ctx, path, all[i].settings); err != nil {
			return nil, err
		}
	}
	return all, nil
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

// folder reads session.toml and tracks.csv beside a track, once for each folder.
func (s *source) folder(path string) (folderSettings, error) {
	beside := "-"
	if path != "-" {
		beside = filepath.Dir(path)
	}
	if known, ok := s.folders[beside]; ok {
		return known, nil
	}
	found, err := s.loadFolder(beside)
	if err != nil {
		return folderSettings{}, settingsError(err)
	}
	if s.folders == nil {
		s.folders = map[string]folderSettings{}
	}
	s.folders[beside] = found
	return found, nil
}

func (s *source) loadFolder(folder string) (found folderSettings, err error) {
	if folder != "-" {
		found.tracks, err = session.LoadTracks(filepath.Join(folder, session.TracksName))
		if err != nil && !errors.Is(err, fs.ErrNotExist) {
			return found, err
		}
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
	if row, ok := folder.tracks.Row(filepath.Base(path), bead); ok {
		sources.Row = row.Settings
	}
	settings, err := session.ForTrack(sources)
	if err != nil {
		return nil, settingsError(err)
	}
	return settings, nil
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
