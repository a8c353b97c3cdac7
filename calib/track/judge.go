package track

import (
	"fmt"
	"slices"
)

// noRows is the error of a sample without a single row of numbers.
func (v *view) noRows(name string) error {
	for i := len(v.lines) - 1; i >= max(0, len(v.lines)-50); i-- {
		if isBlank(v.lines[i].text) {
			continue
		}
		for _, d := range delimiters {
			if h := newHeaderRow(v.lines[i], cellTexts(v.lines[i].text, d.char)); h.roles > 0 {
				return &Error{File: name, Line: v.lines[i].number, Code: CodeEmpty, What: "the file has a header but no data", Remedy: "check that the export is complete"}
			}
		}
	}
	return &Error{File: name, Line: 1, Code: CodeFormat, What: "no rows of numbers are found", Remedy: "give a table of text with one row per sample and a column for each axis"}
}

// checkShape refuses tables that are too wide, lie on their side, or follow
// another table.
func (v *view) checkShape(name string) error {
	line := v.lines[v.first].number
	rows := 0
	for i := v.first; i < len(v.lines); i++ {
		if v.cells[i] != nil {
			rows++
		}
	}
	if rows <= 12 && v.width >= 64 {
		many := "1 row"
		if rows != 1 {
			many = fmt.Sprintf("%d rows", rows)
		}
		return &Error{File: name, Line: line, Code: CodeLayout, What: fmt.Sprintf("the table has %s of %d cells: it seems to lie on its side", many, v.width),
			Remedy: "transpose it: one row per sample, one column per axis"}
	}
	if v.width > columnLimit {
		return &Error{File: name, Line: line, Code: CodeLimit, What: fmt.Sprintf("the table has %d columns, the limit is %d", v.width, columnLimit), Remedy: "export only the columns that are needed"}
	}
	run, from := 0, 0
	for i := range v.first {
		numbers := 0
		for _, k := range v.kinds[i] {
			if k == numberCell {
				numbers++
			}
		}
		if numbers < len(v.kinds[i]) || numbers < 2 {
			run = 0
			continue
		}
		if run++; run == 1 {
			from = v.lines[i].number
		}
		if run >= 3 {
			return &Error{File: name, Line: line, Code: CodeLayout,
				What:   fmt.Sprintf("a second table starts here: rows of %d cells, after rows of %d cells from line %d on", v.width, len(v.kinds[i]), from),
				Remedy: "keep one table in the file"}
		}
	}
	return nil
}

// checkBroken refuses lines that look like rows, or like rows that are broken, above
// what is taken for the first row: they are no part of a header, and would be lost.
func (v *view) checkBroken(name string) error {
	numeric := v.numericColumns()
	run, from := 0, 0
	for i := range v.first {
		switch {
		case v.isRow(i, numeric):
			if run++; run == 1 {
				from = i
			}
		case v.isAside(i), v.isGap(i, numeric):
		case run >= leastLost:
			return v.brokenRow(name, from)
		default:
			run = 0
		}
	}
	broken := -1
	for i := v.first - 1; i >= 0; i-- {
		if v.isAside(i) {
			continue
		}
		text := v.lines[i].text
		cells, open := splitLine(nil, text, v.delimiter)
		h := newHeaderRow(v.lines[i], cellTexts(text, v.delimiter))
		k := slices.IndexFunc(cells, func(c cell) bool { return c.text != "" })
		switch {
		case broken >= 0 && len(cells) == v.width && h.texts == h.filled() && h.roles > 0:
			return v.brokenRow(name, broken)
		case k < 0 || kindOf(cells[k]) == textCell || kindOf(cells[k]) == missingCell || h.units == h.filled():
			return nil
		case open >= 0:
			return openQuote(name, v.lines[i].number, text, open)
		}
		broken = i
	}
	return nil
}

// checkBetween refuses rows, whole or broken, between the header and the first row.
func (v *view) checkBetween(name string, rows []headerRow) error {
	if len(rows) == 0 {
		return nil
	}
	numeric := v.numericColumns()
	for i := range v.first {
		if v.lines[i].number <= rows[len(rows)-1].line.number || v.isAside(i) || isMarker(v.lines[i].text) {
			continue
		}
		cells, _ := splitLine(nil, v.lines[i].text, v.delimiter)
		k := slices.IndexFunc(cells, func(c cell) bool { return c.text != "" })
		if v.isRow(i, numeric) || len(cells) == v.width || k >= 0 && (kindOf(cells[k]) == numberCell || kindOf(cells[k]) == clockCell) {
			return v.brokenRow(name, i)
		}
	}
	return nil
}

