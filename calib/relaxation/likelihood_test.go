package relaxation

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/mat"
)

// record draws n samples of the process by its own recursion: blur is brought in by
// averaging over sub-steps, so that nothing of the package is used.
func record(p Process, n int, seed uint64) []float64 {
	rng := rand.New(rand.NewPCG(seed, 1))
	const sub = 40
	open := int(math.Round(p.Exposure / p.Interval * sub))
	c := math.Exp(-2 * math.Pi * p.Corner * p.Interval / sub)
	kick := math.Sqrt(p.Variance * (1 - c*c))
	z := math.Sqrt(p.Variance) * rng.NormFloat64()
	x := make([]float64, n)
	for i := range x {
		sum := z / 2
		for j := range sub {
			if j == open {
				if open == 0 {
					x[i] = z
				} else {
					x[i] = (sum - z/2) / float64(open)
				}
			}
			z = c*z + kick*rng.NormFloat64()
			sum += z
		}
		if open == sub {
			x[i] = (sum - z/2) / float64(open)
		}
		x[i] += math.Sqrt(p.Noise) * rng.NormFloat64()
	}
	return x
}

// detrended removes the least-squares line and returns the power of the transform.
func detrended(x []float64) (y, power []float64) {
	n := len(x)
	y = make([]float64, n)
	u := direction(RemovedLine, n)
	mean := 0.0
	for _, v := range x {
		mean += v / float64(n)
	}
	b := dot(u, x)
	for i := range x {
		y[i] = x[i] - mean - b*u[i]
	}
	power = make([]float64, n/2+1)
	for k, z := range fourier.NewFFT(n).Coefficients(nil, y) {
		power[k] = real(z)*real(z) + imag(z)*imag(z)
	}
	return y, power
}

func spectralOf(x []float64, exposure, scale float64) *Spectral {
	y, power := detrended(x)
	return NewSpectral(NewBlocks(power, len(x), true, nil), y, exposure, scale)
}

