package track

import (
	"bytes"
	"slices"
	"strings"
)

// delimiters are the candidates in the order in which a tie is settled.
var delimiters = []struct {
	name string
	char byte
}{{"tab", '\t'}, {"semicolon", ';'}, {"pipe", '|'}, {"comma", ','}, {"space", ' '}}

func delimiterName(c byte) string {
	for _, d := range delimiters {
		if d.char == c {
			return d.name
		}
	}
	return string(c)
}

// textLine is a line of the sample; a header cell in quotes may hold newlines.
type textLine struct {
	text   string
	number int // line number, from 1
	at     int // offset in the sample
}

// sampleLines cuts the sample into at most limit lines. A line that opens a
// quote is joined with those up to the closing one, if that is near.
func (lay *layout) sampleLines(sample []byte, limit int) []textLine {
	var lines []textLine
	number := 1
	for at := 0; at < len(sample) && len(lines) < limit; {
		end := lineEnd(sample, at)
		count := 1
		if bytes.Count(sample[at:end], []byte{'"'})%2 == 1 {
			to := end
			for more := 1; more <= 10 && to < len(sample); more++ {
				from := to + 1
				to = lineEnd(sample, from)
				if bytes.Count(sample[min(from, to):to], []byte{'"'})%2 == 1 {
					end, count = to, 1+more
					break
				}
			}
		}
		text := lay.lineText(sample[at:end])
		lines = append(lines, textLine{strings.Clone(strings.TrimPrefix(text, "\ufeff")), number, at})
		number += count
		at = end + 1
	}
	return lines
}

// lineEnd returns the offset of the newline at or after at, or the length.
func lineEnd(b []byte, at int) int {
	if at >= len(b) {
		return len(b)
	}
	if n := bytes.IndexByte(b[at:], '\n'); n >= 0 {
		return at + n
	}
	return len(b)
}

// cellKind is what a cell of the sample looks like.
type cellKind uint8

const (
	textCell cellKind = iota
	numberCell
	clockCell
	missingCell
)

// kindOf classifies a cell without knowing the decimal mark.
func kindOf(c cell) cellKind {
	s := trimCell(c.text)
	if isMissing(s) {
		return missingCell
	}
	if s[len(s)-1] == ',' { // a delimiter of another kind
		return textCell
	}
	for _, mark := range []byte{'.', ','} {
		_, err := generalNumber(s, mark, '.'+','-mark, 0)
		if err == nil || err == twoMarks || err == tooLarge {
			return numberCell
		}
		if s[0] >= '0' && s[0] <= '9' && (err == hexForm || err == scoreForm || err == percentage) {
			return numberCell
		}
	}
	if _, ok := parseClock(s); ok {
		return clockCell
	}
	return textCell
}

// certain is the weight of a line with more numbers than texts beside one with fewer,
// which counts only where there are none of the first kind.
const certain = 1 << 20

// view is the sample as one delimiter cuts it.
type view struct {
	delimiter byte
	lines     []textLine
	cells     [][]cell
	kinds     [][]cellKind
	width     int // cells of most numeric lines
	first     int // index of the first line of the data
	score     int
}

// look cuts the lines at a delimiter and finds the rows of numbers: those with
// the width that gives the most numbers, less the texts between them.
func look(lines []textLine, delimiter byte) *view {
	v := &view{delimiter: delimiter, lines: lines, cells: make([][]cell, len(lines)), kinds: make([][]cellKind, len(lines))}
	scores := map[int]int{}
	for i, line := range lines {
		if isBlank(line.text) || isComment(line.text) {
			continue
		}
		if !strings.ContainsAny(line.text, "0123456789") {
			v.cells[i] = []cell{} // no row; not worth cutting up
			continue
		}
		cells, _ := splitLine(nil, line.text, delimiter)
		kinds := make([]cellKind, len(cells))
		score := 0
		for k, c := range cells[:min(len(cells), columnLimit+1)] {
			kinds[k] = kindOf(c)
			switch kinds[k] {
			case clockCell: // a date and a time of day in one cell are worth two
				score += 2 * min(len(strings.Fields(trimCell(c.text))), 2)
			case numberCell:
				score += 2
			case textCell:
				score -= 2
			}
		}
		v.cells[i], v.kinds[i] = cells, kinds
		if score > 0 {
			scores[len(cells)] += score * certain
		} else if v.numbers(i) > 0 && scores[len(cells)] < certain-1 {
			scores[len(cells)]++
		}
	}
	for width, score := range scores {
		if score > certain {
			score -= score % certain
		}
		if score > v.score || score == v.score && width > v.width {
			v.score, v.width = score, width
		}
	}
	v.first = v.findFirst()
	return v
}

// numbers counts the numeric cells of a line.
func (v *view) numbers(i int) int {
	n := 0
	for _, k := range v.kinds[i] {
		if k == numberCell || k == clockCell {
			n++
		}
	}
	return n
}

// isRow tells whether line i has the width of the table and at least as many
// numbers and gaps as the columns that are numeric in most lines.
func (v *view) isRow(i int, numeric []bool) bool {
	if len(v.kinds[i]) != v.width || v.numbers(i) == 0 {
		return false
	}
	for k, kind := range v.kinds[i] {
		if numeric[k] && kind == textCell {
			return false
		}
	}
	return true
}

