package track

import (
	"encoding/binary"
	"math"
	"math/bits"
	"unsafe"
)

// Eight bytes at a time, in a word with the first byte lowest.
const (
	ones  = 0x0101010101010101
	highs = 0x80 * ones
	zeros = '0' * ones
)

// mostDecimals are the decimals of a cell that a column may expect: with seven bytes
// before them there are at most fifteen digits, which a float64 holds.
const mostDecimals = 8

// patience is the number of unexpected cells of a column in a block after which
// nothing is expected of it any more.
const patience = 100

// column is a field of the file as a worker reads it. Programs write a column with
// one number of decimals, and that of the last cell is expected of the next: the
// processor can then go on with the next cell before it has found the end of this one.
// What is expected changes the time that is taken, never a value.
type column struct {
	kind  fieldKind
	cells int     // columns of the file that it stands for: some where they are not read
	last  bool    // it ends the row
	shift int     // the unit as a power of ten
	times float64 // the unit of a timesField
	index int     // of the kept column
	out   []float64

	expects  bool   // the following holds
	decimals int    // expected, -1 for a whole number
	end      byte   // behind the cell
	stride   int    // from there to the next cell
	marks    uint64 // the byte at which the whole part ends, eight times
	drop     uint   // shift that leaves of eight bytes the decimals
	keep     uint64 // all ones, zero for a whole number
	scale    uint64 // ten to the number of decimals
	divisor  float64
	missed   int  // cells of the block that were not as expected
	wide     bool // there was one that plainNumber does not read
}

// expect sets what is expected of the next cells from the number at b[from:to], behind
// which the next cell begins at b[next].
func (c *column) expect(b []byte, from, to, next int, mark byte) {
	c.expects = false
	at := to
	for at > from && b[at-1]-'0' <= 9 {
		at--
	}
	c.decimals, c.end, c.stride = to-at, b[to], next-to
	if whole := at == from || b[at-1] != mark; whole {
		c.decimals, mark = -1, c.end
	}
	digits := max(c.decimals, 0)
	power := digits - c.shift
	if c.decimals == 0 || digits > mostDecimals || power < 0 || power >= len(tens) || c.stride > 2 || c.stride == 2 && !c.last {
		return
	}
	c.expects = true
	c.marks, c.divisor, c.scale = uint64(mark)*ones, tens[power], wholeTens[digits]
	c.drop, c.keep = uint(64-8*digits), ^uint64(0)
	if digits == 0 {
		c.drop, c.keep = 0, 0
	}
}

// word returns the eight bytes at b[i], which must be there: the caller keeps i at most
// pad-8 bytes behind the last newline. A check of it costs a tenth of all reading.
func word(b []byte, i int) uint64 {
	return binary.LittleEndian.Uint64((*[8]byte)(unsafe.Add(unsafe.Pointer(unsafe.SliceData(b)), i))[:])
}

// notDigits has the high bit of a byte set where x, less the digit zero, is no digit; behind
// the first such byte also others.
func notDigits(x uint64) uint64 { return x | (x + 0x76*ones) }

// eightValues is the value of eight digits, less the digit zero.
func eightValues(x uint64) uint64 {
	x = (x * (1 + 10<<8)) >> 8 & 0x00ff00ff00ff00ff
	x = (x * (1 + 100<<16)) >> 16 & 0x0000ffff0000ffff
	return (x * (1 + 10000<<32)) >> 32
}

// setColumns takes the columns to write to.
func (p *parser) setColumns(columns [][]float64) {
	p.out = columns
	if p.columns == nil {
		p.columns = newColumns(p.lay.fields)
	}
	for k := range p.columns {
		c := &p.columns[k]
		c.missed = 0
		if c.kind != skipField {
			c.out = columns[c.index]
		}
	}
}

// newColumns makes the columns of a file. Neighbours that are not read make one.
func newColumns(fields []field) []column {
	var list []column
	for k := range fields {
		f := &fields[k]
		if n := len(list); f.kind == skipField && n > 0 && list[n-1].kind == skipField {
			list[n-1].cells++
			continue
		}
		list = append(list, column{kind: f.kind, cells: 1, index: f.out, shift: f.shift, times: f.times})
	}
	list[len(list)-1].last = true
	return list
}

