package report

import (
	"io"
	"slices"

	"beadwell/calib"
)

// SetText writes several recordings for a person: one row for each, then the
// text of each result.
func SetText(w io.Writer, s Set, opt TextOptions) error {
	p := &printer{colour: opt.Colour}
	axes := axisNames(s.Results)
	p.table(func(row func(...string)) {
		row(append([]string{"recording, " + stiffnessUnit, "verdict"}, axes...)...)
		for _, r := range s.Results {
			cells := []string{InputName(r.Input), r.Verdict.Status}
			for _, name := range axes {
				cells = append(cells, adoptedCell(r, name))
			}
			row(cells...)
		}
		for _, failure := range s.Failures {
			row(failure.Input, "failed")
		}
	})
	p.joined(s.Joined)
	if _, err := io.WriteString(w, p.String()); err != nil {
		return err
	}
	for _, r := range s.Results {
		if _, err := io.WriteString(w, "\n"); err != nil {
			return err
		}
		if err := Text(w, r, opt); err != nil {
			return err
		}
	}
	return nil
}

// joined prints the straight lines through several recordings.
func (p *printer) joined(list []calib.FlowJoin) {
	if len(list) == 0 {
		return
	}
	p.WriteString("\n")
	p.table(func(row func(...string)) {
		row("displacement against speed in one line", "")
		for _, j := range list {
			row("axis "+j.Axis, "")
			row("  stiffness by constant flow", Of(j.Stiffness, stiffnessUnit))
			row("  the same without viscosity", Of(j.Driven, stiffnessUnit))
			row("  slope, drag/stiffness", withUnit(combined(j.Slope, "us"), "us"))
			row("  intercept", withUnit(combined(j.Intercept, "nm"), "nm"))
		}
	})
	for _, j := range list {
		p.paragraph("  ", "axis "+j.Axis+": "+j.Text+"; intercept and drift are free in each recording")
	}
}

// axisNames lists the axes that any of the results has, in order of name.
func axisNames(results []*calib.Result) []string {
	var names []string
	for _, r := range results {
		for _, axis := range r.Axes {
			if !slices.Contains(names, axis.Name) {
				names = append(names, axis.Name)
			}
		}
	}
	slices.Sort(names)
	return names
}

func adoptedCell(r *calib.Result, name string) string {
	for _, axis := range r.Axes {
		if axis.Name != name {
			continue
		}
		if !axis.Adopted.Stiffness.Known() {
			return "withheld"
		}
		return combined(axis.Adopted.Stiffness, stiffnessUnit)
	}
	return dash
}
