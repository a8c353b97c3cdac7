package track

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
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
		return nil, p.fail(CodeColumns, "no column is recognised as x, y or z: the file has "+listNames(columns),
			"say which columns to use (--columns x=NAME,y=NAME,time=NAME, or by number)")
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

// recognise takes the roles from the names, or for a table without names from
// its shape.
func (p *plan) recognise(opt Options, isGrid func(int) bool) error {
	if !slices.ContainsFunc(p.columns, func(c columnInfo) bool { return c.header != "" }) {
		return p.recogniseShape(isGrid)
	}
	taken := func(role string) bool {
		return slices.ContainsFunc(p.uses, func(u use) bool { return u.role == role })
	}
	for _, one := range []struct {
		role role
		name string
	}{{timeRole, "time"}, {dateRole, "date"}, {frameRole, "frame"}, {beadRole, "bead"}} {
		var found []int
		for k, c := range p.columns {
			if c.role == one.role && (c.numeric || c.clock || one.role == beadRole) {
				found = append(found, k)
			}
		}
		if one.role == timeRole && len(found) == 0 && p.count(timeRole) > 0 && opt.Rate == 0 && !taken("time") {
			k := slices.IndexFunc(p.columns, func(c columnInfo) bool { return c.role == timeRole })
			return p.fail(CodeTime, fmt.Sprintf("the column %s holds neither numbers nor times of day", quoted(p.columns[k].header)),
				"write time stamps as numbers, as 12:30:00.125 or as 2024-05-31T12:30:00.125")
		}
		if taken(one.name) || len(found) == 0 {
			continue
		}
		if len(found) > 1 && one.role == timeRole {
			if narrowed := slices.DeleteFunc(slices.Clone(found), func(k int) bool { return !p.columns[k].stated && !p.columns[k].clock }); len(narrowed) == 1 {
				found = narrowed
			} else {
				return p.fail(CodeColumns, fmt.Sprintf("%d columns look like time: %s", len(found), p.names(found)), "say which one is meant (--columns time=NAME or its number)")
			}
		}
		p.add(found[0], one.name, 0, "")
	}
	return p.recogniseAxes()
}

func (p *plan) names(list []int) string {
	var names []string
	for _, k := range list {
		names = append(names, fmt.Sprintf("%s (%d)", label(p.columns[k], k), k+1))
	}
	return strings.Join(names, ", ")
}

// recogniseAxes finds the position columns and, where there are several of an
// axis, the bead of each.
func (p *plan) recogniseAxes() error {
	var axes []int
	for k, c := range p.columns {
		// A named axis that holds text is read all the same: every cell is an error.
		if c.role == axisRole && !c.empty {
			axes = append(axes, k)
		}
	}
	for _, c := range p.columns {
		if c.role == axisRole && c.empty {
			p.notes = note(p.notes, "axis-left-out", "column %s is left out: it holds no numbers", quoted(c.header))
		}
	}
	if len(axes) == 0 {
		for k, c := range p.columns {
			if c.numeric && c.role == otherRole && len(splitWords(c.header)) > 0 && axisAlone[splitWords(c.header)[0]] {
				axes = append(axes, k)
				p.columns[k].axis = 'x'
			}
		}
		if len(axes) == 1 {
			p.notes = note(p.notes, "axis-assumed", "the only position column, %s, is taken as x", quoted(p.columns[axes[0]].header))
		}
	}
	if p.repeats(axes, func(c columnInfo) string { return c.bead }) {
		// the same axis twice under one name: sets that follow each other are beads
		if err := p.numberSets(axes); err != nil {
			return err
		}
	}
	several := p.repeats(axes, func(columnInfo) string { return "" })
	if several {
		var plainNames, numbered, variants []int
		for _, k := range axes {
			if p.columns[k].bead == "" {
				plainNames = append(plainNames, k)
			} else if p.columns[k].numbered() {
				numbered = append(numbered, k)
			} else {
				variants = append(variants, k)
			}
		}
		switch {
		case len(plainNames) > 0 && len(numbered) == 0 && !p.repeats(plainNames, func(columnInfo) string { return "" }):
			p.notes = note(p.notes, "columns-left-out", "%s are used; the other columns named like positions are not", p.names(plainNames))
			axes, several = plainNames, false
		case len(variants) > 0 || len(plainNames) > 0 && len(numbered) > 0:
			return p.fail(CodeColumns, "it is not clear which columns are positions: "+p.names(axes), "say which columns to use (--columns x=NAME,y=NAME)")
		}
	}
	for _, k := range axes {
		bead := p.columns[k].bead
		if !several {
			bead = ""
		}
		p.add(k, string(p.columns[k].axis), p.columns[k].axis, bead)
	}
	return nil
}

