package calib

import (
	"math"

	"beadwell/calib/relaxation"
	"beadwell/psd"
)

// refitSteps is the number of values at which the record is fitted again before the search.
const refitSteps = 17

// Changes that are usual, for the order of causes without a stated uncertainty.
const (
	usualExposure = 0.2  // of the sampling interval
	usualNoise    = 2e-9 // m
)

// ofTheRecord are the causes under which the likelihood of the record itself is another.
func (b *bench) ofTheRecord() []hypothesis {
	list := []hypothesis{b.exposure(), b.rate()}
	if h, ok := b.noise(); ok {
		list = append(list, h)
	}
	if !trapped(b.works[0]) {
		return list
	}
	if h, ok := b.inertia(); ok {
		list = append(list, h)
	}
	if h, ok := b.drift(); ok {
		list = append(list, h)
	}
	return list
}

func (b *bench) exposure() hypothesis {
	w := b.works[0]
	near := refits{}
	return hypothesis{code: CauseExposure, name: "exposure", stated: input(w.exposure, w.exposureU, "s"), low: 0, high: 1, steps: refitSteps,
		at: func(share float64) (weighed, bool) {
			found, ok := b.all(b.alike, func(w *work) (evidence, bool) { return near.of(w, share/w.rate, w.noise) })
			if !ok {
				return weighed{}, false
			}
			return b.weigh(found, unmoved, nil)
		},
		value: func(share float64) float64 { return share / w.rate },
		order: func(needed float64) float64 { return math.Abs(needed-w.exposure) * w.rate / usualExposure }, text: textOfExposure}
}

// noise is the localisation noise where it was stated. Where that differs between the
// axes, all variances are moved by the same amount.
func (b *bench) noise() (hypothesis, bool) {
	w := b.works[0]
	if !w.noise.Known {
		return hypothesis{}, false
	}
	sd, u := w.statedNoise()
	first := w.noise.Variance
	most := first
	for _, o := range b.works {
		most = math.Max(most, o.mostNoise())
	}
	near := refits{}
	return hypothesis{code: CauseNoise, name: "localisation noise", stated: input(sd, u, "m"), low: 0, high: math.Sqrt(most), steps: 2 * refitSteps,
		at: func(candidate float64) (weighed, bool) {
			found, ok := b.all(b.alike, func(w *work) (evidence, bool) {
				return near.of(w, w.exposure, psd.Noise{Known: true, Variance: math.Max(0, w.noise.Variance+candidate*candidate-first)})
			})
			if !ok {
				return weighed{}, false
			}
			return b.weigh(found, unmoved, nil)
		},
		value: func(p float64) float64 { return p },
		order: func(needed float64) float64 { return math.Abs(needed-sd) / usualNoise }, text: textOfNoise}, true
}

// topBand is where the highest frequencies begin, over half the sampling rate.
const topBand = 0.8

// mostNoise is a bound of the noise variance [m2]: twice the level of the spectrum at its highest frequencies, where
// the noise is all there is at most; of a free bead, what its steps hold.
func (w *work) mostNoise() float64 {
	if !trapped(w) {
		return w.phys.kT/w.phys.gamma/w.rate + w.noise.Variance
	}
	b := w.fit.Blocks
	sum, weight := 0.0, 0.0
	for i, f := range b.Frequency {
		if f > topBand/2 || i == len(b.Frequency)-1 {
			sum += b.Weight[i] * b.Power[i]
			weight += b.Weight[i]
		}
	}
	return 2 * sum / weight
}

// Factors on a sampling rate that slips make: every second frame kept or counted twice,
// milliseconds taken for seconds and the reverse.
var rateSlips = []float64{0.5, 2, 1e-3, 1e3}

// wholeFrame is the share of the sampling interval from which an exposure counts as
// the whole of it, to be moved with the rate.
const wholeFrame = 0.999

