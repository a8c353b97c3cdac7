package main

import (
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"beadwell/calib"
	"beadwell/calib/drag"
	"beadwell/calib/medium"
	"beadwell/calib/relaxation"
	"beadwell/psd"
)

// Ideal is what theory allows in a cell: the power of the likelihood-ratio test of the true statement against
// the wrong one at the level of the verdict, and the probability that the true cause is alone in the tie.
//
// Of a check of the recording it is the power of the likelihood-ratio test of the fault against a sound recording at the promised level of false alarms.
//
// It is computed without any recording: the expected spectrum of the truth stands for the record, whose
// log-likelihood under a statement is then the expected one, and twice its deficit against the truth the
// noncentrality (Wilks 1938; Wald, Trans. Am. Math. Soc. 54 (1943) 426). Stated uncertainties enter as normal priors.
type Ideal struct {
	Noncentrality float64 // of the wrong statement
	Power         float64
	Distance      float64 // least noncentrality of another cause
	Alone         float64
	Known         bool // false: the fault is none of a statement about a stationary record
}

// ideal evaluates a cell.
func (c trialCell) ideal() Ideal {
	truth, stated := c.scenes()
	b, ok := newIdealBench(truth, stated, c.setup.companions)
	if !ok {
		return Ideal{}
	}
	best := b.weigh(truth, c.fault.code)
	if truth.wander > 0 || truth.inertia {
		best = b.self() // no relaxation process with white noise
	}
	out := Ideal{Known: true, Noncentrality: math.Max(0, 2*(best-b.weigh(stated, ""))), Distance: math.Inf(1)}
	out.Power = excess(out.Noncentrality, familyQuantile)
	for _, h := range b.rivals() {
		if h.code == c.fault.code {
			continue
		}
		out.Distance = math.Min(out.Distance, math.Max(0, 2*(best-b.most(h))))
	}
	if d := math.Sqrt(out.Distance); d > 0 {
		// 2 ln of the likelihood ratio of two points is normal about d^2 with the standard deviation 2 d
		out.Alone = distuv.UnitNormal.CDF((d*d - 2*math.Log(tieRatio)) / (2 * d))
	}
	return out
}

const (
	tieRatio       = 10    // of likelihoods, within which causes are a tie
	familyQuantile = 2.807 // of the normal distribution, for a level of 0.005 on both sides
)

// excess is the probability that a normal deviate about the root of a noncentrality is farther from 0 than a quantile.
func excess(lambda, quantile float64) float64 {
	d := math.Sqrt(lambda)
	return distuv.UnitNormal.CDF(d-quantile) + distuv.UnitNormal.CDF(-d-quantile)
}

// idealBench holds the expected evidence of a cell.
type idealBench struct {
	truth, stated scene
	sights        []sight
	known         map[[3]float64][]expected // fits by exposure and the noise in true lengths, of x and of the other axes
	moves         map[string][][]float64    // priors by the freed cause
}

// sight is one axis of one recording.
type sight struct {
	axis    int
	name    rune
	of      func(s scene) scene // what its recording makes of a scene
	free    float64             // relative standard uncertainty of the diffusion coefficient of a free bead; 0: trapped
	blocks  relaxation.Blocks
	scale   float64
	line    float64 // relative standard uncertainty of the answer to the stage by the record; 0: not driven
	process relaxation.Process
}

// self is the expected log-likelihood of the truth where its spectrum is not that of a relaxation process.
func (b *idealBench) self() float64 {
	sum := 0.0
	for _, s := range b.sights {
		for i, w := range s.blocks.Weight {
			sum -= w * (math.Log(s.blocks.Power[i]/s.scale) + 1)
		}
	}
	return sum
}

// expected is what the expected record of an axis says under an exposure and a noise.
type expected struct {
	value    float64
	at       relaxation.Parameters
	total    relaxation.Matrix
	possible bool
}

func newIdealBench(truth, stated scene, companions []func(scene) scene) (*idealBench, bool) {
	b := &idealBench{truth: truth, stated: stated, known: map[[3]float64][]expected{}, moves: map[string][][]float64{}}
	same := func(s scene) scene { return s }
	for _, of := range append([]func(scene) scene{same}, companions...) {
		t := of(truth)
		for i, name := range t.axes {
			s := sight{axis: i, name: name, of: of}
			var ok bool
			if t.free {
				ok = s.seeFree(t, stated)
			} else {
				ok = s.see(t)
			}
			if !ok {
				return nil, false
			}
			b.sights = append(b.sights, s)
		}
	}
	return b, true
}

