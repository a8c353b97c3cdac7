package track

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"strings"
	"sync"
)

// Limits of a table.
const (
	columnLimit = 4096 // columns
	footerLimit = 40   // lines of text behind the data
)

// samplePool keeps the memory of samples from one recording to the next.
var samplePool = sync.Pool{New: func() any { return new([sampleSize]byte) }}

// readText reads a text: first the layout from a sample, then the rows. whole is the
// file from which it comes.
func readText(ctx context.Context, r io.Reader, whole *tally, opt Options, size int64) (*table, error) {
	text, encoding, err := transcode(opt.Name, r)
	if err != nil {
		return nil, err
	}
	whole.stays = whole.stays && encoding == "UTF-8" // otherwise a decoder has a buffer that it uses again
	sample := samplePool.Get().(*[sampleSize]byte)
	defer samplePool.Put(sample)
	defer whole.settle()
	head := sample[:]
	n, err := io.ReadFull(text, head)
	complete := errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF)
	if err != nil && !complete {
		return nil, err
	}
	head = head[:n]
	if err := checkBinary(opt.Name, head); err != nil {
		return nil, err
	}
	if bytes.IndexByte(head, '\r') >= 0 {
		whole.settle()
	}
	lay := &layout{encoding: encoding, returns: endLines(head, complete), legacy: isLegacy(head, complete)}
	if lay.legacy {
		lay.encoding = "Windows-1252"
	}
	p, err := lay.find(opt, head, complete)
	if err != nil {
		return nil, err
	}
	in := &feed{ctx: ctx, name: opt.Name, reader: io.MultiReader(bytes.NewReader(head[lay.start:]), text), whole: whole,
		line: lay.firstLine, delimiter: lay.delimiter, returns: lay.returns}
	return lay.readRows(in, p, opt, size)
}

// find settles the layout from the sample.
func (lay *layout) find(opt Options, head []byte, whole bool) (*plan, error) {
	name := opt.Name
	sample := bytes.TrimRight(head, "\x00\x1a")
	if len(bytes.TrimSpace(sample)) == 0 {
		return nil, &Error{File: name, Code: CodeEmpty, What: "the file is empty", Remedy: "give a file with a header and one row per sample"}
	}
	if !whole {
		at := bytes.LastIndexByte(sample, '\n')
		if at < 0 {
			return nil, tooLong(name, 1)
		}
		sample = sample[:at+1]
	}
	wanted, err := wantedDelimiter(opt, sample)
	if err != nil {
		return nil, err
	}
	v := sniff(lay, sample, wanted)
	if err := v.useHeaderSetting(opt); err != nil {
		return nil, err
	}
	if v.first < 0 {
		return nil, v.noRows(name)
	}
	if err := v.checkShape(name); err != nil {
		return nil, err
	}
	v = lay.commaColumn(v, sample, opt)
	lay.delimiter = v.delimiter
	if err := lay.setNames(name, v, opt); err != nil {
		return nil, err
	}
	if err := lay.findMark(name, v, opt.Decimal); err != nil {
		return nil, err
	}
	lay.preamble.read(v)
	lay.takeFirstRow(v)
	lay.start, lay.firstLine = v.lines[v.first].at, v.lines[v.first].number
	if v.first == 0 && bytes.HasPrefix(head, []byte("\ufeff")) {
		lay.start += len("\ufeff")
	}
	lay.headerLines = lay.firstLine - 1
	lay.measure(v, len(sample))
	line := lay.firstLine
	if v.first > 0 && len(lay.repeats) > 0 {
		line = v.lines[v.first-1].number
	}
	p, err := makePlan(name, lay.names, line, opt, func(k int) bool { return lay.isTimeLike(v, k) })
	if err != nil {
		return nil, err
	}
	if err := p.fillUnits(lay.preamble, opt); err != nil {
		return nil, err
	}
	lay.setFields(p, v)
	return p, nil
}

// wantedDelimiter takes the delimiter from the settings or from a sep= line.
func wantedDelimiter(opt Options, sample []byte) (byte, error) {
	if opt.Decimal != "" && opt.Decimal != "point" && opt.Decimal != "comma" {
		return 0, &Error{File: opt.Name, Code: CodeSetting, What: fmt.Sprintf("the decimal mark %s is not known", quoted(opt.Decimal)), Remedy: "use point or comma"}
	}
	if opt.Delimiter != "" {
		for _, d := range delimiters {
			if d.name == opt.Delimiter {
				return d.char, nil
			}
		}
		return 0, &Error{File: opt.Name, Code: CodeSetting, What: fmt.Sprintf("the delimiter %s is not known", quoted(opt.Delimiter)), Remedy: "use comma, semicolon, tab, space or pipe"}
	}
	first := strings.Trim(string(bytes.TrimPrefix(sample[:min(lineEnd(sample, 0), 12)], []byte("\ufeff"))), "\r\"")
	if len(first) == 5 && strings.EqualFold(first[:4], "sep=") {
		for _, d := range delimiters {
			if d.char == first[4] {
				return d.char, nil
			}
		}
	}
	return 0, nil
}