// rate is the best of the slips. A corner frequency in units of the rate is as it was;
// in hertz it goes with the rate, and so does the diffusion coefficient.
func (b *bench) rate() hypothesis {
	w := b.works[0]
	best, factor := weighed{value: math.Inf(-1)}, rateSlips[0]
	for _, r := range rateSlips {
		for _, keep := range []bool{true, false} { // the exposure, in units of the interval
			if out, ok := b.atRate(r, keep); ok && out.value > best.value {
				best, factor = out, r
			}
		}
	}
	return hypothesis{code: CauseRate, name: "sampling rate", stated: Exact(w.rate, "Hz"), low: 0, high: 0, steps: 1,
		at:    func(float64) (weighed, bool) { return best, !math.IsInf(best.value, -1) },
		value: func(float64) float64 { return w.rate * factor },
		order: func(needed float64) float64 { return 3 }, text: textOfRate}
}

func (b *bench) atRate(r float64, keep bool) (weighed, bool) {
	shift := func(w *work, kind reading) float64 {
		if kind == scaleReading || w.rate != b.works[0].rate { // the line stands where the stage moves, in samples
			return 0
		}
		return -math.Log(r)
	}
	if keep {
		return b.weigh(b.asRead, shift, nil)
	}
	found, ok := b.all(b.alike, func(w *work) (evidence, bool) {
		share := w.exposure * w.rate * r
		if w.exposure == 0 || share > 1 || w.exposure*w.rate > wholeFrame {
			return evidence{}, false
		}
		return refits{}.of(w, share/w.rate, w.noise)
	})
	if !ok {
		return weighed{}, false
	}
	return b.weigh(found, shift, nil)
}

// inertia is the frequency dependence of the drag, where a constant one was fitted.
func (b *bench) inertia() (hypothesis, bool) {
	found, ok := b.all(trapped, func(w *work) (evidence, bool) {
		if w.dragModel != ConstantDrag {
			return evidence{}, false
		}
		return w.withInertia()
	})
	if !ok {
		return hypothesis{}, false
	}
	out, ok := b.weigh(found, unmoved, nil)
	return hypothesis{code: CauseInertia, name: "inertia of the liquid", stated: Exact(0, "1"), low: 0, high: 0, steps: 1,
		at: func(float64) (weighed, bool) { return out, ok }, value: func(float64) float64 { return 1 },
		order: func(float64) float64 { return 1 }, text: textOfInertia}, ok
}

// withInertia fits frequency-dependent drag; its likelihood is compared with that of
// constant drag in the same form, and the difference added to that of the fit as it was.
func (w *work) withInertia() (evidence, bool) {
	h, ok := w.hydrodynamic(true)
	if !ok || h.Drag == nil || w.record.Missing > 0 {
		return evidence{}, false
	}
	constant := h
	constant.Drag, constant.MassCorner = nil, 0
	o := w.fitOptions()
	o.KeepLines = true
	o.Form = constant.Form(w.rate, w.exposure)
	base, err := psd.Estimate(w.record, o)
	if err != nil {
		return evidence{}, false
	}
	o.Form = h.Form(w.rate, w.exposure)
	f, err := psd.Estimate(w.record, o)
	if err != nil {
		return evidence{}, false
	}
	e, ok := w.evidenceOf(f.Problem, f.Maximum, w.exposure)
	e.likelihood += w.fit.Maximum.Value - base.Maximum.Value
	return e, ok
}

// drift is a slow wander of the bead or the stage with a spectrum that falls as 1/f^2.
func (b *bench) drift() (hypothesis, bool) {
	rms := math.NaN()
	found, ok := b.all(trapped, func(w *work) (evidence, bool) {
		e, size, ok := w.withDrift()
		if !(size <= rms) {
			rms = size
		}
		return e, ok
	})
	if !ok {
		return hypothesis{}, false
	}
	out, ok := b.weigh(found, unmoved, nil)
	thermal := math.Sqrt(b.works[0].fit.Variance)
	return hypothesis{code: CauseDrift, name: "slow drift", stated: Exact(0, "m"), low: 0, high: 0, steps: 1,
		at: func(float64) (weighed, bool) { return out, ok }, value: func(float64) float64 { return rms },
		order: func(needed float64) float64 { return needed / (0.1 * thermal) }, text: textOfDrift}, ok
}

