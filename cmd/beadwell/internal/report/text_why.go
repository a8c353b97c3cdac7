package report

import (
	"fmt"
	"math"
	"strings"

	"beadwell/calib"
)

// diagnosis prints the single causes that would reconcile the routes, and what would
// decide between them.
func (p *printer) diagnosis() {
	d := p.result.Diagnosis
	if d == nil {
		return
	}
	p.WriteString("what would reconcile the routes\n")
	p.paragraph("  ", d.Text)
	p.table(func(row func(...string)) {
		row("cause", "stated", "needed", "change, in stated uncertainties", "likelihood", "p left")
		for _, c := range d.Causes {
			if c.Tied {
				row(causeRow(c)...)
			}
		}
	})
	for _, c := range d.Causes {
		if c.Tied {
			p.paragraph("  ", "to decide, "+causeName(c)+": "+c.Measurement)
			if c.Caution != "" {
				p.paragraph("    ", c.Caution)
			}
		}
	}
	if rest := lessLikely(d); rest != "" {
		p.paragraph("  ", "less likely: "+rest)
	}
	p.WriteString("\n")
}

func causeRow(c calib.Cause) []string {
	return []string{causeName(c), causeValue(c.Stated), causeValue(c.Needed), changeText(c), likelihoodText(c), probability(c.PValue)}
}

// causeName is the name of a cause, which holds its axis.
func causeName(c calib.Cause) string { return c.Name }

// causeValue prints a stated or needed value with its unit.
func causeValue(q calib.Quantity) string {
	if !q.Known() {
		return dash
	}
	unit := budgetUnit(q.Unit, q.Value)
	return withUnit(combined(q, unit), unit)
}

func changeText(c calib.Cause) string {
	switch {
	case c.Change.Known():
		return fmt.Sprintf("%+.1f", float64(c.Change))
	case c.Ratio.Known():
		return fmt.Sprintf("x %.3g", float64(c.Ratio))
	}
	return dash
}

// likelihoodText prints the likelihood over that of the best cause.
func likelihoodText(c calib.Cause) string {
	r := math.Exp(float64(c.Likelihood))
	if r < 0.001 {
		return "<0.001"
	}
	return fmt.Sprintf("%.2g", r)
}

// lessLikely names the causes outside of the tie with their likelihoods.
func lessLikely(d *calib.Diagnosis) string {
	var parts []string
	for _, c := range d.Causes {
		if !c.Tied {
			parts = append(parts, causeName(c)+" ("+likelihoodText(c)+")")
		}
	}
	return strings.Join(parts, ", ")
}

// budget prints what the uncertainty of each axis is made of.
func (p *printer) budget() {
	var axes []calib.Axis
	for _, a := range p.result.Axes {
		if len(a.Adopted.Budget) > 0 {
			axes = append(axes, a)
		}
	}
	if len(axes) == 0 {
		return
	}
	p.table(func(row func(...string)) {
		titles := []string{"uncertainty budget, %"}
		for _, a := range axes {
			titles = append(titles, a.Name, "share")
		}
		row(titles...)
		for _, name := range budgetInputs(axes) {
			cells := []string{name}
			for _, a := range axes {
				cells = append(cells, budgetCells(a, name)...)
			}
			row(cells...)
		}
		total := []string{"combined"}
		for _, a := range axes {
			q := a.Adopted.Stiffness
			total = append(total, perHundred(q.Combined.Standard/q.Value), "100")
		}
		row(total...)
	})
	for _, line := range axisLines(axes, expandedText) {
		p.paragraph("  ", line)
	}
	for _, line := range axisLines(axes, halvingText) {
		p.paragraph("  ", line)
	}
	for _, line := range drawnLines(p.result) {
		p.paragraph("  ", line)
	}
	p.WriteString("\n")
}

// budgetInputs lists the inputs that any axis has an uncertainty of, in their order.
func budgetInputs(axes []calib.Axis) []string {
	var names []string
	seen := map[string]bool{}
	for _, a := range axes {
		for _, l := range a.Adopted.Budget {
			if !seen[l.Input] && l.Contribution > 0 {
				seen[l.Input] = true
				names = append(names, l.Input)
			}
		}
	}
	return names
}

func budgetCells(a calib.Axis, name string) []string {
	for _, l := range a.Adopted.Budget {
		if l.Input == name {
			return []string{perHundred(l.Contribution), perHundred(l.Share)}
		}
	}
	return []string{dash, dash}
}

// perHundred prints a share in per cent, without the sign.
func perHundred(f calib.Float) string {
	switch {
	case !f.Known():
		return dash
	case math.Abs(float64(f)) < 5e-5:
		return "<0.01"
	}
	return twoDigits(100 * math.Abs(float64(f)))
}

// axisLines says a text once for all axes that share it.
func axisLines(axes []calib.Axis, text func(calib.Axis) string) []string {
	var order []string
	names := map[string][]string{}
	for _, a := range axes {
		t := text(a)
		if t == "" {
			continue
		}
		if names[t] == nil {
			order = append(order, t)
		}
		names[t] = append(names[t], a.Name)
	}
	for i, t := range order {
		order[i] = strings.Join(names[t], ", ") + ": " + t
	}
	return order
}

// expandedText is the expanded uncertainty in half a sentence.
func expandedText(a calib.Axis) string {
	e := a.Adopted.Expanded
	if e == nil {
		return ""
	}
	freedom := "more than 1000 effective degrees of freedom"
	if e.Freedom.Known() && e.Freedom < 1000 {
		freedom = twoDigits(float64(e.Freedom)) + " effective degrees of freedom"
	}
	return fmt.Sprintf("expanded uncertainty of %.0f %%: %s, coverage factor %.2f (%s)", 100*float64(e.Coverage),
		withUnit(twoDigits(float64(e.Uncertainty)/1e-6), stiffnessUnit), float64(e.Factor), freedom)
}

// halvingText is what to measure better, to be read after the name of the axis.
func halvingText(a calib.Axis) string {
	if a.Adopted.Halving == "" {
		return ""
	}
	return strings.ToLower(a.Adopted.Halving[:1]) + a.Adopted.Halving[1:]
}

// drawnLines tell what a propagation of distributions gave.
func drawnLines(r *calib.Result) []string {
	m := r.MonteCarlo
	if m == nil {
		return nil
	}
	lines := []string{"Monte Carlo: " + m.Text}
	for _, a := range m.Axes {
		u := &calib.Uncertainty{Standard: a.Standard, Interval68: [2]calib.Float{calib.Float(math.NaN()), calib.Float(math.NaN())}}
		lines = append(lines, fmt.Sprintf("%s drawn: %s, 95 %% %s, shortest %s", a.Axis, withUnit(number(a.Mean, u, stiffnessUnit), stiffnessUnit),
			interval(a.Interval95, stiffnessUnit), interval(a.Shortest95, stiffnessUnit)))
	}
	return lines
}
