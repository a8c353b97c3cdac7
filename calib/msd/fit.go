package msd

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"beadwell/calib/relaxation"
)

// ErrTooShort tells that a record is too short for a fit.
var ErrTooShort = errors.New("the record is too short for a fit of the mean-square displacement")

// ErrNoFit tells that the fit did not settle, or that the lags do not determine it.
var ErrNoFit = errors.New("the mean-square displacement does not determine plateau and relaxation time")

// Noise is what is known of the localisation noise beforehand; the zero value is nothing.
type Noise struct {
	Known     bool
	Variance  float64 // q [m2]
	VarianceU float64 // its standard uncertainty [m2]; 0 is exact
}

// Input is what the estimate is made from.
type Input struct {
	X       []float64          // positions, mean and drift removed [m]; NaN where missing
	Missing bool               // whether there are NaNs
	Known   *Spectrum          // periodogram of X, where it is at hand; nil: it is not
	Summed  *Summed            // what is known of a record whose samples are not at hand; X is nil then
	Guess   relaxation.Process // interval and exposure; the rest gives lags, covariance and start
	Noise   Noise
	// Detected is what the detector adds to the mean-square displacement at a lag [samples] beyond exposure and
	// noise [m2], computed for the guess; it is taken off before the fit. Nil is nothing.
	Detected func(lag int) float64
	FirstLag int     // shortest lag to fit [samples]; 0 or 1: all
	Scale    float64 // unit of variance [m2] for q
	// FitCovariance is the covariance of ln fc, ln V and q/Scale of an efficient fit of
	// the same record, for the covariance of the two.
	FitCovariance relaxation.Matrix
}

// Result is the outcome of Estimate, in SI units.
type Result struct {
	Corner, Variance, NoiseQ float64 // fc [Hz], V [m2], q [m2]
	// Covariance of ln fc, ln V and q/Scale, with a stated noise taken as exact.
	Covariance relaxation.Matrix
	// WithFit is the covariance of these (rows) with those of the fit (columns).
	WithFit relaxation.Matrix
	// WithMeanSquare is their covariance with the mean square of the record [m2].
	WithMeanSquare [3]float64
	NoiseSlope     [3]float64 // derivatives with respect to a stated q [1/m2]

	ChiSquare        float64
	DegreesOfFreedom int
	PValue           float64
	Points           []Point
}

// Point is the mean-square displacement at one lag.
type Point struct {
	Lag      int     // samples
	MSD      float64 // m2
	Standard float64 // standard uncertainty [m2]
	Model    float64 // m2
}

// ridge is added to the unit diagonal of the correlation matrix of the lags.
const ridge = 1e-9

// Estimate fits the mean-square displacement by generalised least squares. The
// covariance of the lags is that of the guess; scale and shape of the fit hardly
// depend on it, its chi-square does.
//
// The error is ErrTooShort for records of fewer than 16 samples, ErrNoFit otherwise.
func Estimate(in Input) (*Result, error) {
	if in.samples() < 16 {
		return nil, fmt.Errorf("%w: %d samples", ErrTooShort, in.samples())
	}
	g := in.Guess
	var lags, pairs []int
	var values []float64
	if in.Summed != nil {
		lags, values, pairs = in.Summed.from(in.FirstLag)
	} else {
		lags = from(Lags(len(in.X), 1/(2*math.Pi*g.Corner*g.Interval)), in.FirstLag)
		values, pairs = Displacements(in.X, in.Missing, lags, in.Known)
	}
	lags, values, pairs = keepFull(lags, values, pairs)
	if in.Detected != nil {
		for i, lag := range lags {
			values[i] -= in.Detected(lag)
		}
	}
	if len(lags) < 3 {
		return nil, fmt.Errorf("%w: %d lags", ErrTooShort, len(lags))
	}
	f, err := newFitter(in, lags, values, pairs)
	if err != nil {
		return nil, err
	}
	if err := f.search(); err != nil {
		// without blur the plateau needs no relaxation time: where the samples are white, the corner
		// frequency of the guess will do
		if g.Exposure > 0 || g.Corner*g.Interval < whiteCorner {
			return nil, err
		}
		if f, err = newFitter(in, lags, values, pairs); err != nil {
			return nil, err
		}
		f.free = f.free[1:]
		if err := f.search(); err != nil {
			return nil, err
		}
	}
	return f.result(), nil
}

// whiteCorner is the corner frequency, in sampling rates, above which less than 4 % of
// the correlation is left after one sample.
const whiteCorner = 0.5

// from drops the lags below first, but leaves at least four.
func from(lags []int, first int) []int {
	i := 0
	for i < len(lags)-4 && lags[i] < first {
		i++
	}
	return lags[i:]
}

