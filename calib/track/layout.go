package track

import (
	"bytes"
	"strings"
	"unicode/utf8"
	"unsafe"

	"golang.org/x/text/encoding/charmap"
)

// layout is what is known of a text file before its rows are parsed.
type layout struct {
	encoding    string // for ReadAs
	legacy      bool   // bytes above 127 are Windows-1252 (Latin-1)
	delimiter   byte   // ' ' stands for runs of spaces and tabs
	padded      bool   // blanks stand around the cells
	returns     bool   // carriage returns end lines
	mark        byte   // decimal mark
	thousands   byte   // separator of groups of three digits, 0 for none
	trailing    bool   // rows may end in a delimiter
	allWhole    bool   // no cell of the sample has a decimal mark
	knownText   bool   // a text cell is a wrong cell, not another table
	fields      []field
	names       []columnInfo    // one per field, from the header
	start       int             // offset of the first row in the head
	firstLine   int             // its line number, from 1
	headerLines int             // lines above the data
	lineBytes   float64         // mean length of a row in the sample [bytes]
	last        digits          // of the last column, where all rows agree
	lastMarks   map[string]bool // spellings of a missing sample in the last column of the sample
	repeats     map[string]bool
	clock       clockBase
	decimals    int // decimals of the time stamps as written, -1 when unknown
	preamble    preamble
	kept        int // kept columns
}

// decode returns a line as valid text. The result shares the memory of line
// where no conversion is needed, and is good only as long as that.
func (lay *layout) decode(line []byte) string {
	if lay.legacy {
		for _, c := range line {
			if c >= utf8.RuneSelf {
				var b strings.Builder
				for _, c := range line {
					b.WriteRune(charmap.Windows1252.DecodeByte(c))
				}
				return b.String()
			}
		}
	}
	return unsafe.String(unsafe.SliceData(line), len(line))
}

// lineText returns a line without its end as text.
func (lay *layout) lineText(line []byte) string {
	return lay.decode(bytes.TrimSuffix(line, []byte{'\r'}))
}

// isComment tells whether a line is a remark: it begins with # or %.
func isComment(text string) bool {
	text = strings.TrimLeft(text, " \t\"")
	return text != "" && (text[0] == '#' || text[0] == '%')
}

// isBlank tells whether a line is empty but for blanks, delimiters and padding.
func isBlank(text string) bool {
	return strings.Trim(text, " \t\r\x00\x1a\u00a0\ufeff") == ""
}

// isIgnored tells whether a line among the rows is blank, a remark or the
// header once more.
func (lay *layout) isIgnored(text string) bool {
	return isBlank(text) || isComment(text) || lay.isRepeat(text)
}

// isRepeat tells whether a line is a line of the header.
func (lay *layout) isRepeat(text string) bool {
	return len(lay.repeats) > 0 && lay.repeats[strings.TrimSpace(text)]
}
