package calib

import (
	"math"
	"slices"

	"beadwell/calib/relaxation"
	"beadwell/calib/transform"
	"beadwell/equipartition"
	"beadwell/psd"
)

// describe fills the parts of the axis result that a reader looks at.
func (w *work) describe() {
	x := &w.axis
	x.Name, x.Orientation = w.axisName, "parallel"
	if !w.phys.parallel {
		x.Orientation = "perpendicular"
	}
	x.Mean = Float(w.record.Mean)
	w.describeDrag()
	for leg := range legNames {
		x.Estimates = append(x.Estimates, Estimate{Leg: legNames[leg], Route: routeOf(leg), Stiffness: w.legStiffness(leg)})
	}
	x.Covariance = w.covarianceTable()
	w.describeSpectrum()
	w.describeEquipartition()
	w.describeDisplacement()
	x.Trace = w.trace()
	w.describeDriven()
	w.describeSensitivity()
	w.describePhotodiode()
	w.describeFree()
	if w.background != nil {
		x.Background = w.background.describe(w.perUnit, "m")
	}
}

func (w *work) describeDrag() {
	x, p := &w.axis, w.phys
	factor, u := p.wall.Factor, 0.0
	for _, in := range p.influences {
		switch in.name {
		case "height", "depth", wallModel:
			u = math.Hypot(u, in.drag)
		case "bead diameter":
			u = math.Hypot(u, p.wall.LogSlopeRadius*in.u/in.base)
		}
	}
	x.Wall = Wall{Factor: input(factor, u*factor, "1"), Faxen: Float(p.wall.Faxen), FaxenError: Float(p.wall.FaxenError), Method: p.wall.Method}
	computed, u := w.computedDrag()
	x.Drag = input(computed, u*computed, "N s/m")
	if !x.CrossCheck.Routes.PValue.Known() {
		reason := x.CrossCheck.Routes.Reason
		x.MeasuredDrag, x.DragRatio = Withheld("N s/m", reason), Withheld("1", reason)
		return
	}
	sd, _ := w.fit.SD(alongDrag)
	o := w.profile(alongDrag, sd).Mirrored()
	ratio := -w.dragExcess() // ln(measured/computed)
	_, _, aa := p.systematics()
	measured := math.Log(p.gamma) + ratio
	x.MeasuredDrag = exponential(measured, sd, o, math.Hypot(sd, math.Sqrt(aa)), o.Widened(math.Sqrt(aa)), "N s/m")
	x.DragRatio = exponential(ratio, sd, o, math.Hypot(sd, w.pooled.u), o.Widened(w.pooled.u), "1")
}

// computedDrag is Stokes drag times wall factor [N s/m] with its relative standard uncertainty.
func (w *work) computedDrag() (value, u float64) {
	if w.free != nil {
		for _, g := range w.free.base {
			u = math.Hypot(u, g)
		}
		return w.free.computed, u
	}
	gg, _, _ := w.phys.systematics()
	return w.phys.gamma, math.Sqrt(gg)
}

func (w *work) covarianceTable() Covariance {
	c := Covariance{}
	for i, name := range legNames {
		c.Legs = append(c.Legs, name)
		s, t := make([]Float, legCount), make([]Float, legCount)
		for j := range legNames {
			s[j], t[j] = Float(w.legs.stat[i][j]), Float(w.legs.total[i][j])
			if !w.has(i) || !w.has(j) {
				s[j], t[j] = Float(math.NaN()), Float(math.NaN())
			}
		}
		c.Statistical, c.Combined = append(c.Statistical, s), append(c.Combined, t)
	}
	return c
}

// spectrumPoints is the number of blocks of the spectrum that are kept for figures.
const spectrumPoints = 160

// excludedBy says why a range was left out of the fit.
func (w *work) excludedBy(e psd.Range) string {
	if w.background != nil && slices.ContainsFunc(w.background.lines, func(l psd.Line) bool { return l.Low == e.Low && l.High == e.High }) {
		return "narrow line of the background"
	}
	return "as set"
}

