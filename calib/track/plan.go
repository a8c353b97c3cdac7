package track

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
	"unicode"
)

// use is what a column is used for after header and settings are weighed.
type use struct {
	column int // index in the file
	role   string
	axis   byte
	bead   string
	unit   unit
	known  bool // the unit is known
	out    int  // index of the kept column
}

// plan says which columns become what.
type plan struct {
	name    string
	columns []columnInfo
	uses    []use // kept columns
	time    *use
	date    *use
	frame   *use
	bead    *use
	notes   []Note
	line    int // of the header, for messages
	guessed bool
}

// label names a column in messages.
func label(c columnInfo, k int) string {
	if c.header != "" {
		return c.header
	}
	return "column " + strconv.Itoa(k+1)
}

// listNames names the columns of a file for a message.
func listNames(columns []columnInfo) string {
	var list []string
	for k, c := range columns {
		if c.header != "" {
			list = append(list, quoted(c.header))
		} else {
			list = append(list, strconv.Itoa(k+1))
		}
	}
	if len(list) > 12 {
		list = append(list[:12], "…")
	}
	return strings.Join(list, ", ")
}

// makePlan assigns the columns. columns are described by the header, with the
// facts numeric, clock and whole from the sample.
func makePlan(name string, columns []columnInfo, line int, opt Options, isGrid func(column int) bool) (*plan, error) {
	p := &plan{name: name, columns: columns, line: line}
	chosen, err := p.choose(opt)
	if err != nil {
		return nil, err
	}
	if !chosen {
		if err := p.recognise(opt, isGrid); err != nil {
			return nil, err
		}
	}
	if err := p.keep(opt); err != nil {
		return nil, err
	}
	if !slices.ContainsFunc(p.uses, func(u use) bool { return u.axis != 0 }) {
		return nil, p.noPositions()
	}
	if err := p.setUnits(opt); err != nil {
		return nil, err
	}
	for i := range p.uses {
		u := &p.uses[i]
		u.out = i
		switch u.role {
		case "time":
			p.time = u
		case "date":
			p.date = u
		case "frame":
			p.frame = u
		case "bead":
			p.bead = u
		}
	}
	return p, nil
}

func (p *plan) fail(code, what, remedy string) *Error {
	return &Error{File: p.name, Line: p.line, Code: code, What: what, Remedy: remedy}
}

func (p *plan) add(k int, role string, axis byte, bead string) {
	p.uses = append(p.uses, use{column: k, role: role, axis: axis, bead: bead})
}

// find looks a column up by its name or number.
func (p *plan) find(key, value string) (int, error) {
	if n, err := strconv.Atoi(value); err == nil && n >= 1 && n <= len(p.columns) {
		return n - 1, nil
	}
	wanted := parseName(value).header
	tests := []func(c columnInfo) bool{
		func(c columnInfo) bool { return c.header == value || c.header == wanted },
		func(c columnInfo) bool {
			return strings.EqualFold(c.header, value) || strings.EqualFold(c.header, wanted)
		},
	}
	for _, test := range tests {
		var found []int
		for k, c := range p.columns {
			if c.header != "" && test(c) {
				found = append(found, k)
			}
		}
		if len(found) == 1 {
			return found[0], nil
		}
		if len(found) > 1 {
			return 0, p.fail(CodeColumns, fmt.Sprintf("%d columns are named %s (%s)", len(found), quoted(value), key), "give the number of the column instead of its name")
		}
	}
	return 0, p.fail(CodeColumns, fmt.Sprintf("no column %s for %s: the file has %s", quoted(value), key, listNames(p.columns)), "name one of these, or give its number from 1")
}

