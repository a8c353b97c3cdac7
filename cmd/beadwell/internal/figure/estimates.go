package figure

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"beadwell/calib"
)

// LegName is the name of a stiffness estimate in figures and reports.
func LegName(leg string) string {
	switch leg {
	case calib.LegSpectrum:
		return "corner frequency"
	case calib.LegDisplacementTime:
		return "relaxation time"
	case calib.LegEquipartition:
		return "variance"
	case calib.LegDisplacement:
		return "MSD plateau"
	case calib.LegSpectrumAmplitude:
		return "spectrum amplitude"
	case calib.LegDriven:
		return "driven stage"
	case calib.LegFreeDrag:
		return "free bead's drag"
	case calib.LegFlow:
		return "constant flow"
	}
	return strings.ReplaceAll(clean(leg), "_", " ")
}

// estimates draws the stiffness estimates of all axes side by side: a panel an
// axis, a row an estimate, first the route through drag.
func estimates(r *calib.Result) Figure {
	f := Figure{Name: string(Estimates), Kind: Estimates, Title: "Stiffness estimates side by side"}
	var described []string
	for i := range r.Axes {
		p, words, ok := estimatePanel(&r.Axes[i])
		if !ok {
			continue
		}
		f.panels = append(f.panels, p)
		f.height += 34
		described = append(described, words)
	}
	if len(f.panels) == 0 {
		return f.empty("the result holds no stiffness estimate")
	}
	f.height += 6
	f.key = []keyItem{{"by drag", dots, drag}, {"by amplitude", squares, ampl}}
	if slices.ContainsFunc(r.Axes, func(a calib.Axis) bool { return a.Adopted.Stiffness.Known() }) {
		f.key = append(f.key, keyItem{"adopted", span, adoptedTint})
	}
	f.key = append(f.key, keyItem{"68 %", bar68, text}, keyItem{"95 %", bar95, text})
	return f.described("Stiffness estimates with intervals of 68 % (thick) and 95 % (thin), combined uncertainty. " +
		strings.Join(described, " "))
}

// ordered returns the estimates of one axis, drag route first.
func ordered(a *calib.Axis) (list []calib.Estimate) {
	for _, route := range []string{calib.RouteDrag, calib.RouteAmplitude, calib.RouteDriven} {
		for _, e := range a.Estimates {
			if e.Route == route {
				list = append(list, e)
			}
		}
	}
	return list
}

func estimatePanel(a *calib.Axis) (p panel, words string, ok bool) {
	list := ordered(a)
	p = panel{name: clean(a.Name), share: 1}
	reach := newExtent()
	if adoptedSpan, known := adoptedBand(a.Adopted); known {
		p.series = append(p.series, adoptedSpan...)
		reach.show(adoptedSpan[0].low[0], adoptedSpan[0].high[0])
	}
	var rows []string
	for row, e := range list {
		rows = append(rows, LegName(e.Leg))
		s := whiskerOf(e, row)
		if e.Stiffness.Known() {
			p.add(s)
			reach.show(s.x[0], s.low[0], s.high[0])
		} else {
			share := 1 - (float64(row)+0.6)/(float64(len(list))+0.2)
			p.notes = append(p.notes, note{text: "withheld", x: 0.01, y: share, ink: soft})
		}
	}
	if len(list) == 0 || reach.empty() {
		return p, "", false
	}
	quantity := "stiffness along " + axisName(a)
	if !a.Adopted.Stiffness.Known() {
		quantity += ", none adopted"
	}
	p.x = scale{quantity: quantity, unit: "pN/µm", si: "N/m", factor: 1e6}.over(reach)
	p.y = scale{factor: 1, rows: rows, low: -float64(len(rows)) + 0.4, high: 0.6}
	return p, describeEstimates(a, list), true
}

// whiskerOf is one estimate at its row: dots through drag, squares through amplitude.
func whiskerOf(e calib.Estimate, row int) series {
	s := series{name: e.Leg, mark: whisker, ink: ampl, glyph: squares,
		x: []float64{float64(e.Stiffness.Value)}, y: []float64{-float64(row)}}
	if e.Route == calib.RouteDrag {
		s.ink, s.glyph = drag, dots
	}
	inner, outer := intervals(e.Stiffness)
	s.low, s.high = []float64{outer[0]}, []float64{outer[1]}
	s.innerLow, s.inHigh = []float64{inner[0]}, []float64{inner[1]}
	return s
}

// intervals returns the 68 % and the 95 % interval of a quantity: combined where
// it has one, statistical otherwise, NaN when there is neither.
func intervals(q calib.Quantity) (inner, outer [2]float64) {
	u := q.Combined
	if u == nil {
		u = q.Statistical
	}
	if u == nil {
		nan := math.NaN()
		return [2]float64{nan, nan}, [2]float64{nan, nan}
	}
	return [2]float64{float64(u.Interval68[0]), float64(u.Interval68[1])},
		[2]float64{float64(u.Interval95[0]), float64(u.Interval95[1])}
}

// adoptedBand is the 95 % band of the adopted value and a line at the value.
func adoptedBand(a calib.Adopted) ([]series, bool) {
	if !a.Stiffness.Known() {
		return nil, false
	}
	value := float64(a.Stiffness.Value)
	_, outer := intervals(a.Stiffness)
	if !finite(outer[0], outer[1]) {
		outer = [2]float64{value, value}
	}
	return []series{
		{name: "adopted, 95 %", mark: span, ink: adoptedTint, low: outer[:1], high: outer[1:]},
		{name: "adopted", mark: upright, ink: adopted, x: []float64{value}, label: "adopted " + measured(a.Stiffness, "pN/um")},
	}, true
}

func describeEstimates(a *calib.Axis, list []calib.Estimate) string {
	var parts []string
	for _, e := range list {
		if e.Stiffness.Known() {
			parts = append(parts, LegName(e.Leg)+" "+measured(e.Stiffness, "pN/um"))
		} else {
			parts = append(parts, LegName(e.Leg)+" withheld")
		}
	}
	s := fmt.Sprintf("Along %s: %s", clean(a.Name), strings.Join(parts, "; "))
	if a.Adopted.Stiffness.Known() {
		return s + "; adopted " + measured(a.Adopted.Stiffness, "pN/um") + "."
	}
	return s + "; no value adopted."
}
