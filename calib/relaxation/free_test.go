package relaxation_test

import (
	"errors"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
)

func freeRecord(n int, d, rate, exposure, noise float64, seed uint64) []float64 {
	truth := simulate.Truth{Samples: n, Rate: rate, Exposure: exposure, Axes: []simulate.Axis{{Diffusion: d, Noise: noise}}}
	return simulate.Record(truth, seed)[0]
}

// dense is the restricted log-likelihood of the displacements by their full covariance matrix.
func dense(t *testing.T, d []float64, diffusion, dt, exposure, q float64) float64 {
	t.Helper()
	n := len(d)
	c := mat.NewSymDense(n, nil)
	for i := range n {
		c.SetSym(i, i, 2*diffusion*(dt-exposure/3)+2*q)
		if i > 0 {
			c.SetSym(i-1, i, diffusion*exposure/3-q)
		}
	}
	var chol mat.Cholesky
	if !chol.Factorize(c) {
		t.Fatal("the covariance is not positive")
	}
	x, one := mat.NewVecDense(n, d), mat.NewVecDense(n, nil)
	for i := range n {
		one.SetVec(i, 1)
	}
	var sx, s1 mat.VecDense
	if chol.SolveVecTo(&sx, x) != nil || chol.SolveVecTo(&s1, one) != nil {
		t.Fatal("no solution")
	}
	a, b, k := mat.Dot(x, &sx), mat.Dot(x, &s1), mat.Dot(one, &s1)
	return -(chol.LogDet() + math.Log(k) + a - b*b/k) / 2
}

// The estimate is the maximum of the likelihood by the full matrix: no step away from it, in D or in the noise, is uphill.
func TestFitFreeMaximisesTheDenseLikelihood(t *testing.T) {
	const dt, exposure = 2e-3, 1.4e-3
	x := freeRecord(200, 4.4e-13, 1/dt, exposure, 15e-9, 3)
	f, err := relaxation.FitFree(x, relaxation.FreeOptions{Interval: dt, Exposure: exposure})
	if err != nil {
		t.Fatal(err)
	}
	scale := 2 * f.Diffusion * dt // displacements in units of its root keep the numbers near 1
	d := make([]float64, len(x)-1)
	for i := range d {
		d[i] = (x[i+1] - x[i]) / math.Sqrt(scale)
	}
	value := func(diffusion, q float64) float64 {
		return dense(t, d, diffusion/scale, dt, exposure, q/scale)
	}
	top := value(f.Diffusion, f.Noise)
	for _, step := range [][2]float64{{0.02, 0}, {-0.02, 0}, {0, 0.05}, {0, -0.05}, {0.02, -0.05}, {-0.02, 0.05}} {
		if v := value(f.Diffusion*(1+step[0]), f.Noise+step[1]*scale); v > top {
			t.Errorf("the likelihood is %.4g higher at D %+.2f, q %+.2f", v-top, step[0], step[1])
		}
	}
	// the ends of the 95 % interval lie where the profile falls by 1.92; the profile from the matrix, by a scan of q
	for _, end := range []float64{-f.Intervals.Low95, f.Intervals.High95} {
		best := math.Inf(-1)
		for i := range 801 {
			q := f.Noise + (float64(i)/400-1)*f.NoiseSD*3
			best = math.Max(best, value(f.Diffusion*math.Exp(end), q))
		}
		if fall := top - best; math.Abs(fall-1.9207) > 0.01 { // the scan and the search leave 1e-3
			t.Errorf("the profile falls by %.4f at %+.3f, want 1.9207", fall, end)
		}
	}
}

// Lengths and times scale, and a constant velocity does not matter.
func TestFitFreeProperties(t *testing.T) {
	const dt = 1e-3
	x := freeRecord(3000, 4.4e-13, 1/dt, 0.5e-3, 10e-9, 5)
	o := relaxation.FreeOptions{Interval: dt, Exposure: 0.5e-3}
	f, err := relaxation.FitFree(x, o)
	if err != nil {
		t.Fatal(err)
	}
	moved := make([]float64, len(x))
	for i := range x {
		moved[i] = 1e6*x[i] + 0.7*float64(i)*dt // um, drifting by 0.7 um/s
	}
	g, err := relaxation.FitFree(moved, o)
	if err != nil {
		t.Fatal(err)
	}
	// the search settles to 1e-5 standard uncertainties, and subtraction leaves 1e-10 of 1000 um
	if math.Abs(g.Diffusion/f.Diffusion/1e12-1) > 1e-6 || math.Abs(g.Speed-f.Speed*1e6-0.7) > 1e-6 {
		t.Errorf("D %g and %g, speed %g and %g", f.Diffusion, g.Diffusion, f.Speed, g.Speed)
	}
	exact, err := relaxation.FitFree(x, relaxation.FreeOptions{Interval: dt, Exposure: 0.5e-3, NoiseKnown: true, Noise: 1e-16})
	if err != nil || exact.LogSD >= f.LogSD {
		t.Errorf("known noise: sd %g, fitted %g (%v)", exact.LogSD, f.LogSD, err)
	}
}

// Over seeded records D is unbiased and its intervals hold it, in four regimes of blur and noise, with gaps.
func TestFitFreeCoverage(t *testing.T) {
	const records, d = 80, 4.4e-13
	for name, c := range map[string]struct {
		n                     int
		rate, exposure, noise float64
		known                 bool
		gap                   int
	}{
		"fast":          {400, 2000, 0, 0, false, 0},
		"noisy":         {400, 500, 0, 30e-9, false, 0},
		"blurred":       {400, 200, 5e-3, 10e-9, false, 0},
		"noise known":   {300, 500, 1e-3, 20e-9, true, 0},
		"every 25 lost": {400, 500, 1e-3, 20e-9, false, 25},
	} {
		mean, misses := 0.0, 0
		for seed := range uint64(records) {
			x := freeRecord(c.n, d, c.rate, c.exposure, c.noise, 100+seed)
			if c.gap > 0 {
				for i := 0; i < len(x); i += c.gap {
					x[i] = math.NaN()
				}
			}
			f, err := relaxation.FitFree(x, relaxation.FreeOptions{Interval: 1 / c.rate, Exposure: c.exposure, NoiseKnown: c.known, Noise: c.noise * c.noise})
			if err != nil {
				t.Fatalf("%s: seed %d: %v", name, seed, err)
			}
			z := math.Log(f.Diffusion / d)
			mean += (f.Diffusion/d - 1) / f.LogTotal / records
			if z > f.Intervals.Low95 || z < -f.Intervals.High95 {
				misses++
			}
		}
		// four standard errors of a mean; and 80 intervals at 95 % miss 4 +- 1.9, more than 11 with p < 1e-3
		// (over 400 records of each the means were 0.02 to 0.11 and 19 to 26 missed, 20 +- 4.4 expected)
		if math.Abs(mean) > 4/math.Sqrt(records) || misses > 11 {
			t.Errorf("%s: mean of z = %.2f, %d of %d intervals miss", name, mean, misses, records)
		}
	}
}

func TestFitFreeRefusals(t *testing.T) {
	if _, err := relaxation.FitFree(make([]float64, 10), relaxation.FreeOptions{Interval: 1}); !errors.Is(err, relaxation.ErrFewDisplacements) {
		t.Errorf("ten samples: %v", err)
	}
	if _, err := relaxation.FitFree(make([]float64, 100), relaxation.FreeOptions{Interval: 1}); !errors.Is(err, relaxation.ErrNoMaximum) {
		t.Errorf("a constant: %v", err)
	}
}
