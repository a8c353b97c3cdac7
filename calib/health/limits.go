package health

import (
	"fmt"
	"math"

	"beadwell/calib/relaxation"
)

const (
	shortDoubtful = 30 // record times corner frequency
	shortBad      = 8
	keptDoubtful  = 0.15 // share of the variance that the exposure leaves; 2 pi fc W = 12
	keptBad       = 0.07 // 2 pi fc W = 27
	slowDoubtful  = 0.6  // standard uncertainty of ln(fc) that the sampling allows at best
	slowBad       = 1.5
	unsureCorner  = 0.4  // standard uncertainty of ln(fc) beyond which the corner says little of the length
	misfitBeyond  = 1e-4 // p-value
	// whiteMost is 1 - rho(1) above which a slow process cannot be the main motion: for a
	// record of few relaxation times it is the share of the noise.
	whiteMost = 0.6
)

// cornerSD returns the least standard uncertainty of ln(fc) that N samples of the
// process allow: sqrt((1-c^2)/N)/(c |ln c|) without blur and noise (the Cramer-Rao
// bound), with the correlation of neighbours lowered by what noise and raised by what blur
// does to it.
func (v *view) cornerSD() float64 {
	c := math.Exp(-v.h.rho)
	seen := math.Min(v.h.vb/v.h.r0*c, 0.9999999) // correlation of neighbours
	return math.Sqrt((1-math.Min(c, seen)*math.Min(c, seen))/v.h.n) / (seen * v.h.rho)
}

// spread returns the standard uncertainty of ln(fc): that of the fit when it is given,
// otherwise one and a half times the least possible, for the noise that is fitted too.
func (v *view) spread() float64 {
	if v.CornerSD > 0 {
		return v.CornerSD
	}
	return 1.5 * v.cornerSD()
}

// short compares the record with the memory of the bead.
func (v *view) short() Check {
	c := v.check("short-record")
	c.Threshold = shortDoubtful
	if !v.Known {
		return c.spared("no corner frequency was found")
	}
	if why := v.upset(); why != "" {
		return c.spared(why)
	}
	if v.judgeable() && v.whole.whiteness() > whiteMost {
		return c.spared("most of what is seen is noise or fast motion, which tells nothing of the length")
	}
	c.Value = v.Process.Corner * v.h.n / v.rate
	spread := v.spread()
	if spread > unsureCorner && spread > 3/math.Sqrt(math.Pi*c.Value) { // what makes it uncertain is not the length: 1/sqrt(pi T fc)
		return c.spared("the corner frequency is too uncertain here, by noise or slow sampling, to tell how long the record is")
	}
	// A record of just 30 is found shorter half of the time: it must be by three standard uncertainties.
	sure := c.Value * math.Exp(3*math.Min(spread, unsureCorner))
	c.Text = fmt.Sprintf("The record is %s times as long as 1/fc.", digits(c.Value))
	switch {
	case c.Value < shortBad:
		c.Level = Bad
	case sure < shortDoubtful:
		c.Level = Doubtful
	default:
		return c
	}
	c.Text = fmt.Sprintf("The record is only %s times as long as 1/fc, so that the bead has visited few independent positions.", digits(c.Value))
	c.Remedy = fmt.Sprintf("Record for at least %s, better ten times that; with a stiffer trap the time is shorter.", seconds(shortDoubtful/v.Process.Corner)) + caution
	return c
}

// blurred looks at how much of the motion the exposure averages away.
func (v *view) blurred() Check {
	c := v.check("long-exposure")
	c.Threshold = keptDoubtful
	if !v.Known {
		return c.spared("no corner frequency was found")
	}
	a := 2 * math.Pi * v.Process.Corner * v.exposure
	c.Value, _ = relaxation.BlurVariance(a)
	// the least blur that the corner frequency allows, by three of its standard uncertainties where they are known
	sure, _ := relaxation.BlurVariance(a * math.Exp(-3*v.CornerSD))
	c.Text = fmt.Sprintf("The exposure leaves %s of the variance.", percent(c.Value))
	switch {
	case sure < keptBad:
		c.Level = Bad
	case sure < keptDoubtful:
		c.Level = Doubtful
	default:
		return c
	}
	c.Text = fmt.Sprintf("The exposure of %s is long against the relaxation time of %s: it leaves only %s of the variance.",
		seconds(v.exposure), seconds(1/(2*math.Pi*v.Process.Corner)), percent(c.Value))
	c.Remedy = "Shorten the exposure and use more light, or a softer trap, so that the exposure is below the relaxation time." + caution
	return c
}

// slow looks at whether neighbouring samples still know of each other.
func (v *view) slow() Check {
	c := v.check("slow-sampling")
	c.Threshold = slowDoubtful
	if v.white() {
		c.Level = Bad
		c.Text = "Neighbouring samples do not know of each other at all: either the bead relaxes much faster than the samples follow each other, or what is seen is noise and no bead that moves."
		c.Remedy = "See whether the bead is there and moves freely. Sample faster, or use a softer trap." + caution
		return c
	}
	if !v.Known {
		return c.spared("no corner frequency was found")
	}
	ratio := v.Process.Corner / v.rate
	c.Value = v.cornerSD()
	c.Text = fmt.Sprintf("The corner frequency is %s of the sampling rate.", digits(ratio))
	switch {
	case ratio < 0.2 || v.total.n < whiteSamples: // what makes the corner uncertain here is length or noise, not the rate
		return c
	case c.Value > slowBad:
		c.Level = Bad
	case c.Value > slowDoubtful:
		c.Level = Doubtful
	default:
		return c
	}
	c.Text = fmt.Sprintf("The sampling is too slow: at a corner frequency of %s of the sampling rate, neighbouring samples hardly know of each other, and the corner rests on a standard uncertainty of %s at best.",
		digits(ratio), percent(math.Min(c.Value, 99)))
	c.Remedy = fmt.Sprintf("Sample at %s or more, or use a softer trap.", hertz(10*v.Process.Corner)) + caution
	return c
}

// whiteSamples is the least number of samples of which the lack of any correlation means
// something: of a bead sampled at twice its corner frequency with a full exposure, a
// thousand show a coefficient of neighbours of 6 standard deviations.
const whiteSamples = 1000

// white tells whether the samples do not know of each other, by the correlation
// coefficient of neighbours about line and step, whose standard deviation is 1/sqrt(N) for
// white samples.
func (v *view) white() bool {
	if !v.judgeable() || v.upset() != "" || v.total.steps < whiteSamples {
		return false
	}
	return (1-v.whole.whiteness())*math.Sqrt(v.whole.steps) < 1.5
}

// misfit reports a spectrum that the model does not describe.
func (v *view) misfit() Check {
	c := v.check("odd-spectrum")
	c.Threshold = misfitBeyond
	if !v.Known || !known(v.GoodnessP) {
		return c.spared("no spectrum was fitted")
	}
	if why := v.upset(); why != "" {
		return c.spared(why)
	}
	c.Value = v.GoodnessP
	if v.GoodnessP >= misfitBeyond {
		c.Text = "The spectrum is that of a trapped bead."
		return c
	}
	c.Level = Doubtful
	c.Text = fmt.Sprintf("The spectrum is not quite that of a trapped bead: chance makes such a misfit with a probability of %.1g.", v.GoodnessP)
	c.Remedy = "Look at the residuals of the spectrum: a slope at high frequencies points to the detector, the fluid's inertia or a wrong exposure; excess at low ones to vibration or drift; narrow excess to lines to exclude."
	return c
}
