package relaxation

import "math"

// Exact is the Gaussian likelihood of a record in the time domain, by the
// innovations of a Kalman filter; missing samples are skipped.
type Exact struct {
	x        []float64 // NaN: missing
	trend    int       // number of removed directions: 0, 1 (mean), 2 (mean and line)
	restrict bool
	exposure float64
	scale    float64
	observed int
	grid     Blocks // frequencies over which the Fisher information is summed
	rough    Blocks // spectrum to start from
}

// NewExact prepares the likelihood of the positions x [m], NaN where a sample is
// missing; x is retained and not modified. Exposure is W/dt and scale a rough
// variance [m2]. The removed directions are estimated by generalised least squares;
// with restrict their degrees of freedom are accounted for (Patterson and Thompson,
// Biometrika 58 (1971) 545), without it the plain likelihood is maximised over them.
func NewExact(x []float64, removed Removed, restrict bool, exposure, scale float64) *Exact {
	e := &Exact{x: x, trend: int(removed), restrict: restrict, exposure: exposure, scale: scale}
	for _, v := range x {
		if !math.IsNaN(v) {
			e.observed++
		}
	}
	n := e.observed
	flat := make([]float64, n/2+1)
	e.grid = NewBlocks(flat, n, removed == RemovedLine, nil)
	return e
}

// Scale returns the unit of variance [m2].
func (e *Exact) Scale() float64 { return e.scale }

// RelaxationProcess marks the likelihoods of the relaxation process itself.
func (e *Exact) RelaxationProcess() {}

// Value returns the log-likelihood.
func (e *Exact) Value(p Parameters) float64 {
	if !inDomain(p) {
		return math.Inf(-1)
	}
	sh := newShape(math.Exp(p[0]), e.exposure)
	v, q := e.scale*math.Exp(p[1]), e.scale*p[2]
	s, ok := e.run(sh, v, q)
	if !ok {
		return math.Inf(-1)
	}
	return s.logLikelihood(e.trend, e.restrict)
}

// LogLikelihood returns the full log-likelihood, constant included, of positions in
// their own unit: -(N ln 2 pi + ln|C| + residual sum)/2.
func (e *Exact) LogLikelihood(p Parameters) float64 {
	return e.Value(p) - float64(e.observed)/2*(math.Log(2*math.Pi)+math.Log(e.scale))
}

// sums are weighted sums over the innovations of the record (y) and of the
// regressors (1 and t).
type sums struct {
	logF                    float64
	yy, y1, yt, one, mix, t float64
}

// run filters the record and both regressors at once. The "noise" variance may be
// negative (blur); what must be positive is the innovation variance.
func (e *Exact) run(sh shape, v, q float64) (sums, bool) {
	c := sh.c
	vb := sh.pole * v / (1 - c*c) / e.scale
	white := (v*sh.level + q) / e.scale
	link := vb * (1 - c*c)
	unit := 1 / math.Sqrt(e.scale)
	mid, step := float64(len(e.x)-1)/2, 2/math.Max(1, float64(len(e.x)-1))
	var s sums
	var ay, a1, at float64
	p := vb
	product, inv := 1.0, 0.0
	k, f := 0.0, 0.0
	steady := false
	for i, x := range e.x {
		if math.IsNaN(x) {
			ay, a1, at = c*ay, c*a1, c*at
			p = c*c*p + link
			steady = false
			continue
		}
		if !steady {
			f = p + white
			if !(f > 0) {
				return s, false
			}
			k, inv = p/f, 1/f
			next := c*c*p*(1-k) + link
			steady = math.Abs(next-p) <= 1e-15*math.Abs(p)
			p = next
		}
		vy := x*unit - ay
		v1 := 1 - a1
		vt := (float64(i)-mid)*step - at
		product *= f
		if product < 1e-250 || product > 1e250 {
			s.logF += math.Log(product)
			product = 1
		}
		s.yy += vy * vy * inv
		s.y1 += vy * v1 * inv
		s.yt += vy * vt * inv
		s.one += v1 * v1 * inv
		s.mix += v1 * vt * inv
		s.t += vt * vt * inv
		ay, a1, at = c*(ay+k*vy), c*(a1+k*v1), c*(at+k*vt)
	}
	s.logF += math.Log(product)
	return s, true
}