// commaColumn reads a single column with decimal commas under one name, where a
// comma would cut every number in two.
func (lay *layout) commaColumn(v *view, sample []byte, opt Options) *view {
	if v.delimiter != ',' || v.width != 2 || opt.Delimiter != "" || v.first == 0 || v.headerWidth() != 1 && opt.Decimal != "comma" {
		return v
	}
	one := look(v.lines, ';')
	if one.width != 1 || one.first != v.first {
		return v
	}
	for _, line := range v.lines[max(0, v.first-2):v.first] { // the name, or the name and the unit
		if h := newHeaderRow(line, cellTexts(line.text, ';')); h.roles == 1 {
			return one
		}
	}
	return v
}

// readRows parses all rows and judges the lines that are none.
func (lay *layout) readRows(in *feed, p *plan, opt Options, size int64) (*table, error) {
	expected := int(float64(size)/max(lay.lineBytes, 1)*1.02) + 4096
	beads := &beadIndex{}
	var parts *partReader
	var full func(*parsed) error
	if limit := p.mostRows(opt); limit > 0 {
		parts = &partReader{opt: opt, table: func(rows *parsed) (*table, error) { return lay.table(p, rows, beads, opt) }}
		full = parts.take
		if size == 0 || expected > limit { // of a stream the size is not known
			expected = limit
		}
		in.store = newStore(lay.kept, expected)
		in.store.limit = limit
	} else {
		in.store = newStore(lay.kept, expected)
	}
	rows, err := parseRows(in, lay, beads, opt.Workers, full)
	if err != nil {
		return nil, err
	}
	if parts != nil && parts.first != nil {
		return parts.finish(rows)
	}
	if err := rows.judge(); err != nil {
		return nil, err
	}
	return lay.table(p, rows, beads, opt)
}

// table makes the table of the rows that were read.
func (lay *layout) table(p *plan, rows *parsed, beads *beadIndex, opt Options) (*table, error) {
	if err := rows.checkRepeats(opt.Name, lay, p); err != nil {
		return nil, err
	}
	if err := rows.checkBlank(opt.Name, lay, p); err != nil {
		return nil, err
	}
	tab := &table{plan: p, columns: rows.columns, rows: rows.rows, shifted: true, pre: lay.preamble, undated: lay.isUndated(p)}
	if p.bead != nil {
		tab.beads = beads.names
	}
	tab.written = lay.resolution(p)
	tab.place = func(row int) *Error {
		stamp := p.time
		if stamp == nil {
			stamp = p.frame
		}
		e := &Error{File: opt.Name, Line: lay.firstLine + rows.base + rows.lineOf(row)}
		if stamp != nil && stamp.column == 0 {
			e.Column = 1
		} else if stamp != nil {
			e.cell = &hidden{stamp.column, lay.delimiter, lay.lineText}
		}
		return e
	}
	tab.readAs = lay.readAs(p, rows)
	if len(rows.again) > 0 {
		tab.notes = note(tab.notes, "header-repeated", "the header occurs again among the rows, first in line %d: the rows are read as one recording", lay.firstLine+rows.base+rows.again[0])
	}
	if n := rows.dropEmpty(p); n > 0 {
		tab.rows -= n
		tab.readAs.Rows -= n
		tab.notes = note(tab.notes, "rows-empty", "%d rows without a time and without a number at the end are left out", n)
	}
	if footer := rows.total; footer > 0 {
		tab.notes = note(tab.notes, "footer", "%d lines of text behind the data are left out, from line %d on", footer, rows.bad[0].err.Line)
	}
	return tab, nil
}

// resolution is the rounding of the time stamps as the sample shows it.
func (lay *layout) resolution(p *plan) resolution {
	if p.time == nil {
		return resolution{}
	}
	out := resolution{shift: p.time.unit.siShift(), times: p.time.unit.times}
	if lay.decimals >= 0 {
		out.step = out.factor() * math.Pow(10, float64(out.shift-lay.decimals))
	}
	return out
}

// isUndated tells whether the time is a time of day without a date.
func (lay *layout) isUndated(p *plan) bool {
	return p.time != nil && p.columns[p.time.column].clock && !lay.clock.dated && p.date == nil
}