const (
	driftBelow  = 0.2 // of the corner frequency: above it a wander hides in the motion of the bead
	driftBlocks = 6   // at least, below that frequency
)

// withDrift fits the trap to the frequencies above a fifth of the corner, and below them a
// drift on top of it. It returns the evidence and the drift's rms [m].
func (w *work) withDrift() (evidence, float64, bool) {
	f := w.fit
	if w.form != nil || f.Method == psd.Exact {
		return evidence{}, math.NaN(), false
	}
	low, high := cutBlocks(f.Blocks, driftBelow*f.Corner/w.rate)
	if len(low.Power) < driftBlocks || len(high.Power) < driftBlocks {
		return evidence{}, math.NaN(), false
	}
	share := w.exposure * w.rate
	whole, part := f.Problem, f.Problem
	whole.Likelihood = relaxation.NewSpectral(f.Blocks, nil, share, f.Scale())
	part.Likelihood = relaxation.NewSpectral(high, nil, share, f.Scale())
	base, err := whole.Maximise(f.Maximum.At)
	if err != nil {
		return evidence{}, math.NaN(), false
	}
	top, err := part.Maximise(f.Maximum.At)
	if err != nil {
		return evidence{}, math.NaN(), false
	}
	process := w.processAt(top.At)
	value, rms := wander(low, process, f.Scale())
	e, ok := w.evidenceOf(part, top, w.exposure)
	e.likelihood = f.Maximum.Value + top.Value + value - base.Value
	return e, rms, ok && rms > 0
}

// cutBlocks parts the blocks at a frequency in units of the sampling rate.
func cutBlocks(b relaxation.Blocks, at float64) (low, high relaxation.Blocks) {
	n := 0
	for n < len(b.Frequency) && b.Frequency[n] < at {
		n++
	}
	part := func(from, to int) relaxation.Blocks {
		return relaxation.Blocks{Samples: b.Samples, Frequency: b.Frequency[from:to], Sigma: b.Sigma[from:to], SigmaVar: b.SigmaVar[from:to],
			Power: b.Power[from:to], Weight: b.Weight[from:to], Bins: b.Bins[from:to]}
	}
	return part(0, n), part(n, len(b.Frequency))
}

// wander fits the amplitude of a 1/f^2 spectrum on top of that of the process, and returns the log-likelihood and
// the rms of the wander [m].
func wander(b relaxation.Blocks, p relaxation.Process, scale float64) (value, rms float64) {
	spectrum := p.SpectrumFunc()
	base := make([]float64, len(b.Power))
	for i, f := range b.Frequency {
		base[i] = spectrum(f/p.Interval) / p.Interval
	}
	at := func(amplitude float64) float64 {
		sum := 0.0
		for i, f := range b.Frequency {
			m := base[i] + amplitude/(f*f)
			sum -= b.Weight[i] * (math.Log(m/scale) + b.Power[i]/m)
		}
		return sum
	}
	best, value := 0.0, at(0)
	first := b.Frequency[0] * b.Frequency[0] * base[0]
	const perDecade = 20 // steps of 12 % in the amplitude, 6 % in the rms
	for i := -3 * perDecade; i <= 6*perDecade; i++ {
		a := first * math.Pow(10, float64(i)/perDecade)
		if v := at(a); v > value {
			best, value = a, v
		}
	}
	for i, f := range b.Frequency {
		rms += 2 * float64(b.Bins[i]) * best / (f * f) / float64(b.Samples)
	}
	return value, math.Sqrt(rms)
}
