package cli

import (
	"context"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"unicode"

	"github.com/google/renameio/v2"

	"beadwell/cmd/beadwell/internal/report"
)

// outputFolder is the folder of one recording's outputs, a member of the
// folder that --out names. Names are resolved inside that folder only; a
// symbolic link on the way is refused.
type outputFolder struct {
	root   *os.Root // of --out
	parent string   // as the user gave it
	name   string
	// pending makes the file that write fills; nil is that of renameio. Tests give one that fails.
	pending func(name string, opts ...renameio.Option) (pendingFile, error)
}

// pendingFile is a file under a temporary name.
type pendingFile interface {
	Write([]byte) (int, error)
	CloseAtomicallyReplace() error // syncs, closes, renames
	Cleanup() error                // does nothing after a rename
}

func newPendingFile(name string, opts ...renameio.Option) (pendingFile, error) {
	return renameio.NewPendingFile(name, opts...)
}

// openParent makes the folder of --out when it is not there, and opens it.
func openParent(path string) (*os.Root, error) {
	if err := os.MkdirAll(path, 0o777); err != nil {
		return nil, outputError(path, err)
	}
	root, err := os.OpenRoot(path)
	if err != nil {
		return nil, outputError(path, err)
	}
	return root, nil
}

// probe checks that files can be made in the folder, so that a long
// computation does not end before a closed door.
func (f outputFolder) probe() error {
	probe, err := renameio.NewPendingFile(filepath.Join(f.name, "probe"), renameio.WithRoot(f.root))
	if err != nil {
		return outputError(f.path(""), err)
	}
	if err := probe.Cleanup(); err != nil {
		return outputError(f.path(""), err)
	}
	return nil
}

func (f outputFolder) path(file string) string { return filepath.Join(f.parent, f.name, file) }

// notFollowed says that something else stands where a file is to be written.
func notFollowed(path string, info fs.FileInfo) error {
	kind := "no plain file"
	switch {
	case info.Mode()&fs.ModeSymlink != 0:
		kind = "a symbolic link, which is not followed"
	case info.IsDir():
		kind = "a folder"
	case info.Mode().IsRegular():
		kind = "a file, not a folder"
	}
	return &failure{status: StatusFailed, code: codeOutput, err: &report.FileError{File: path, Err: errors.New("is " + kind)},
		remedy: "move it away, or choose another --out"}
}

// check refuses a file that cannot be replaced.
func (f outputFolder) check(file string) (exists bool, err error) {
	info, err := f.root.Lstat(filepath.Join(f.name, file))
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return false, nil
	case err != nil:
		return false, outputError(f.path(file), err)
	case !info.Mode().IsRegular():
		return true, notFollowed(f.path(file), info)
	}
	return true, nil
}

// write writes a file under a random temporary name, and renames it when it is
// whole: a reader sees the old file or the new one.
func (f outputFolder) write(ctx context.Context, file string, content []byte) error {
	if err := ctx.Err(); err != nil {
		return err
	}
	if _, err := f.check(file); err != nil {
		return err
	}
	open := f.pending
	if open == nil {
		open = newPendingFile
	}
	pending, err := open(filepath.Join(f.name, file), renameio.WithRoot(f.root), renameio.WithPermissions(0o666))
	if err != nil {
		return outputError(f.path(file), err)
	}
	defer pending.Cleanup()
	if _, err := pending.Write(content); err != nil {
		return outputError(f.path(file), err)
	}
	if err := pending.CloseAtomicallyReplace(); err != nil {
		return outputError(f.path(file), err)
	}
	return nil
}

// read returns a file of the folder; it follows no link out of the folder.
func (f outputFolder) read(file string) ([]byte, error) {
	return f.root.ReadFile(filepath.Join(f.name, file))
}

// folderNames gives each recording a folder name of its own: the name of its
// file without the ending, with the folder in front where two would be the
// same, and the bead behind.
func folderNames(paths []string) ([]string, error) {
	names := make([]string, len(paths))
	uses := map[string]int{}
	for i, path := range paths {
		names[i] = stem(path)
		uses[names[i]]++
	}
	owner := map[string]string{}
	for i, path := range paths {
		if uses[names[i]] > 1 {
			names[i] = safeName(filepath.Base(filepath.Dir(path))) + "-" + names[i]
		}
		if other, taken := owner[names[i]]; taken {
			return nil, usageError("calibrate them with two commands and an --out for each",
				"%s and %s would both be written to %q", other, path, names[i])
		}
		owner[names[i]] = path
	}
	return names, nil
}

// stem is the name of the file without its ending, as a folder name.
func stem(path string) string {
	if path == "-" {
		return "stdin"
	}
	base := filepath.Base(path)
	for _, packed := range []string{".gz", ".zst"} {
		base = strings.TrimSuffix(base, packed)
	}
	if without := strings.TrimSuffix(base, filepath.Ext(base)); without != "" {
		base = without
	}
	return safeName(base)
}

// safeName keeps letters, digits and a few signs of a name; it never begins with a dot or a dash.
func safeName(name string) string {
	safe := strings.Map(func(r rune) rune {
		if r == unicode.ReplacementChar || !(unicode.IsLetter(r) || unicode.IsDigit(r) || strings.ContainsRune("._-", r)) {
			return '_'
		}
		return r
	}, name)
	if safe == "" || safe[0] == '.' || safe[0] == '-' {
		safe = "_" + safe
	}
	return safe
}