// isGap tells whether line i is a row in which every number is missing.
func (v *view) isGap(i int, numeric []bool) bool {
	cells := v.cells[i]
	if len(cells) == 0 && !isComment(v.lines[i].text) && !isBlank(v.lines[i].text) {
		cells, _ = splitLine(nil, v.lines[i].text, v.delimiter) // look leaves lines without a digit whole
	}
	if len(cells) != v.width {
		return false
	}
	for k, c := range cells {
		if numeric[k] && !isMissing(trimCell(c.text)) {
			return false
		}
	}
	return true
}

// numericColumns tells which columns hold numbers or clock times in most rows.
func (v *view) numericColumns() []bool {
	numbers, texts := make([]int, v.width), make([]int, v.width)
	for i := range v.lines {
		if len(v.kinds[i]) != v.width || v.numbers(i) == 0 {
			continue
		}
		for k, kind := range v.kinds[i] {
			switch kind {
			case numberCell, clockCell:
				numbers[k]++
			case textCell:
				texts[k]++
			}
		}
	}
	numeric := make([]bool, v.width)
	for k := range numeric {
		numeric[k] = numbers[k] > texts[k]
	}
	return numeric
}

// findFirst returns the index of the first row, -1 if there is none. With text
// columns a key and its value may look like a row, so there the longest run
// counts.
func (v *view) findFirst() int {
	if v.width == 0 {
		return -1
	}
	numeric := v.numericColumns()
	text := false
	for _, n := range numeric {
		text = text || !n
	}
	best, bestLength, from, length := -1, 0, -1, 0
	for i := range v.lines {
		switch {
		case length > 0 && v.isGap(i, numeric):
			length++
		case v.isRow(i, numeric):
			if !text {
				return i
			}
			if length == 0 {
				from = i
			}
			length++
			if length > bestLength {
				best, bestLength = from, length
			}
		case v.cells[i] != nil:
			length = 0
		}
	}
	return best
}

// hasHeader tells whether the line above the data has the width of the rows, but for a
// delimiter at its end.
func (v *view) hasHeader() bool {
	if v.width == 0 || v.first < 1 {
		return false
	}
	n := v.headerWidth()
	return n == v.width || n == v.width+1 && strings.HasSuffix(strings.TrimRight(v.lines[v.first-1].text, " "), string(v.delimiter))
}

// preferVisible takes a delimiter that can be seen where blanks cut more numbers from
// the rows, as in "4 102 054.0", but do not fit the line above the data.
func preferVisible(lines []textLine, best *view, wanted byte) *view {
	if wanted != 0 || best.delimiter != ' ' || best.first < 1 {
		return best
	}
	for _, d := range delimiters {
		if d.char == ' ' || d.char == ',' && best.hasHeader() || !strings.Contains(lines[best.first].text, string(d.char)) {
			continue
		}
		v := look(lines, d.char)
		if trailing := v.first >= 0 && v.headerWidth() == v.width-1 && v.alwaysEmpty(v.width-1); v.width >= 2 && v.first == best.first && (v.hasHeader() || trailing) {
			return v
		}
	}
	return best
}

// preferSpaces takes blanks as the delimiter of a table with tabs where only
// that fits the line above the data.
func preferSpaces(lines []textLine, best *view, wanted byte) *view {
	if wanted != 0 || best.delimiter != '\t' || best.first < 1 || best.headerWidth() == best.width {
		return best
	}
	v := look(lines, ' ')
	if v.width == best.width && v.first == best.first && v.headerWidth() == v.width {
		return v
	}
	return best
}

// isNumeric tells whether the rows are of numbers for the most part. Long lists of
// settings are not: below them the table may still come.
func (v *view) isNumeric() bool {
	count := 0
	for _, n := range v.numericColumns() {
		if n {
			count++
		}
	}
	return 2*count > v.width
}

// preambleLimit is the number of lines in which the first row must be found.
const preambleLimit = 25_600

// sniff finds the delimiter and the first row. wanted restricts the search to
// one delimiter; 0 tries all.
func sniff(lay *layout, sample []byte, wanted byte) *view {
	var best *view
	for limit := 400; ; limit *= 8 {
		lines := lay.sampleLines(sample, limit)
		best = nil
		absent := false
		for _, d := range delimiters {
			if wanted != 0 && d.char != wanted {
				continue
			}
			if d.char != ' ' && !slices.ContainsFunc(lines, func(l textLine) bool { return strings.IndexByte(l.text, d.char) >= 0 }) {
				if absent {
					continue // it cuts the lines as the other one does
				}
				absent = true
			}
			v := look(lines, d.char)
			if best == nil || v.score > best.score || v.score == best.score && v.hasHeader() && !best.hasHeader() {
				best = v
			}
		}
		best = preferVisible(lines, preferSpaces(lines, best, wanted), wanted)
		enough := best.first >= 0 && len(lines)-best.first >= 100 && best.isNumeric()
		if enough || len(lines) < limit || limit >= preambleLimit {
			return best
		}
	}
}
