package batch

import (
	"cmp"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"time"

	"beadwell/calib/session"
	"beadwell/cmd/beadwell/internal/report"
)

// Found is what Find found.
type Found struct {
	Paths   []string  // recordings, in natural order, each once
	Aside   []string  // files in folders that do not look like recordings
	Growing []Growing // recordings that are being written
}

// Growing is a file that is not whole yet.
type Growing struct{ Path, Note string }

// endings are those of recordings, compressed or not.
var endings = []string{".csv", ".tsv", ".txt", ".dat", ".asc", ".npy"}

// Find lists the recordings that the arguments name: files as they are, folders by what
// looks like a recording in them or stands in their track list (with below, in their folders too), and patterns that
// the shell left as they were. Results of earlier runs are not looked into.
//
// An argument that is not there, or cannot be looked into, is listed as a recording, of which it will be told, unless there is
// no other: then it is the error.
func Find(arguments []string, below bool) (Found, error) {
	var found Found
	var gone []string
	var first error
	for _, argument := range arguments {
		if err := found.add(argument, below); err != nil {
			gone, first = append(gone, filepath.Clean(argument)), cmp.Or(first, err)
		}
	}
	if len(found.Paths) == 0 && first != nil {
		return found, first
	}
	found.Paths = append(found.Paths, gone...)
	slices.SortFunc(found.Paths, natural)
	found.Paths = slices.Compact(found.Paths)
	return found, nil
}

func (f *Found) add(argument string, below bool) error {
	info, err := os.Stat(argument)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		matches, bad := filepath.Glob(argument)
		if bad != nil || len(matches) == 0 {
			return &report.FileError{File: argument, Err: errors.New("no such file or folder, and no file matches it")}
		}
		for _, match := range matches {
			if looksLikeRecording(filepath.Base(match)) {
				f.Paths = append(f.Paths, match)
			}
		}
		return nil
	case err != nil:
		return err
	case !info.IsDir():
		if base := filepath.Base(argument); base != session.TracksName && base != session.FileName {
			f.Paths = append(f.Paths, filepath.Clean(argument))
		}
		return nil
	}
	return f.folder(argument, below)
}

func (f *Found) folder(folder string, below bool) error {
	entries, err := os.ReadDir(folder)
	if err != nil {
		return err
	}
	for _, entry := range entries {
		path, name := filepath.Join(folder, entry.Name()), entry.Name()
		switch {
		case strings.HasPrefix(name, "."), name == session.FileName, name == session.TracksName:
		case entry.IsDir():
			if below && !isResults(path) && f.folder(path, below) != nil {
				f.Paths = append(f.Paths, path) // one that cannot be read has a row in the summary
			}
		case strings.HasSuffix(name, truthEnding): // of a simulated recording
		case looksLikeRecording(name):
			f.Paths = append(f.Paths, path)
		default:
			f.Aside = append(f.Aside, path)
		}
	}
	f.listed(folder)
	return nil
}

// listed adds the recordings that the track list of a folder names, whatever their ending, those too that are not there:
// they have a row in the summary.
func (f *Found) listed(folder string) {
	tracks, err := session.LoadTracks(filepath.Join(folder, session.TracksName))
	if err != nil { // whoever reads the settings of the folder tells of it
		return
	}
	for _, row := range tracks.Rows {
		path := filepath.Join(folder, filepath.FromSlash(row.File))
		f.Paths = append(f.Paths, path)
		f.Aside = slices.DeleteFunc(f.Aside, func(aside string) bool { return aside == path })
	}
}

// truthEnding is that of the file beside a simulated recording.
const truthEnding = ".truth.json"

// isResults tells whether a folder is the output of an earlier run.
func isResults(folder string) bool {
	matches, err := filepath.Glob(filepath.Join(folder, journalPattern))
	return err == nil && len(matches) > 0
}

// looksLikeRecording goes by the name: a table's ending, and no text for people.
func looksLikeRecording(name string) bool {
	lower := strings.ToLower(name)
	lower = strings.TrimSuffix(strings.TrimSuffix(lower, ".gz"), ".zst")
	if !slices.Contains(endings, filepath.Ext(lower)) || name == session.TracksName {
		return false
	}
	for _, text := range []string{"readme", "license", "licence", "changelog"} {
		if strings.HasPrefix(lower, text) {
			return false
		}
	}
	return true
}

// Times of the look at files that may still grow: only files that were written to within
// recent are looked at twice, once for all of them.
const (
	recent = 5 * time.Second
	pause  = 400 * time.Millisecond
)

// SetGrowingApart moves files that change while it looks, for no longer than pause.
func (f *Found) SetGrowingApart() {
	before := map[string]fs.FileInfo{}
	for _, path := range f.Paths {
		if info, err := os.Stat(path); err == nil && time.Since(info.ModTime()) < recent {
			before[path] = info
		}
	}
	if len(before) == 0 {
		return
	}
	time.Sleep(pause)
	f.Paths = slices.DeleteFunc(f.Paths, func(path string) bool {
		was, looked := before[path]
		now, err := os.Stat(path)
		if !looked || err != nil || now.Size() == was.Size() && now.ModTime().Equal(was.ModTime()) {
			return false
		}
		f.Growing = append(f.Growing, Growing{path, growingNote})
		return true
	})
}

const growingNote = "is still being written; run the same command again when it is whole"

// folderNames gives each recording a folder of its own among the outputs: its name without
// the ending, with the ending where two would be the same, with the folders in front
// where two still would, and a number as the last resort. They depend on the list alone.
func folderNames(paths []string) []string {
	names := make([]string, len(paths))
	forms := []func(string) string{
		func(p string) string { return stem(filepath.Base(p)) },
		filepath.Base,
		func(p string) string { return strings.Join(strings.Split(filepath.ToSlash(p), "/"), "-") },
	}
	for i, path := range paths {
		names[i] = safeName(forms[0](path))
	}
	for _, form := range forms[1:] {
		uses := count(names)
		for i, path := range paths {
			if uses[strings.ToLower(names[i])] > 1 {
				names[i] = safeName(form(path))
			}
		}
	}
	taken := map[string]bool{}
	for i, name := range names {
		for k := 2; taken[strings.ToLower(names[i])]; k++ {
			names[i] = fmt.Sprintf("%s-%d", name, k)
		}
		taken[strings.ToLower(names[i])] = true
	}
	return names
}

// count counts names as file systems that ignore case see them.
func count(names []string) map[string]int {
	uses := map[string]int{}
	for _, name := range names {
		uses[strings.ToLower(name)]++
	}
	return uses
}

func stem(base string) string {
	for _, packed := range []string{".gz", ".zst"} {
		base = strings.TrimSuffix(base, packed)
	}
	if without := strings.TrimSuffix(base, filepath.Ext(base)); without != "" {
		return without
	}
	return base
}
