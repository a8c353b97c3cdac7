package track

import (
	"fmt"
	"strings"
)

// markEvidence counts what the cells of the sample say about the decimal mark.
type markEvidence struct {
	point, comma         int // cells that are only a number if this is the decimal mark
	weakPoint, weakComma int // one mark with a group of three behind it: "1.234"
	pointAt, commaAt     textPlace
	grouped              bool // both marks in one cell, or one mark twice
	other                int  // numbers without a mark
	clockComma           bool // a time of day has a comma before the fraction of a second
}

type textPlace struct{ line, column int }

// add weighs one numeric cell.
func (m *markEvidence) add(text string, place textPlace) {
	s := strings.TrimLeft(trimCell(text), "+-−")
	if at := strings.IndexAny(s, "eEdD"); at >= 0 {
		s = s[:at]
	}
	points, commas := strings.Count(s, "."), strings.Count(s, ",")
	switch {
	case points == 0 && commas == 0:
		m.other++
	case points > 0 && commas > 0:
		m.grouped = true
		if strings.LastIndex(s, ".") > strings.LastIndex(s, ",") {
			m.vote('.', place)
		} else {
			m.vote(',', place)
		}
	case points > 1:
		m.grouped = true
		m.vote(',', place)
	case commas > 1:
		m.grouped = true
		m.vote('.', place)
	case points == 1:
		if isGroup(s, '.') {
			m.weakPoint++
		} else {
			m.vote('.', place)
		}
	default:
		if isGroup(s, ',') {
			m.weakComma++
		} else {
			m.vote(',', place)
		}
	}
}

// vote records evidence for a mark and the first place of it.
func (m *markEvidence) vote(mark byte, place textPlace) {
	if mark == '.' {
		if m.point == 0 {
			m.pointAt = place
		}
		m.point++
		return
	}
	if m.comma == 0 {
		m.commaAt = place
	}
	m.comma++
}

// isGroup tells whether the one mark of s could separate thousands.
func isGroup(s string, mark byte) bool {
	at := strings.IndexByte(s, mark)
	return at >= 1 && at <= 3 && s[0] != '0' && len(s)-at-1 == 3
}

// findMark sets the decimal mark and the separator of thousands.
func (lay *layout) findMark(name string, v *view, wanted string) error {
	var m markEvidence
	numeric := v.numericColumns()
	for i := v.first; i < len(v.lines); i++ {
		if !v.isRow(i, numeric) {
			continue
		}
		for k, c := range v.cells[i] {
			if numeric[k] && v.kinds[i][k] == clockCell && strings.Contains(c.text, ",") {
				m.clockComma = true
			}
			if numeric[k] && v.kinds[i][k] == numberCell {
				m.add(c.text, textPlace{v.lines[i].number, characters(v.lines[i].text, c.at)})
			}
		}
	}
	var above preamble
	above.read(v)
	lay.allWhole = m.point+m.comma+m.weakPoint+m.weakComma == 0
	lay.mark = '.'
	switch wanted {
	case "point":
		lay.thousands, lay.preamble.mark = ',', '.'
		return nil
	case "comma":
		lay.mark, lay.thousands, lay.preamble.mark = ',', '.', ','
		return nil
	}
	const remedy = "state the decimal mark (--decimal point or comma)"
	// One mark in twenty or fewer is a slip: its cell is refused at its place.
	if few := (m.point + m.comma) / 20; m.point <= few {
		m.point = 0
	} else if m.comma <= few {
		m.comma = 0
	}
	switch {
	case m.point > 0 && m.comma > 0:
		return &Error{File: name, Line: m.commaAt.line, Column: m.commaAt.column, Code: CodeLayout,
			What: fmt.Sprintf("a decimal comma here, and a decimal point at line %d", m.pointAt.line), Remedy: remedy}
	case m.point > 0:
		if m.grouped {
			lay.thousands = ','
		}
	case m.comma > 0 || m.weakComma > 0 && (m.clockComma || above.comma) && m.weakPoint == 0:
		lay.mark = ','
		if m.grouped {
			lay.thousands = '.'
		}
	case m.weakComma > 0:
		return &Error{File: name, Line: v.lines[v.first].number, Code: CodeLayout,
			What: "the comma can be a decimal mark or a separator of thousands: every number reads both ways", Remedy: remedy}
	}
	if !lay.allWhole {
		lay.preamble.mark = lay.mark
	}
	return nil
}

// checkCommas refuses a table in which the comma both delimits and marks
// decimals: whole numbers only, twice as many of them as names, or fractions
// such as "05" in cells of their own.
func (v *view) checkCommas(name string, header int) error {
	if v.delimiter != ',' || v.first < 0 {
		return nil
	}
	zeros, whole := 0, true
	numeric := v.numericColumns()
	for i := v.first; i < len(v.lines); i++ {
		if !v.isRow(i, numeric) {
			continue
		}
		for _, c := range v.cells[i] {
			if strings.ContainsAny(c.text, ".,") || c.quoted {
				whole = false
			}
			if digits := strings.TrimLeft(c.text, "+-"); len(digits) > 1 && digits[0] == '0' {
				zeros++
			}
		}
	}
	if !whole || zeros == 0 && header*2 != v.width {
		return nil
	}
	return &Error{File: name, Line: v.lines[v.first].number, Code: CodeLayout,
		What: fmt.Sprintf("the comma seems to be both delimiter and decimal mark: %d whole numbers in a row", v.width),
		Remedy: "export with another delimiter (semicolon or tab), with a decimal point, or with quotes around the numbers; " +
			"if the numbers are whole, state --delimiter comma --decimal point"}
}
