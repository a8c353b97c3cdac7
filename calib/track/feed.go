package track

import (
	"bytes"
	"cmp"
	"context"
	"errors"
	"fmt"
	"io"
	"sync"
)

const (
	blockSize = 256 << 10 // bytes a worker parses at a time: fits the second-level cache
	lineLimit = 1 << 20   // longest line [bytes]
)

// block is a run of whole lines; its last byte is a newline and pad bytes of
// room follow it.
type block struct {
	data []byte
	line int // number of the first line in the file, from 1
	row  int // index of the first line in the store
	cut  bool
}

// buffer is the memory of a block.
type buffer struct {
	room   []byte
	passed int64 // what tally.wait waits for before the bytes may change
}

// bufferPool keeps buffers from one recording to the next.
var bufferPool = sync.Pool{New: func() any { return &buffer{room: make([]byte, blockSize+pad+1)} }}

// feed hands out the lines of the data in order. Workers call next in turn; the
// rows of each block are reserved in the store while the lock is held, so that
// every worker writes straight to its final place.
type feed struct {
	ctx    context.Context
	name   string
	reader io.Reader
	whole  *tally // where the bytes come from
	store  *store

	delimiter byte // of the cells
	returns   bool // carriage returns by themselves end lines

	mu    sync.Mutex
	carry []byte // beginning of a line whose end is not yet read
	line  int    // number of the next line
	row   int    // index of the next row in the store
	base  int    // lines of data that the store has been emptied of
	// full is called when the store holds as many rows as it may, with no worker at work. It is to empty the store of
	// the first row rows. nil: the store grows.
	full  func() error
	ended bool
	err   error
}

// next fills buf, the room of which it may replace by a longer one, with the next lines.
// While the caller works on the block it holds the store for reading and must
// call store.release. The error is io.EOF when no lines are left.
func (f *feed) next(buf *buffer) (block, error) {
	f.mu.Lock()
	defer f.mu.Unlock()
	if f.err == nil {
		f.err = f.ctx.Err()
	}
	if f.err == nil && f.ended {
		f.err = io.EOF
	}
	if f.err != nil {
		return block{}, f.err
	}
	data, room, cut, err := f.fill(buf.room)
	buf.room, buf.passed = room, f.whole.passed
	if err == nil && len(data) == 0 {
		err = io.EOF
	}
	if err != nil {
		f.err = err
		return block{}, err
	}
	lines := bytes.Count(data, []byte{'\n'})
	if f.full != nil && f.row+lines > f.store.limit {
		f.store.lock.Lock() // waits for the workers
		f.err = f.full()
		f.base, f.row = f.base+f.row, 0
		f.store.lock.Unlock()
		if f.err != nil {
			return block{}, f.err
		}
	}
	b := block{data: data, line: f.line, row: f.row, cut: cut}
	f.line += lines
	f.row += lines
	f.store.reserve(f.row)
	return b, nil
}

// fill reads up to blockSize bytes (more only for a long line) and returns them
// up to the last newline; the rest is carried over. cut tells that the last
// line of the file has no newline of its own.
func (f *feed) fill(buf []byte) (data, room []byte, cut bool, err error) {
	have := copy(buf, f.carry)
	f.carry = f.carry[:0]
	for {
		n, err := io.ReadFull(f.reader, buf[have:len(buf)-pad-1])
		have += n
		f.endLines(buf[:have], err != nil)
		switch {
		case errors.Is(err, io.ErrUnexpectedEOF), err == io.EOF:
			f.ended = true
			data, cut, err = f.finish(buf, have)
			return data, buf, cut, err
		case err != nil:
			return nil, buf, false, err
		}
		if at := bytes.LastIndexByte(buf[:have], '\n'); at >= 0 {
			if len(buf) > lineLimit && bytes.IndexByte(buf[:have], '\n') > lineLimit {
				return nil, buf, false, f.tooLong()
			}
			at = f.wholeRows(buf[:at+1]) - 1
			f.carry = append(f.carry, buf[at+1:have]...)
			if len(f.carry) > 0 && isPadding(f.carry[0]) {
				err = f.checkPadding()
			}
			return buf[:at+1], buf, false, err
		}
		if at := bytes.IndexByte(buf[:have], 0); at >= 0 {
			f.carry = append(f.carry, buf[at:have]...)
			if err := f.checkPadding(); err != nil {
				return nil, buf, false, err
			}
			data, cut, err = f.finish(buf, at)
			return data, buf, cut, err
		}
		if have > lineLimit {
			return nil, buf, false, f.tooLong()
		}
		buf = append(buf, make([]byte, len(buf))...)
	}
}

func (f *feed) tooLong() *Error { return tooLong(f.name, f.line) }

