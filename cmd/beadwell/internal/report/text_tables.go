package report

import (
	"fmt"
	"strings"

	"beadwell/calib"
	"beadwell/calib/quantity"
)

// legs gives each estimate its column, drag route first.
var legs = []struct{ leg, route, title string }{
	{calib.LegSpectrum, calib.RouteDrag, "corner frequency"},
	{calib.LegDisplacementTime, calib.RouteDrag, "relaxation time"},
	{calib.LegEquipartition, calib.RouteAmplitude, "variance"},
	{calib.LegDisplacement, calib.RouteAmplitude, "MSD plateau"},
	{calib.LegSpectrumAmplitude, calib.RouteAmplitude, "spectrum"},
}

// estimates prints the stiffness estimates side by side, the two routes apart:
// one row with combined, one with statistical uncertainties.
func (p *printer) estimates() {
	p.table(func(row func(...string)) {
		row("estimates, "+stiffnessUnit, "through drag:", "", "| through amplitude:")
		titles := []string{"axis, uncertainty"}
		for _, leg := range legs {
			titles = append(titles, divided(leg.leg, leg.title))
		}
		row(titles...)
		for _, axis := range p.result.Axes {
			row(estimateRow(axis, axis.Name+" combined", func(q calib.Quantity) *calib.Uncertainty { return q.Combined })...)
			row(estimateRow(axis, axis.Name+" statistical", func(q calib.Quantity) *calib.Uncertainty { return q.Statistical })...)
		}
	})
	p.WriteString("\n")
}

// divided puts the line between the routes in front of the first amplitude leg.
func divided(leg, text string) string {
	if leg == calib.LegEquipartition {
		return "| " + text
	}
	return text
}

func estimateRow(axis calib.Axis, title string, part func(calib.Quantity) *calib.Uncertainty) []string {
	cells := []string{title}
	for _, leg := range legs {
		text := dash
		for _, estimate := range axis.Estimates {
			if u := part(estimate.Stiffness); estimate.Leg == leg.leg && u != nil {
				text = number(estimate.Stiffness.Value, u, stiffnessUnit)
			}
		}
		cells = append(cells, divided(leg.leg, text))
	}
	return cells
}

// dragUnit is the unit in which a drag coefficient is printed.
const dragUnit = "nN s/m"

// drag prints the measured against the computed drag, and the tests of equality
// that were made.
func (p *printer) drag() {
	tests := testsMade(p.result.Axes)
	p.table(func(row func(...string)) {
		titles := []string{"drag, " + dragUnit, "computed", "measured", "ratio"}
		for _, test := range tests {
			titles = append(titles, test.title)
		}
		row(titles...)
		for _, axis := range p.result.Axes {
			cells := []string{axis.Name, combined(axis.Drag, dragUnit), combined(axis.MeasuredDrag, dragUnit), combined(axis.DragRatio, "1")}
			for _, test := range tests {
				cells = append(cells, twoProbabilities(test.of(axis.CrossCheck)))
			}
			row(cells...)
		}
	})
	if len(tests) > 0 {
		p.WriteString("p-values: inputs taken as exact / with their stated uncertainties\n")
	}
	p.WriteString("\n")
}

// equalityTest is one test of the cross-check and its column.
type equalityTest struct {
	title string
	of    func(calib.CrossCheck) calib.Test
}

var equalityTests = []equalityTest{
	{"p, routes", func(c calib.CrossCheck) calib.Test { return c.Routes }},
	{"p, amplitudes", func(c calib.CrossCheck) calib.Test { return c.Amplitudes }},
	{"p, all estimates", func(c calib.CrossCheck) calib.Test { return c.Equality }},
}

// testsMade returns the tests that any axis has a p-value of.
func testsMade(axes []calib.Axis) []equalityTest {
	var made []equalityTest
	for _, test := range equalityTests {
		for _, axis := range axes {
			if t := test.of(axis.CrossCheck); t.PValue.Known() || t.PValueCombined.Known() {
				made = append(made, test)
				break
			}
		}
	}
	return made
}

func twoProbabilities(t calib.Test) string {
	if !t.PValue.Known() && !t.PValueCombined.Known() {
		return dash
	}
	return probability(t.PValue) + " / " + probability(t.PValueCombined)
}