// keepFull drops lags without pairs.
func keepFull(lags []int, values []float64, pairs []int) ([]int, []float64, []int) {
	n := 0
	for i := range lags {
		if pairs[i] > 0 {
			lags[n], values[n], pairs[n] = lags[i], values[i], pairs[i]
			n++
		}
	}
	return lags[:n], values[:n], pairs[:n]
}

// fitter solves the weighted problem with whitened residuals: chol is the factor of
// the correlation matrix, sd the standard uncertainties.
type fitter struct {
	in     Input
	lags   []int
	values []float64
	sd     []float64
	chol   mat.Cholesky
	free   []int // of the parameters ln fc, ln V, q/scale
	at     [3]float64
	jac    *mat.Dense // whitened, for the free parameters
	inv    mat.SymDense
	chi2   float64
}

func newFitter(in Input, lags []int, values []float64, pairs []int) (*fitter, error) {
	f := &fitter{in: in, lags: lags, values: values, free: []int{0, 1, 2}}
	if in.Noise.Known && in.Noise.VarianceU == 0 {
		f.free = f.free[:2]
	}
	cov := Covariance(in.Guess, lags, pairs)
	n := len(lags)
	f.sd = make([]float64, n)
	for i := range f.sd {
		f.sd[i] = math.Sqrt(cov[i][i])
	}
	corr := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			corr.SetSym(i, j, cov[i][j]/f.sd[i]/f.sd[j])
		}
		corr.SetSym(i, i, 1+ridge)
	}
	for extra := ridge; !f.chol.Factorize(corr); extra *= 10 {
		if extra > 1e-3 {
			return nil, ErrNoFit
		}
		for i := range n {
			corr.SetSym(i, i, 1+extra)
		}
	}
	g := in.Guess
	f.at = [3]float64{math.Log(g.Corner), math.Log(g.Variance), g.Noise / in.Scale}
	if in.Noise.Known {
		f.at[2] = in.Noise.Variance / in.Scale
	}
	return f, nil
}

func (f *fitter) process(at [3]float64) relaxation.Process {
	g := f.in.Guess
	return relaxation.Process{Corner: math.Exp(at[0]), Variance: math.Exp(at[1]), Noise: at[2] * f.in.Scale, Interval: g.Interval, Exposure: g.Exposure}
}

// whiten returns L^-1 (v/sd).
func (f *fitter) whiten(v []float64) []float64 {
	b := mat.NewVecDense(len(v), nil)
	for i := range v {
		b.SetVec(i, v[i]/f.sd[i])
	}
	var l mat.TriDense
	f.chol.LTo(&l)
	var out mat.VecDense
	// a triangular solve cannot fail: the factor has a positive diagonal
	_ = out.SolveVec(&l, b)
	return out.RawVector().Data
}

func (f *fitter) residuals(at [3]float64) []float64 {
	p := f.process(at)
	r := make([]float64, len(f.lags))
	for i, lag := range f.lags {
		r[i] = f.values[i] - p.MSD(lag)
	}
	return r
}

// gradient returns the derivatives of M at the lags with respect to one parameter.
func (f *fitter) gradient(at [3]float64, k int) []float64 {
	p := f.process(at)
	g := make([]float64, len(f.lags))
	for i, lag := range f.lags {
		switch k {
		case 1:
			g[i] = p.MSD(lag) - 2*p.Noise
		case 2:
			g[i] = 2 * f.in.Scale
		default:
			g[i] = p.MSDSlope(lag)
		}
	}
	return g
}

// search runs Gauss-Newton steps with halving.
func (f *fitter) search() error {
	value := f.objective(f.at)
	for range 60 {
		if err := f.linearise(); err != nil {
			return err
		}
		step, gain := f.step()
		if gain < 1e-9 {
			f.chi2 = value
			if f.free[0] == 0 && !(math.Exp(f.at[0])*f.in.Guess.Interval < relaxation.HighestCorner) {
				return ErrNoFit // it ran to the end of the domain; one that is not fitted may stand there
			}
			return nil
		}
		scale := 1.0
		for _, s := range step {
			scale = math.Min(scale, 1/math.Max(1, math.Abs(s)))
		}
		moved := false
		for range 25 {
			next := f.at
			for i, k := range f.free {
				next[k] += scale * step[i]
			}
			if v := f.objective(next); v < value {
				f.at, value, moved = next, v, true
				break
			}
			scale /= 2
		}
		if !moved {
			if gain < 1e-3 {
				f.chi2 = value
				return nil
			}
			return ErrNoFit
		}
	}
	return ErrNoFit
}

func (f *fitter) objective(at [3]float64) float64 {
	s := 0.0
	for _, v := range f.whiten(f.residuals(at)) {
		s += v * v
	}
	if z, ok := f.prior(at); ok {
		s += z * z
	}
	return s
}

// prior returns the deviation of the noise from what was stated, in its standard uncertainties.
func (f *fitter) prior(at [3]float64) (float64, bool) {
	if !f.in.Noise.Known || f.in.Noise.VarianceU == 0 {
		return 0, false
	}
	return (at[2]*f.in.Scale - f.in.Noise.Variance) / f.in.Noise.VarianceU, true
}

