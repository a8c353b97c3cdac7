package track

import (
	"fmt"
	"math"
	"slices"
	"strconv"
)

// table is a file as numbers: the kept columns with what is known about them.
type table struct {
	plan    *plan
	columns [][]float64 // by use.out, in SI units for lengths, volts and seconds
	beads   []string    // names by index, when plan.bead is set
	rows    int
	shifted bool // columns are in SI units already (text); otherwise in file units (npy)
	written resolution
	pre     preamble
	rate    float64              // of a bead whose stamps leave no doubt, for the others [Hz]; 0 until needed
	undated bool                 // the time is a time of day without a date
	place   func(row int) *Error // position of a row's time stamp in the file
	readAs  ReadAs
	notes   []Note
	whole   *Recording // what was handed out in parts, instead of rows
	stretch bool       // the rows are part of a recording: a constant axis may move elsewhere
}

// recordings turns the table into one recording per bead.
func (tab *table) recordings(opt Options) ([]*Recording, error) {
	if tab.whole != nil {
		return []*Recording{tab.whole}, nil
	}
	name := tab.plan.name
	if tab.rows < 2 {
		what := "the file has a header but no data"
		if tab.rows == 1 {
			what = "the file has one row of data"
		}
		return nil, &Error{File: name, Code: CodeEmpty, What: what, Remedy: "a recording needs at least two samples, and many more to be of use"}
	}
	tab.notes = append(tab.notes, tab.plan.notes...)
	groups, err := tab.groups(opt)
	if err != nil {
		return nil, err
	}
	var list []*Recording
	var last error
	var aside []string
	for _, g := range groups {
		rec, err := tab.recording(g, opt, len(groups) > 1 || tab.plan.bead != nil)
		if errTooFew, ok := err.(*Error); ok && errTooFew.Code == CodeEmpty && len(groups) > 1 {
			aside, last = append(aside, g.bead), err
			continue
		}
		if err != nil {
			return nil, err
		}
		list = append(list, rec)
	}
	if len(list) == 0 {
		return nil, last
	}
	if len(aside) > 0 {
		for _, rec := range list {
			rec.Notes = note(rec.Notes, "beads-left-out", "%d beads of the file have too few samples and are left out, the first is %s", len(aside), quoted(aside[0]))
		}
	}
	return list, nil
}

// group is the part of the table that belongs to one bead.
type group struct {
	bead string
	rows []int // nil for all
	axes []use
}

// groups splits the table by identifier column or by sets of columns.
func (tab *table) groups(opt Options) ([]group, error) {
	var all []group
	axes := slices.DeleteFunc(slices.Clone(tab.plan.uses), func(u use) bool { return u.axis == 0 })
	slices.SortStableFunc(axes, func(a, b use) int { return int(a.axis) - int(b.axis) })
	if tab.plan.bead != nil {
		index := tab.columns[tab.plan.bead.out]
		at := map[int]int{}
		for row, v := range index {
			i, ok := at[int(v)]
			if !ok {
				i = len(all)
				at[int(v)] = i
				all = append(all, group{bead: tab.beadName(v), axes: axes})
			}
			all[i].rows = append(all[i].rows, row)
		}
	} else {
		for _, u := range axes {
			i := slices.IndexFunc(all, func(g group) bool { return g.bead == u.bead })
			if i < 0 {
				i = len(all)
				all = append(all, group{bead: u.bead})
			}
			all[i].axes = append(all[i].axes, u)
		}
	}
	if opt.Bead == "" {
		return all, nil
	}
	for _, g := range all {
		if g.bead == opt.Bead {
			return []group{g}, nil
		}
	}
	var names []string
	for _, g := range all[:min(len(all), 12)] {
		if g.bead != "" {
			names = append(names, quoted(g.bead))
		}
	}
	if len(names) == 0 {
		return nil, &Error{File: tab.plan.name, Code: CodeSetting, What: fmt.Sprintf("no bead %s: the file holds one track without a name", quoted(opt.Bead)), Remedy: "leave out --bead"}
	}
	return nil, &Error{File: tab.plan.name, Code: CodeSetting, What: fmt.Sprintf("no bead %s: the file has %s", quoted(opt.Bead), joinComma(names)), Remedy: "name one of these (--bead)"}
}

