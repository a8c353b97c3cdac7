package figure

import (
	"fmt"
	"strings"
	"sync"

	"beadwell/calib"
)

// Kind names what a figure shows.
type Kind string

// The kinds of figure, in the order in which All returns them.
const (
	Estimates    Kind = "estimates"    // stiffness estimates of all axes side by side
	Spectrum     Kind = "spectrum"     // power spectrum, fit and residuals
	Position     Kind = "position"     // position histogram and potential
	Displacement Kind = "displacement" // mean-square displacement and fit
	Trace        Kind = "trace"        // position against time
)

// Figure is one figure, ready to be rendered.
type Figure struct {
	Name        string // unique within a result and fit for a file name, e.g. "spectrum-x"
	Kind        Kind
	Axis        string // "x", "y", "z"; empty for the estimates of all axes
	Title       string
	Caption     string // one sentence for below the figure
	Description string // what it shows, in words, for those who cannot see it; begins with the caption
	Reason      string // why it could not be drawn, in which case it is an empty frame; else empty

	panels []panel
	key    []keyItem
	height float64       // mm
	drawn  func() []byte // what lies inside its SVG in the light theme, made once; nil: made each time
}

// All returns every figure of a result: the estimates, then spectrum, position,
// displacement and trace of each axis in the order of the result.
//
// A figure that the result does not hold enough numbers for is there all the
// same, as an empty frame that carries the reason. A free bead and a background have no
// trap to show, and their traces alone are drawn. A figure that is shown on a page
// and written as a file of its own is drawn once.
func All(r *calib.Result) []Figure {
	untrapped := r.Role == calib.RoleFree || r.Role == calib.RoleBackground
	var figures []Figure
	names := map[string]bool{}
	if !untrapped {
		figures = append(figures, estimates(r))
		names[figures[0].Name] = true
	}
	for i := range r.Axes {
		axis := &r.Axes[i]
		ofAxis := []Figure{trace(r, axis)}
		if !untrapped {
			ofAxis = append([]Figure{spectrum(axis), position(r, axis), displacement(axis)}, ofAxis...)
		}
		for _, f := range ofAxis {
			f.Axis = clean(axis.Name)
			f.Name = uniqueName(names, string(f.Kind)+"-"+fileSafe(axis.Name))
			figures = append(figures, f)
		}
	}
	for i, f := range figures {
		figures[i].drawn = sync.OnceValue(func() []byte { return f.elements(Light) })
	}
	return figures
}

// uniqueName returns name, with a number behind it when it was taken already.
func uniqueName(taken map[string]bool, name string) string {
	unique := name
	for n := 2; taken[unique]; n++ {
		unique = fmt.Sprintf("%s-%d", name, n)
	}
	taken[unique] = true
	return unique
}

// fileSafe keeps ASCII letters, digits and hyphens.
func fileSafe(name string) string {
	safe := make([]byte, 0, len(name))
	for _, c := range []byte(name) {
		if c >= 'a' && c <= 'z' || c >= 'A' && c <= 'Z' || c >= '0' && c <= '9' {
			safe = append(safe, c)
		}
	}
	if len(safe) == 0 {
		return "axis"
	}
	return string(safe)
}

// empty makes f a frame that shows the reason why it could not be drawn.
func (f Figure) empty(reason string) Figure {
	f.Reason = clean(reason)
	f = f.described("Not drawn: " + f.Reason + ".")
	f.panels, f.key = nil, nil
	return f
}

// described sets the description, whose first sentence is the caption.
func (f Figure) described(s string) Figure {
	f.Description, f.Caption = s, s
	if first, _, more := strings.Cut(s, ". "); more {
		f.Caption = first + "."
	}
	return f
}