// noiseFree tells whether the noise is a parameter of the fit.
func (f *fitter) noiseFree() bool { return f.free[len(f.free)-1] == 2 }

func (f *fitter) precision() float64 {
	if !f.in.Noise.Known || f.in.Noise.VarianceU == 0 {
		return 0
	}
	r := f.in.Scale / f.in.Noise.VarianceU
	return r * r
}

// linearise sets the whitened Jacobian and the inverse of the normal matrix.
func (f *fitter) linearise() error {
	m := len(f.free)
	f.jac = mat.NewDense(len(f.lags), m, nil)
	for i, k := range f.free {
		f.jac.SetCol(i, f.whiten(f.gradient(f.at, k)))
	}
	var normal mat.Dense
	normal.Mul(f.jac.T(), f.jac)
	sym := mat.NewSymDense(m, nil)
	d := make([]float64, m)
	for i := range m {
		v := normal.At(i, i)
		if f.free[i] == 2 {
			v += f.precision()
		}
		if !(v > 0) {
			return ErrNoFit
		}
		d[i] = 1 / math.Sqrt(v)
	}
	for i := range m {
		for j := i; j < m; j++ {
			v := normal.At(i, j)
			if i == j && f.free[i] == 2 {
				v += f.precision()
			}
			sym.SetSym(i, j, v*d[i]*d[j])
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(sym) || chol.Cond() > 1e12 || chol.InverseTo(&f.inv) != nil {
		return ErrNoFit
	}
	for i := range m {
		for j := i; j < m; j++ {
			f.inv.SetSym(i, j, f.inv.At(i, j)*d[i]*d[j])
		}
	}
	return nil
}

func (f *fitter) step() ([]float64, float64) {
	r := mat.NewVecDense(len(f.lags), f.whiten(f.residuals(f.at)))
	var b, s mat.VecDense
	b.MulVec(f.jac.T(), r)
	if z, ok := f.prior(f.at); ok {
		last := len(f.free) - 1 // the noise
		b.SetVec(last, b.AtVec(last)-z*f.in.Scale/f.in.Noise.VarianceU)
	}
	s.MulVec(&f.inv, &b)
	return s.RawVector().Data, mat.Dot(&s, &b)
}

// result propagates covariances: with H = (J'J + P)^-1 J' (whitened), the estimate
// moves by H times the whitened displacements.
func (f *fitter) result() *Result {
	p := f.process(f.at)
	res := &Result{Corner: p.Corner, Variance: p.Variance, NoiseQ: p.Noise, ChiSquare: f.chi2,
		DegreesOfFreedom: len(f.lags) - len(f.free)}
	res.PValue = math.NaN()
	if res.DegreesOfFreedom > 0 {
		res.PValue = distuv.ChiSquared{K: float64(res.DegreesOfFreedom)}.Survival(f.chi2)
	}
	for i, lag := range f.lags {
		res.Points = append(res.Points, Point{Lag: lag, MSD: f.values[i], Standard: f.sd[i], Model: p.MSD(lag)})
	}
	var h, cov mat.Dense
	h.Mul(&f.inv, f.jac.T())
	cov.Mul(&h, h.T())
	k := newKernel(f.in.Guess)
	mean := make([]float64, len(f.lags))
	for i, lag := range f.lags {
		mean[i] = k.withMeanSquare(lag, f.in.samples())
	}
	mean = f.whiten(mean)
	var full [3][]float64 // whitened gradients over all three parameters
	for j := range full {
		full[j] = f.whiten(f.gradient(f.at, j))
	}
	for i, a := range f.free {
		row := h.RawRowView(i)
		for j, b := range f.free {
			res.Covariance[a][b] = cov.At(i, j)
		}
		res.WithMeanSquare[a] = dot(row, mean)
		// Cov(estimate, fit) = H J Cov(fit): an efficient fit shares C grad E[T] with any T
		for j := range full {
			hj := dot(row, full[j])
			for b := range 3 {
				res.WithFit[a][b] += hj * f.in.FitCovariance[j][b]
			}
		}
		if !f.noiseFree() {
			res.NoiseSlope[a] = -dot(row, full[2]) / f.in.Scale
		} else if f.precision() > 0 {
			res.NoiseSlope[a] = f.inv.At(i, len(f.free)-1) * f.precision() / f.in.Scale
		}
	}
	if !f.noiseFree() {
		res.NoiseSlope[2] = 1 / f.in.Scale
	}
	if f.free[0] != 0 { // the corner frequency was not fitted
		res.Corner = math.NaN()
		res.Covariance[0][0] = math.Inf(1)
	}
	return res
}

func dot(a, b []float64) float64 {
	s := 0.0
	for i, v := range a {
		s += v * b[i]
	}
	return s
}
