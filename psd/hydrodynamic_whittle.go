package psd

import (
	"math"
	"sync"
	"sync/atomic"

	"beadwell/calib/relaxation"
)

// whittle is the likelihood of a hydrodynamic spectrum.
type whittle struct {
	blocks  relaxation.Blocks
	lattice *lattice
	model   *model
	scale   float64
	recent  atomic.Pointer[curve] // what Density was asked for last
	spare   sync.Pool             // of *expected, with leakage, to be filled in again
}

func newWhittle(l *lattice, b relaxation.Blocks, scale float64) *whittle {
	return &whittle{blocks: b, lattice: l, scale: scale}
}

// Scale returns the unit of variance [m2].
func (w *whittle) Scale() float64 { return w.scale }

// The domain of the search, that of package relaxation: corner frequencies in units of the
// sampling rate, and logarithms of the variance.
const (
	lowestCorner  = 1e-9
	highestCorner = 3.0
	largestLog    = 60
)

func inDomain(p relaxation.Parameters) bool {
	x := math.Exp(p[0])
	return x > lowestCorner && x < highestCorner && math.Abs(p[1]) < largestLog && !math.IsNaN(p[2])
}

// expected is the mean of the blocked periodogram for V = 1 and q = 0, and its
// derivative with respect to ln fc.
type expected struct {
	value, slope []float64
	jump, djump  []float64 // what a chance of 1 in the ends adds, see settle; nil without leakage
}

// expected evaluates a model, with the leakage of a finite record or without.
func (w *whittle) expected(m *model, x float64, finite bool) *expected {
	c := newClosed(x, w.lattice.exposure)
	f := m.fold(x)
	e := w.blank(finite)
	for i, sigma := range w.blocks.Sigma {
		d := c.gap + c.decay*sigma
		dd := c.dgap + c.ddecay*sigma
		// The mean over a block to second order in its width, as that of 1/d.
		r := c.decay * c.decay * w.blocks.SigmaVar[i] / (d * d)
		dr := 2 * r * (c.ddecay/c.decay - dd/d)
		own, down := m.blocks[i].at(x)
		other, dother := f.at(&w.lattice.rows[i])
		inner := m.prompt*c.pole/d + own
		dinner := m.prompt*(c.dpole/d-c.pole*dd/(d*d)) + down
		e.value[i] = inner*(1+r) + m.prompt*c.level + other
		e.slope[i] = dinner*(1+r) + inner*dr + m.prompt*c.dlevel + dother
		if finite {
			v, s := c.leakage(w.lattice.turns[i], w.blocks.Samples)
			e.value[i] += v
			e.slope[i] += s
			e.jump[i], e.djump[i] = c.jump(d, dd, w.blocks.Samples)
		}
	}
	return e
}

// blank is an expectation to be filled in, one that was given back where there is one.
func (w *whittle) blank(finite bool) *expected {
	if e, ok := w.spare.Get().(*expected); ok && finite {
		return e
	}
	n := len(w.blocks.Sigma)
	e := &expected{value: make([]float64, n), slope: make([]float64, n)}
	if finite {
		e.jump, e.djump = make([]float64, n), make([]float64, n)
	}
	return e
}

// jumpVariance is the variance of the chance in the ends: the square of a normal
// deviate over its mean, less 1.
const jumpVariance = 2

const (
	settleSteps = 30
	settleGain  = 1e-12 // of the log-likelihood
)