func (w *work) describeSpectrum() {
	s := &w.axis.Spectrum
	f := w.fit
	s.Method, s.Drag = f.Method, w.dragModel
	s.Band = [2]Float{Float(f.Band.Low), Float(f.Band.High)}
	s.Bins = f.Bins
	for _, l := range w.record.Lines {
		s.Excluded = append(s.Excluded, Excluded{Range: [2]Float{Float(l.Low), Float(l.High)}, Reason: "narrow line, removed"})
	}
	for _, e := range f.Excluded {
		s.Excluded = append(s.Excluded, Excluded{Range: [2]Float{Float(e.Low), Float(e.High)}, Reason: w.excludedBy(e)})
	}
	nan := Float(math.NaN())
	s.LeastSquares = LeastSquares{Corner: nan, Diffusion: nan}
	s.Goodness = Goodness{ChiSquare: nan, PValue: nan}
	if w.fitErr != nil {
		reason := w.legs.reason[spectrumLeg]
		s.Corner, s.Variance, s.Diffusion = Withheld("Hz", reason), Withheld("m2", reason), Withheld("m2/s", reason)
		s.Noise, s.NoiseVariance, s.NoiseOrigin = Withheld("m", reason), Withheld("m2", reason), w.noiseOrigin()
		s.LeastSquares.Reason = reason
		return
	}
	s.Goodness = Goodness{ChiSquare: Float(f.Goodness.ChiSquare), DegreesOfFreedom: f.Goodness.DegreesOfFreedom, PValue: Float(f.Goodness.PValue)}
	sdC, totalC := f.SD(alongCorner)
	sdV, totalV := f.SD(alongVariance)
	s.Corner = w.fitted(math.Log(f.Corner), spectrumLeg, alongCorner, sdC, totalC, 0, "Hz")
	s.Variance = w.fitted(math.Log(f.Variance), amplitudeLeg, alongVariance, sdV, totalV, w.lengthU(), "m2")
	sdD, totalD := f.SD(alongDrag)
	o := w.profile(alongDrag, sdD)
	extra := math.Sqrt(math.Max(0, totalD*totalD-sdD*sdD) + w.lengthU()*w.lengthU())
	s.Diffusion = exponential(math.Log(2*math.Pi*f.Corner*f.Variance), sdD, o, math.Hypot(sdD, extra), o.Widened(extra), "m2/s")
	if sdD > 2*hopeless {
		s.Diffusion = Withheld("m2/s", tooUncertain(sdD))
	}
	w.describeNoise()
	w.leastSquares()
	w.spectrumCurves()
}

// lengthU is the relative uncertainty of a squared length.
func (w *work) lengthU() float64 {
	u := 0.0
	for _, in := range w.phys.influences {
		u = math.Hypot(u, 2*in.length)
	}
	return u
}

// fitted makes the quantity of a parameter of the fit whose interval a leg holds. One that is not known to a factor of e
// is withheld.
func (w *work) fitted(value float64, leg int, weights relaxation.Parameters, sd, total, length float64, unit string) Quantity {
	if sd > 2*hopeless {
		return Withheld(unit, tooUncertain(sd))
	}
	o := relaxation.Normal(sd)
	if w.has(leg) {
		o = w.legs.offsets[leg]
		if leg == amplitudeLeg {
			o = o.Mirrored()
		}
	}
	extra := math.Sqrt(math.Max(0, total*total-sd*sd) + length*length)
	return exponential(value, sd, o, math.Hypot(sd, extra), o.Widened(extra), unit)
}

func (w *work) noiseOrigin() string {
	switch {
	case !w.noise.Known:
		return "fitted"
	case w.background != nil:
		return "background and fitted"
	case w.noise.VarianceU > 0:
		return "stated and fitted"
	}
	return "stated"
}

func (w *work) describeNoise() {
	s := &w.axis.Spectrum
	q, scale := w.fit.NoiseQ, w.fit.Scale()
	sd, total := math.Sqrt(w.fit.Data[2][2])*scale, math.Sqrt(w.fit.Total[2][2])*scale
	s.NoiseOrigin = w.noiseOrigin()
	around := func(u float64) *Uncertainty {
		return &Uncertainty{Standard: Float(u), Interval68: [2]Float{Float(q - u), Float(q + u)}, Interval95: [2]Float{Float(q - z95*u), Float(q + z95*u)}}
	}
	s.NoiseVariance = Quantity{Value: Float(q), Unit: "m2", Statistical: around(sd), Combined: around(total)}
	if q > 0 && (q > 2*total || w.noise.Known) {
		root := math.Sqrt(q)
		bounds := func(u float64) *Uncertainty {
			low, high := math.Sqrt(math.Max(0, q-z95*u)), math.Sqrt(q+z95*u)
			return &Uncertainty{Standard: Float(u / (2 * root)),
				Interval68: [2]Float{Float(math.Sqrt(math.Max(0, q-u))), Float(math.Sqrt(q + u))}, Interval95: [2]Float{Float(low), Float(high)}}
		}
		s.Noise = Quantity{Value: Float(root), Unit: "m", Statistical: bounds(sd), Combined: bounds(total)}
		return
	}
	if w.noise.Known {
		s.Noise = Exact(math.Sqrt(math.Max(0, q)), "m")
		return
	}
	s.Noise = Withheld("m", "the noise floor is not above twice its uncertainty")
}

