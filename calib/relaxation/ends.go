package relaxation

import "math"

// Ends holds the two ends of a record, for the factor that opens the ring.
//
// On a ring of N samples the latent process z (variance V B, decay c) has one
// link more than on a line: the one from z_{N-1} back to z_0. Hence
//
//	p_ring(y) = p_line(y) E[ N(z_0; c z_{N-1}, Q) / N(z_0; 0, V B) | y ],
//
// Q = V B (1-c^2), where the expectation is over the posterior of (z_0, z_{N-1}) on
// the line. Up to exp(-2 pi fc T) that posterior is the product of the two
// stationary filtered states, Gaussian with the variance F and the means m_0 and m_N
// that exponential averages from either end give, and the integral is elementary.
// The derivation is ours (docs/method.md, Eqs 14 to 17); the idea that a boundary term turns the Whittle form into
// the Gaussian likelihood is that of Subba Rao and Yang, Ann. Stat. 49 (2021) 2762.
type Ends struct {
	head, tail []float64 // first samples in order, last samples in reverse order
	weight     float64   // number of records that these ends stand for, less one
}

// Scaled returns the ends of the record times a factor.
func (e Ends) Scaled(factor float64) Ends {
	out := Ends{head: make([]float64, len(e.head)), tail: make([]float64, len(e.tail)), weight: e.weight}
	for i, v := range e.head {
		out.head[i], out.tail[i] = v*factor, e.tail[i]*factor
	}
	return out
}

// Weighted returns ends that stand for a number of records.
func (e Ends) Weighted(records float64) Ends {
	e.weight = records - 1
	return e
}

// endLength bounds what is kept of either end.
const endLength = 1 << 15

// NewEnds copies the ends of a record x [m] from which mean and line were removed.
func NewEnds(x []float64) Ends { return ShortEnds(x, endLength) }

// ShortEnds is NewEnds with no more than most samples of either end. Those beyond some forty
// relaxation times count for nothing.
func ShortEnds(x []float64, most int) Ends {
	m := min(len(x)/2, most)
	e := Ends{head: append([]float64(nil), x[:m]...), tail: make([]float64, m)}
	for i := range e.tail {
		e.tail[i] = x[len(x)-1-i]
	}
	return e
}

// filter is the stationary Kalman filter of the recorded process.
type filter struct {
	gain, memory float64 // K and c (1-K): m_t = memory m_{t-1} + K y_t
	variance     float64 // of the filtered state, F [m2]
	innovation   float64 // variance of the one-step innovation [m2]
	ok           bool
}

// stationary solves the scalar Riccati equation P = c^2 P R/(P+R) + Q. The "noise"
// R = V (S-B) + q may be negative, since blur anticorrelates; the algebra is the
// same as long as the covariance matrix of the record is positive definite.
func stationary(c, vb, white float64) filter {
	q := vb * (1 - c*c)
	half := (white*(1-c*c) - q) / 2
	disc := half*half + q*white
	if disc < 0 {
		return filter{}
	}
	// the larger root, without cancellation
	root := math.Sqrt(disc)
	p := root - half
	if half > 0 {
		p = q * white / (root + half)
		if white == 0 {
			p = q
		}
	}
	f := p + white
	if !(f > 0) {
		return filter{}
	}
	k := p / f
	return filter{gain: k, memory: c * (1 - k), variance: white * k, innovation: f, ok: true}
}

// average runs the exponential average from the far samples towards the first.
func (f filter) average(x []float64) float64 {
	n := len(x)
	if m := math.Abs(f.memory); m < 1 && m > 0 {
		if need := int(-37/math.Log(m)) + 2; need < n { // exp(-37) = 1e-16
			n = need
		}
	} else if m == 0 {
		n = min(1, n)
	}
	s := 0.0
	for i := n - 1; i >= 0; i-- {
		s = f.memory*s + f.gain*x[i]
	}
	return s
}

// logRatio returns ln p_line(y) - ln p_ring(y); ok is false where the parameters
// are outside the domain.
func (e Ends) logRatio(sh shape, v, q float64) (value float64, ok bool) {
	vb := sh.pole * v / (1 - sh.c*sh.c)
	f := stationary(sh.c, vb, v*sh.level+q)
	if !f.ok {
		return 0, false
	}
	m0, mn := f.average(e.head), f.average(e.tail)
	link := vb * (1 - sh.c*sh.c)
	g00, g01, g11 := 1/link-1/vb, -sh.c/link, sh.c*sh.c/link
	a00, a01, a11 := 1+f.variance*g00, f.variance*g01, 1+f.variance*g11
	det := a00*a11 - a01*a01
	if !(det > 0) {
		return 0, false
	}
	h0, hn := g00*m0+g01*mn, g01*m0+g11*mn
	// m' A^-1 G m
	quad := (m0*(a11*h0-a01*hn) + mn*(a00*hn-a01*h0)) / det
	logE := -quad/2 - math.Log(det)/2 - math.Log1p(-sh.c*sh.c)/2
	return -logE, true
}

// EndExcess returns how much the step from the last sample of a record back to its
// first exceeds a step of the process: the squared innovation over its variance, less one. The
// periodogram takes the record for a ring; the relaxing part of its expectation, given the
// two ends, is (1 + EndExcess/N) times the spectrum, which is the leakage of the record. x [m] has mean and
// drift removed; NaN within the ends gives 0.
func (p Process) EndExcess(x []float64) float64 { return p.ExcessOf(NewEnds(x)) }

// ExcessOf is EndExcess for the ends of a record.
func (p Process) ExcessOf(e Ends) float64 {
	b, _ := BlurCovariance(2 * math.Pi * p.Corner * p.Exposure)
	c, vb := p.Decay(), p.Variance*b
	f := stationary(c, vb, p.RecordedVariance()-vb)
	d := f.average(e.head) - c*f.average(e.tail)
	link := vb * (1 - c*c)
	// the filtered states are uncertain: their variance is part of the squared step
	excess := (d*d+f.variance*(1+c*c))/link - 1
	if !f.ok || math.IsNaN(excess) {
		return 0
	}
	return excess
}

// Floor returns the part of P/dt [m2] that does not depend on frequency: noise, less
// what the exposure takes from neighbouring samples' correlation.
func (p Process) Floor() float64 {
	b, _ := BlurCovariance(2 * math.Pi * p.Corner * p.Exposure)
	return p.RecordedVariance() - p.Variance*b
}