// see expects the record of a trapped bead.
func (s *sight) see(t scene) bool {
	kT, gamma, _, err := t.process(s.name)
	if err != nil {
		return false
	}
	kappa := stiffness(t.soft[s.axis])
	p := relaxation.Process{Corner: kappa / (2 * math.Pi * gamma), Variance: kT / kappa, Noise: t.noise * t.noise, Interval: 1 / t.rate, Exposure: t.exposure}
	n := t.samples / 2 * 2
	power := make([]float64, n/2+1)
	spectrum := p.SpectrumFunc()
	for k := range power {
		power[k] = spectrum(float64(k)/float64(n)*t.rate) * t.rate * float64(n)
	}
	if t.wander > 0 {
		step := t.wander * thermal(t.soft[s.axis]) / math.Sqrt(float64(t.samples)/wanderSteps)
		for k := 1; k < len(power); k++ {
			power[k] += step * step * walkPower(k, n)
		}
	}
	s.blocks, s.scale, s.process = relaxation.NewBlocks(power, n, true, nil), p.RecordedVariance(), p
	if t.inertia && !s.withInertia(t, gamma) {
		return false
	}
	if t.drive > 0 && s.axis == 0 {
		ratio := p.Corner / driveHz
		amplitude := t.drive / math.Sqrt(1+ratio*ratio)
		s.line = math.Sqrt(2*spectrum(driveHz)/(float64(n)/t.rate)) / amplitude
	}
	return true
}

// walkPower is the expected |X_k|^2 of a random walk of n unit steps less its least-squares straight line. With G_k(j) = (e^{-i w j} - 1)/
// (1 - e^{-i w}) the transform of a step at j, b(j) = 6 j (n - j)/n^3 the slope that it makes, and T_k = n/(e^{-i w} - 1) the transform
// of the ramp, w = 2 pi k/n, it is the sum over j of |G_k - b T_k|^2, for n large against k and 1.
func walkPower(k, n int) float64 {
	sine := 2 * math.Sin(math.Pi*float64(k)/float64(n))
	return float64(n) * (1.2 - 6/(math.Pi*math.Pi*float64(k)*float64(k))) / (sine * sine)
}

// aliases is the number of multiples of the sampling rate on either side whose power is summed; the spectrum falls faster than 1/f^2, so
// that less than 1e-5 of it is left.
const aliases = 200

// withInertia replaces the expected spectrum by that of a bead in a liquid with inertia.
func (s *sight) withInertia(t scene, gamma float64) bool {
	liquid, err := medium.ParseFluid("water")
	if err != nil {
		return false
	}
	p, err := liquid.At(t.kelvin)
	if err != nil {
		return false
	}
	static := gamma / drag.Stokes(p.Viscosity, t.diameter/2)
	d := drag.Frequency{Radius: t.diameter / 2, Height: t.height, Viscosity: p.Viscosity, Density: p.Density, StaticFactor: static, Perpendicular: s.name == 'z'}
	h := psd.Hydrodynamic{Drag: func(f float64) complex128 { return d.Factor(f) / complex(static, 0) },
		MassCorner: gamma / (2 * math.Pi * math.Pi / 6 * t.diameter * t.diameter * t.diameter * beadDensity)}
	for i, phi := range s.blocks.Frequency {
		sum := 0.0
		for m := -aliases; m <= aliases; m++ {
			f := math.Abs(phi+float64(m)) * t.rate
			blur := 1.0
			if x := math.Pi * f * t.exposure; x > 0 {
				blur = math.Sin(x) / x
			}
			sum += h.Position(f, s.process.Corner, s.process.Variance) / 2 * blur * blur
		}
		s.blocks.Power[i] = sum*t.rate + s.process.Noise
	}
	return true
}

// seeFree takes the uncertainty of a free bead's diffusion coefficient from one recording of it.
func (s *sight) seeFree(t, stated scene) bool {
	rec, err := t.recording(1)
	if err != nil {
		return false
	}
	x := rec.Axes[s.axis].Values
	for i := range x {
		x[i] *= t.pixel
	}
	fit, err := relaxation.FitFree(x, relaxation.FreeOptions{Interval: 1 / t.rate, Exposure: t.exposure, NoiseKnown: !stated.unknownNoise, Noise: stated.noise * stated.noise})
	s.free = fit.LogTotal
	return err == nil
}