// repeats tells whether an axis occurs twice with the same key.
func (p *plan) repeats(axes []int, key func(columnInfo) string) bool {
	seen := map[string]bool{}
	for _, k := range axes {
		id := string(p.columns[k].axis) + key(p.columns[k])
		if seen[id] {
			return true
		}
		seen[id] = true
	}
	return false
}

// numberSets numbers sets of columns with equal names, x y x y. A single axis
// that repeats, or sets that differ, are ambiguous.
func (p *plan) numberSets(axes []int) error {
	pattern := ""
	for _, k := range axes {
		pattern += string(p.columns[k].axis)
	}
	for size := 2; size <= 3; size++ {
		if len(pattern)%size != 0 || strings.Repeat(pattern[:size], len(pattern)/size) != pattern {
			continue
		}
		first := axes[:size]
		if p.repeats(first, func(columnInfo) string { return "" }) {
			continue
		}
		for i, k := range axes {
			if c := p.columns[axes[i%size]]; c.unit != p.columns[k].unit || c.bead != p.columns[k].bead {
				return p.fail(CodeColumns, "columns of one name have different units: "+p.names(axes), "say which columns to use (--columns x=NUMBER,y=NUMBER)")
			}
		}
		for i, k := range axes {
			p.columns[k].bead, p.columns[k].named = strconv.Itoa(i/size+1), true
		}
		p.notes = note(p.notes, "beads-numbered", "columns of one name repeat: the sets are taken as beads 1 to %d", len(axes)/size)
		return nil
	}
	return p.fail(CodeColumns, "several columns have the same name: "+p.names(axes), "say which columns to use (--columns x=NUMBER,y=NUMBER)")
}

// recogniseShape gives roles to a table without names: a first column of equal
// steps is the time, the rest are x, y, z in order.
func (p *plan) recogniseShape(isGrid func(int) bool) error {
	p.guessed = true
	var numbers []int
	for k, c := range p.columns {
		if c.numeric || c.clock {
			numbers = append(numbers, k)
		} else if !c.empty {
			return &Error{File: p.name, Code: CodeColumns, What: fmt.Sprintf("the table has no names, and column %d holds text", k+1),
				Remedy: "give the columns names, or say which to use (--columns time=1,x=2)"}
		}
	}
	has := func(role string) bool {
		return slices.ContainsFunc(p.uses, func(u use) bool { return u.role == role })
	}
	numbers = slices.DeleteFunc(numbers, func(k int) bool {
		return slices.ContainsFunc(p.uses, func(u use) bool { return u.column == k })
	})
	if len(numbers) > 1 && !has("time") && (p.columns[numbers[0]].clock || isGrid(numbers[0])) {
		role := "time"
		if p.columns[numbers[0]].whole && !p.columns[numbers[0]].clock {
			role = "frame"
		}
		p.add(numbers[0], role, 0, "")
		numbers = numbers[1:]
	}
	if len(numbers) > 3 {
		return &Error{File: p.name, Code: CodeColumns, What: fmt.Sprintf("the table has no names and %d columns beside the time", len(numbers)),
			Remedy: "say which columns to use (--columns time=1,x=2,y=3)"}
	}
	for i, k := range numbers {
		p.add(k, "xyz"[i:i+1], "xyz"[i], "")
	}
	var parts []string
	for _, u := range p.uses {
		parts = append(parts, fmt.Sprintf("%d as %s", u.column+1, u.role))
	}
	p.notes = note(p.notes, "columns-assumed", "the file names no columns: column %s", strings.Join(parts, ", "))
	return nil
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