// leastSquares repeats the fit in closed form on blocks up to a quarter of the
// sampling rate, where aliasing is still small, as a check.
func (w *work) leastSquares() {
	s := &w.axis.Spectrum
	const bins = 20
	b := w.fit.Blocks
	var f, p []float64
	high := math.Min(0.25, 8*w.fit.Corner/w.rate)
	var weight, freq, power float64
	for i, n := range b.Weight {
		if b.Frequency[i] > high {
			break
		}
		weight += n
		freq += n * b.Frequency[i]
		power += n * b.Power[i]
		if weight >= bins {
			f = append(f, freq/weight*w.rate)
			p = append(p, power/weight/w.rate)
			weight, freq, power = 0, 0, 0
		}
	}
	if len(f) < 4 {
		s.LeastSquares.Reason = "too few frequencies below a quarter of the sampling rate"
		return
	}
	fc, d, err := psd.LeastSquares(f, p, bins)
	if err != nil {
		s.LeastSquares.Reason = err.Error()
		return
	}
	s.LeastSquares = LeastSquares{Corner: Float(fc), Diffusion: Float(d)}
}

func (w *work) spectrumCurves() {
	s := &w.axis.Spectrum
	points, used := w.fit.SpectrumPoints(w.record, spectrumPoints)
	for i, p := range points {
		s.Points = append(s.Points, SpectrumPoint{Frequency: Float(p.Frequency), Power: Float(p.Power), Standard: Float(p.Standard),
			Model: Float(p.Model), Residual: Float(p.Residual), Bins: p.Bins, Used: used[i]})
	}
	const steps = 200
	low, high := w.rate/float64(w.record.Length), w.rate/2
	for i := 0; i <= steps; i++ {
		f := low * math.Pow(high/low, float64(i)/steps)
		s.Model = append(s.Model, Point{X: Float(f), Y: Float(w.fit.Spectrum(f))})
	}
}

func (w *work) describeEquipartition() {
	e, eq := &w.axis.Equipartition, w.legs.eq
	s2 := w.record.MeanSquare()
	e.RawVariance = Float(s2)
	e.BlurFactor, e.NoiseShare, e.LengthFactor, e.EffectiveN = Float(eq.Blur), Float(eq.NoiseShare), Float(eq.Length), Float(eq.Effective)
	if eq.Effective == 0 {
		nan := Float(math.NaN())
		e.BlurFactor, e.NoiseShare, e.LengthFactor, e.EffectiveN = nan, nan, nan, nan
	}
	if w.has(equipartitionLeg) {
		o := w.legs.offsets[equipartitionLeg].Mirrored()
		extra := math.Sqrt(math.Max(0, w.legs.total[equipartitionLeg][equipartitionLeg]-w.legs.stat[equipartitionLeg][equipartitionLeg]))
		e.Variance = exponential(math.Log(eq.Variance), eq.SD, o, math.Hypot(eq.SD, extra), o.Widened(extra), "m2")
	} else {
		e.Variance = Withheld("m2", w.legs.reason[equipartitionLeg])
	}
	e.Potential = w.potential(math.Sqrt(s2), eq.Effective)
}

func (w *work) potential(sigma, effective float64) Potential {
	if !(effective > 0) {
		effective = float64(w.record.Observed())
	}
	process, _, _, _ := w.bestProcess()
	var q equipartition.Potential
	if w.gathered != nil {
		q = w.gathered.histogram.Scaled(w.unit).Potential(sigma, effective, process.Decay())
	} else {
		q = equipartition.NewPotential(w.record.X, sigma, effective, process.Decay())
	}
	p := Potential{BinWidth: Float(q.Width), Gaussian: [2]Float{0, Float(sigma)},
		Curvature:  around(q.Curvature*w.phys.kT, q.CurvatureSD*w.phys.kT, "N/m"),
		Anharmonic: around(q.ExcessKurtosis, q.ExcessKurtosisSD, "1"), Skewness: around(q.Skewness, q.SkewnessSD, "1")}
	for _, b := range q.Bins {
		p.Bins = append(p.Bins, HistogramBin{Centre: Float(b.Centre), Count: b.Count, Density: Float(b.Density), Energy: Float(b.Energy), EnergyU: Float(b.EnergyU)})
	}
	return p
}

