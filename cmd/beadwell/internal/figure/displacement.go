package figure

import (
	"fmt"
	"math"

	"beadwell/calib"
)

// displacement draws the mean-square displacement against the lag with its fit,
// the plateau and the relaxation time.
func displacement(a *calib.Axis) Figure {
	f := Figure{Kind: Displacement, Title: "Mean-square displacement, " + axisName(a), height: 62}
	used, unused := lagPoints(a)
	lags, values := newExtent(), newExtent()
	for _, s := range []series{used, unused} {
		lags.showPositive(s.x...)
		values.showPositive(s.y...)
	}
	if lags.empty() || values.empty() {
		return f.empty("the result holds no mean-square displacement above zero")
	}
	fit := fitted(a.Displacement.Model, "fit")
	plateau := a.Displacement.Plateau
	values.showPositive(float64(plateau.Value))
	tau := a.Displacement.RelaxationTime
	showNearby(&lags, float64(tau.Value))
	p := panel{name: "displacement", share: 1,
		x: scale{quantity: "lag", unit: "s", si: "s", factor: 1, log: true}.over(lags),
		y: scale{quantity: "mean-square displacement", unit: "nm^{2}", si: "m2", factor: 1e18, log: true}.over(values)}
	if plateau.Known() {
		p.add(series{name: "plateau", mark: level, ink: rule, y: []float64{float64(plateau.Value)},
			label: plateauLabel(plateau, fit)})
	}
	if tau.Known() {
		p.add(series{name: "relaxation time", mark: upright, ink: rule, x: []float64{float64(tau.Value)},
			label: "relaxation time " + measured(tau, timeUnit(float64(tau.Value)))})
	}
	p.add(unused)
	p.add(used)
	p.add(fit)
	f.panels = []panel{p}
	f.key = []keyItem{{"lags in the fit", dots, data}, {"fit", curve, model}}
	if len(unused.x) > 0 {
		f.key = append(f.key, keyItem{"not in the fit", rings, left})
	}
	return f.described(describeDisplacement(a, len(used.x)+len(unused.x)))
}

// showNearby lets a range reach to a value that lies less than a factor of 30
// outside: the relaxation time of a slow camera is shorter than its first lag.
func showNearby(e *extent, v float64) {
	const reach = 30
	if v > e.low/reach && v < e.high*reach {
		e.showPositive(v)
	}
}

// plateauLabel names the plateau. Blur and noise are removed from it, which is
// said where the recorded curve, with them, ends visibly elsewhere.
func plateauLabel(plateau calib.Quantity, fit series) string {
	const visible = 0.03 // a few line widths on the axis
	label := "plateau " + measured(plateau, "nm2")
	if n := len(fit.y); n > 0 && math.Abs(fit.y[n-1]/float64(plateau.Value)-1) > visible {
		label += ", blur and noise removed"
	}
	return label
}

func lagPoints(a *calib.Axis) (used, unused series) {
	used = series{name: "used", mark: dots, ink: data}
	unused = series{name: "not in the fit", mark: rings, ink: left}
	for _, i := range thinned(len(a.Displacement.Points), maxMarks) {
		p := a.Displacement.Points[i]
		if !p.Lag.Known() || !p.MSD.Known() {
			continue
		}
		s := &unused
		if p.Used {
			s = &used
		}
		s.x = append(s.x, float64(p.Lag))
		s.y = append(s.y, float64(p.MSD))
		s.low = append(s.low, float64(p.MSD-p.Standard))
		s.high = append(s.high, float64(p.MSD+p.Standard))
	}
	return used, unused
}

// timeUnit picks the unit in which a time has a few digits before the point.
func timeUnit(seconds float64) string {
	switch {
	case seconds < 1e-3:
		return "us"
	case seconds < 1:
		return "ms"
	}
	return "s"
}

func describeDisplacement(a *calib.Axis, points int) string {
	s := fmt.Sprintf("Mean-square displacement along %s against the lag on logarithmic axes, %d lags, with the fitted curve", clean(a.Name), points)
	if a.Displacement.Plateau.Known() {
		s += ". It rises to a plateau of " + measured(a.Displacement.Plateau, "nm2") + " (blur and noise removed)"
	}
	if tau := a.Displacement.RelaxationTime; tau.Known() {
		s += "; the relaxation time is " + measured(tau, timeUnit(float64(tau.Value)))
	}
	return s + "."
}