// trueNoise is the noise of a scene in true lengths, of x and of the other axes: it is recorded in the lengths of the scene or, where it was
// measured with the scale that is stated, in those.
func (b *idealBench) trueNoise(h scene) (x, others float64) {
	by := h
	if h.noiseRecorded {
		by = b.stated
	}
	others = h.noise * b.truth.pixel / by.pixel
	return others * b.truth.uneven / by.uneven, others
}

// fits returns what the axes say under the exposure and the noise of a scene.
func (b *idealBench) fits(h scene) []expected {
	first, others := b.trueNoise(h)
	key := [3]float64{h.exposure * h.rate, first, others}
	if known, ok := b.known[key]; ok {
		return known
	}
	var out []expected
	for _, s := range b.sights {
		if s.free > 0 {
			out = append(out, expected{possible: true})
			continue
		}
		pr := relaxation.Problem{Likelihood: relaxation.NewSpectral(s.blocks, nil, math.Min(1, h.exposure*h.rate), s.scale)}
		from := relaxation.Parameters{math.Log(s.process.Corner * s.process.Interval), math.Log(s.process.Variance / s.scale), s.process.Noise / s.scale}
		if !h.unknownNoise {
			pr.Directions = []relaxation.Parameters{{1, 0, 0}, {0, 1, 0}}
			noise := others
			if s.axis == 0 {
				noise = first
			}
			from[2] = noise * noise / s.scale
		}
		e := expected{}
		if m, err := pr.Maximise(from); err == nil {
			total, _, err := pr.Covariance(m.Information)
			e = expected{value: m.Value, at: m.At, total: total, possible: err == nil}
		}
		out = append(out, e)
	}
	b.known[key] = out
	return out
}

// readings are the logarithms of the measured over the stated diffusion coefficients, and of the length scale by
// the stage, that a scene predicts where the statement is b.stated.
func (b *idealBench) readings(h scene) ([]float64, bool) {
	var out []float64
	for _, s := range b.sights {
		kT, gamma, _, err := s.of(h).process(s.name)
		kT0, gamma0, _, err0 := s.of(b.stated).process(s.name)
		if err != nil || err0 != nil {
			return nil, false
		}
		pixel := math.Log(h.pixel / b.stated.pixel)
		if s.axis == 0 {
			pixel += math.Log(h.uneven / b.stated.uneven)
		}
		out = append(out, math.Log(kT/gamma/(kT0/gamma0))-2*pixel+math.Log(b.stated.rate/h.rate))
		if s.line > 0 {
			out = append(out, pixel+math.Log(b.stated.drive/h.drive))
		}
	}
	return out, true
}

// weigh is the expected log-likelihood of a scene, the stated inputs but those of a cause being known within their
// uncertainties.
func (b *idealBench) weigh(h scene, freed string) float64 {
	fits := b.fits(h)
	want, ok := b.readings(h)
	have, known := b.readings(b.truth)
	if !ok || !known {
		return math.Inf(-1)
	}
	n := len(want)
	r, c := mat.NewVecDense(n, nil), mat.NewSymDense(n, nil)
	value, k := 0.0, 0
	for i, s := range b.sights {
		f := fits[i]
		if !f.possible {
			return math.Inf(-1)
		}
		if s.free > 0 {
			r.SetVec(k, have[k]-want[k])
			c.SetSym(k, k, s.free*s.free)
			k++
			continue
		}
		value += f.value
		kT, gamma, _, err := s.of(b.stated).process(s.name)
		if err != nil {
			return math.Inf(-1)
		}
		// recorded in true lengths and intervals; the statement reads them in its own
		pixel := math.Log(b.truth.pixel / b.stated.pixel)
		if s.axis == 0 {
			pixel += math.Log(b.truth.uneven / b.stated.uneven)
		}
		along := relaxation.Parameters{1, 1, 0}
		d := f.at[0] + f.at[1] + math.Log(2*math.Pi*b.stated.rate*s.scale) - 2*pixel - math.Log(kT/gamma)
		r.SetVec(k, d-want[k])
		c.SetSym(k, k, f.total.Form(along, along))
		if s.line > 0 {
			ratio := s.process.Corner / driveHz
			bend := ratio * ratio / (1 + ratio*ratio)
			by := relaxation.Parameters{-bend, 0, 0}
			scale := pixel + math.Log(b.stated.drive/b.truth.drive) - bend*(f.at[0]-math.Log(s.process.Corner*s.process.Interval))
			r.SetVec(k+1, scale-want[k+1])
			c.SetSym(k+1, k+1, f.total.Form(by, by)+s.line*s.line)
			c.SetSym(k, k+1, f.total.Form(along, by))
			k++
		}
		k++
	}
	for _, row := range b.priors(freed) {
		for i := range n {
			for j := i; j < n; j++ {
				c.SetSym(i, j, c.At(i, j)+row[i]*row[j])
			}
		}
	}
	var chol mat.Cholesky
	var z mat.VecDense
	if !chol.Factorize(c) || chol.SolveVecTo(&z, r) != nil {
		return math.Inf(-1)
	}
	return value - mat.Dot(r, &z)/2
}

