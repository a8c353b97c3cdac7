package psd

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"
)

func lorentzian(f, corner, diffusion float64) float64 { // two-sided
	return diffusion / (2 * math.Pi * math.Pi) / (corner*corner + f*f)
}

// The closed form of Berg-Sorensen and Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594, Eqs. 13
// to 15: eight powers, for which a direct minimisation of the sum of (P/S - 1)^2 gives the
// same (recomputed), and an exact Lorentzian.
func TestLeastSquaresValues(t *testing.T) {
	f := []float64{1, 2, 3, 4, 5, 6, 7, 8}
	p := []float64{.52, .31, .13, .088, .05, .04, .029, .021}
	corner, diffusion, err := LeastSquares(f, p, 0)
	if err != nil || math.Abs(corner/1.255394581135258-1) > 1e-12 || math.Abs(diffusion/28.99849520565577-1) > 1e-12 {
		t.Errorf("corner, diffusion = %.13g, %.13g (%v), want 1.255394581135, 28.99849520566", corner, diffusion, err)
	}
	f, p = nil, nil
	for k := 10; k <= 2000; k++ {
		f = append(f, float64(k))
		p = append(p, lorentzian(float64(k), 357, 1.7))
	}
	corner, diffusion, err = LeastSquares(f, p, 0)
	if err != nil || math.Abs(corner/357-1) > 1e-9 || math.Abs(diffusion/1.7-1) > 1e-9 {
		t.Errorf("exact Lorentzian: corner, diffusion = %.13g, %.13g (%v), want 357, 1.7", corner, diffusion, err)
	}
}

// Powers in other units scale D alone.
func TestLeastSquaresScale(t *testing.T) {
	f := []float64{1, 2, 3, 4, 5, 6, 7, 8}
	p := []float64{.52, .31, .13, .088, .05, .04, .029, .021}
	c1, d1, _ := LeastSquares(f, p, 7)
	for i := range p {
		p[i] *= 1e-18
	}
	c2, d2, err := LeastSquares(f, p, 7)
	if err != nil || math.Abs(c2/c1-1) > 1e-12 || math.Abs(d2/d1/1e-18-1) > 1e-12 {
		t.Errorf("powers times 1e-18: corner, diffusion = %g, %g (%v), want %g, %g", c2, d2, err, c1, 1e-18*d1)
	}
}

// Averages of n_b exponential powers: the amplitude comes out (n_b+1)/n_b too large and is
// corrected (Norrelykke and Flyvbjerg, Rev. Sci. Instrum. 81 (2010) 075103), to the order of one
// over the number of powers. D of 400 powers of n_b = 5 has a standard deviation of about
// 1/sqrt(400 x 5) x 2; the mean of 300 of them one of 0.26 %, against a correction of 20 %.
func TestLeastSquaresBias(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 12))
	for _, bins := range []int{5, 20} {
		var corrected, raw float64
		const runs = 300
		for range runs {
			var f, p []float64
			for k := 1; k <= 400; k++ {
				sum := 0.0
				for range bins {
					sum += rng.ExpFloat64()
				}
				f = append(f, float64(k))
				p = append(p, lorentzian(float64(k), 60, 1)*sum/float64(bins))
			}
			_, d, err := LeastSquares(f, p, bins)
			if err != nil {
				t.Fatal(err)
			}
			_, d0, _ := LeastSquares(f, p, 0)
			corrected += d / runs
			raw += d0 / runs
		}
		if math.Abs(corrected-1) > 0.012 { // 4 standard deviations of the mean
			t.Errorf("%d values per average: mean of D = %.4f, want 1", bins, corrected)
		}
		if want := 1 + 1/float64(bins); math.Abs(raw/corrected-want) > 1e-12 {
			t.Errorf("%d values per average: the correction is %.6f, want %.6f", bins, raw/corrected, want)
		}
	}
}

func TestLeastSquaresDegenerate(t *testing.T) {
	for _, c := range []struct {
		what string
		f, p []float64
	}{
		{"nothing", nil, nil},
		{"one power", []float64{1}, []float64{2}},
		{"rising", []float64{1, 2, 3}, []float64{1, 4, 9}},
		{"NaN", []float64{1, 2, 3}, []float64{1, math.NaN(), 0.1}},
		{"zeros", []float64{1, 2, 3}, []float64{0, 0, 0}},
	} {
		corner, diffusion, err := LeastSquares(c.f, c.p, 0)
		if !errors.Is(err, ErrNoLorentzian) || !math.IsNaN(corner) || !math.IsNaN(diffusion) {
			t.Errorf("%s: corner, diffusion = %g, %g (%v), want NaN and %v", c.what, corner, diffusion, err, ErrNoLorentzian)
		}
	}
	defer func() {
		if recover() == nil {
			t.Error("slices of different lengths: no panic")
		}
	}()
	_, _, _ = LeastSquares([]float64{1, 2}, []float64{1}, 0)
}
