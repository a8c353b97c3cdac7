package track

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"sync"
)

// slowRow parses any line of a block: a sample, a comment, a repeated header, or an
// error. It returns the offset behind the line, or behind the lines over which a
// quoted cell of the row runs on.
func (p *parser) slowRow(b block, at, row int) (next int) {
	number := b.line + row - b.row
	end := lineEnd(b.data, at)
	text := p.lay.lineText(b.data[at:end])
	if p.lay.isIgnored(text) {
		if p.lay.isRepeat(text) {
			p.again = append(p.again, row)
		}
		if len(p.lay.fields) == 1 && isBlank(text) {
			p.blank = append(p.blank, row)
		}
		p.skip = append(p.skip, row)
		return end + 1
	}
	cells, open := splitLine(p.cells[:0], text, p.lay.delimiter)
	if open >= 0 {
		to := p.closing(b.data, at)
		if to < 0 {
			p.reject(row, false, openQuote(p.name, number, text, open))
			return end + 1
		}
		end, text = to, p.lay.lineText(b.data[at:to])
		cells, _ = splitLine(p.cells[:0], text, p.lay.delimiter)
	}
	p.cells = cells
	p.anyRow(cells, text, number, row, b.cut && end+1 == len(b.data))
	return end + 1
}

// closing returns the end of the line that closes a quoted cell of the row at the
// given offset, -1 if there is none. A line in between that is a row by itself, or a
// row of the wrong width, tells that the quote was never meant to be closed there.
func (p *parser) closing(data []byte, at int) int {
	end := closingLine(data, at, p.lay.delimiter)
	if end < 0 {
		return -1
	}
	text := p.lay.lineText(data[at:end])
	cells, _ := splitLine(nil, text, p.lay.delimiter)
	if p.checkWidth(cells, text, 0, false) != nil || slices.ContainsFunc(cells, func(c cell) bool { return !c.quoted && strings.Contains(c.text, "\n") }) {
		return -1
	}
	for i, line := range strings.Split(text, "\n") {
		if i > 0 && p.isRow(line) {
			return -1
		}
	}
	return end
}

// isRow tells whether a line alone has the width of the table and numbers where they
// belong.
func (p *parser) isRow(line string) bool {
	cells, open := splitLine(nil, line, p.lay.delimiter)
	if open >= 0 || p.checkWidth(cells, line, 0, false) != nil {
		return false
	}
	for k, f := range p.lay.fields {
		if f.kind == numberField {
			if v, err := p.value(&f, cells[k].text); err != nil || v != v {
				return false
			}
		}
	}
	return true
}

// beginsRow tells whether cells are the first ones of a row, at least one of them a
// number, rather than a line of text.
func (p *parser) beginsRow(cells []cell) bool {
	numbers := 0
	for k, c := range cells[:min(len(cells), len(p.lay.fields))] {
		f := &p.lay.fields[k]
		if f.kind != numberField && f.kind != timesField && f.kind != clockField {
			continue
		}
		if _, err := p.value(f, c.text); err != nil {
			return false
		}
		numbers++
	}
	return numbers > 0
}

// anyRow parses the cells of a row. last tells that the line ends the file without a
// newline.
func (p *parser) anyRow(cells []cell, text string, number, row int, last bool) {
	texty := isText(cells, p.lay.mark)
	if len(p.bad) == keptBad && len(cells) != len(p.lay.fields) {
		p.reject(row, texty, nil) // only counted
		return
	}
	if err := p.checkWidth(cells, text, number, last); err != nil {
		p.reject(row, texty && !(err.Code == CodeCut && p.beginsRow(cells)), err)
		return
	}
	for k := range p.lay.fields {
		f := &p.lay.fields[k]
		if f.kind == skipField {
			continue
		}
		v, err := p.value(f, cells[k].text)
		if err != nil {
			place := &Error{Line: number, Column: characters(text, cells[k].at), Code: CodeCell,
				What: fmt.Sprintf("%s %s %s", f.name, quoted(cells[k].text), err.Error()), Remedy: correctCell}
			if why, ok := err.(*fault); ok {
				place.Remedy = why.remedy
			}
			if texty && !p.lay.knownText {
				place.What = fmt.Sprintf("text where a row of numbers is expected: %s", quoted(strings.TrimSpace(text)))
				place.Column, place.Code = 0, CodeRow
				place.Remedy = "keep one table in the file; a second one, or a header inside the data, must be removed"
			}
			p.reject(row, texty, place)
			return
		}
		p.out[f.out][row] = v
	}
	if last {
		if err := p.checkCut(cells, text, number); err != nil {
			p.reject(row, false, err)
		}
	}
}

// reject records a line that is no sample.
func (p *parser) reject(row int, texty bool, err *Error) {
	p.skip = append(p.skip, row)
	p.total++
	if len(p.bad) < keptBad {
		err.File = p.name
		p.bad = append(p.bad, badLine{err, row, texty})
	}
}

// value reads one cell.
func (p *parser) value(f *field, text string) (float64, error) {
	switch f.kind {
	case clockField:
		return p.lay.clock.seconds(text)
	case beadField:
		return p.bead(text)
	}
	if f.marked && strings.ContainsAny(text, ".,") && strings.IndexByte(text, p.lay.mark) < 0 {
		return 0, twoMarks
	}
	v, err := generalNumber(text, p.lay.mark, p.lay.thousands, f.shift)
	if f.kind == timesField {
		v *= f.times
	}
	if err == nil && math.Abs(v) > farthest {
		err = beyond
	}
	return v, err
}

