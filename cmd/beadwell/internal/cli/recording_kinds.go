package cli

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"strings"

	"beadwell/calib"
	"beadwell/calib/session"
	"beadwell/calib/track"
)

// readWithStage reads the recordings of a file, with the track of the stage when there is one: the column that
// was named for it, or in a driven recording one whose header begins with the word stage.
func (s *source) readWithStage(ctx context.Context, path string, o track.Options, settings *session.Settings) ([]*track.Recording, error) {
	recordings, err := s.read(ctx, path, o)
	if err != nil || len(o.Keep) > 0 || path == "-" {
		return recordings, err
	}
	if role, _ := settings.Lookup("role", ""); role.Word != calib.RoleDriven {
		return recordings, nil
	}
	for _, c := range recordings[0].ReadAs.Columns {
		if c.Role == "unused" && strings.HasPrefix(strings.ToLower(c.Header), "stage") {
			o.Keep = []string{c.Header}
			return s.read(ctx, path, o)
		}
	}
	return recordings, nil
}

// addOthers reads the background and the companions that the settings of a recording name.
func (s *source) addOthers(ctx context.Context, path string, one *loaded) (err error) {
	if one.background, err = s.background(ctx, path, one.settings); err != nil {
		return err
	}
	one.companions, err = s.companions(ctx, path, *one)
	return err
}

// ofAnother says of which other recording an error is; it keeps its exit status.
func ofAnother(which string, err error) error {
	var known *failure
	if !errors.As(err, &known) {
		return fmt.Errorf("%s: %w", which, err)
	}
	same := *known
	same.err = fmt.Errorf("%s: %w", which, known.err)
	return &same
}

// ofOneRecording are the settings that a flag gives to the recording in question, not to its companions.
var ofOneRecording = []string{"role", "chamber.height", "laser.power", "drive.waveform", "drive.amplitude", "drive.frequency",
	"recording.companions", "recording.background", "recording.bead"}

// companions reads the recordings that join the diagnosis of another. Their role, height and drive stand in the track
// list beside them. A list that holds for a whole folder names the recording itself too, which is passed over.
func (s *source) companions(ctx context.Context, of string, one loaded) ([]calib.Companion, error) {
	named, ok := one.settings.Lookup("recording.companions", "")
	if role, _ := one.settings.Lookup("role", ""); !ok || role.Word == calib.RoleBackground || s.inspect || s.alone {
		return nil, nil
	}
	own := &source{app: s.app, file: s.file, flags: &settingFlags{settings: *s.flags.settings.Lacking(ofOneRecording...)}, alone: true}
	var out []calib.Companion
	for _, path := range s.beside(of, named, named.Files()) {
		if filepath.Clean(path) == filepath.Clean(of) {
			continue
		}
		all, err := own.load(ctx, path)
		if err != nil {
			return nil, ofAnother("a companion of "+of, err)
		}
		match := -1
		for i := range all {
			if len(all) == 1 || all[i].recording.Bead == one.recording.Bead {
				match = i
			}
		}
		if match < 0 {
			return nil, settingsError(&session.Error{Where: named.Where, Key: "recording.companions", Text: named.Text,
				Problem: fmt.Sprintf("names %s, which holds %d beads, none of them %q", path, len(all), one.recording.Bead),
				Hint:    "give recordings of the same bead"})
		}
		out = append(out, calib.Companion{Recording: all[match].recording, Settings: all[match].settings})
	}
	return out, nil
}

// background reads the recording that holds the noise. In a session file and a track list its path is
// from the folder of the track, in a flag from the working folder.
func (s *source) background(ctx context.Context, of string, settings *session.Settings) (*track.Recording, error) {
	named, ok := settings.Lookup("recording.background", "")
	if role, _ := settings.Lookup("role", ""); !ok || role.Word == calib.RoleBackground || s.inspect {
		return nil, nil
	}
	path := s.beside(of, named, []string{named.Word})[0]
	s.lock.Lock()
	defer s.lock.Unlock()
	if known, ok := s.backgrounds[path]; ok {
		return known, nil
	}
	folder, err := s.folder(path)
	if err != nil {
		return nil, err
	}
	own, err := s.merged(folder, path, "", nil)
	if err != nil {
		return nil, err
	}
	options, err := s.readOptions(path, own)
	if err != nil {
		return nil, err
	}
	options.Keep, options.Bead = nil, ""
	recordings, err := s.read(ctx, path, options)
	if err != nil {
		return nil, ofAnother("the background of "+of, err)
	}
	if len(recordings) != 1 {
		return nil, settingsError(&session.Error{Where: named.Where, Key: "recording.background", Text: named.Text,
			Problem: fmt.Sprintf("holds %d beads", len(recordings)), Hint: "give a file with one track"})
	}
	if s.backgrounds == nil {
		s.backgrounds = map[string]*track.Recording{}
	}
	s.backgrounds[path] = recordings[0]
	return recordings[0], nil
}
