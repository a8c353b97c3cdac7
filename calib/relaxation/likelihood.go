package relaxation

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// Parameters are the free quantities of a fit, in the scaled units in which the
// likelihood is close to a parabola:
//
//	[0] ln(fc dt),  [1] ln(V/scale),  [2] q/scale,
//
// where scale [m2] is a property of the Likelihood. The noise enters linearly and
// may be negative in a fit, so that its estimate is unbiased at zero.
type Parameters [3]float64

// Matrix is a symmetric matrix over Parameters.
type Matrix [3][3]float64

// Likelihood is the logarithm of a likelihood of one record.
type Likelihood interface {
	// Scale returns the unit of variance [m2] of the Parameters.
	Scale() float64
	// Value returns the log-likelihood up to a constant, -Inf outside the domain.
	Value(Parameters) float64
	// Score returns the log-likelihood, its gradient, and the Fisher information.
	Score(Parameters) (float64, Parameters, Matrix)
	// Start returns a point to search from.
	Start(noise float64, noiseFree bool) Parameters
}

// The domain of the search: corner frequencies in units of the sampling rate.
// Below, a record would hold no relaxation; above, exp(-2 pi 3) = 7e-9 of the
// correlation is left after one sample.
const (
	lowestCorner = 1e-9

	// HighestCorner is the end of the domain at which samples are independent of each other.
	HighestCorner = 3.0
)

func inDomain(p Parameters) bool {
	x := math.Exp(p[0])
	return x > lowestCorner && x < HighestCorner && math.Abs(p[1]) < 60 && !math.IsNaN(p[2])
}

// Spectral is the likelihood of a record without missing samples, in the form of
// its blocked periodogram and its two ends.
type Spectral struct {
	blocks   Blocks
	ends     []Ends // of each record; each opens a ring
	exposure float64
	scale    float64
}

// NewSpectral prepares the likelihood for a record whose samples are averages over
// the share exposure = W/dt of the sampling interval. Scale is a rough variance
// [m2]. If x is not nil it holds the record [m] from which mean and line were
// removed, and its ends are used; with nil the
// plain Whittle form remains, as is right when part of the band is left out.
func NewSpectral(b Blocks, x []float64, exposure, scale float64) *Spectral {
	if x == nil {
		return NewSpectralOf(b, nil, exposure, scale)
	}
	return NewSpectralOf(b, []Ends{NewEnds(x)}, exposure, scale)
}

// NewSpectralOf prepares the likelihood for any number of records of one length and process,
// taken as independent: b is the blocked mean of their periodograms, its weights those of
// all together. With no ends the plain Whittle form remains.
func NewSpectralOf(b Blocks, ends []Ends, exposure, scale float64) *Spectral {
	return &Spectral{blocks: b, ends: ends, exposure: exposure, scale: scale}
}

// Scale returns the unit of variance [m2].
func (s *Spectral) Scale() float64 { return s.scale }

// RelaxationProcess marks the likelihoods of the relaxation process itself.
func (s *Spectral) RelaxationProcess() {}

// Blocks returns the blocked periodogram behind the likelihood.
func (s *Spectral) Blocks() Blocks { return s.blocks }

// Value returns the log-likelihood.
func (s *Spectral) Value(p Parameters) float64 {
	if !inDomain(p) {
		return math.Inf(-1)
	}
	sh := newShape(math.Exp(p[0]), s.exposure)
	v, q := s.scale*math.Exp(p[1]), s.scale*p[2]
	sum := 0.0
	for i, w := range s.blocks.Weight {
		m := sh.at(v, q, s.blocks.Sigma[i], s.blocks.SigmaVar[i])
		if !(m > 0) {
			return math.Inf(-1)
		}
		sum -= w * (math.Log(m/s.scale) + s.blocks.Power[i]/m)
	}
	return sum + s.opening(sh, v, q)
}

func (s *Spectral) opening(sh shape, v, q float64) float64 {
	sum := 0.0
	for _, e := range s.ends {
		r, ok := e.logRatio(sh, v, q)
		if !ok {
			return math.Inf(-1)
		}
		sum += r * (1 + e.weight)
	}
	return sum
}

