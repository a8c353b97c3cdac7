package figure

import (
	"fmt"
	"math"

	"beadwell/calib"
)

// Planned is the kind of the figure of a plan.
const Planned Kind = "plan"

// Plan draws the uncertainty that a planned recording reaches: against its duration,
// and below that against the sampling rate.
func Plan(p *calib.Plan) Figure {
	f := Figure{Name: string(Planned), Kind: Planned, Title: "Uncertainty of the stiffness to expect, axis " + clean(p.Axis), height: 104}
	times := planPanel("duration", scale{quantity: "duration", unit: "s", si: "s", factor: 1, log: true}, len(p.Times),
		func(i int) (float64, calib.PlanRoutes) { return float64(p.Times[i].Duration), p.Times[i].Routes })
	rates := planPanel("rate", scale{quantity: "sampling rate", unit: "Hz", si: "Hz", factor: 1, log: true}, len(p.Rates.Rows),
		func(i int) (float64, calib.PlanRoutes) { return float64(p.Rates.Rows[i].Rate), p.Rates.Rows[i].Routes })
	if times == nil {
		return f.empty("no duration that was compared determines the stiffness")
	}
	if p.Wanted != nil {
		times.add(series{name: "wanted", mark: level, ink: rule, y: []float64{float64(p.Wanted.Uncertainty)}})
		f.key = []keyItem{{"wanted", level, rule}}
	}
	if p.Enough.Known() {
		times.add(series{name: "enough", mark: upright, ink: rule, x: []float64{float64(p.Enough.Value)}, label: "enough, " + plain(float64(p.Enough.Value), "s")})
	}
	f.panels = []panel{*times}
	if rates != nil {
		rates.add(series{name: "as planned", mark: upright, ink: rule, x: []float64{float64(p.Rate)}, label: "as planned"})
		f.panels = append(f.panels, *rates)
	}
	f.key = append([]keyItem{{"by drag", dots, drag}, {"by amplitude", squares, ampl}, {"both", rings, adopted}, {"inputs exact", dashes, text}}, f.key...)
	return f.described(describePlan(p))
}

// planPanel draws the three routes over a sweep: lines with the uncertainties of the inputs, dashes
// without; nil when there is nothing to draw.
func planPanel(name string, x scale, n int, at func(int) (float64, calib.PlanRoutes)) *panel {
	routes := []struct {
		name string
		ink  ink
		mark mark
		of   func(calib.PlanRoutes) calib.PlanUncertainty
	}{
		{"drag", drag, dots, func(r calib.PlanRoutes) calib.PlanUncertainty { return r.Drag }},
		{"amplitude", ampl, squares, func(r calib.PlanRoutes) calib.PlanUncertainty { return r.Amplitude }},
		{"both", adopted, rings, func(r calib.PlanRoutes) calib.PlanUncertainty { return r.Both }},
	}
	across, up := newExtent(), newExtent()
	var all []series
	for _, route := range routes {
		full := series{name: route.name + ", combined", mark: curve, ink: route.ink}
		exact := series{name: route.name + ", inputs exact", mark: dashes, ink: route.ink}
		for i := range n {
			v, r := at(i)
			u := route.of(r)
			full.x, full.y = append(full.x, v), append(full.y, float64(u.Combined))
			exact.x, exact.y = append(exact.x, v), append(exact.y, float64(u.Statistical))
			across.showPositive(v)
			up.showPositive(float64(u.Combined), float64(u.Statistical))
		}
		marks := full
		marks.mark = route.mark
		all = append(all, exact, full, marks)
	}
	if across.empty() || up.empty() {
		return nil
	}
	p := &panel{name: name, share: 0.5, x: x.over(across),
		y: scale{quantity: "relative uncertainty", unit: "%", si: "1", factor: 100, log: true}.over(up)}
	for _, s := range all {
		p.add(s)
	}
	return p
}

func describePlan(p *calib.Plan) string {
	last := p.Times[len(p.Times)-1]
	s := fmt.Sprintf("Relative standard uncertainty of the stiffness against the duration of the recording and against the sampling rate, on logarithmic axes, by drag, by amplitude and by both. In %s both together reach %s",
		plain(float64(last.Duration), "s"), shareText(last.Routes.Both.Combined))
	if p.Enough.Known() {
		s += "; longer than " + plain(float64(p.Enough.Value), "s") + " gains less than 5 %"
	}
	return s + "."
}

// shareText prints a relative uncertainty in per cent.
func shareText(f calib.Float) string {
	if !f.Known() || math.IsNaN(float64(f)) {
		return "no number"
	}
	return fmt.Sprintf("%.2g %%", 100*float64(f))
}