// around makes a quantity with a normal statistical uncertainty.
func around(value, sd float64, unit string) Quantity {
	return Quantity{Value: Float(value), Unit: unit, Statistical: &Uncertainty{Standard: Float(sd),
		Interval68: [2]Float{Float(value - sd), Float(value + sd)}, Interval95: [2]Float{Float(value - z95*sd), Float(value + z95*sd)}}}
}

func (w *work) describeDisplacement() {
	d, m := &w.axis.Displacement, w.legs.msd
	nan := Float(math.NaN())
	d.Goodness = Goodness{ChiSquare: nan, PValue: nan}
	if m == nil {
		reason := w.legs.reason[displacementLeg]
		d.Plateau, d.RelaxationTime = Withheld("m2", reason), Withheld("s", reason)
		return
	}
	d.Plateau = Withheld("m2", w.legs.reason[displacementLeg])
	if w.has(displacementLeg) {
		o := w.legs.offsets[displacementLeg].Mirrored()
		sd := math.Sqrt(m.Covariance[1][1])
		extra := math.Sqrt(math.Max(0, w.legs.total[displacementLeg][displacementLeg]-w.legs.stat[displacementLeg][displacementLeg]))
		d.Plateau = exponential(math.Log(2*m.Variance), sd, o, math.Hypot(sd, extra), o.Widened(extra), "m2")
	}
	d.RelaxationTime = Withheld("s", w.legs.reason[timeLeg])
	if w.has(timeLeg) {
		o := w.legs.offsets[timeLeg].Mirrored()
		sd := math.Sqrt(m.Covariance[0][0])
		noise := math.Abs(w.legs.grad[timeLeg][len(w.phys.influences)])
		d.RelaxationTime = exponential(-math.Log(2*math.Pi*m.Corner), sd, o, math.Hypot(sd, noise), o.Widened(noise), "s")
	}
	d.Goodness = Goodness{ChiSquare: Float(m.ChiSquare), DegreesOfFreedom: m.DegreesOfFreedom, PValue: Float(m.PValue)}
	dt := 1 / w.rate
	p := relaxation.Process{Corner: m.Corner, Variance: m.Variance, Noise: m.NoiseQ, Interval: dt, Exposure: w.exposure}
	for _, q := range m.Points {
		d.Points = append(d.Points, MSDPoint{Lag: Float(float64(q.Lag) * dt), MSD: Float(q.MSD), Standard: Float(q.Standard), Model: Float(q.Model), Used: true})
	}
	const steps = 120
	last := float64(m.Points[len(m.Points)-1].Lag)
	for i := 0; i <= steps; i++ {
		lag := math.Pow(last, float64(i)/steps)
		d.Model = append(d.Model, Point{X: Float(lag * dt), Y: Float(p.MSDCurve(lag))})
	}
}

// traceSteps is the number of stretches of the decimated trace.
const traceSteps = 500

// trace keeps minimum and maximum of consecutive stretches of the recorded positions.
func (w *work) trace() Trace {
	if w.gathered != nil {
		return w.gatheredTrace()
	}
	x := w.recorded.Values
	n := min(traceSteps, len(x))
	t := Trace{Start: Float(w.start), Step: Float(float64(len(x)) / float64(n) / w.rate), Low: make([]Float, n), High: make([]Float, n)}
	if w.unscaled && w.unit == 1 {
		t.Unit = w.recorded.Unit
	}
	stretch := func(i int) {
		low, high := math.Inf(1), math.Inf(-1)
		for _, v := range x[i*len(x)/n : (i+1)*len(x)/n] {
			if v < low {
				low = v
			}
			if v > high {
				high = v
			}
		}
		t.Low[i], t.High[i] = Float(low*w.unit), Float(high*w.unit)
		if low > high {
			t.Low[i], t.High[i] = Float(math.NaN()), Float(math.NaN())
		}
	}
	if len(x) < longRecord {
		for i := range n {
			stretch(i)
		}
		return t
	}
	transform.Each(n, func(next func() (int, bool)) {
		for i, ok := next(); ok; i, ok = next() {
			stretch(i)
		}
	})
	return t
}
