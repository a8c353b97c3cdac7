package session

import (
	"errors"
	"io/fs"
	"path/filepath"
)

// LoadFolder reads the session file and the track list of a folder. Either
// result is nil when the folder has no such file.
func LoadFolder(folder string) (*Settings, *Tracks, error) {
	settings, err := Load(filepath.Join(folder, FileName))
	if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return nil, nil, err
	}
	tracks, err := LoadTracks(filepath.Join(folder, TracksName))
	if err != nil && !errors.Is(err, fs.ErrNotExist) {
		return nil, nil, err
	}
	return settings, tracks, nil
}