// denseLogLikelihood is the restricted Gaussian log-likelihood from the covariance
// matrix itself, up to the same constant as Exact.Value.
func denseLogLikelihood(x []float64, p Process, trend int, scale float64) float64 {
	var idx []int
	for i, v := range x {
		if !math.IsNaN(v) {
			idx = append(idx, i)
		}
	}
	n := len(idx)
	cov := mat.NewSymDense(n, nil)
	for i := range idx {
		for j := i; j < n; j++ {
			cov.SetSym(i, j, p.Autocovariance(idx[j]-idx[i])/scale)
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(cov) {
		return math.Inf(-1)
	}
	y := mat.NewVecDense(n, nil)
	reg := mat.NewDense(n, max(trend, 1), nil)
	mid, step := float64(len(x)-1)/2, 2/float64(len(x)-1)
	for i, k := range idx {
		y.SetVec(i, x[k]/math.Sqrt(scale))
		reg.Set(i, 0, 1)
		if trend == 2 {
			reg.Set(i, 1, (float64(k)-mid)*step)
		}
	}
	var sy mat.VecDense
	chol.SolveVecTo(&sy, y)
	rest := mat.Dot(y, &sy)
	logInfo := 0.0
	if trend > 0 {
		var sx, a mat.Dense
		chol.SolveTo(&sx, reg)
		a.Mul(reg.T(), &sx)
		var b, beta mat.VecDense
		b.MulVec(reg.T(), &sy)
		beta.SolveVec(&a, &b)
		rest -= mat.Dot(&b, &beta)
		logInfo = math.Log(mat.Det(&a))
	}
	return -(chol.LogDet() + logInfo + rest) / 2
}

func parameters(p Process, scale float64) Parameters {
	return Parameters{math.Log(p.Corner * p.Interval), math.Log(p.Variance / scale), p.Noise / scale}
}

var processes = []Process{
	{Corner: 0.02, Variance: 2.5, Noise: 0, Interval: 1, Exposure: 0},
	{Corner: 0.05, Variance: 0.3, Noise: 0.05, Interval: 1, Exposure: 0},
	{Corner: 0.1, Variance: 1, Noise: 0, Interval: 1, Exposure: 1},
	{Corner: 0.4, Variance: 1, Noise: 0.25, Interval: 1, Exposure: 1},
	{Corner: 1, Variance: 1, Noise: 0.01, Interval: 1, Exposure: 1},
}

// The Kalman form equals the Gaussian likelihood of the dense covariance matrix,
// with and without gaps. Tolerance: Cholesky of a 120 x 120 matrix of condition up to
// 1e4 loses four of sixteen digits of a number of order 100.
func TestExactAgainstDenseMatrix(t *testing.T) {
	for i, p := range processes {
		for trend := 0; trend <= 2; trend++ {
			for _, gaps := range []bool{false, true} {
				x := record(p, 120, uint64(i+1))
				if gaps {
					for _, k := range []int{0, 7, 8, 9, 50, 51, 118} {
						x[k] = math.NaN()
					}
				}
				e := NewExact(x, Removed(trend), true, p.Exposure, 1.7)
				got := e.Value(parameters(p, 1.7))
				want := denseLogLikelihood(x, p, trend, 1.7)
				if math.Abs(got-want) > 1e-8 {
					t.Errorf("process %d, %d regressors, gaps %v: log-likelihood = %.10f, want %.10f (dense matrix)", i, trend, gaps, got, want)
				}
			}
		}
	}
}

// The mean at the middle of a record with gaps, which tilt the line against the mean, is that of
// generalised least squares with the dense covariance matrix.
func TestExactMean(t *testing.T) {
	p := processes[1]
	x := record(p, 60, 8)
	var index []int
	for i := range x {
		x[i] += 3 + 0.1*float64(i)
		if i%5 == 1 || i > 40 && i < 55 {
			x[i] = math.NaN()
			continue
		}
		index = append(index, i)
	}
	n := len(index)
	cov := mat.NewSymDense(n, nil)
	y := mat.NewVecDense(n, nil)
	for i, k := range index {
		y.SetVec(i, x[k])
		for j := i; j < n; j++ {
			cov.SetSym(i, j, p.Autocovariance(index[j]-k))
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(cov) {
		t.Fatal("covariance matrix is not positive definite")
	}
	for removed := RemovedMean; removed <= RemovedLine; removed++ {
		reg := mat.NewDense(n, int(removed), nil)
		for i, k := range index {
			reg.Set(i, 0, 1)
			if removed == RemovedLine {
				reg.Set(i, 1, float64(k)-29.5)
			}
		}
		var weighted, normal mat.Dense
		var right, beta mat.VecDense
		if err := chol.SolveTo(&weighted, reg); err != nil {
			t.Fatal(err)
		}
		normal.Mul(reg.T(), &weighted)
		right.MulVec(weighted.T(), y)
		if err := beta.SolveVec(&normal, &right); err != nil {
			t.Fatal(err)
		}
		got, want := NewExact(x, removed, true, 0, 0.3).Mean(parameters(p, 0.3)), beta.AtVec(0)
		if math.Abs(got/want-1) > 1e-10 { // a condition number of 1e3
			t.Errorf("removed %d: mean = %.12g, want %.12g (dense matrix)", removed, got, want)
		}
	}
}

// The spectral form with its ends equals the exact likelihood: their difference
// must not depend on the parameters by more than a small part of the statistical
// unit (1/2). What remains is the difference between the ordinary and the
// generalised least-squares line, of the order of 1/(2 pi fc T).
func TestSpectralAgainstExact(t *testing.T) {
	for i, p := range processes {
		n := 4 * int(1000/(8*p.Corner)/4) // fc T = 125, an even number
		if n%2 == 1 {
			n++
		}
		x := record(p, n, uint64(10+i))
		e := NewExact(x, RemovedLine, true, p.Exposure, 1)
		s := spectralOf(x, p.Exposure, 1)
		at := parameters(p, 1)
		base := s.Value(at) - e.Value(at)
		for _, d := range []Parameters{{0.1, 0, 0}, {-0.1, 0, 0}, {0, 0.1, 0}, {0, -0.1, 0}, {0.07, -0.07, 0}, {0, 0, 0.02}} {
			q := at
			for k := range q {
				q[k] += d[k]
			}
			if gap := s.Value(q) - e.Value(q) - base; math.Abs(gap) > 0.06 {
				t.Errorf("process %d, step %v: the difference of the two log-likelihoods changes by %.4f (exact changes by %.4f)", i, d, gap, e.Value(q)-e.Value(at))
			}
		}
	}
}

func ExampleProblem() {
	p := processes[1]
	x := record(p, 4000, 3)
	pr := Problem{Likelihood: NewExact(x, RemovedLine, true, 0, 0.3)}
	m, err := pr.Maximise(pr.Start(0, true))
	fmt.Println(err, m.Converged)
	// Output: <nil> true
}

// The gradient within directions has the derivatives of a quadratic along them, and no part outside.
func TestGradientAlong(t *testing.T) {
	f := func(p Parameters) float64 { return 3*p[0] - 2*p[1]*p[1] + p[0]*p[2] }
	p := Parameters{0.3, -0.7, 0.2}
	full := Parameters{3 + p[2], -4 * p[1], p[0]}
	for _, directions := range [][]Parameters{allDirections, {{1, 0, 0}, {0, 0, 1}}, {{1, -1, 0}}, {{1, -1, 0}, {0, 0.5, 1}}, {}} {
		g := gradientAlong(p, directions, f)
		for _, u := range directions {
			if math.Abs(g.dot(u)-full.dot(u)) > 1e-9 { // rounding over the step, 1e-16/1e-5
				t.Errorf("along %v of %v: %g, want %g", u, directions, g.dot(u), full.dot(u))
			}
		}
		if len(directions) == 1 {
			if across := g.dot(Parameters{1, 1, 0}); math.Abs(across) > 1e-9 {
				t.Errorf("across %v: %g, want 0", directions, across)
			}
		}
	}
}