// bead returns the index of an identifier.
func (p *parser) bead(text string) (float64, error) {
	text = trimCell(text)
	if text == p.recent && text != "" {
		return p.recall, nil
	}
	if isMissing(text) && text != "-" {
		return 0, &fault{"is no name of a bead", "name the bead in every row"}
	}
	index, err := p.beads.index(text)
	if err == nil {
		p.recent, p.recall = strings.Clone(text), index
	}
	return index, err
}

const repairRow = "repair or remove the row; keep one table in the file"

// checkWidth compares the number of cells with the table.
func (p *parser) checkWidth(cells []cell, text string, number int, last bool) *Error {
	want, have := len(p.lay.fields), len(cells)
	if p.lay.trailing && have == want && want > 1 && !cells[want-1].quoted && strings.HasSuffix(strings.TrimRight(text, " "), string(p.lay.delimiter)) {
		have-- // every other row ends in a delimiter as well
	}
	if have == want || have == want+1 && cells[want].text == "" && (p.lay.trailing || p.lay.delimiter != ' ') {
		return nil
	}
	err := &Error{Line: number, Code: CodeRow,
		What:   fmt.Sprintf("the row has %d cells, the table has %d columns", have, want),
		Remedy: repairRow}
	if have > want {
		err.Column = characters(text, cells[want].at)
	} else if last {
		err.Code, err.Remedy = CodeCut, "the file seems to be cut off: export it again, or remove its last line"
		err.What = fmt.Sprintf("the last line ends after %d of %d cells", have, want)
	}
	if p.lay.delimiter == ',' && have > want && p.lay.allWhole {
		err.Remedy = "if the comma is the decimal mark, export with another delimiter (semicolon or tab)"
	}
	return err
}

// checkCut refuses a last line without a newline whose last number has fewer digits
// than that of every other row, or is not there: most likely its end is lost.
func (p *parser) checkCut(cells []cell, text string, number int) *Error {
	k := len(p.lay.fields) - 1
	if k >= len(cells) {
		return nil
	}
	what := ""
	want, have := p.lay.last, digitsOf(cells[k].text, p.lay.mark)
	switch {
	case len(cells[k].text) < 2 && isMissing(cells[k].text) && !p.lay.lastMarks[cells[k].text] && k > 0:
		what = fmt.Sprintf("the last cell is %s, as in no other row", quoted(cells[k].text))
	case isMissing(trimCell(cells[k].text)):
	case have.decimals < want.decimals:
		what = fmt.Sprintf("the last number %s has %d decimals, all others have %d", quoted(cells[k].text), have.decimals, want.decimals)
	case have.exponent < want.exponent:
		what = fmt.Sprintf("the exponent of the last number %s is shorter than all others", quoted(cells[k].text))
	case want == digits{} && p.lay.trailing && len(cells) == k+1:
		what = "the last line does not end in the delimiter as all others do"
	}
	if what == "" {
		return nil
	}
	return &Error{Line: number, Column: characters(text, cells[k].at), Code: CodeCut, What: what + ", and the line has no end: the file seems to be cut off",
		Remedy: "export the file again, or remove its last line"}
}

// digits counts the digits of a number behind its decimal mark and in its exponent.
type digits struct{ decimals, exponent int }

// digitsOf counts the digits of a cell; decimals are -1 for a missing sample.
func digitsOf(text string, mark byte) digits {
	text = trimCell(text)
	if isMissing(text) {
		return digits{decimals: -1}
	}
	var d digits
	if at := strings.IndexAny(text, "eEdD"); at >= 0 {
		d.exponent = len(strings.TrimLeft(text[at+1:], "+-"))
		text = text[:at]
	}
	if at := strings.IndexByte(text, mark); at >= 0 {
		d.decimals = len(text) - at - 1
	}
	return d
}

// isText tells whether a line begins with text rather than with a number.
func isText(cells []cell, mark byte) bool {
	for _, c := range cells {
		if c.text == "" {
			continue
		}
		if r := rune(c.text[0]); r >= '0' && r <= '9' || strings.ContainsRune("+-.,", r) {
			return false
		}
		v, err := generalNumber(c.text, mark, 0, 0)
		return err != nil || math.IsNaN(v) && len(cells) == 1
	}
	return true
}

// beadLimit is the largest number of beads in one file.
const beadLimit = 10000

// beadIndex numbers the identifiers of beads in the order in which they are met.
type beadIndex struct {
	lock  sync.RWMutex
	known map[string]int
	names []string
}

// index returns the number of an identifier, a new one for a new identifier.
func (b *beadIndex) index(name string) (float64, error) {
	b.lock.RLock()
	i, ok := b.known[name]
	b.lock.RUnlock()
	if ok {
		return float64(i), nil
	}
	b.lock.Lock()
	defer b.lock.Unlock()
	if i, ok = b.known[name]; ok {
		return float64(i), nil
	}
	if len(b.names) >= beadLimit {
		return 0, &fault{fmt.Sprintf("is the name of one bead more than %d", beadLimit), "is this the column that identifies the bead? say which columns to use (--columns)"}
	}
	if b.known == nil {
		b.known = make(map[string]int)
	}
	name = strings.Clone(name)
	i = len(b.names)
	b.names = append(b.names, name)
	b.known[name] = i
	return float64(i), nil
}
