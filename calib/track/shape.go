package track

import (
	"fmt"
	"strconv"
	"strings"
)

// read reads the keys in the lines above the data, on one line or as names above
// their values.
func (p *preamble) read(v *view) {
	for i := range v.first {
		line := v.lines[i]
		p.readKey(line.text, v.delimiter, line.number)
		if i+1 < v.first && !isKeyLine(line.text) && !isKeyLine(v.lines[i+1].text) {
			names, values := cellTexts(line.text, v.delimiter), cellTexts(v.lines[i+1].text, v.delimiter)
			for k := range min(len(names), len(values)) {
				p.set(names[k], values[k], v.lines[i+1].number)
			}
		}
	}
}

// takeFirstRow takes start and increment of the time from the row under those
// names, where no other row has a value in those columns.
func (lay *layout) takeFirstRow(v *view) {
	isTiming := func(c columnInfo) bool {
		list := splitWords(c.header)
		return matches(list, intervalKeys) || matches(list, startKeys)
	}
	found := false
	for k, c := range lay.names {
		if k >= len(v.cells[v.first]) || (v.kinds[v.first][k] == numberCell) != isTiming(c) {
			return
		}
		found = found || isTiming(c)
	}
	if !found || v.first+1 >= len(v.lines) {
		return
	}
	for k, c := range lay.names {
		if isTiming(c) {
			lay.preamble.take(c, v.cells[v.first][k].text, v.lines[v.first].number)
		}
	}
	v.first++
}

// headerWidth is the number of cells of the line above the data.
func (v *view) headerWidth() int {
	for i := v.first - 1; i >= 0; i-- {
		if !isBlank(v.lines[i].text) {
			return len(cellTexts(strings.TrimLeft(v.lines[i].text, "#% "), v.delimiter))
		}
	}
	return 0
}

// checkNames refuses a header that is plainly one but does not fit the rows.
func (v *view) checkNames(name string, opt Options) error {
	if opt.Header == "none" || v.first == 0 || len(opt.Columns) > 0 {
		return nil
	}
	i := v.first - 1
	for i > 0 && isBlank(v.lines[i].text) {
		i--
	}
	line := v.lines[i]
	cells := cellTexts(strings.TrimLeft(line.text, "#% "), v.delimiter)
	h := newHeaderRow(line, cells)
	if h.roles == 0 || isComment(line.text) && (h.roles < 2 || h.roles*2 < h.filled()) || isMarker(line.text) || isKeyLine(line.text) {
		return nil
	}
	return &Error{File: name, Line: line.number, Code: CodeLayout,
		What:   fmt.Sprintf("the header has %d names, the rows have %d cells", len(cells), v.width),
		Remedy: "give every column one name, or say which columns to use (--columns with numbers)"}
}

// isKeyLine tells a line of the form "key: value" or "key = value".
func isKeyLine(text string) bool {
	key, value, found := strings.Cut(strings.TrimLeft(text, "#% "), ":")
	if !found {
		key, value, found = strings.Cut(key, "=")
	}
	return found && trimCell(key) != "" && trimCell(value) != ""
}

// alwaysEmpty tells whether column k is empty in every row of the sample.
func (v *view) alwaysEmpty(k int) bool {
	for i := v.first; i < len(v.lines); i++ {
		if len(v.cells[i]) == v.width && v.numbers(i) > 0 && v.cells[i][k].text != "" {
			return false
		}
	}
	return true
}

// isIndex tells whether column k counts the rows by ones.
func (v *view) isIndex(k int) bool {
	last, seen := 0, 0
	for i := v.first; i < len(v.lines); i++ {
		if len(v.cells[i]) != v.width || v.numbers(i) == 0 {
			continue
		}
		n, err := strconv.Atoi(v.cells[i][k].text)
		if err != nil || seen > 0 && n != last+1 {
			return false
		}
		last = n
		seen++
	}
	return seen > 1
}
