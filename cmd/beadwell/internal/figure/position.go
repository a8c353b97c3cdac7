package figure

import (
	"fmt"
	"math"

	"beadwell/calib"
)

// modelPoints is the number of points of a curve that the figure evaluates itself.
const modelPoints = 121

// position draws the histogram of the positions with the Gaussian of their
// variance and, below it, the potential in kT with its harmonic part.
func position(r *calib.Result, a *calib.Axis) Figure {
	f := Figure{Kind: Position, Title: "Positions and potential, " + axisName(a), height: 84}
	pot := a.Equipartition.Potential
	columns, reach, density := histogram(pot)
	if len(columns.y) == 0 || density.empty() || density.high <= 0 {
		reason := "the result holds no position histogram"
		if pot.Reason != "" {
			reason = pot.Reason
		}
		return f.empty(reason)
	}
	x := positionScale("displacement from the mean", reach)
	density.show(0)
	top := panel{name: "histogram", share: 0.5, linked: true, x: x,
		y: scale{quantity: "density", unit: "1/" + x.unit, si: "1/m", factor: 1 / x.factor}.over(density)}
	top.y.low = 0
	top.add(columns)
	top.add(gaussian(pot, reach))
	bottom := potentialPanel(r, pot, x, density.high)
	f.panels = []panel{top, bottom}
	f.key = []keyItem{{"positions", columns.mark, columns.ink}, {"Gaussian", curve, model},
		{"potential", dots, data}, {"harmonic", dashes, model}}
	return f.described(describePosition(a, len(columns.y)))
}

func histogram(pot calib.Potential) (s series, reach, density extent) {
	s = series{name: "positions", mark: columns, ink: band}
	reach, density = newExtent(), newExtent()
	half := float64(pot.BinWidth) / 2
	for _, i := range thinned(len(pot.Bins), maxMarks) {
		bin := pot.Bins[i]
		if !bin.Centre.Known() || !bin.Density.Known() || !finite(half) {
			continue
		}
		s.x = append(s.x, float64(bin.Centre))
		s.y = append(s.y, float64(bin.Density))
		s.low = append(s.low, float64(bin.Centre)-half)
		s.high = append(s.high, float64(bin.Centre)+half)
		reach.show(float64(bin.Centre)-half, float64(bin.Centre)+half)
		density.show(float64(bin.Density))
	}
	return s, reach, density
}

// gaussian is the normal density of the recorded standard deviation; the bins
// are centred on the mean.
func gaussian(pot calib.Potential, reach extent) series {
	s := series{name: "Gaussian", mark: curve, ink: model}
	sigma := float64(pot.Gaussian[1])
	if !finite(sigma) || sigma <= 0 {
		return s
	}
	s.x, s.y = sampled(reach, func(x float64) float64 {
		return math.Exp(-x*x/(2*sigma*sigma)) / (sigma * math.Sqrt(2*math.Pi))
	})
	return s
}

// sampled evaluates a curve over a range.
func sampled(over extent, f func(float64) float64) (x, y []float64) {
	for i := range modelPoints {
		at := over.low + (over.high-over.low)*float64(i)/(modelPoints-1)
		x, y = append(x, at), append(y, f(at))
	}
	return x, y
}

func potentialPanel(r *calib.Result, pot calib.Potential, x scale, peak float64) panel {
	energies := series{name: "potential", mark: dots, ink: data}
	reach := newExtent()
	reach.show(0, 1)
	for _, i := range thinned(len(pot.Bins), maxMarks) {
		bin := pot.Bins[i]
		if !bin.Energy.Known() || !bin.Centre.Known() {
			continue
		}
		energies.x = append(energies.x, float64(bin.Centre))
		energies.y = append(energies.y, float64(bin.Energy))
		energies.low = append(energies.low, float64(bin.Energy-bin.EnergyU))
		energies.high = append(energies.high, float64(bin.Energy+bin.EnergyU))
		reach.show(float64(bin.Energy))
	}
	p := panel{name: "potential", share: 0.5, x: x,
		y: scale{quantity: "energy", unit: "kT", si: "kT", factor: 1}.over(reach)}
	p.add(harmonic(r, pot, x, peak))
	p.add(energies)
	return p
}

// harmonic is the parabola of the fitted curvature. The energies are counted
// from the fullest bin, so the parabola is lifted by what that bin stands above
// the Gaussian.
func harmonic(r *calib.Result, pot calib.Potential, x scale, peak float64) series {
	s := series{name: "harmonic", mark: dashes, ink: model}
	kT, k := float64(r.Medium.ThermalEnergy.Value), float64(pot.Curvature.Value)
	if !finite(kT, k) || kT <= 0 {
		return s
	}
	lift := 0.0
	if sigma := float64(pot.Gaussian[1]); sigma > 0 {
		lift = math.Log(peak * sigma * math.Sqrt(2*math.Pi))
	}
	s.x, s.y = sampled(extent{x.low / x.factor, x.high / x.factor}, func(at float64) float64 {
		return lift + k*at*at/(2*kT)
	})
	return s
}

// positionScale is a scale in nm, or in um when it reaches far.
func positionScale(quantity string, reach extent) scale {
	s := scale{quantity: quantity, unit: "nm", si: "m", factor: 1e9}
	if reach.magnitude() > 3e-6 {
		s.unit, s.factor = "µm", 1e6
	}
	return s.over(reach)
}

func describePosition(a *calib.Axis, bins int) string {
	pot := a.Equipartition.Potential
	s := fmt.Sprintf("Histogram of the position along %s in %d bins, with the Gaussian of the same standard deviation", clean(a.Name), bins)
	if pot.Gaussian[1].Known() {
		s += ", " + plain(float64(pot.Gaussian[1])*1e9, "nm")
	}
	s += ". Below it the potential in units of kT from the logarithm of the histogram, with a parabola"
	if pot.Curvature.Known() {
		s += " of curvature " + measured(pot.Curvature, "pN/um")
	}
	if pot.Anharmonic.Known() {
		s += fmt.Sprintf("; excess kurtosis %s", measured(pot.Anharmonic, "1"))
	}
	return s + "."
}
