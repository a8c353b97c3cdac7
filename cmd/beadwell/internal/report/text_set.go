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