// choose follows Options.Columns. It reports whether positions were chosen;
// roles that were not named are then inferred for time and bead only.
func (p *plan) choose(opt Options) (bool, error) {
	if len(opt.Columns) == 0 {
		return false, nil
	}
	keys := make([]string, 0, len(opt.Columns))
	for key := range opt.Columns {
		keys = append(keys, key)
	}
	slices.Sort(keys)
	axes, named := false, map[string]int{}
	for _, key := range keys {
		if !slices.Contains([]string{"time", "x", "y", "z", "bead", "frame"}, key) {
			return false, &Error{File: p.name, Code: CodeSetting, What: fmt.Sprintf("a column cannot be %s", quoted(key)), Remedy: "use time, x, y, z, frame or bead"}
		}
		k, err := p.find(key, opt.Columns[key])
		if err != nil {
			return false, err
		}
		for other, column := range named {
			if column == k {
				return false, p.fail(CodeSetting, fmt.Sprintf("column %s is named for both %s and %s", label(p.columns[k], k), other, key), "give each its own column")
			}
		}
		named[key] = k
		axes = axes || len(key) == 1
	}
	for _, key := range keys {
		axis := byte(0)
		if len(key) == 1 {
			axis = key[0]
		}
		p.add(named[key], key, axis, "")
	}
	if !axes {
		return false, nil
	}
	for k, c := range p.columns {
		taken := slices.ContainsFunc(p.uses, func(u use) bool { return u.column == k })
		_, time := named["time"]
		_, bead := named["bead"]
		switch {
		case taken:
		case c.role == timeRole && !time && p.count(timeRole) == 1:
			p.add(k, "time", 0, "")
		case c.role == beadRole && !bead && p.count(beadRole) == 1:
			p.add(k, "bead", 0, "")
		}
	}
	return true, nil
}

func (p *plan) count(r role) int {
	n := 0
	for _, c := range p.columns {
		if c.role == r {
			n++
		}
	}
	return n
}

// noPositions is the error of a file without position columns. Where one to three
// columns could be meant it says how to name them.
func (p *plan) noPositions() error {
	var empty, could []int
	for k, c := range p.columns {
		switch {
		case c.role == axisRole && c.empty:
			empty = append(empty, k)
		case c.role == otherRole && c.numeric && !slices.ContainsFunc(p.uses, func(u use) bool { return u.column == k }):
			could = append(could, k)
		}
	}
	if len(empty) > 0 {
		return p.fail(CodeEmpty, "the position columns hold no number: "+p.names(empty), "check the export, or say which columns to use (--columns x=NAME,y=NAME)")
	}
	remedy := "say which columns to use (--columns x=NAME,y=NAME,time=NAME, or by number)"
	if len(could) > 0 && len(could) <= 3 {
		var list []string
		for i, k := range could {
			list = append(list, "xyz"[i:i+1]+"="+p.address(k))
		}
		remedy = fmt.Sprintf("if %s the positions, in this order, say so: --columns %s", map[bool]string{true: "this column holds", false: "these columns hold"}[len(could) == 1], strings.Join(list, ","))
	}
	return p.fail(CodeColumns, "no column is recognised as x, y or z: the file has "+listNames(p.columns), remedy)
}

// address is how --columns is told of a column without need of quotes: by its name if
// that is one plain word of its own, otherwise by its number.
func (p *plan) address(k int) string {
	name := p.columns[k].header
	plain := name != "" && !strings.ContainsFunc(name, func(r rune) bool { return r > 127 || !unicode.IsLetter(r) && !unicode.IsDigit(r) && r != '_' })
	if _, err := strconv.Atoi(name); err == nil || !plain {
		return strconv.Itoa(k + 1)
	}
	if found, err := p.find("x", name); err != nil || found != k {
		return strconv.Itoa(k + 1)
	}
	return name
}

// keep adds the columns of Options.Keep.
func (p *plan) keep(opt Options) error {
	for _, name := range opt.Keep {
		k, err := p.find("keep", name)
		if err != nil {
			return err
		}
		if !p.columns[k].numeric {
			return p.fail(CodeColumns, fmt.Sprintf("the column %s to keep holds no numbers", quoted(name)), "keep numeric columns only")
		}
		if at := slices.IndexFunc(p.uses, func(u use) bool { return u.column == k }); at >= 0 {
			return p.fail(CodeSetting, fmt.Sprintf("the column %s to keep is in use already, as %s", quoted(name), p.uses[at].role), "keep other columns only")
		}
		p.add(k, "kept", 0, "")
	}
	return nil
}
