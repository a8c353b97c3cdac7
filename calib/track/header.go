package track

import (
	"fmt"
	"slices"
	"strings"
)

// headerRow is a line above the data that has one cell per column.
type headerRow struct {
	line  textLine
	cells []string
	roles int // cells with a known role
	units int // cells that are units
	texts int // cells that are neither empty nor numbers

	counters int // cells that name a counter of rows
}

// maxHeaderRows is the largest number of header rows.
const maxHeaderRows = 4

// newHeaderRow weighs the cells of a line.
func newHeaderRow(line textLine, cells []string) headerRow {
	h := headerRow{line: line, cells: cells}
	if len(cells) > columnLimit {
		return h
	}
	for _, c := range cells {
		if trimCell(c) == "" {
			continue
		}
		if _, ok := findUpper(c); ok {
			h.units++
		}
		if k := kindOf(cell{text: c}); k == textCell || k == missingCell {
			h.texts++
		}
		info := parseName(c)
		info.understand()
		if info.role == indexRole {
			h.counters++
		} else if info.role != otherRole {
			h.roles++
		}
	}
	return h
}

// isShort tells whether every cell has four words at most, as names do.
func (h headerRow) isShort() bool {
	return !slices.ContainsFunc(h.cells, func(c string) bool { return len(strings.Fields(c)) > 4 })
}

// filled counts the cells that are not empty.
func (h headerRow) filled() int {
	n := 0
	for _, c := range h.cells {
		if trimCell(c) != "" {
			n++
		}
	}
	return n
}

// cellTexts returns the texts of a line cut at a delimiter.
func cellTexts(text string, delimiter byte) []string {
	cells, _ := splitLine(nil, text, delimiter)
	list := make([]string, len(cells))
	for i, c := range cells {
		list[i] = c.text
	}
	return list
}

// headerCells cuts a header line. Where blanks delimit, units in brackets belong
// to the name before them, and names of several words are told by wide blanks.
func headerCells(text string, delimiter byte, width int) []string {
	list := cellTexts(text, delimiter)
	if delimiter != ' ' || len(list) <= width {
		return list
	}
	var merged []string
	for _, c := range list {
		if len(merged) > 0 && c != "" && strings.IndexByte("([{/", c[0]) >= 0 {
			merged[len(merged)-1] += " " + c
		} else {
			merged = append(merged, c)
		}
	}
	if len(merged) == width {
		return merged
	}
	wide := strings.FieldsFunc(strings.ReplaceAll(strings.TrimSpace(text), "  ", "\t"), func(r rune) bool { return r == '\t' })
	if len(wide) == width {
		return wide
	}
	return list
}

// isRule tells lines that only draw or mark a border: "-----", "===", "|---|".
func isRule(text string) bool {
	return strings.Trim(text, "-=+|*_~:,;# \t") == ""
}

// isMarker tells a line that ends a preamble: one or a few words without a cell.
func isMarker(text string) bool {
	t := strings.ToLower(strings.Trim(text, " \t[]<>*-=#%:,;\"_"))
	t = strings.Join(strings.FieldsFunc(t, func(r rune) bool { return r == '_' || r == ' ' || r == '-' }), " ")
	switch t {
	case "data", "begin data", "start data", "data start", "begin", "end header", "end of header", "header end", "endheader", "end head", "values", "begin of data", "daten", "measurement", "measurements":
		return true
	}
	return false
}

// findHeader returns the header rows above the data.
func (v *view) findHeader(fits func(width int) bool) (rows []headerRow) {
	rows = v.plainHeader(fits)
	roles := 0
	for _, h := range rows {
		roles = max(roles, h.roles)
	}
	// A list of settings may look like names; what is nearer to the data is preferred.
	if remark := v.commentHeader(fits); len(remark) > 0 && (roles == 0 || remark[0].line.number > rows[0].line.number && remark[len(remark)-1].roles >= roles) {
		rows = remark
	}
	slices.Reverse(rows)
	return rows
}

// plainHeader collects the header rows that are no remarks, nearest first.
func (v *view) plainHeader(fits func(width int) bool) (rows []headerRow) {
	for i := v.first - 1; i >= 0 && len(rows) < maxHeaderRows; i-- {
		text := v.lines[i].text
		if isComment(text) || isRule(text) || isMarker(text) || isBlank(text) {
			if len(rows) > 0 && isBlank(text) {
				break
			}
			continue
		}
		cells := headerCells(text, v.delimiter, v.width)
		h := newHeaderRow(v.lines[i], cells)
		if !fits(len(cells)) || h.texts == 0 || len(rows) > 0 && v.width == 1 && h.units == 0 && h.roles == 0 {
			break
		}
		if len(rows) > 0 && h.texts < h.filled() && (v.width <= 2 || trimCell(cells[0]) != "" && !beadWords[strings.ToLower(trimCell(cells[0]))]) {
			break // a key and its value
		}
		if h.roles == 0 && h.units == 0 && isKeyLine(text) || len(rows) > 0 && len(cells) > v.width && trimCell(cells[len(cells)-1]) != "" {
			break
		}
		rows = append(rows, h)
	}
	return rows
}

