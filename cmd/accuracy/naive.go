package main

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"beadwell/calib/transform"
)

// naive is what a script of one's own gives: a stiffness with its 95 % interval.
type naive struct{ value, low, high float64 }

// naiveSegments is the number of pieces over which a script averages the spectrum.
const naiveSegments = 16

// naiveSpectrum fits a plain Lorentzian by unweighted least squares to a spectrum
// averaged over segments, with the uncertainty that the residuals give.
func naiveSpectrum(x []float64, rate, gamma float64) naive {
	n := transform.GoodLength(len(x) / naiveSegments)
	if n < 8 {
		return naive{math.NaN(), math.NaN(), math.NaN()}
	}
	plan, err := transform.NewPlan(n)
	if err != nil {
		return naive{math.NaN(), math.NaN(), math.NaN()}
	}
	power := make([]float64, n/2+1)
	for s := range naiveSegments {
		for k, p := range plan.Power(nil, centred(x[s*n:(s+1)*n])) {
			power[k] += p / naiveSegments / float64(n)
		}
	}
	f, p := make([]float64, n/2-1), make([]float64, n/2-1)
	for k := range f {
		f[k], p[k] = float64(k+1)/float64(n)*rate, power[k+1]
	}
	unit := p[0]
	for k := range p {
		p[k] /= unit
	}
	a, c := 1.0, f[len(f)/4]
	model := func(t [2]float64, f float64) (float64, [2]float64) {
		u := f / t[1]
		d := 1 / (1 + u*u)
		return t[0] * d, [2]float64{d, 2 * t[0] * d * d * u * u / t[1]}
	}
	t, cov, ok := leastSquares(f, p, [2]float64{a, c}, model)
	if !ok {
		return naive{math.NaN(), math.NaN(), math.NaN()}
	}
	k := 2 * math.Pi * gamma
	sd := math.Sqrt(cov[1])
	return naive{k * t[1], k * (t[1] - 1.96*sd), k * (t[1] + 1.96*sd)}
}

// naiveVariance is kT over the raw variance, with the uncertainty of independent samples.
func naiveVariance(x []float64, kT float64) naive {
	s := 0.0
	for _, v := range centred(x) {
		s += v * v
	}
	n := float64(len(x))
	k := kT / (s / (n - 1))
	sd := k * math.Sqrt(2/(n-1))
	return naive{k, k - 1.96*sd, k + 1.96*sd}
}

// naiveDisplacement fits 2 V (1 - exp(-t/tau)) by unweighted least squares to the
// mean-square displacement at lags up to a tenth of the record, with independent errors.
func naiveDisplacement(x []float64, kT float64) naive {
	var lags, msd []float64
	last := 0
	for i := range 50 {
		lag := int(math.Round(math.Pow(float64(len(x))/10, float64(i)/49)))
		if lag <= last {
			continue
		}
		last = lag
		s := 0.0
		for j := range len(x) - lag {
			d := x[j+lag] - x[j]
			s += d * d
		}
		lags, msd = append(lags, float64(lag)), append(msd, s/float64(len(x)-lag))
	}
	if len(lags) < 3 {
		return naive{math.NaN(), math.NaN(), math.NaN()}
	}
	unit := msd[len(msd)-1] / 2
	for i := range msd {
		msd[i] /= unit
	}
	model := func(t [2]float64, lag float64) (float64, [2]float64) {
		e := math.Exp(-lag / t[1])
		return 2 * t[0] * (1 - e), [2]float64{2 * (1 - e), -2 * t[0] * e * lag / (t[1] * t[1])}
	}
	t, cov, ok := leastSquares(lags, msd, [2]float64{1, lags[len(lags)/3]}, model)
	if !ok {
		return naive{math.NaN(), math.NaN(), math.NaN()}
	}
	sd := math.Sqrt(cov[0])
	kT /= unit
	return naive{kT / t[0], kT / (t[0] + 1.96*sd), kT / math.Max(t[0]-1.96*sd, 1e-300)}
}

func centred(x []float64) []float64 {
	mean := 0.0
	for _, v := range x {
		mean += v / float64(len(x))
	}
	y := make([]float64, len(x))
	for i, v := range x {
		y[i] = v - mean
	}
	return y
}

// leastSquares fits two parameters by damped Gauss-Newton steps; the variances of the
// parameters come from the scatter of the residuals.
func leastSquares(x, y []float64, t [2]float64, model func([2]float64, float64) (float64, [2]float64)) ([2]float64, [2]float64, bool) {
	damping := 1e-3
	cost := func(t [2]float64) (s float64) {
		for i := range x {
			m, _ := model(t, x[i])
			s += (y[i] - m) * (y[i] - m)
		}
		return s
	}
	best := cost(t)
	normal := func() (a [3]float64, b [2]float64) {
		for i := range x {
			m, d := model(t, x[i])
			r := y[i] - m
			a[0] += d[0] * d[0]
			a[1] += d[0] * d[1]
			a[2] += d[1] * d[1]
			b[0] += d[0] * r
			b[1] += d[1] * r
		}
		return a, b
	}
	for range 200 {
		a, b := normal()
		m := mat.NewDense(2, 2, []float64{a[0] * (1 + damping), a[1], a[1], a[2] * (1 + damping)})
		var step mat.VecDense
		if step.SolveVec(m, mat.NewVecDense(2, b[:])) != nil {
			return t, t, false
		}
		next := [2]float64{t[0] + step.AtVec(0), t[1] + step.AtVec(1)}
		if c := cost(next); c < best && next[1] > 0 && next[0] > 0 {
			done := best-c < 1e-12*best
			t, best, damping = next, c, damping/10
			if done {
				break
			}
			continue
		}
		if damping *= 10; damping > 1e12 {
			break
		}
	}
	a, _ := normal()
	det := a[0]*a[2] - a[1]*a[1]
	s := best / float64(len(x)-2)
	return t, [2]float64{s * a[2] / det, s * a[0] / det}, det > 0 && t[0] > 0 && t[1] > 0
}