// tooLong is the error of a line beyond the limit.
func tooLong(name string, line int) *Error {
	return &Error{File: name, Line: line, Code: CodeLimit, What: "the line is longer than 1 MiB",
		Remedy: "give a file with one row per sample; a table with one row per axis must be transposed"}
}

// endLines ends lines at newlines alone. Until a carriage return is known to end a
// line by itself, as many returns as newlines in b are taken as pairs of the two;
// where that is wrong, the row is refused, and not misread.
func (f *feed) endLines(b []byte, final bool) {
	returns := bytes.Count(b, []byte{'\r'})
	if returns == 0 || !f.returns && returns == bytes.Count(b, []byte{'\n'}) {
		return
	}
	f.whole.settle()
	if endLines(b, final) {
		f.returns = true
	}
}

// quoteLines is the number of lines over which a quoted cell may run on.
const quoteLines = 10

// wholeRows returns the length of data without the lines at its end that may be the
// beginning of a row with a quoted cell that runs on. Such a row at the start of
// data, which is then a few enormous lines, is left to be refused.
func (f *feed) wholeRows(data []byte) int {
	from := len(data)
	for range quoteLines {
		if from > 0 {
			from = bytes.LastIndexByte(data[:from-1], '\n') + 1
		}
	}
	if bytes.IndexByte(data[from:], '"') < 0 {
		return len(data)
	}
	if bytes.Count(data[:from], []byte{'"'})%2 != 0 {
		from = 0 // not between rows, it seems; data begins with one
	}
	for at := from; at < len(data); {
		end := lineEnd(data, at)
		if _, open := splitLine(nil, string(data[at:end]), f.delimiter); open >= 0 {
			if end = closingLine(data, at, f.delimiter); end < 0 {
				return cmp.Or(at, len(data))
			}
		}
		at = end + 1
	}
	return len(data)
}

// closingLine returns the end of the line that closes the quote which the line at
// the given offset opens, -1 if none within reach does.
func closingLine(data []byte, at int, delimiter byte) int {
	end := lineEnd(data, at)
	for range quoteLines {
		if end+1 >= len(data) {
			return -1
		}
		from := end + 1
		end = lineEnd(data, from)
		if bytes.IndexByte(data[from:end], '"') < 0 {
			continue
		}
		if _, open := splitLine(nil, string(data[at:end]), delimiter); open < 0 {
			return end
		}
	}
	return -1
}

// finish ends the last line of the file, without the padding behind it.
func (f *feed) finish(buf []byte, have int) (data []byte, cut bool, err error) {
	for have > 0 && isPadding(buf[have-1]) {
		have--
	}
	if have > 0 && buf[have-1] != '\n' {
		f.whole.settle() // there may be padding
		buf[have] = '\n'
		have++
		cut = true
	}
	return buf[:have], cut, nil
}

// isPadding tells the bytes with which old systems fill up the end of a file.
func isPadding(c byte) bool { return c == 0 || c == 0x1a }

// checkPadding verifies that nothing but padding follows, and ends the feed.
func (f *feed) checkPadding() error {
	f.ended = true
	chunk := f.carry
	for {
		for _, c := range chunk {
			if !isPadding(c) && c != '\n' && c != '\r' && c != ' ' {
				return &Error{File: f.name, Line: f.line, Code: CodeFormat,
					What:   fmt.Sprintf("zero bytes, and then more text (byte 0x%02x): the file is damaged or not plain text", c),
					Remedy: "export the recording again as text"}
			}
		}
		if err := f.ctx.Err(); err != nil {
			return err
		}
		next := make([]byte, 64<<10)
		n, err := f.reader.Read(next)
		chunk = next[:n]
		if n == 0 && err != nil {
			f.carry = nil
			if err == io.EOF {
				return nil
			}
			return err
		}
	}
}

// store holds the kept columns while they grow. Workers write to rows that
// reserve has given them, holding the lock for reading; growing waits for them.
type store struct {
	lock    sync.RWMutex
	columns [][]float64
	limit   int // rows that it may hold, where the feed says what is done then
}

// newStore makes n columns with room for an expected number of rows. Room that
// is never written costs no memory, so the caller may be generous.
func newStore(n, rows int) *store {
	s := &store{columns: make([][]float64, n)}
	for i := range s.columns {
		s.columns[i] = make([]float64, rows)
	}
	return s
}

// reserve makes room for rows and takes the lock for reading on behalf of the
// worker, which gives it back with release.
func (s *store) reserve(rows int) {
	if len(s.columns) > 0 && rows > len(s.columns[0]) {
		s.lock.Lock()
		for i, old := range s.columns {
			room := rows + rows/2
			if s.limit > 0 {
				room = min(room, s.limit)
			}
			grown := make([]float64, room)
			copy(grown, old)
			s.columns[i] = grown
		}
		s.lock.Unlock()
	}
	s.lock.RLock()
}

// release ends the writing that reserve allowed.
func (s *store) release() { s.lock.RUnlock() }
