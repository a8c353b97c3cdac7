package relaxation

import (
	"errors"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Prior is independent knowledge of one linear combination of the Parameters:
// Weights . p is normal with the given mean and standard deviation.
type Prior struct {
	Weights Parameters
	Mean    float64
	SD      float64 // > 0
}

// Problem is a likelihood with what else is known.
type Problem struct {
	Likelihood Likelihood
	Directions []Parameters // directions in which to search; nil: all three
	Priors     []Prior
	// NonNegative keeps the noise at zero or above. Directions must then contain {0, 0, 1}
	// alone for it.
	NonNegative bool

	gain float64 // of the log-likelihood at which the search ends; 0: settled
}

// Maximum is the point of greatest (penalised) likelihood.
type Maximum struct {
	At          Parameters
	Value       float64 // with the penalties of the priors
	Information Matrix  // Fisher information of the data alone, over all three parameters
	Iterations  int
	Converged   bool
}

// ErrNoMaximum tells that the search left the domain or did not settle.
var ErrNoMaximum = errors.New("the likelihood has no maximum inside the range of models")

// maxIterations is far above the 5 to 10 that a regular problem takes.
const maxIterations = 200

// settled is the expected gain in log-likelihood of a further step at which the
// search ends. Statistical precision is one half; 1e-10 leaves an error of 1e-5 standard
// errors.
const settled = 1e-10

// Start returns a point from which to search, given the noise variance that is
// known (m2; ignored if noiseFree).
func (pr Problem) Start(noise float64, noiseFree bool) Parameters {
	p := pr.Likelihood.Start(noise, noiseFree)
	if !noiseFree {
		p[2] = noise / pr.Likelihood.Scale()
	}
	return p
}

// Maximise searches from a point by Fisher scoring with step halving: each step
// solves (information + prior precision) step = gradient within the directions.
func (pr Problem) Maximise(from Parameters) (Maximum, error) {
	m := Maximum{At: from}
	here := pr.score(from)
	if math.IsInf(here.value, -1) || math.IsNaN(here.value) {
		return m, ErrNoMaximum
	}
	damping, enough := 0.0, settled
	if pr.gain > 0 {
		enough = pr.gain
	}
	for m.Iterations = 1; m.Iterations <= maxIterations; m.Iterations++ {
		step, gain, err := pr.within(m.At, here.grad).step(here.grad, here.info, damping)
		if err != nil {
			return m, ErrNoMaximum
		}
		if gain < enough {
			m.Converged = true
			break
		}
		at, next, better := pr.climb(m.At, step, here.value)
		if !better {
			if damping > 1e6 {
				m.Converged = gain < 1e-4
				break
			}
			damping = math.Max(1e-3, 10*damping)
			continue
		}
		damping /= 10
		if damping < 1e-6 {
			damping = 0
		}
		m.At, here = at, next
	}
	m.Value, m.Information = here.value, here.data
	if !m.Converged {
		return m, ErrNoMaximum
	}
	return m, nil
}

// within leaves out the direction of the noise where it lies at zero and the likelihood
// would rise below.
func (pr Problem) within(at, grad Parameters) Problem {
	if !pr.NonNegative || at[2] > 0 || grad[2] > 0 {
		return pr
	}
	inner := pr
	inner.Directions = []Parameters{}
	for _, u := range pr.directions() {
		if u != (Parameters{0, 0, 1}) {
			inner.Directions = append(inner.Directions, u)
		}
	}
	return inner
}

// numeric is a likelihood whose score takes several times as long as its value, and longer for each direction.
type numeric interface {
	ScoreAlong(Parameters, []Parameters) (float64, Parameters, Matrix)
}

// climb halves the step until the value rises; steps are bounded to one e-fold in
// the logarithms first. It returns the point and the score there.
func (pr Problem) climb(at, step Parameters, value float64) (Parameters, scored, bool) {
	scale := 1.0
	if big := math.Max(math.Abs(step[0]), math.Abs(step[1])); big > 1 {
		scale = 1 / big
	}
	_, slow := pr.Likelihood.(numeric)
	for try := range 30 {
		next := at
		for a := range next {
			next[a] += scale * step[a]
		}
		if pr.NonNegative {
			next[2] = math.Max(0, next[2])
		}
		// the first step is nearly always the one that is taken
		if try == 0 && !slow {
			if s := pr.score(next); s.value > value {
				return next, s, true
			}
		} else if pr.Value(next) > value {
			return next, pr.score(next), true
		}
		scale /= 2
	}
	return at, scored{}, false
}

// Value returns the log-likelihood less the penalties of the priors.
func (pr Problem) Value(p Parameters) float64 {
	v := pr.Likelihood.Value(p)
	for _, q := range pr.Priors {
		z := (q.Weights.dot(p) - q.Mean) / q.SD
		v -= z * z / 2
	}
	return v
}

// scored is a point with its derivatives.
type scored struct {
	value float64 // with the penalties of the priors
	grad  Parameters
	info  Matrix // with the precision of the priors
	data  Matrix // without
}

func (pr Problem) score(p Parameters) scored {
	var s scored
	if l, ok := pr.Likelihood.(numeric); ok {
		s.value, s.grad, s.data = l.ScoreAlong(p, pr.directions())
	} else {
		s.value, s.grad, s.data = pr.Likelihood.Score(p)
	}
	s.info = s.data
	for _, q := range pr.Priors {
		z := (q.Weights.dot(p) - q.Mean) / q.SD
		s.value -= z * z / 2
		for a := range s.grad {
			s.grad[a] -= z * q.Weights[a] / q.SD
			for b := range s.grad {
				s.info[a][b] += q.Weights[a] * q.Weights[b] / (q.SD * q.SD)
			}
		}
	}
	return s
}

func (p Parameters) dot(q Parameters) float64 { return p[0]*q[0] + p[1]*q[1] + p[2]*q[2] }

var allDirections = []Parameters{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}

func (pr Problem) directions() []Parameters {
	if pr.Directions == nil {
		return allDirections
	}
	return pr.Directions
}

// step returns the scoring step and the gain in log-likelihood that a parabola
// promises for it.
func (pr Problem) step(grad Parameters, info Matrix, damping float64) (Parameters, float64, error) {
	u := pr.directions()
	n := len(u)
	if n == 0 {
		return Parameters{}, 0, nil
	}
	a := mat.NewSymDense(n, nil)
	b := mat.NewVecDense(n, nil)
	for i := range u {
		b.SetVec(i, u[i].dot(grad))
		for j := i; j < n; j++ {
			v := info.Form(u[i], u[j])
			if i == j {
				v *= 1 + damping
			}
			a.SetSym(i, j, v)
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(a) {
		for i := range n {
			a.SetSym(i, i, a.At(i, i)*(1+1e-9))
		}
		if !chol.Factorize(a) {
			return Parameters{}, 0, ErrNoMaximum
		}
	}
	var z mat.VecDense
	if err := chol.SolveVecTo(&z, b); err != nil {
		var cond mat.Condition
		if !errors.As(err, &cond) {
			return Parameters{}, 0, ErrNoMaximum
		}
	}
	var step Parameters
	for i := range u {
		for k := range step {
			step[k] += z.AtVec(i) * u[i][k]
		}
	}
	return step, mat.Dot(&z, b) / 2, nil
}

// Form returns u' M v.
func (m Matrix) Form(u, v Parameters) float64 {
	s := 0.0
	for a := range u {
		for b := range v {
			s += u[a] * m[a][b] * v[b]
		}
	}
	return s
}

// Covariance returns the inverse of information plus prior precision within the
// directions, as a covariance over all three parameters (zero outside the
// directions), and the part of it that comes from the data: with C the inverse and
// F the information of the data, that part is C F C, and the rest is due to the priors
// (docs/method.md, Eq. 20).
func (pr Problem) Covariance(info Matrix) (total, data Matrix, err error) {
	u := pr.directions()
	n := len(u)
	a := mat.NewSymDense(n, nil)
	f := mat.NewSymDense(n, nil)
	for i := range u {
		for j := i; j < n; j++ {
			v := info.Form(u[i], u[j])
			f.SetSym(i, j, v)
			for _, q := range pr.Priors {
				v += q.Weights.dot(u[i]) * q.Weights.dot(u[j]) / (q.SD * q.SD)
			}
			a.SetSym(i, j, v)
		}
	}
	// scale to a unit diagonal: variances and noise shares differ by orders
	d := make([]float64, n)
	for i := range d {
		if !(a.At(i, i) > 0) {
			return total, data, ErrNoMaximum
		}
		d[i] = 1 / math.Sqrt(a.At(i, i))
	}
	for i := range n {
		for j := i; j < n; j++ {
			a.SetSym(i, j, a.At(i, j)*d[i]*d[j])
		}
	}
	var chol mat.Cholesky
	var inv mat.SymDense
	if !chol.Factorize(a) || chol.Cond() > 1e13 || chol.InverseTo(&inv) != nil {
		return total, data, ErrNoMaximum
	}
	for i := range n {
		for j := i; j < n; j++ {
			inv.SetSym(i, j, inv.At(i, j)*d[i]*d[j])
		}
	}
	var cf, cfc mat.Dense
	cf.Mul(&inv, f)
	cfc.Mul(&cf, &inv)
	for i := range u {
		for j := range u {
			for p := range total {
				for q := range total {
					total[p][q] += u[i][p] * inv.At(i, j) * u[j][q]
					data[p][q] += u[i][p] * cfc.At(i, j) * u[j][q]
				}
			}
		}
	}
	return total, data, nil
}