// Innovations returns, for every sample of x [m] that is not NaN, its difference from what the samples before it
// predict, over the standard deviation of that: white, of variance 1, for the process itself, whatever is missing
// between them (Kalman, J. Basic Eng. 82 (1960) 35; Kailath, IEEE Trans. Autom. Control 13 (1968) 646). The mean of x must
// have been taken off. It returns nil where the process is impossible.
func (p Process) Innovations(x []float64) []float64 {
	sh := newShape(p.Corner*p.Interval, p.relativeExposure())
	c := sh.c
	vb := sh.pole * p.Variance / (1 - c*c)
	white, link := p.Variance*sh.level+p.Noise, vb*(1-c*c)
	out := make([]float64, 0, len(x))
	at, spread := 0.0, vb // the state before a sample: its mean and variance
	for _, v := range x {
		if math.IsNaN(v) {
			at, spread = c*at, c*c*spread+link
			continue
		}
		f := spread + white
		if !(f > 0) {
			return nil
		}
		gain := spread / f
		out = append(out, (v-at)/math.Sqrt(f))
		at = c * (at + gain*(v-at))
		spread = c*c*spread*(1-gain) + link
	}
	return out
}

func (s sums) logLikelihood(trend int, restrict bool) float64 {
	rest, logInfo := s.yy, 0.0
	if trend >= 1 {
		rest -= s.y1 * s.y1 / s.one
		logInfo += math.Log(s.one)
	}
	if trend == 2 {
		t := s.t - s.mix*s.mix/s.one
		yt := s.yt - s.y1*s.mix/s.one
		if t > 0 {
			rest -= yt * yt / t
			logInfo += math.Log(t)
		}
	}
	if !restrict {
		logInfo = 0
	}
	return -(s.logF + logInfo + rest) / 2
}

// Mean returns the generalised-least-squares mean [m] of the record at p.
func (e *Exact) Mean(p Parameters) float64 {
	sh := newShape(math.Exp(p[0]), e.exposure)
	s, ok := e.run(sh, e.scale*math.Exp(p[1]), e.scale*p[2])
	if !ok {
		return math.NaN()
	}
	if e.trend < 2 {
		return s.y1 / s.one * math.Sqrt(e.scale)
	}
	det := s.one*s.t - s.mix*s.mix
	return (s.t*s.y1 - s.mix*s.yt) / det * math.Sqrt(e.scale)
}

// Score returns the log-likelihood, its gradient by central differences and the
// Fisher information by the spectral sum over the observed number of samples.
func (e *Exact) Score(p Parameters) (float64, Parameters, Matrix) {
	return e.ScoreAlong(p, allDirections)
}

// ScoreAlong is Score with the gradient within some directions alone: each costs two values more.
func (e *Exact) ScoreAlong(p Parameters, directions []Parameters) (float64, Parameters, Matrix) {
	value := e.Value(p)
	if math.IsInf(value, -1) {
		return value, Parameters{}, Matrix{}
	}
	return value, gradientAlong(p, directions, e.Value), fisher(e.grid, e.exposure, e.scale, p)
}

// fisher returns the Fisher information sum w (d ln P)(d ln P)' over blocks.
func fisher(b Blocks, exposure, scale float64, p Parameters) Matrix {
	var f Matrix
	sh := newShape(math.Exp(p[0]), exposure)
	v, q := scale*math.Exp(p[1]), scale*p[2]
	for i, w := range b.Weight {
		m, dphi, dv := sh.grad(v, q, b.Sigma[i], b.SigmaVar[i])
		d := Parameters{dphi / m, dv / m, scale / m}
		for a := range d {
			for c := range d {
				f[a][c] += w * d[a] * d[c]
			}
		}
	}
	return f
}

// Start returns a point to search from, by a scan of corner frequencies.
func (e *Exact) Start(noise float64, noiseFree bool) Parameters {
	if len(e.rough.Weight) == 0 {
		e.rough = e.periodogram()
	}
	return startFromBlocks(e.rough, e.exposure, e.scale, noise, noiseFree)
}

// StartFrom gives a rough blocked spectrum to take starting values from, which saves
// the direct sums of a long record.
func (e *Exact) StartFrom(b Blocks) { e.rough = b }

// periodogram returns a rough blocked spectrum for starting values: direct sums at
// the block centres, missing samples taken as the mean.
func (e *Exact) periodogram() Blocks {
	b := e.grid
	b.Power = make([]float64, len(b.Weight))
	mean := 0.0
	for _, x := range e.x {
		if !math.IsNaN(x) {
			mean += x
		}
	}
	mean /= float64(max(1, e.observed))
	for i, f := range b.Frequency {
		b.Power[i] = goertzel(e.x, mean, f) / float64(max(1, e.observed))
	}
	return b
}

// goertzel returns |sum (x_j - mean) exp(-2 pi i f j)|^2 over the observed samples
// (Goertzel, Am. Math. Mon. 65 (1958) 34), f in cycles a sample.
func goertzel(x []float64, mean, f float64) float64 {
	w := 2 * math.Cos(2*math.Pi*f)
	var s1, s2 float64
	for _, v := range x {
		d := v - mean
		if math.IsNaN(d) {
			d = 0
		}
		s1, s2 = d+w*s1-s2, s1
	}
	return s1*s1 + s2*s2 - w*s1*s2
}