// priors are the effects of one stated standard uncertainty of each input on the readings, but for that of a cause.
func (b *idealBench) priors(freed string) [][]float64 {
	if b.stated.exact {
		return nil
	}
	if known, ok := b.moves[freed]; ok {
		return known
	}
	var out [][]float64
	for _, in := range []struct {
		code string
		move func(s *scene)
	}{
		{calib.CauseDiameter, func(s *scene) { s.diameter *= 1 + carefulDiameter }},
		{calib.CauseTemperature, func(s *scene) { s.kelvin += carefulKelvin }},
		{calib.CauseHeight, func(s *scene) { s.height *= 1 + carefulHeight }},
		{calib.CauseScale, func(s *scene) { s.pixel *= 1 + carefulPixel }},
		{calib.CauseStage, func(s *scene) { s.drive *= 1 + carefulDrive }},
	} {
		if in.code == freed {
			continue
		}
		h := b.stated
		in.move(&h)
		if row, ok := b.readings(h); ok {
			out = append(out, row)
		}
	}
	b.moves[freed] = out
	return out
}

// rival is a cause with the scenes that it makes of the statement.
type rival struct {
	code      string
	low, high float64
	at        func(s *scene, parameter float64)
}

// widest factor of the search.
const widest = 1.5 // in the logarithm

func (b *idealBench) rivals() []rival {
	list := []rival{
		{calib.CauseScale, -widest, widest, func(s *scene, p float64) { s.pixel *= math.Exp(p) }},
		{calib.CauseTemperature, 274, 370, func(s *scene, p float64) { s.kelvin = p }},
		{calib.CauseViscosity, -widest, widest, func(s *scene, p float64) { s.thickness *= math.Exp(p) }},
		{calib.CauseDiameter, -widest, widest, func(s *scene, p float64) { s.diameter *= math.Exp(p) }},
		{calib.CauseHeight, math.Log(0.01), math.Log(600), func(s *scene, p float64) { s.height = s.diameter / 2 * (1 + math.Exp(p)) }},
		{calib.CauseExposure, 0, 1, func(s *scene, p float64) { s.exposure = p / s.rate }},
	}
	if len(b.stated.axes) > 1 {
		list = append(list, rival{calib.CauseScaleOne, -widest, widest, func(s *scene, p float64) { s.uneven *= math.Exp(p) }})
	}
	if !b.stated.unknownNoise {
		for _, h := range list {
			if h.code == calib.CauseScale || h.code == calib.CauseScaleOne {
				list = append(list, rival{h.code, h.low, h.high, func(s *scene, p float64) {
					h.at(s, p)
					s.noiseRecorded = true
				}})
			}
		}
		list = append(list, rival{calib.CauseNoise, 0, 1, func(s *scene, p float64) { s.noise = p * math.Sqrt(b.sights[0].scale) }})
	}
	if len(b.sights) > len(b.stated.axes) {
		list = append(list, rival{calib.CauseHeating, -30, 60, func(s *scene, p float64) { s.heating = p }})
	}
	if b.stated.drive > 0 {
		list = append(list, rival{calib.CauseStage, -widest, widest, func(s *scene, p float64) { s.drive *= math.Exp(p) }})
	}
	for _, factor := range []float64{0.5, 2, 1e-3, 1e3} {
		list = append(list, rival{calib.CauseRate, 0, 0, func(s *scene, _ float64) {
			s.rate *= factor
			s.exposure /= factor
		}})
	}
	return list
}

// most is the greatest expected log-likelihood of a cause, by a scan and a finer one about its best.
func (b *idealBench) most(h rival) float64 {
	const steps = 40
	best, at := math.Inf(-1), h.low
	low, high := h.low, h.high
	for range 3 { // each narrows the range by a factor of 20
		for i := range steps + 1 {
			p := low + (high-low)*float64(i)/steps
			s := b.stated
			h.at(&s, p)
			if v := b.weigh(s, h.code); v > best {
				best, at = v, p
			}
			if high == low {
				return best
			}
		}
		step := (high - low) / steps
		low, high = math.Max(h.low, at-step), math.Min(h.high, at+step)
	}
	return best
}
