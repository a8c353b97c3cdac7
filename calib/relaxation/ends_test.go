package relaxation

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/mat"
)

// gaussian returns the log density, without -(n/2) ln 2 pi, of y for the Toeplitz or
// circulant covariance with the first row r.
func gaussian(t *testing.T, y, r []float64) float64 {
	t.Helper()
	n := len(y)
	c := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			c.SetSym(i, j, r[j-i])
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(c) {
		t.Fatal("covariance matrix is not positive definite")
	}
	v := mat.NewVecDense(n, y)
	var s mat.VecDense
	if err := chol.SolveVecTo(&s, v); err != nil {
		t.Fatal(err)
	}
	return -(chol.LogDet() + mat.Dot(v, &s)) / 2
}

// ln p_line - ln p_ring from dense matrices: the ring's covariance is the mean of the
// spectrum at the N Fourier frequencies, times cosines. fc T = 12 leaves terms of
// exp(-pi fc T) = 4e-17 from the halves that the two filters see, so that rounding of the
// two log densities (of order 100, with condition numbers up to 1e4) is what remains.
func TestEndsOpenTheRing(t *testing.T) {
	for i, p := range append([]Process{{Corner: 0.1, Variance: 2, Noise: 0, Interval: 1, Exposure: 0.5}}, processes...) {
		n := 2 * int(math.Ceil(6/p.Corner))
		line, ring := make([]float64, n), make([]float64, n)
		for d := range n {
			line[d] = p.Autocovariance(d)
			for k := range n {
				ring[d] += p.Spectrum(float64(k)/float64(n)) / p.Interval * math.Cos(2*math.Pi*float64(k*d%n)/float64(n)) / float64(n)
			}
		}
		rng := rand.New(rand.NewPCG(uint64(i), 7))
		for _, size := range []float64{0.3, 1, 5} { // the identity holds for any y
			y := make([]float64, n)
			for j := range y {
				y[j] = size * math.Sqrt(p.RecordedVariance()) * rng.NormFloat64()
			}
			got, ok := NewEnds(y).logRatio(newShape(p.Corner*p.Interval, p.Exposure), p.Variance, p.Noise)
			want := gaussian(t, y, line) - gaussian(t, y, ring)
			if !ok || math.Abs(got-want) > 1e-8*math.Max(1, size*size*10) {
				t.Errorf("process %d, size %g: ln p(line) - ln p(ring) = %.12g, want %.12g (dense matrices)", i, size, got, want)
			}
		}
	}
}

// For a bead without noise and blur, the ratios of the periodogram to the spectrum add up to the squared
// steps round the ring over their variance (Parseval): those of the line and the one
// from the end to the beginning, 1 + EndExcess.
func TestEndExcessIsLastStep(t *testing.T) {
	p := Process{Corner: 0.05, Variance: 0.4, Interval: 1}
	const n = 64
	c := p.Decay()
	rng := rand.New(rand.NewPCG(3, 4))
	x := make([]float64, n)
	for i := range x {
		x[i] = rng.NormFloat64()
	}
	sum := 0.0
	for k, z := range fourier.NewFFT(n).Coefficients(nil, x) {
		weight := 2.0
		if k == 0 || k == n/2 {
			weight = 1
		}
		sum += weight * (real(z)*real(z) + imag(z)*imag(z)) / n / p.Spectrum(float64(k)/n)
	}
	for i := 1; i < n; i++ {
		step := x[i] - c*x[i-1]
		sum -= step * step / (p.Variance * (1 - c*c))
	}
	if got := p.EndExcess(x); math.Abs(got-(sum-1)) > 1e-11*float64(n) { // 64 terms of up to 10
		t.Errorf("EndExcess = %.12g, want %.12g", got, sum-1)
	}
	x[0] = math.NaN()
	if got := p.EndExcess(x); got != 0 {
		t.Errorf("EndExcess with the first sample missing = %g, want 0", got)
	}
}

// The two ends of a record of fc T = 60 know nothing of each other: x_0 - c x_{N-1} has the variance
// V B (1 + c^2), the filtered states and their uncertainty together, against V B (1 - c^2) of a step.
func TestEndExcessMean(t *testing.T) {
	noisy := Process{Corner: 0.03, Variance: 1, Noise: 0.5, Interval: 1} // the filtered states' uncertainty is a fifth of the result
	for i, p := range append([]Process{noisy}, processes[:4]...) {
		c := p.Decay()
		want := (1+c*c)/(1-c*c) - 1
		sum, square := 0.0, 0.0
		const records = 600
		for j := range records {
			e := p.EndExcess(record(p, int(60/p.Corner/20)*2+20, uint64(10000*i+j)))
			sum += e / records
			square += e * e / records
		}
		if sd := math.Sqrt((square - sum*sum) / records); math.Abs(sum-want) > 3*sd {
			t.Errorf("process %d: mean of EndExcess = %.3f +- %.3f, want %.3f", i, sum, sd, want)
		}
	}
}

// Without a link there is nothing to open: at fc/fs = 3 the samples are independent.
func TestEndsOfIndependentSamples(t *testing.T) {
	y := []float64{1, -2, 0.5, 3, -1, 0.3}
	got, ok := NewEnds(y).logRatio(newShape(2.99, 0), 1, 0)
	if !ok || math.Abs(got) > 1e-7 { // c = 7e-9, times products of the ends up to 3
		t.Errorf("ln p(line) - ln p(ring) = %g, want 0", got)
	}
}

// The filtered state of a noise-free, unblurred bead is its last position; parameters for
// which the innovation has no positive variance are outside the domain.
func TestStationaryFilterLimits(t *testing.T) {
	f := stationary(0.9, 2, 0)
	if !f.ok || f.gain != 1 || f.variance != 0 || math.Abs(f.innovation-2*(1-0.81)) > 1e-15 {
		t.Errorf("noise-free filter = %+v, want gain 1, variance 0, innovation 0.38", f)
	}
	if f := stationary(0.9, 2, -1.9); f.ok {
		t.Errorf("filter with more blur than motion = %+v, want none", f)
	}
}