// leastLost is the number of rows in a run that are no accident.
const leastLost = 3

// isAside tells whether line i is blank, a remark or a rule.
func (v *view) isAside(i int) bool {
	text := v.lines[i].text
	return isBlank(text) || isComment(text) || isRule(text)
}

// brokenRow says what is wrong with the first line from i on that is no row.
func (v *view) brokenRow(name string, i int) error {
	numeric := v.numericColumns()
	for i+1 < v.first && (v.isRow(i, numeric) || v.isGap(i, numeric) || v.isAside(i)) {
		i++
	}
	line := v.lines[i]
	cells, _ := splitLine(nil, line.text, v.delimiter)
	err := &Error{File: name, Line: line.number, Code: CodeRow, What: fmt.Sprintf("the row has %d cells, the table has %d columns", len(cells), v.width), Remedy: repairRow}
	for k, c := range cells {
		if len(cells) != v.width || !numeric[k] || kindOf(c) != textCell {
			continue
		}
		err.Column, err.Code, err.Remedy = characters(line.text, c.at), CodeCell, correctCell
		_, why := generalNumber(c.text, '.', ',', 0)
		if why == nil {
			why = notNumber
		}
		err.What = fmt.Sprintf("%s %s", quoted(c.text), why.Error())
		break
	}
	return err
}

// checkBlank refuses blank lines among rows of a single number each, without a time that
// tells: they can be missing samples, and they can be nothing. Where every second line
// is blank they are nothing.
func (a *parsed) checkBlank(name string, lay *layout, p *plan) error {
	if p.time != nil || p.date != nil || p.frame != nil || len(a.blank) == 0 || 2*len(a.blank) >= a.rows {
		return nil
	}
	first := a.blank[0]
	if first > a.lineOf(a.rows-1) {
		return nil // behind the last row
	}
	return &Error{File: name, Line: lay.firstLine + first, Code: CodeRow, What: "a blank line among rows of one number: a missing sample or none",
		Remedy: "write NaN for a missing sample, or remove the blank lines"}
}

// dropEmpty takes rows off the end that hold neither a time nor a position: spreadsheets
// write them. It returns their number.
func (a *parsed) dropEmpty(p *plan) (dropped int) {
	if p.time == nil && p.date == nil && p.frame == nil {
		return 0 // each may be a sample that is missing
	}
	for a.rows > 0 && !slices.ContainsFunc(a.columns, func(c []float64) bool { return c[a.rows-1] == c[a.rows-1] }) {
		a.rows--
		dropped++
	}
	for i, c := range a.columns {
		a.columns[i] = c[:a.rows]
	}
	return dropped
}

// openQuote is the error of a quote without an end.
func openQuote(name string, number int, text string, at int) *Error {
	return &Error{File: name, Line: number, Column: characters(text, at), Code: CodeRow, What: "a quote is opened here and not closed", Remedy: "close the quote, or remove it"}
}

// checkRepeats refuses a header that follows a blank line where no time column
// can tell whether one recording goes on or another begins.
func (a *parsed) checkRepeats(name string, lay *layout, p *plan) error {
	if p.time != nil || p.date != nil || p.frame != nil {
		return nil
	}
	for _, row := range a.again {
		if _, found := slices.BinarySearch(a.skip, row-1); found {
			return &Error{File: name, Line: lay.firstLine + row, Code: CodeLayout, What: "the header occurs again after a gap: a second table seems to start here",
				Remedy: "keep one table in the file, or remove the blank line and the header"}
		}
	}
	return nil
}

// judge accepts lines of text behind the last row as a footer and refuses the
// file for any other line that is no sample.
func (a *parsed) judge() error {
	if a.total == 0 {
		return nil
	}
	places := make([]*Error, len(a.bad))
	footer := a.total <= footerLimit && a.total == len(a.bad)
	last := -1 // line of the last sample
	for line, i := a.lines-1, len(a.skip)-1; line >= 0; line, i = line-1, i-1 {
		if i < 0 || a.skip[i] != line {
			last = line
			break
		}
	}
	for i, b := range a.bad {
		places[i] = b.err
		footer = footer && b.texty && b.row > last
	}
	if footer {
		return nil
	}
	return asError(places, a.total)
}