// settle returns the log-likelihood at its best chance in the ends, and works that
// into the expectation.
//
// Leakage comes from the jump between the two ends of a record. Its mean square is part of the
// expectation; what chance makes of it in one record adds the same spectrum, (J^2 - E J^2)/(N |1-z|^2),
// to all frequencies, which shifts the amplitude by sqrt(2)/(2 pi fc T). For a record of
// few correlation times at a high rate that is more than the statistical error sqrt(2/N).
// It is fitted with its variance as prior knowledge, so that the uncertainties count it.
func (w *whittle) settle(p relaxation.Parameters, e *expected) float64 {
	v, q := w.scale*math.Exp(p[1]), w.scale*p[2]
	chance := 0.0
	for range settleSteps {
		grad, info := -chance/jumpVariance, 1.0/jumpVariance
		for i, weight := range w.blocks.Weight {
			m := v*e.value[i] + q
			if !(m > 0) {
				return math.Inf(-1)
			}
			s := v * e.jump[i] / m
			grad += weight * (w.blocks.Power[i]/m - 1) * s
			info += weight * s * s
		}
		step := grad / info
		if step*grad < settleGain {
			break
		}
		for i := range e.value { // all means stay positive
			if fall := v * e.jump[i] * step; fall < 0 {
				step = math.Max(step, -(v*e.value[i]+q)/(2*v*e.jump[i]))
			}
		}
		chance += step
		for i := range e.value {
			e.value[i] += step * e.jump[i]
			e.slope[i] += step * e.djump[i]
		}
	}
	sum := -chance * chance / (2 * jumpVariance)
	for i, weight := range w.blocks.Weight {
		m := v*e.value[i] + q
		if !(m > 0) {
			return math.Inf(-1)
		}
		sum -= weight * (math.Log(m/w.scale) + w.blocks.Power[i]/m)
	}
	return sum
}

// Value returns the log-likelihood.
func (w *whittle) Value(p relaxation.Parameters) float64 {
	if !inDomain(p) {
		return math.Inf(-1)
	}
	e := w.expected(w.model, math.Exp(p[0]), true)
	defer w.spare.Put(e)
	return w.settle(p, e)
}

// Score returns the log-likelihood, its gradient and the Fisher information
// sum w (d ln P)(d ln P)' (Whittle, Ark. Mat. 2 (1953) 423), less what is not known of the ends.
func (w *whittle) Score(p relaxation.Parameters) (float64, relaxation.Parameters, relaxation.Matrix) {
	if !inDomain(p) {
		return math.Inf(-1), relaxation.Parameters{}, relaxation.Matrix{}
	}
	e := w.expected(w.model, math.Exp(p[0]), true)
	defer w.spare.Put(e)
	value := w.settle(p, e)
	if math.IsInf(value, -1) {
		return value, relaxation.Parameters{}, relaxation.Matrix{}
	}
	d := w.derive(p, e, nil)
	return value, d.own(), d.ownInfo()
}

// derived are the derivatives of a settled log-likelihood: of the three parameters, and of up
// to two more.
type derived struct {
	grad [5]float64
	info [5][5]float64
}

func (d *derived) own() relaxation.Parameters { return relaxation.Parameters(d.grad[:3]) }

func (d *derived) ownInfo() (m relaxation.Matrix) {
	for a := range m {
		copy(m[a][:], d.info[a][:3])
	}
	return m
}

// derive takes a settled expectation, and the derivatives of the mean for V = 1 with
// respect to further parameters.
func (w *whittle) derive(p relaxation.Parameters, e *expected, further []*expected) *derived {
	var r derived
	var ends [5]float64
	endsInfo := 1.0 / jumpVariance
	v, q := w.scale*math.Exp(p[1]), w.scale*p[2]
	n := 3 + len(further)
	for i, weight := range w.blocks.Weight {
		m := v*e.value[i] + q
		d := [5]float64{v * e.slope[i] / m, v * e.value[i] / m, w.scale / m}
		for k, f := range further {
			d[3+k] = v * f.value[i] / m
		}
		s := v * e.jump[i] / m
		excess := weight * (w.blocks.Power[i]/m - 1)
		endsInfo += weight * s * s
		for a := range n {
			r.grad[a] += excess * d[a]
			ends[a] += weight * s * d[a]
			for b := range n {
				r.info[a][b] += weight * d[a] * d[b]
			}
		}
	}
	for a := range n {
		for b := range n {
			r.info[a][b] -= ends[a] * ends[b] / endsInfo
		}
	}
	return &r
}

// Start returns where the relaxation process fits best on a coarse net.
func (w *whittle) Start(noise float64, noiseFree bool) relaxation.Parameters {
	return relaxation.NewSpectral(w.blocks, nil, w.lattice.exposure, w.scale).Start(noise, noiseFree)
}

// Density returns the one-sided spectrum of the samples [m2/Hz] at f [Hz], from 0 to
// half the sampling rate: with detector, exposure, aliases and noise.
func (w *whittle) Density(p relaxation.Parameters, hz float64) float64 {
	return w.density(w.model, p, hz)
}