// commentHeader looks for names in the remarks above the data.
func (v *view) commentHeader(fits func(width int) bool) []headerRow {
	var units []headerRow
	last := v.first - 1
	for last > 0 && isBlank(v.lines[last].text) {
		last--
	}
	for i := last; i >= 0; i-- {
		text := v.lines[i].text
		if !isComment(text) {
			continue
		}
		text = strings.TrimLeft(trimCell(text), "#% \t")
		for _, word := range []string{"columns:", "column names:", "fields:", "header:"} {
			if len(text) > len(word) && strings.EqualFold(text[:len(word)], word) {
				text = text[len(word):]
			}
		}
		ways := [][]string{cellTexts(text, v.delimiter), cellTexts(text, ','), cellTexts(text, '\t'), cellTexts(text, ';'), headerCells(text, ' ', v.width)}
		for k, cells := range ways {
			h := newHeaderRow(v.lines[i], cells)
			switch {
			case !fits(len(cells)):
			case h.units == h.filled() && h.units > 1:
				units = []headerRow{h}
			case h.roles > 0 && (2*(h.roles+h.counters) >= h.filled() || i == last && k == 0 && (v.delimiter != ' ' || strings.Contains(text, `"`)) && h.isShort()):
				return append(units, h)
			}
		}
	}
	return nil
}

// nameColumns merges the header rows into one description per column.
func nameColumns(rows []headerRow, width, shift int) []columnInfo {
	names := make([]columnInfo, width)
	if len(rows) == 0 {
		return names
	}
	best := -1
	for i, h := range rows {
		onlyUnits := h.units == h.filled() && len(rows) > 1
		if !onlyUnits && (best < 0 || h.roles > rows[best].roles || h.roles == rows[best].roles) {
			best = i
		}
	}
	if best < 0 {
		best = 0
	}
	at := func(h headerRow, k int) string {
		if k -= shift; k >= 0 && k < len(h.cells) {
			return h.cells[k]
		}
		return ""
	}
	for k := range names {
		names[k] = parseName(at(rows[best], k))
		names[k].understand()
	}
	for i, h := range rows {
		if i == best {
			continue
		}
		if h.units*2 >= h.filled() {
			for k := range names {
				u, ok := findUpper(at(h, k))
				if ok && trimCell(at(h, k)) != "" {
					if names[k].stated && names[k].unit != u && h.units == h.filled() {
						names[k].other = u.name
					} else if !names[k].stated {
						names[k].unit, names[k].stated = u, true
					}
				} else if text := strings.Trim(trimCell(at(h, k)), "()[]"); !ok && text != "" && !names[k].stated && h.units > 0 && i > best {
					names[k].unknown = text
				}
			}
		} else if i < best {
			groupColumns(names, func(k int) string { return at(h, k) })
		}
	}
	return names
}

// groupColumns takes the names of beads from a row above the names, where the
// names repeat. A name holds until the next one.
func groupColumns(names []columnInfo, at func(int) string) {
	count := map[byte]int{}
	for _, c := range names {
		if c.role == axisRole {
			count[c.axis]++
		}
	}
	if count['x'] < 2 && count['y'] < 2 && count['z'] < 2 {
		return
	}
	group := ""
	for k := range names {
		if text := trimCell(at(k)); text != "" {
			group = text
		}
		if names[k].role == axisRole && names[k].bead == "" {
			names[k].bead, names[k].named = group, true
		}
	}
}

// isRemark tells whether every header row calls what stands behind the columns of the
// rows a remark, or nothing: a column that is written only where there is one.
func isRemark(rows []headerRow, width int) bool {
	for _, h := range rows {
		for _, c := range h.cells[min(width, len(h.cells)):] {
			if list := splitWords(c); slices.ContainsFunc(list, func(w string) bool { return !remarkWords[w] }) {
				return false
			}
		}
	}
	return true
}

// setNames finds the header and the columns of the table, and reconciles their
// numbers: a trailing delimiter, or an index column without a name.
func (lay *layout) setNames(name string, v *view, opt Options) error {
	width := v.width
	lastEmpty := v.alwaysEmpty(width - 1)
	var rows []headerRow
	if opt.Header != "none" {
		if err := v.checkBroken(name); err != nil {
			return err
		}
		rows = v.findHeader(func(n int) bool {
			return n == width || n == width+1 || n == width-1 && (lastEmpty || v.isIndex(0))
		})
	}
	cells := 0
	for _, h := range rows {
		n := len(h.cells)
		if n > 0 && trimCell(h.cells[n-1]) == "" && n > 1 && (lastEmpty || n == width+1) {
			n--
		}
		cells = max(cells, n)
	}
	shift := 0
	switch {
	case len(rows) == 0:
		if err := v.checkCommas(name, v.headerWidth()); err != nil && opt.Delimiter == "" && opt.Decimal == "" {
			return err
		}
		if err := v.checkNames(name, opt); err != nil {
			return err
		}
		if lastEmpty && width > 1 {
			width, lay.trailing = width-1, true
		}
	case cells == width:
	case cells == width-1 && lastEmpty:
		width, lay.trailing = width-1, true
	case cells == width-1:
		shift = 1
	case cells > width && isRemark(rows, width):
	case cells > width:
		return &Error{File: name, Line: rows[0].line.number, Code: CodeLayout,
			What:   fmt.Sprintf("the header has %d names, the rows have %d cells", cells, width),
			Remedy: "give every column one name; quote names that hold the delimiter"}
	}
	if len(rows) > 0 && opt.Delimiter == "" && opt.Decimal == "" {
		if err := v.checkCommas(name, cells); err != nil {
			return err
		}
	}
	if err := v.checkBetween(name, rows); err != nil {
		return err
	}
	lay.names = nameColumns(rows, width, shift)
	lay.repeats = map[string]bool{}
	for _, h := range rows {
		if !isComment(h.line.text) {
			lay.repeats[strings.TrimSpace(h.line.text)] = true
		}
	}
	return nil
}