// fits prints what the power spectrum says of each axis.
func (p *printer) fits() {
	p.table(func(row func(...string)) {
		row("spectrum", "corner frequency, Hz", "relaxation time, ms", "noise, nm", "fit band", "p of fit")
		for _, axis := range p.result.Axes {
			s := axis.Spectrum
			row(axis.Name, combined(s.Corner, "Hz"), combined(axis.Displacement.RelaxationTime, "ms"), combined(s.Noise, "nm"),
				band(s.Band), probability(s.Goodness.PValue))
		}
	})
	p.WriteString("\n")
}

func band(ends [2]calib.Float) string {
	if !ends[0].Known() || !ends[1].Known() {
		return dash
	}
	return hertz(ends[0]) + " to " + hertz(ends[1])
}

// hertz prints a frequency in Hz or kHz with at most four digits.
func hertz(f calib.Float) string {
	if f >= 1000 {
		return fmt.Sprintf("%.4g kHz", float64(f)/1000)
	}
	return fmt.Sprintf("%.4g Hz", float64(f))
}

func (p *printer) readAs() {
	r := p.result
	p.paragraph("", "read as: "+r.ReadAs.Line)
	for _, note := range r.ReadAs.Notes {
		p.paragraph("  ", note)
	}
	rec := r.Recording
	line := fmt.Sprintf("analysed: %d samples", rec.Samples)
	if rec.Missing > 0 {
		line += fmt.Sprintf(" (%d missing)", rec.Missing)
	}
	if rec.Rate.Known() && rec.Duration.Known() {
		line += fmt.Sprintf(" at %s, %s", hertz(rec.Rate), plainNumber(rec.Duration, "s"))
	}
	if medium := p.medium(); medium != "" {
		line += "; " + medium
	}
	p.paragraph("", line)
}

// medium tells bead and liquid in half a line.
func (p *printer) medium() string {
	r := p.result
	parts := []string{}
	if r.Bead.Diameter.Known() {
		parts = append(parts, "bead of "+withUnit(combined(r.Bead.Diameter, "um"), "um"))
	}
	if r.Bead.Height.Known() {
		parts = append(parts, withUnit(combined(r.Bead.Height, "um"), "um")+" above the surface")
	}
	if r.Medium.Viscosity.Known() {
		liquid := r.Medium.Fluid
		if liquid == "" {
			liquid = "liquid"
		}
		parts = append(parts, liquid+" of "+withUnit(combined(r.Medium.Viscosity, "mPa s"), "mPa s"))
	}
	if r.Medium.Temperature.Known() {
		parts = append(parts, "at "+withUnit(combined(r.Medium.Temperature, "C"), "C"))
	}
	return strings.Join(parts, ", ")
}

// assumed lists the settings that nobody stated.
func (p *printer) assumed() {
	if p.result.Role == calib.RoleBackground { // no liquid and no bead enters it
		return
	}
	var parts []string
	for _, s := range p.result.Settings {
		if s.Assumed {
			parts = append(parts, strings.TrimSpace(s.Key+" "+s.Axis)+" = "+settingText(s))
		}
	}
	if len(parts) > 0 {
		p.paragraph("", "assumed, for nobody stated it: "+strings.Join(parts, "; "))
	}
}

// settingText is the text of a setting, made from its value when it has none.
func settingText(s calib.Setting) string {
	if s.Text != "" || !s.Value.Known() {
		return s.Text
	}
	if _, err := quantity.Convert(0, s.Unit); err != nil {
		return strings.TrimSpace(fmt.Sprintf("%g %s", float64(s.Value), s.Unit))
	}
	u := 0.0
	if s.StandardUncertainty.Known() {
		u = float64(s.StandardUncertainty)
	}
	return quantity.Format(float64(s.Value), u, s.Unit)
}

// footnotes prints the findings with their remedies.
func (p *printer) footnotes() {
	if len(p.notes) > 0 {
		p.WriteString("\n")
	}
	for i, note := range p.notes {
		where := ""
		if note.Axis != "" {
			where = " on " + strings.Join(note.axes, ", ")
		}
		p.paragraph("", fmt.Sprintf("[%d] %s, %s%s: %s", i+1, note.Severity, note.Code, where, note.Text))
		if note.Remedy != "" {
			p.paragraph("    ", "remedy: "+note.Remedy)
		}
	}
}