// fastRow parses a row of numbers and reports false for any other. It allocates
// nothing and knows nothing of comments and other dialects. A cell begins at the
// newline of its row at the latest, its mark is within eight bytes, and eight bytes
// from behind that on are loaded: 16 beyond the newline.
func (p *parser) fastRow(b []byte, i, row int) (next int, ok bool) {
	blanks, delimiter := p.lay.padded, p.lay.delimiter
	columns := p.columns
	for k := range columns {
		c := &columns[k]
		if blanks {
			i = skipBlanks(b, i, delimiter)
		}
		if !c.expects {
			if i, ok = p.anyField(c, b, i, row); !ok {
				return 0, false
			}
			continue
		}
		w := word(b, i)
		found := firstByte(w ^ c.marks)
		if found == 0 {
			if i, ok = p.anyField(c, b, i, row); !ok {
				return 0, false
			}
			continue
		}
		at := bits.TrailingZeros64(found) // 8 times the index of the mark, plus 7
		var negative uint64
		if byte(w) == '-' {
			negative = 1 // without a branch: the sign of a trace is a coin toss
		}
		j := i + at>>3 + 1
		whole := (w ^ negative*('-'^'0') ^ zeros) << (uint(71-at) & 63)
		rest := (word(b, j) ^ zeros) << (c.drop & 63) & c.keep
		j += c.decimals
		if at < 15+8*int(negative) || (notDigits(whole)|notDigits(rest))&highs != 0 || b[j] != c.end {
			if i, ok = p.anyField(c, b, i, row); !ok {
				return 0, false
			}
			continue
		}
		v := float64(int64(eightValues(whole)*c.scale+eightValues(rest))) / c.divisor
		c.out[row] = math.Float64frombits(math.Float64bits(v) | negative<<63)
		i = j + c.stride
	}
	return i, b[i-1] == '\n'
}

// anyField parses a cell of which nothing is expected, or another than expected, and
// returns where the next one begins.
func (p *parser) anyField(c *column, b []byte, i, row int) (next int, ok bool) {
	lay := p.lay
	at := i
	if c.expects {
		c.missed++
	}
	switch c.kind {
	case numberField, timesField:
		var v float64
		if v, at, ok = p.number(c, b, i); !ok {
			return 0, false
		}
		if c.kind == timesField {
			v *= c.times
		}
		c.out[row] = v
	case skipField:
		if lay.padded {
			at = p.skipPadded(b, i, c.cells)
		} else {
			at = skipCells(b, i, c.cells, lay.delimiter)
		}
	default:
		return 0, false
	}
	if next, ok = p.cellEnd(b, at, c.last); ok && c.kind == numberField && c.missed < patience {
		c.expect(b, i, at, next, lay.mark)
	} else {
		c.expects = false
	}
	return next, ok
}

// cellEnd steps over what stands between the end of a cell and the next one.
func (p *parser) cellEnd(b []byte, i int, last bool) (next int, ok bool) {
	delimiter := p.lay.delimiter
	if p.lay.padded {
		if delimiter == ' ' && !last {
			return i + 1, b[i] == ' ' || b[i] == '\t'
		}
		i = skipBlanks(b, i, delimiter)
	}
	if !last {
		return i + 1, b[i] == delimiter
	}
	if p.lay.trailing && b[i] == delimiter {
		i++
	}
	if b[i] == '\r' {
		i++
	}
	return i + 1, b[i] == '\n'
}

// skipPadded steps over n cells with blanks around them to the end of the last one.
func (p *parser) skipPadded(b []byte, i, n int) int {
	delimiter := p.lay.delimiter
	for ; ; n-- {
		i = skipBlanks(b, i, delimiter)
		for b[i] != delimiter && b[i] != '\n' && b[i] != '\r' && b[i] != '"' {
			i++
		}
		if n == 1 {
			return i
		}
		next, ok := p.cellEnd(b, i, false)
		if !ok {
			return i
		}
		i = next
	}
}

// skipCells steps over n cells to the delimiter behind the last one, or to the end of
// the row or to a quote if that comes first.
func skipCells(b []byte, i, n int, delimiter byte) int {
	delimiters := uint64(delimiter) * ones
	for {
		w := word(b, i)
		stops := firstByte(w^'\n'*ones) | firstByte(w^'\r'*ones) | firstByte(w^'"'*ones)
		x := w ^ delimiters
		found := ^(x&^highs + ^uint64(highs) | x) & highs // of every delimiter
		found &= stops&-stops - 1
		for ; found != 0; found &= found - 1 {
			if n--; n == 0 {
				return i + bits.TrailingZeros64(found)>>3
			}
		}
		if stops != 0 {
			return i + bits.TrailingZeros64(stops)>>3
		}
		i += 8
	}
}

// firstByte has the high bit of the first byte of x set that is zero, and below it none.
func firstByte(x uint64) uint64 { return (x - ones) &^ x & highs }

// number reads a number in any of the ways that need no copy of it.
func (p *parser) number(c *column, b []byte, i int) (v float64, next int, ok bool) {
	if !c.wide {
		if v, next, ok = plainNumber(b, i, p.lay.mark, c.shift); ok {
			return v, next, true
		}
		c.wide = true
	}
	return p.rareNumber(b, i, c.shift)
}
