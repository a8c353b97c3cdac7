package track

import (
	"fmt"
	"slices"
	"strings"
)

// setUnits settles the unit of every kept column: from the header, from a
// setting where the header is silent, or as an error.
func (p *plan) setUnits(opt Options) error {
	var wanted unit
	if opt.Unit != "" {
		u, ok := findUnit(opt.Unit)
		if !ok || !u.positional() {
			return &Error{File: p.name, Code: CodeSetting, What: fmt.Sprintf("the position unit %s is not known", quoted(opt.Unit)),
				Remedy: "use one of m, mm, um, nm, px, V, mV, counts, 1"}
		}
		wanted = u
	}
	forced := false
	for i := range p.uses {
		u := &p.uses[i]
		c := p.columns[u.column]
		u.unit, u.known = c.unit, c.stated
		if c.other != "" && (u.axis != 0 && !opt.UnitForced || u.role == "time") {
			return p.fail(CodeUnit, fmt.Sprintf("the name of column %s states %s, the row of units %s", quoted(c.header), c.unit.name, c.other), "correct one of them")
		}
		switch {
		case u.role == "time":
			if err := p.setTimeUnit(u, opt); err != nil {
				return err
			}
		case u.axis != 0:
			if c.unknown != "" && (opt.Unit == "" || !opt.UnitForced) {
				return p.fail(CodeUnit, fmt.Sprintf("the unit %s of column %s is not known", quoted(c.unknown), quoted(c.header)),
					"units are m, mm, um, nm, px, V, mV, counts or 1; --unit replaces the one in the file")
			}
			if c.stated && !c.unit.positional() {
				return p.fail(CodeUnit, fmt.Sprintf("the unit %s of column %s is no unit of position", c.unit.name, quoted(c.header)),
					"units are m, mm, um, nm, px, V, mV, counts or 1; say which columns to use (--columns)")
			}
			if opt.Unit == "" {
				continue
			}
			if c.stated && c.unit != wanted {
				if !opt.UnitForced {
					return p.fail(CodeUnit, fmt.Sprintf("the header states %s in %s, the setting says %s", quoted(c.header), c.unit.name, wanted.name),
						"correct one of them; the flag --unit overrides the header")
				}
				forced = true
			}
			u.unit, u.known = wanted, true
		}
	}
	if forced {
		p.notes = note(p.notes, "unit-overridden", "positions are read in %s by a flag, against the unit in the header", wanted.name)
	}
	return nil
}

// fillUnits gives the unit stated in the preamble to positions without one, and
// refuses positions that have none at all.
func (p *plan) fillUnits(pre preamble, opt Options) error {
	var bare []string
	for i := range p.uses {
		u := &p.uses[i]
		if u.axis == 0 {
			continue
		}
		if !u.known && pre.stated {
			u.unit, u.known = pre.unit, true
		} else if pre.stated && u.known && u.unit != pre.unit && opt.Unit != "" && !opt.UnitForced && !p.columns[u.column].stated {
			return p.fail(CodeUnit, fmt.Sprintf("the file states positions in %s, the setting says %s", pre.unit.name, u.unit.name),
				"correct one of them; the flag --unit overrides the file")
		}
		if !u.known {
			bare = append(bare, label(p.columns[u.column], u.column))
		}
	}
	if len(bare) == 0 {
		return nil
	}
	slices.Sort(bare)
	what := "the file states no unit for " + strings.Join(slices.Compact(bare), ", ")
	if opt.Inspect {
		p.notes = note(p.notes, "unit-unknown", "%s", what)
		return nil
	}
	return p.fail(CodeUnit, what, "state it (--unit um, or recording.unit in the session file), or write it in the header: x (um)")
}

const timeUnits = "units of time are s, ms, us, ns, min, h, d and frame"

// setTimeUnit settles the unit of the time column.
func (p *plan) setTimeUnit(u *use, opt Options) error {
	c := p.columns[u.column]
	if c.unknown != "" && opt.TimeUnit == "" {
		return p.fail(CodeUnit, fmt.Sprintf("the unit %s of column %s is not known", quoted(c.unknown), quoted(c.header)), timeUnits+" (--time-unit)")
	}
	if c.stated && c.unit.dim != duration && c.unit.dim != frames {
		return p.fail(CodeUnit, fmt.Sprintf("the unit %s of column %s is no unit of time", c.unit.name, quoted(c.header)), timeUnits+" (--time-unit)")
	}
	if opt.TimeUnit != "" {
		wanted, ok := findUnit(opt.TimeUnit)
		if !ok || wanted.dim != duration && wanted.dim != frames {
			return &Error{File: p.name, Code: CodeSetting, What: fmt.Sprintf("the time unit %s is not known", quoted(opt.TimeUnit)), Remedy: timeUnits}
		}
		if c.stated && c.unit != wanted {
			return p.fail(CodeUnit, fmt.Sprintf("the header states %s in %s, the setting says %s", quoted(c.header), c.unit.name, wanted.name), "correct one of them")
		}
		u.unit, u.known = wanted, true
	}
	if c.clock {
		u.unit, u.known = units["s"], true
	}
	if u.known && u.unit.dim == frames {
		u.role = "frame"
	}
	return nil
}
