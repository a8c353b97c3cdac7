package track

import (
	"math"
	"strconv"
	"strings"
)

// measure takes the facts about the columns from the sample: numbers or text,
// whole numbers, blanks around cells, the mean length of a row.
func (lay *layout) measure(v *view, sampled int) {
	numeric := v.numericColumns()
	for k := range lay.names {
		lay.names[k].numeric, lay.names[k].whole, lay.names[k].empty = numeric[k], true, true
	}
	last := len(lay.names) - 1
	lay.lastMarks = map[string]bool{}
	rows, first := 0, true
	marked := make([]int, len(lay.names)) // numbers with a decimal mark, less nine times those without
	for i := v.first; i < len(v.lines); i++ {
		if !v.isRow(i, numeric) {
			continue
		}
		rows++
		for k := range lay.names {
			c, kind := v.cells[i][k], v.kinds[i][k]
			lay.names[k].empty = lay.names[k].empty && kind == missingCell
			lay.names[k].clock = lay.names[k].clock || kind == clockCell
			if kind == numberCell && strings.IndexByte(c.text, lay.mark) >= 0 {
				lay.names[k].whole = false
				marked[k]++
			} else if kind == numberCell {
				marked[k] -= 9
			}
		}
		lay.padded = lay.padded || v.delimiter == ' ' || hasBlanks(v.lines[i].text, v.delimiter)
		if i == len(v.lines)-1 {
			break // possibly cut off
		}
		if v.kinds[i][last] == missingCell {
			lay.lastMarks[v.cells[i][last].text] = true
		}
		if d := digitsOf(v.cells[i][last].text, lay.mark); d.decimals < 0 {
			continue
		} else if first {
			lay.last, first = d, false
		} else if d != lay.last {
			lay.last = digits{}
		}
	}
	for k, weight := range marked {
		lay.names[k].marked = weight > 0
	}
	if lay.last.decimals < 2 || rows < 3 {
		lay.last = digits{}
	}
	end := sampled
	if n := len(v.lines); n > v.first+1 {
		end = v.lines[n-1].at
		lay.lineBytes = float64(end-v.lines[v.first].at) / float64(n-1-v.first)
		return
	}
	lay.lineBytes = float64(max(end-v.lines[v.first].at, 1))
}

// hasBlanks tells whether blanks stand beside a delimiter or at an end.
func hasBlanks(text string, delimiter byte) bool {
	for i := range len(text) {
		if text[i] != ' ' && (text[i] != '\t' || delimiter == '\t') {
			continue
		}
		if i == 0 || i+1 == len(text) || text[i-1] == delimiter || text[i+1] == delimiter || text[i+1] == ' ' {
			return true
		}
	}
	return false
}

// setFields turns the plan into the orders for the parser.
func (lay *layout) setFields(p *plan, v *view) {
	lay.fields = make([]field, len(lay.names))
	for k := range lay.fields {
		lay.fields[k] = field{kind: skipField, name: label(lay.names[k], k)}
	}
	for _, u := range p.uses {
		f := &lay.fields[u.column]
		f.out, f.shift = u.out, 0
		switch {
		case u.role == "bead":
			f.kind = beadField
		case lay.names[u.column].clock && (u.role == "time" || u.role == "date"):
			f.kind = clockField
		default:
			f.kind, f.shift, f.times = numberField, u.unit.siShift(), u.unit.times
			f.marked = lay.names[u.column].marked
			if u.unit.isCoarse() {
				f.kind = timesField
			}
			if u.role == "kept" || u.role == "frame" {
				f.shift = 0
			}
		}
	}
	lay.kept = len(p.uses)
	text := 0
	for k := range lay.names {
		if !lay.names[k].numeric {
			text++
		}
	}
	lay.knownText = text > 0
	lay.decimals = -1
	numeric := v.numericColumns()
	stamps := p.time
	if stamps == nil {
		stamps = p.date
	}
	for i := v.first; i < len(v.lines) && stamps != nil; i++ {
		if !v.isRow(i, numeric) {
			continue
		}
		lay.weighStamp(trimCell(v.cells[i][stamps.column].text))
		if p.date != nil {
			lay.weighStamp(trimCell(v.cells[i][p.date.column].text))
		}
	}
}

// weighStamp notes the day and the digits of a stamp of the sample.
func (lay *layout) weighStamp(text string) {
	decimals := -1
	if d := digitsOf(text, lay.mark); d.exponent == 0 {
		decimals = d.decimals
	}
	if s, ok := parseClock(text); ok {
		if s.clocked {
			decimals = s.digits
		}
		if s.dated && !lay.clock.dated {
			lay.clock = clockBase{day: s.day, dated: true}
		}
	}
	lay.decimals = max(lay.decimals, decimals)
}

// isTimeLike tells whether a column of the sample rises in equal steps, but for
// a few gaps.
func (lay *layout) isTimeLike(v *view, k int) bool {
	var t []float64
	numeric := v.numericColumns()
	for i := v.first; i < len(v.lines); i++ {
		if !v.isRow(i, numeric) {
			continue
		}
		x, err := generalNumber(v.cells[i][k].text, lay.mark, lay.thousands, 0)
		if err != nil || math.IsNaN(x) {
			return false
		}
		t = append(t, x)
	}
	if len(t) < 4 {
		return false
	}
	step := usualStep(t)
	even := 0
	for i := 1; i < len(t); i++ {
		if t[i] <= t[i-1] {
			return false
		}
		if math.Abs(t[i]-t[i-1]-step) <= 0.2*step {
			even++
		}
	}
	return even*10 >= (len(t)-1)*9
}

// useHeaderSetting applies Options.Header: the first row follows the stated
// number of lines.
func (v *view) useHeaderSetting(opt Options) error {
	if opt.Header == "" {
		return nil
	}
	n := 0
	if opt.Header != "none" {
		var err error
		if n, err = strconv.Atoi(opt.Header); err != nil || n < 0 {
			return &Error{File: opt.Name, Code: CodeSetting, What: "the header " + quoted(opt.Header) + " is not known", Remedy: "use none, or the number of lines above the data"}
		}
	}
	for i, line := range v.lines {
		if line.number > n && !isBlank(line.text) && !isComment(line.text) {
			v.first = i
			if cells, _ := splitLine(nil, line.text, v.delimiter); len(cells) != v.width {
				v.width = len(cells)
			}
			return nil
		}
	}
	v.first = -1
	return nil
}

// readAs describes the reading.
func (lay *layout) readAs(p *plan, rows *parsed) ReadAs {
	r := ReadAs{Format: "text", Delimiter: delimiterName(lay.delimiter), Decimal: "point", Encoding: lay.encoding,
		HeaderLines: lay.headerLines, Rows: rows.rows, Ignored: len(rows.skip), Rate: math.NaN()}
	if lay.mark == ',' {
		r.Decimal = "comma"
	}
	r.Columns = p.describe()
	return r
}

// describe lists the columns of the file with their use.
func (p *plan) describe() []ColumnUse {
	list := make([]ColumnUse, len(p.columns))
	for k, c := range p.columns {
		list[k] = ColumnUse{Header: c.header, Role: "unused", Unit: c.unit.name}
	}
	for _, u := range p.uses {
		list[u.column].Role = u.role
		if u.unit.name != "" {
			list[u.column].Unit = u.unit.name
		}
	}
	return list
}