// Score returns the log-likelihood, its gradient and the Fisher information
// sum w (d ln P)(d ln P)' (Whittle 1953); the ends add a term of the order of
// one degree of freedom to the gradient and none to the information.
func (s *Spectral) Score(p Parameters) (float64, Parameters, Matrix) {
	var g Parameters
	var f Matrix
	if !inDomain(p) {
		return math.Inf(-1), g, f
	}
	sh := newShape(math.Exp(p[0]), s.exposure)
	v, q := s.scale*math.Exp(p[1]), s.scale*p[2]
	sum := 0.0
	for i, w := range s.blocks.Weight {
		m, dphi, dv := sh.grad(v, q, s.blocks.Sigma[i], s.blocks.SigmaVar[i])
		if !(m > 0) {
			return math.Inf(-1), g, f
		}
		ratio := s.blocks.Power[i] / m
		sum -= w * (math.Log(m/s.scale) + ratio)
		d := Parameters{dphi / m, dv / m, s.scale / m}
		r := w * (ratio - 1)
		for a := range d {
			g[a] += r * d[a]
			for b := 0; b <= a; b++ {
				f[a][b] += w * d[a] * d[b]
			}
		}
	}
	f[0][1], f[0][2], f[1][2] = f[1][0], f[2][0], f[2][1]
	if len(s.ends) > 0 {
		sum += s.opening(sh, v, q)
		ends := gradientAlong(p, allDirections, func(p Parameters) float64 {
			return s.opening(newShape(math.Exp(p[0]), s.exposure), s.scale*math.Exp(p[1]), s.scale*p[2])
		})
		for a := range g {
			g[a] += ends[a]
		}
	}
	return sum, g, f
}

// numericStep balances rounding (1e-16/h) against curvature (h^2) of a central
// difference of a smooth function of order one: the cube root of 1e-16, rounded up.
const numericStep = 1e-5

// gradientAlong returns the vector in the space of some directions whose products with them are the derivatives along them, by
// central differences. One that does not exist counts as zero.
func gradientAlong(p Parameters, directions []Parameters, f func(Parameters) float64) (g Parameters) {
	slopes := make([]float64, len(directions))
	orthonormal := true
	for i, u := range directions {
		up, down := p, p
		for a := range p {
			up[a] += numericStep * u[a]
			down[a] -= numericStep * u[a]
		}
		if d := (f(up) - f(down)) / (2 * numericStep); !math.IsNaN(d) && !math.IsInf(d, 0) {
			slopes[i] = d
		}
		for _, v := range directions[:i] {
			orthonormal = orthonormal && u.dot(v) == 0
		}
		orthonormal = orthonormal && u.dot(u) == 1
	}
	if !orthonormal {
		slopes = inDual(directions, slopes)
	}
	for i, u := range directions {
		for a := range g {
			g[a] += slopes[i] * u[a]
		}
	}
	return g
}

// inDual returns the coefficients of directions in the vector whose products with them are given.
func inDual(directions []Parameters, products []float64) []float64 {
	gram := mat.NewSymDense(len(directions), nil)
	for i, u := range directions {
		for j := range i + 1 {
			gram.SetSym(j, i, u.dot(directions[j]))
		}
	}
	var c mat.VecDense
	// it does not fail: the directions of a search are independent
	_ = c.SolveVec(gram, mat.NewVecDense(len(products), products))
	return c.RawVector().Data
}

// amplitude returns the best variance for a spectrum of given corner frequency and noise
// share q/V, and the log-likelihood with it.
func (b Blocks) amplitude(sh shape, share float64) (v, value float64) {
	var sum, weight, logs float64
	for j, w := range b.Weight {
		m := sh.at(1, share, b.Sigma[j], b.SigmaVar[j])
		if !(m > 0) {
			return math.NaN(), math.Inf(-1)
		}
		sum += w * b.Power[j] / m
		logs += w * math.Log(m)
		weight += w
	}
	v = sum / weight
	return v, -weight*math.Log(v) - logs
}

// Start scans corner frequencies; for each, and for each of some noise shares, the
// best amplitude is known in closed form.
func (s *Spectral) Start(noise float64, noiseFree bool) Parameters {
	return startFromBlocks(s.blocks, s.exposure, s.scale, noise, noiseFree)
}

// startBlocks is the number of blocks that a start is sought from.
const startBlocks = 80

func startFromBlocks(b Blocks, exposure, scale, noise float64, noiseFree bool) Parameters {
	best, bestValue := Parameters{math.Log(0.05), 0, 0}, math.Inf(-1)
	low := math.Max(0.1/float64(b.Samples), 2*lowestCorner)
	b = b.thinned(startBlocks)
	const steps = 48
	for i := 0; i <= steps; i++ {
		x := low * math.Pow(1.5/low, float64(i)/steps)
		sh := newShape(x, exposure)
		for _, share := range []float64{0, 0.003, 0.03, 0.3} {
			v, value := b.amplitude(sh, share)
			if !noiseFree { // the share that the stated noise has, to a few per cent
				for range 3 {
					v, value = b.amplitude(sh, noise/v)
				}
				share = noise / v
			}
			if value > bestValue && v > 0 && !math.IsInf(v, 1) {
				bestValue = value
				best = Parameters{math.Log(x), math.Log(v / scale), share * v / scale}
			}
			if !noiseFree {
				break
			}
		}
	}
	return best
}