func joinComma(list []string) string {
	s := ""
	for i, one := range list {
		if i > 0 {
			s += ", "
		}
		s += one
	}
	return s
}

// beadName is the identifier behind a value of the bead column.
func (tab *table) beadName(v float64) string {
	if tab.beads != nil {
		return tab.beads[int(v)]
	}
	return strconv.FormatFloat(v, 'g', -1, 64)
}

// pick returns the values of a column for the rows of a group.
func (g *group) pick(column []float64) []float64 {
	if g.rows == nil {
		return column
	}
	out := make([]float64, len(g.rows))
	for i, row := range g.rows {
		out[i] = column[row]
	}
	return out
}

// recording builds the recording of one group.
func (tab *table) recording(g group, opt Options, several bool) (*Recording, error) {
	rec := &Recording{Name: tab.plan.name, Bead: g.bead, Notes: slices.Clone(tab.notes), ReadAs: tab.readAs}
	rec.ReadAs.Columns = slices.Clone(tab.readAs.Columns)
	if several && g.bead != "" {
		rec.Name += "#" + g.bead
	}
	rows := tab.rows
	if g.rows != nil {
		rows = len(g.rows)
	}
	if rows < 2 {
		return nil, &Error{File: rec.Name, Code: CodeEmpty, What: "the bead has one row of data", Remedy: "a recording needs at least two samples"}
	}
	grid, err := tab.grid(rec, g, rows, opt)
	if err != nil {
		return nil, err
	}
	rec.Samples = grid.samples
	rec.JitterRMS, rec.JitterMax = grid.rms, grid.max
	for _, u := range g.axes {
		axis := Axis{Name: string(u.axis), Header: tab.plan.columns[u.column].header, Unit: u.unit.name, ToMetre: u.unit.toMetre()}
		axis.Values = grid.scatter(tab.si(u, g.pick(tab.columns[u.out])))
		if why := axis.survey(); why != "" && !tab.stretch {
			if _, named := opt.Columns[axis.Name]; named {
				return nil, &Error{File: rec.Name, Code: CodeEmpty, What: fmt.Sprintf("column %s for %s %s", quoted(axis.Header), axis.Name, why), Remedy: "name another column (--columns)"}
			}
			rec.Notes = note(rec.Notes, "axis-left-out", "axis %s is left out: it %s", axis.Name, why)
			setRole(rec.ReadAs.Columns, u.column, "constant")
			continue
		}
		rec.Axes = append(rec.Axes, axis)
	}
	if len(rec.Axes) == 0 {
		return nil, &Error{File: rec.Name, Code: CodeEmpty, What: "no axis moves: every position column is constant or empty", Remedy: "check that the right columns are read (--columns)"}
	}
	rec.countMissing()
	for _, u := range tab.plan.uses {
		if u.role == "kept" {
			rec.Extra = append(rec.Extra, Column{tab.plan.columns[u.column].header, grid.scatter(g.pick(tab.columns[u.out]))})
		}
	}
	rec.ReadAs.Rate, rec.ReadAs.RateOrigin = rec.Rate, rec.RateOrigin
	return rec, nil
}

// si converts file units where the numbers are not yet in SI units. It divides
// by a power of ten, which is exact, so that the result is rounded once.
func (tab *table) si(u use, values []float64) []float64 {
	shift := u.unit.siShift()
	if tab.shifted || shift == 0 && !u.unit.isCoarse() {
		return values
	}
	out := make([]float64, len(values))
	for i, v := range values {
		if u.unit.isCoarse() {
			out[i] = v * u.unit.times
		} else if shift < 0 {
			out[i] = v / math.Pow10(-shift)
		} else {
			out[i] = v * math.Pow10(shift)
		}
	}
	return out
}
