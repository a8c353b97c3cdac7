package track

import (
	"bufio"
	"bytes"
	"compress/bzip2"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"hash"
	"io"
	"sync"

	"github.com/klauspost/compress/gzip"
	"github.com/klauspost/compress/zstd"
)

// tally counts and hashes the bytes of a file as they pass. The hash runs
// beside the parsing, over the buffers of the reader where these stay as they are until
// wait returns, otherwise over copies of them.
type tally struct {
	reader io.Reader
	size   int64
	stays  bool  // the reader leaves what it read untouched until wait returns
	passed int64 // buffers given to the hash
	work   chan passed
	free   chan []byte
	done   chan struct{}
	sum    hash.Hash

	lock   sync.Mutex
	behind sync.Cond
	hashed int64 // buffers
}

// passed is a buffer on its way to the hash.
type passed struct {
	data   []byte
	copied bool
}

// newTally starts the hash unless none is wanted.
func newTally(r io.Reader, hashed bool) *tally {
	t := &tally{reader: r}
	if hashed {
		t.work, t.free, t.done = make(chan passed, 4), make(chan []byte, 8), make(chan struct{})
		t.sum = sha256.New()
		t.behind.L = &t.lock
		go t.hash()
	}
	return t
}

// hash takes the buffers as they come.
func (t *tally) hash() {
	defer close(t.done)
	for b := range t.work {
		t.sum.Write(b.data)
		if b.copied {
			select {
			case t.free <- b.data:
			default:
			}
		}
		t.lock.Lock()
		t.hashed++
		t.lock.Unlock()
		t.behind.Broadcast()
	}
}

// wait returns when the first n buffers are hashed.
func (t *tally) wait(n int64) {
	if t.sum == nil || n == 0 {
		return
	}
	t.lock.Lock()
	for t.hashed < n {
		t.behind.Wait()
	}
	t.lock.Unlock()
}

// settle returns when all that was read is hashed, and may be changed.
func (t *tally) settle() { t.wait(t.passed) }

// Read passes bytes on and hands them to the hash.
func (t *tally) Read(p []byte) (int, error) {
	n, err := t.reader.Read(p)
	t.size += int64(n)
	if n > 0 && t.sum != nil {
		b := passed{data: p[:n]}
		if !t.stays {
			var room []byte
			select {
			case room = <-t.free:
			default:
			}
			b = passed{append(room[:0], p[:n]...), true}
		}
		t.passed++
		t.work <- b
	}
	return n, err
}

// drain reads what a decompressor left behind, so that size and hash are those
// of the whole file.
func (t *tally) drain(ctx context.Context) error {
	t.stays = false
	buf := make([]byte, 64<<10)
	for {
		if err := ctx.Err(); err != nil {
			return err
		}
		if _, err := t.Read(buf); err == io.EOF {
			return nil
		} else if err != nil {
			return err
		}
	}
}

// finish ends the hash and returns it in hexadecimal, empty without one.
func (t *tally) finish() string {
	if t.sum == nil {
		return ""
	}
	close(t.work)
	<-t.done
	return hex.EncodeToString(t.sum.Sum(nil))
}

// decompressed returns the content of r, whatever its compression, and the name
// of that. It looks at the first bytes, never at the name.
func decompressed(name string, r io.Reader) (content io.Reader, compression string, end func(), err error) {
	start := make([]byte, 6)
	n, err := io.ReadFull(r, start)
	if err != nil && err != io.EOF && !errors.Is(err, io.ErrUnexpectedEOF) {
		return nil, "", nil, err
	}
	start = start[:n]
	content = io.MultiReader(bytes.NewReader(start), r)
	nothing := func() {}
	damaged := func(err error) error {
		return &Error{File: name, Code: CodeFormat, What: "the compressed data are damaged: " + err.Error(), Remedy: "compress the file again, or give it uncompressed"}
	}
	switch {
	case bytes.HasPrefix(start, []byte{0x1f, 0x8b}):
		z, err := gzip.NewReader(bufio.NewReaderSize(content, blockSize))
		if err != nil {
			return nil, "", nil, damaged(err)
		}
		return &unpacked{z, name}, "gzip", nothing, nil
	case bytes.HasPrefix(start, []byte{0x28, 0xb5, 0x2f, 0xfd}):
		z, err := zstd.NewReader(bufio.NewReaderSize(content, blockSize), zstd.WithDecoderConcurrency(1), zstd.WithDecoderMaxMemory(256<<20))
		if err != nil {
			return nil, "", nil, damaged(err)
		}
		return &unpacked{z, name}, "zstd", z.Close, nil
	case bytes.HasPrefix(start, []byte("BZh")):
		if _, err := io.ReadFull(bzip2.NewReader(bytes.NewReader(start)), make([]byte, 1)); !errors.As(err, new(bzip2.StructuralError)) {
			return nil, "", nil, &Error{File: name, Code: CodeFormat, What: "a bzip2 archive", Remedy: "unpack it first, or use gzip or zstd"}
		}
	}
	return content, "", nothing, nil
}

// unpacked names the errors of a decompressor.
type unpacked struct {
	reader io.Reader
	name   string
}

func (u *unpacked) Read(p []byte) (int, error) {
	n, err := u.reader.Read(p)
	switch {
	case err == nil || err == io.EOF:
	case errors.Is(err, io.ErrUnexpectedEOF):
		err = &Error{File: u.name, Code: CodeCut, What: "the compressed data end too early: the file is cut off", Remedy: "copy or compress the file again"}
	case errors.As(err, new(*Error)) || errors.Is(err, context.Canceled) || errors.Is(err, context.DeadlineExceeded):
	default:
		err = &Error{File: u.name, Code: CodeFormat, What: "the compressed data are damaged: " + err.Error(), Remedy: "copy or compress the file again"}
	}
	return n, err
}

// limited ends with an error when more than left bytes pass.
type limited struct {
	reader io.Reader
	left   int64
	name   string
	limit  int64
}

func (l *limited) Read(p []byte) (int, error) {
	n, err := l.reader.Read(p)
	if l.left -= int64(n); l.left < 0 {
		return 0, &Error{File: l.name, Code: CodeLimit, What: fmt.Sprintf("the content is longer than the limit of %d bytes", l.limit),
			Remedy: "raise the limit (--max-text '200 GB'), or check that the compressed file is what it should be"}
	}
	return n, err
}