func (w *whittle) density(m *model, p relaxation.Parameters, hz float64) float64 {
	x := math.Exp(p[0])
	c := w.recent.Load()
	if c == nil || c.corner != x || c.model != m {
		c = &curve{model: m, corner: x, closed: newClosed(x, w.lattice.exposure), aliases: m.fold(x).coefficients()}
		w.recent.Store(c)
	}
	l := w.lattice
	phi := hz / l.rate
	half := math.Sin(math.Pi * phi)
	t := m.term(l.at(phi, false, 1))
	own, _ := t.at(x)
	unit := m.prompt*(c.closed.pole/(c.closed.gap+4*c.closed.decay*half*half)+c.closed.level) + own + series(&c.aliases, phi)
	return 2 * (w.scale*math.Exp(p[1])*unit + w.scale*p[2]) / l.rate
}

// curve is what Density needs at one corner x.
type curve struct {
	model   *model
	corner  float64
	closed  closed
	aliases [aliasNodes]float64
}

// closed holds what the spectrum of the relaxation process needs at one corner
// frequency: with c = exp(-2 pi fc dt), d = (1-c)^2 + c sigma, sigma = 4 sin^2(pi f dt), and a = 2 pi fc W
//
//	P/dt = V [B (1-c^2)/d + S - B],
//
// S and B those of relaxation.BlurVariance and BlurCovariance. Derivatives are with
// respect to ln fc.
type closed struct {
	step           float64 // 2 pi fc dt
	decay, ddecay  float64 // c
	fall           float64 // 1 - c
	gap, dgap      float64 // (1-c)^2
	pole, dpole    float64 // B (1-c^2)
	level, dlevel  float64 // S - B
	correl, dcorel float64 // B
}

// newClosed takes fc dt and W/dt.
func newClosed(x, exposure float64) closed {
	rho := 2 * math.Pi * x
	a := rho * exposure
	s, ds := relaxation.BlurVariance(a)
	b, db := relaxation.BlurCovariance(a)
	c := closed{step: rho, decay: math.Exp(-rho), fall: -math.Expm1(-rho), correl: b, dcorel: a * db}
	c.ddecay = -rho * c.decay
	c.gap, c.dgap = c.fall*c.fall, -2*c.fall*c.ddecay
	two := -math.Expm1(-2 * rho)
	c.pole, c.dpole = b*two, a*db*two-2*b*c.decay*c.ddecay
	c.level, c.dlevel = s-b, a*(ds-db)
	return c
}

// leakage returns by how much the mean periodogram of n samples differs from the
// spectrum, for V = 1, and the derivative with respect to ln fc: with z = c exp(2 pi i f dt)
//
//	-(2 B/n) Re[z (1 - c^n)/(1 - z)^2],
//
// the exact mean periodogram of the sampled relaxation process. turn = 1 - exp(2 pi i f dt).
func (c *closed) leakage(turn complex128, n int) (value, slope float64) {
	decay := complex(c.decay, 0)
	rest := complex(c.fall, 0) + decay*turn // 1 - z
	z := decay * (1 - turn)
	// the inverse by hand: the division of complex numbers guards against ranges that are not met here, and takes five times as long
	square := real(rest)*real(rest) + imag(rest)*imag(rest)
	inverse := complex(real(rest)/square, -imag(rest)/square)
	u := z * inverse * inverse
	du := complex(-c.step, 0) * u * (1 + z) * inverse
	span := c.step * float64(n)
	left := -math.Expm1(-span)
	by := -2 / float64(n)
	value = by * c.correl * left * real(u)
	slope = by * (c.dcorel*left*real(u) + c.correl*span*math.Exp(-span)*real(u) + c.correl*left*real(du))
	return value, slope
}

// jump returns the mean square of the jump between the ends over n |1 - z|^2, for V = 1, and
// its derivative: (1 + c^2) B/(n d).
func (c *closed) jump(d, dd float64, n int) (value, slope float64) {
	square := 1 + c.decay*c.decay
	value = square * c.correl / (float64(n) * d)
	slope = (2*c.decay*c.ddecay*c.correl+square*c.dcorel)/(float64(n)*d) - value*dd/d
	return value, slope
}
