package track

import (
	"bytes"
	"errors"
	"io"
	"math"
	"slices"
	"sync"
)

// fieldKind is how the cells of a column are read.
type fieldKind uint8

const (
	skipField   fieldKind = iota // not read
	numberField                  // a number
	timesField                   // a number that counts minutes, hours or days
	clockField                   // date and time, or one of them, in seconds
	beadField                    // identifier of a bead
)

// field is one column of the file.
type field struct {
	kind   fieldKind
	out    int     // index of the kept column
	shift  int     // the unit as a power of ten
	times  float64 // the unit of a timesField
	name   string  // header, for messages
	marked bool    // nearly all numbers of the sample have a decimal mark
}

// parser turns blocks into rows. Each worker has its own.
type parser struct {
	lay     *layout
	name    string
	beads   *beadIndex
	out     [][]float64
	columns []column
	cells   []cell // room for the fields of a row
	bad     []badLine
	total   int   // bad lines, with those that are not in bad
	skip    []int // rows that hold no sample
	again   []int // rows that repeat the header
	blank   []int // rows that are blank
	recent  string
	recall  float64
}

// badLine is a line of the data that is no sample.
type badLine struct {
	err   *Error
	row   int
	texty bool // it begins with text: possibly part of a footer
}

// keptBad is the number of bad lines that are remembered.
const keptBad = 64

// parsed is the outcome of all parsers.
type parsed struct {
	columns [][]float64
	rows    int   // samples
	skip    []int // lines of data that hold no sample, ascending
	again   []int // those that repeat the header
	blank   []int // those that are blank
	lines   int   // lines of data
	base    int   // lines of data before these
	bad     []badLine
	total   int
}

// parseRows reads all rows with the given number of workers. The result does
// not depend on that number. Where the feed's store has a limit, full is called with the rows before it is emptied.
func parseRows(in *feed, lay *layout, beads *beadIndex, workers int, full func(*parsed) error) (*parsed, error) {
	parsers := make([]*parser, workers)
	if full != nil {
		in.full = func() error { return full(collect(in, parsers)) }
	}
	for i := range parsers {
		parsers[i] = &parser{lay: lay, name: in.name, beads: beads}
	}
	var wait sync.WaitGroup
	for _, p := range parsers {
		wait.Go(func() { p.run(in) })
	}
	wait.Wait()
	if in.err != nil && !errors.Is(in.err, io.EOF) {
		return nil, in.err
	}
	return collect(in, parsers), in.ctx.Err()
}

// collect puts together what the parsers found since it was last called.
func collect(in *feed, parsers []*parser) *parsed {
	all := &parsed{columns: slices.Clone(in.store.columns), lines: in.row, base: in.base}
	for _, p := range parsers {
		all.skip = append(all.skip, p.skip...)
		all.again = append(all.again, p.again...)
		all.blank = append(all.blank, p.blank...)
		all.bad = append(all.bad, p.bad...)
		all.total += p.total
		p.skip, p.again, p.bad, p.total = nil, nil, nil, 0
	}
	slices.Sort(all.skip)
	slices.Sort(all.again)
	slices.Sort(all.blank)
	slices.SortFunc(all.bad, func(a, b badLine) int { return a.err.Line - b.err.Line })
	all.bad = all.bad[:min(len(all.bad), keptBad)]
	all.rows = all.lines - len(all.skip)
	all.compact()
	return all
}

// compact closes the rows that hold no sample and cuts the columns to length.
func (a *parsed) compact() {
	for i, column := range a.columns {
		to := 0
		from := 0
		for _, gap := range append(a.skip, a.lines) {
			if to == from {
				to = gap
			} else {
				to += copy(column[to:], column[from:gap])
			}
			from = gap + 1
		}
		a.columns[i] = column[:a.rows]
	}
}

// lineOf returns the index among the lines of data of a sample.
func (a *parsed) lineOf(row int) int {
	for _, gap := range a.skip {
		if gap > row {
			break
		}
		row++
	}
	return row
}

// run parses blocks until the feed ends. While the hash is still at the last buffers
// it goes on with another one.
func (p *parser) run(in *feed) {
	var buffers [4]*buffer
	for i := range buffers {
		buffers[i] = bufferPool.Get().(*buffer)
	}
	for i := 0; ; i = (i + 1) % len(buffers) {
		in.whole.wait(buffers[i].passed)
		b, err := in.next(buffers[i])
		if err != nil {
			break
		}
		p.setColumns(in.store.columns)
		p.block(b)
		in.store.release()
	}
	for _, b := range buffers {
		in.whole.wait(b.passed)
		b.passed = 0
		if len(b.room) <= 2*blockSize {
			bufferPool.Put(b)
		}
	}
}

// block parses the lines of b into the rows that belong to it.
func (p *parser) block(b block) {
	data := b.data[: len(b.data)+pad : len(b.data)+pad]
	end := len(b.data)
	row := b.row
	for at := 0; at < end; row++ {
		next, ok := p.fastRow(data, at, row)
		if !ok || b.cut && next == end { // the last line may be cut off
			next = p.slowRow(b, at, row)
			for more := bytes.Count(data[at:next-1], []byte{'\n'}); more > 0; more-- {
				row++
				p.skip = append(p.skip, row) // a quoted cell runs on over these lines
			}
		}
		at = next
	}
}

// skipBlanks steps over spaces, and over tabs where they do not delimit.
func skipBlanks(b []byte, i int, delimiter byte) int {
	for b[i] == ' ' || b[i] == '\t' && delimiter != '\t' {
		i++
	}
	return i
}

// rareNumber reads what plainNumber declines and is still a number or a gap.
func (p *parser) rareNumber(b []byte, i, shift int) (v float64, next int, ok bool) {
	if b[i] == '"' {
		if v, next, ok = plainNumber(b, i+1, p.lay.mark, shift); !ok {
			v, next, ok = fastNumber(b, i+1, p.lay.mark, shift)
		}
		return v, next + 1, ok && b[next] == '"' && math.Abs(v) <= farthest
	}
	if v, next, ok = fastNumber(b, i, p.lay.mark, shift); ok {
		return v, next, math.Abs(v) <= farthest
	}
	return p.fastMissing(b, i)
}

// fastMissing reads an empty cell or "nan" in any case.
func (p *parser) fastMissing(b []byte, i int) (v float64, next int, ok bool) {
	delimiter := p.lay.delimiter
	if b[i] == delimiter || len(p.lay.fields) > 1 && !p.lay.trailing && (b[i] == '\n' || b[i] == '\r') {
		return math.NaN(), i, delimiter != ' '
	}
	if b[i]|0x20 == 'n' && b[i+1]|0x20 == 'a' && b[i+2]|0x20 == 'n' {
		return math.NaN(), i + 3, true
	}
	return 0, i, false
}
