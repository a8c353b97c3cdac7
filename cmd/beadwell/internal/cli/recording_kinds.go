package cli

import (
	"context"
	"fmt"
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
		return nil, fmt.Errorf("the background of %s: %w", of, err)
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
