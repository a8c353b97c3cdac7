package track

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"runtime"
)

// defaultMaxBytes is the limit of a text after decompression.
const defaultMaxBytes = 64 << 30

// ReadFile reads the recordings of a file: one, or one per bead. The file must
// be a regular one that does not change meanwhile. Errors of the content are
// *Error or *Errors; others are those of the file system and of ctx.
func ReadFile(ctx context.Context, path string, opt Options) ([]*Recording, error) {
	if opt.Name == "" {
		opt.Name = filepath.Base(path)
	}
	before, err := os.Stat(path)
	if err != nil {
		return nil, pathError(opt.Name, err)
	}
	if !before.Mode().IsRegular() {
		return nil, &Error{File: opt.Name, Code: CodeFileKind, What: "this is " + kindOfFile(before.Mode()) + ", a regular file is expected",
			Remedy: "give the name of a file; a stream can be read from standard input"}
	}
	file, err := os.Open(path)
	if err != nil {
		return nil, pathError(opt.Name, err)
	}
	defer file.Close()
	opened, err := file.Stat()
	if err != nil {
		return nil, pathError(opt.Name, err)
	}
	if !os.SameFile(before, opened) || !opened.Mode().IsRegular() {
		return nil, changed(opt.Name)
	}
	list, err := read(ctx, file, opt, opened.Size())
	if err != nil {
		return nil, locate(path, err)
	}
	if err := unchanged(opt.Name, path, opened, list[0].Size); err != nil {
		return nil, err
	}
	return list, nil
}

// unchanged compares a file with what it was when it was opened, and with the
// number of bytes that were read.
func unchanged(name, path string, before os.FileInfo, size int64) error {
	after, err := os.Stat(path)
	if err != nil || !os.SameFile(before, after) || after.Size() != before.Size() || !after.ModTime().Equal(before.ModTime()) || size != before.Size() {
		return changed(name)
	}
	return nil
}

func changed(name string) error {
	return &Error{File: name, Code: CodeChanged, What: "the file changed while it was read", Remedy: "wait until the recording is complete, then read it again"}
}

// pathError keeps control characters of a name out of the message.
func pathError(name string, err error) error {
	var p *os.PathError
	if errors.As(err, &p) {
		return fmt.Errorf("%s: %w", Printable(name), p.Err)
	}
	return fmt.Errorf("%s: %w", Printable(name), err)
}

func kindOfFile(mode os.FileMode) string {
	switch {
	case mode.IsDir():
		return "a folder"
	case mode&os.ModeNamedPipe != 0:
		return "a named pipe"
	case mode&os.ModeSocket != 0:
		return "a socket"
	}
	return "a device"
}

// Read reads the recordings of a stream: one, or one per bead. When ctx is
// cancelled it returns at once; a read that blocks is then left to itself.
func Read(ctx context.Context, r io.Reader, opt Options) ([]*Recording, error) {
	type outcome struct {
		list []*Recording
		err  error
	}
	done := make(chan outcome, 1)
	go func() {
		list, err := read(ctx, r, opt, 0)
		done <- outcome{list, err}
	}()
	select {
	case out := <-done:
		return out.list, out.err
	case <-ctx.Done():
		return nil, ctx.Err()
	}
}

// read reads a stream of which size bytes are expected (0 for unknown).
func read(ctx context.Context, r io.Reader, opt Options, size int64) ([]*Recording, error) {
	if opt.MaxBytes <= 0 {
		opt.MaxBytes = defaultMaxBytes
	}
	if opt.Workers <= 0 {
		opt.Workers = runtime.GOMAXPROCS(0)
	}
	whole := newTally(r, !opt.NoHash)
	list, err := readContent(ctx, whole, opt, size)
	if err == nil {
		err = whole.drain(ctx)
	}
	sum := whole.finish()
	if err != nil {
		return nil, err
	}
	for _, rec := range list {
		rec.Size, rec.SHA256 = whole.size, sum
	}
	return list, nil
}

// readContent looks at the first bytes and reads text or an array.
func readContent(ctx context.Context, r *tally, opt Options, size int64) ([]*Recording, error) {
	content, compression, end, err := decompressed(opt.Name, r)
	if err != nil {
		return nil, err
	}
	defer end()
	r.stays = compression == "" // a decompressor has a buffer that it uses again
	content = &limited{content, opt.MaxBytes, opt.Name, opt.MaxBytes}
	start := make([]byte, 8)
	n, err := io.ReadFull(content, start)
	if err != nil && err != io.EOF && !errors.Is(err, io.ErrUnexpectedEOF) {
		return nil, err
	}
	content = io.MultiReader(bytes.NewReader(start[:n]), content)
	if compression != "" {
		size *= 4 // room that is not needed costs nothing
	}
	var tab *table
	if bytes.HasPrefix(start[:n], []byte(npyMagic)) {
		r.stays = false
		tab, err = readArray(ctx, content, opt)
	} else {
		tab, err = readText(ctx, content, r, opt, size)
	}
	if err != nil {
		return nil, err
	}
	tab.readAs.Compression = compression
	return tab.recordings(opt)
}
