package figure

import (
	"fmt"

	"beadwell/calib"
)

// frequencyScale is the scale of a frequency axis.
func frequencyScale() scale {
	return scale{quantity: "frequency", unit: "Hz", si: "Hz", factor: 1, log: true}
}

// spectrum draws the blocked one-sided power spectrum with its fit, and below
// it the residuals in standard errors.
func spectrum(a *calib.Axis) Figure {
	f := Figure{Kind: Spectrum, Title: "Power spectrum, " + axisName(a), height: 82}
	points := merged(a.Spectrum.Points)
	used, unused := spectrumPoints(points)
	frequencies, powers := newExtent(), newExtent()
	for _, s := range []series{used, unused} {
		frequencies.showPositive(s.x...)
		powers.showPositive(s.y...)
	}
	if frequencies.empty() || powers.empty() {
		return f.empty("the result holds no point of the power spectrum above zero")
	}
	x := frequencyScale().over(frequencies)
	top := panel{name: "spectrum", share: 0.72, linked: true, x: x,
		y: scale{quantity: "power spectral density", unit: "nm^{2}/Hz", si: "m2/Hz", factor: 1e18, log: true}.over(powers)}
	bottom := panel{name: "residuals", share: 0.28, x: x}
	for _, p := range []*panel{&top, &bottom} {
		p.add(fitBand(a))
		p.add(exclusions(a, p == &top))
	}
	top.add(unused)
	top.add(used)
	top.add(fitted(a.Spectrum.Model, "fit"))
	if corner := a.Spectrum.Corner; corner.Known() {
		top.add(series{name: "corner frequency", mark: upright, ink: rule,
			x: []float64{float64(corner.Value)}, label: "corner " + measured(corner, "Hz")})
	}
	residualPanel(&bottom, points)
	f.panels = []panel{top, bottom}
	f.key = spectrumKey(a, len(unused.x) > 0)
	return f.described(describeSpectrum(a, used))
}

// spectrumPoints returns the points in the fit and those left out. The bars are
// one standard uncertainty of the logarithm, which the model gives: they are as
// long up as down on the axis, and do not run out of it where a block is small.
func spectrumPoints(points []calib.SpectrumPoint) (used, unused series) {
	used = series{name: "used", mark: dots, ink: data}
	unused = series{name: "left out", mark: rings, ink: left}
	for _, p := range points {
		if !p.Frequency.Known() || !p.Power.Known() {
			continue
		}
		s := &unused
		if p.Used {
			s = &used
		}
		factor := 1 + float64(p.Standard/p.Model)
		s.x = append(s.x, float64(p.Frequency))
		s.y = append(s.y, float64(p.Power))
		s.low = append(s.low, float64(p.Power)/factor)
		s.high = append(s.high, float64(p.Power)*factor)
	}
	return used, unused
}

func residualPanel(p *panel, points []calib.SpectrumPoint) {
	used := series{name: "residual, used", mark: dots, ink: data}
	unused := series{name: "residual, left out", mark: rings, ink: left}
	reach := newExtent()
	reach.show(-3, 3)
	for _, point := range points {
		if !point.Residual.Known() || !point.Frequency.Known() {
			continue
		}
		s := &unused
		if point.Used {
			s = &used
			reach.show(float64(point.Residual))
		}
		s.x = append(s.x, float64(point.Frequency))
		s.y = append(s.y, float64(point.Residual))
	}
	p.y = scale{quantity: "residual", unit: "s.e.", si: "standard errors", factor: 1}.over(reach)
	p.add(series{name: "zero", mark: level, ink: rule, y: []float64{0}})
	p.add(unused)
	p.add(used)
	if len(used.x) == 0 {
		p.notes = append(p.notes, note{text: "no residuals in the result", x: 0.5, y: 0.7, ink: soft, middle: true})
	}
}

func fitBand(a *calib.Axis) series {
	s := series{name: "fit band", mark: span, ink: band}
	if low, high := a.Spectrum.Band[0], a.Spectrum.Band[1]; low.Known() && high.Known() && high > low {
		s.low, s.high = []float64{float64(low)}, []float64{float64(high)}
	}
	return s
}

func exclusions(a *calib.Axis, wedge bool) series {
	s := series{name: "excluded", mark: strip, ink: left, wedge: wedge}
	for _, e := range a.Spectrum.Excluded {
		if len(s.low) < 100 && e.Range[0].Known() && e.Range[1].Known() {
			s.low, s.high = append(s.low, float64(e.Range[0])), append(s.high, float64(e.Range[1]))
		}
	}
	return s
}

// fitted is a model curve of a result.
func fitted(points []calib.Point, name string) series {
	s := series{name: name, mark: curve, ink: model}
	for _, i := range thinned(len(points), maxPoints) {
		s.x = append(s.x, float64(points[i].X))
		s.y = append(s.y, float64(points[i].Y))
	}
	return s
}

func spectrumKey(a *calib.Axis, leftOut bool) []keyItem {
	items := []keyItem{{"spectrum", dots, data}, {"fit", curve, model}, {"fit band", span, band}}
	if leftOut {
		items = append(items, keyItem{"left out", rings, left})
	}
	if len(a.Spectrum.Excluded) > 0 {
		items = append(items, keyItem{"excluded", strip, left})
	}
	return items
}

func describeSpectrum(a *calib.Axis, used series) string {
	over := newExtent()
	over.showPositive(used.x...)
	s := fmt.Sprintf("One-sided power spectrum of the position along %s on logarithmic axes, %d blocked points from %s to %s in the fit, with the fitted spectrum",
		clean(a.Name), len(used.x), plain(over.low, "Hz"), plain(over.high, "Hz"))
	if a.Spectrum.Corner.Known() {
		s += "; the corner frequency is " + measured(a.Spectrum.Corner, "Hz")
	}
	if n := len(a.Spectrum.Excluded); n > 0 {
		s += fmt.Sprintf("; %s left out of the fit", count(n, "range of frequencies", "ranges of frequencies"))
	}
	s += ". Below it the residuals in standard errors"
	if p := a.Spectrum.Goodness.PValue; p.Known() {
		s += fmt.Sprintf("; goodness of fit p = %.2g", float64(p))
	}
	return s + "."
}
