package track

import (
	"fmt"
	"slices"
	"strconv"
	"strings"
)

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
		if c.role == axisRole && !c.empty && !slices.ContainsFunc(p.uses, func(u use) bool { return u.column == k }) {
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
	for i, k := range axes { // beads whose names differ in case only are one
		for _, other := range axes[:i] {
			if strings.EqualFold(p.columns[k].bead, p.columns[other].bead) {
				p.columns[k].bead = p.columns[other].bead
			}
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
			return p.fail(CodeColumns, fmt.Sprintf("the table has no names, and column %d holds text", k+1),
				"give the columns names, or say which to use (--columns time=1,x=2)")
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
		return p.fail(CodeColumns, fmt.Sprintf("the table has no names and %d columns beside the time", len(numbers)),
			"say which columns to use (--columns time=1,x=2,y=3)")
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
