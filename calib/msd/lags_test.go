package msd

import (
	"math"
	"math/rand/v2"
	"testing"

	"beadwell/calib/transform"
)

// Lags rise, start at one sample, and end at 60 relaxation times or a quarter of the record.
func TestLags(t *testing.T) {
	for _, n := range []int{16, 20, 100, 1000, 100000} {
		for _, tau := range []float64{0.05, 1, 12, 3000, 1e7} {
			lags := Lags(n, tau)
			if lags[0] != 1 {
				t.Errorf("Lags(%d, %g) starts at %d", n, tau, lags[0])
			}
			for i := 1; i < len(lags); i++ {
				if lags[i] <= lags[i-1] {
					t.Errorf("Lags(%d, %g) = %v does not rise", n, tau, lags)
					break
				}
			}
			last := lags[len(lags)-1]
			if last >= n || float64(last) > math.Max(3, math.Min(float64(n)/4, math.Max(60*tau, 24))) {
				t.Errorf("Lags(%d, %g) ends at %d", n, tau, last)
			}
			if len(lags) > 200 {
				t.Errorf("Lags(%d, %g) has %d lags", n, tau, len(lags))
			}
		}
	}
	if lags := Lags(100000, 12); lags[len(lags)-1] != 720 {
		t.Errorf("Lags(100000, 12) ends at %d, want 720", lags[len(lags)-1])
	}
}

func noise(n int, seed uint64) []float64 {
	rng := rand.New(rand.NewPCG(seed, 2))
	x := make([]float64, n)
	for i := range x {
		x[i] = rng.NormFloat64()
	}
	return x
}

func bruteMSD(x []float64, lag int) (float64, int) {
	sum, n := 0.0, 0
	for i := 0; i+lag < len(x); i++ {
		if d := x[i+lag] - x[i]; !math.IsNaN(d) {
			sum += d * d
			n++
		}
	}
	return sum / float64(n), n
}

// Displacements from transforms against sums over pairs, and with missing samples.
// The autocovariance is good to 1e-14 of the sum at lag 0, the displacements are of its order.
func TestDisplacementsAreMeans(t *testing.T) {
	for _, n := range []int{20, 300, 5000} {
		x := noise(n, uint64(n))
		lags := Lags(n, 3)
		values, pairs := Displacements(x, false, lags, nil)
		for i, lag := range lags {
			want, count := bruteMSD(x, lag)
			if pairs[i] != count || math.Abs(values[i]/want-1) > 1e-12 {
				t.Errorf("n = %d: MSD(%d) = %.15g of %d pairs, want %.15g of %d", n, lag, values[i], pairs[i], want, count)
			}
		}
		for i := range x {
			if i%7 == 2 || i > 10 && i < 14 {
				x[i] = math.NaN()
			}
		}
		values, pairs = Displacements(x, true, lags, nil)
		for i, lag := range lags {
			want, count := bruteMSD(x, lag)
			if pairs[i] != count || math.Abs(values[i]/want-1) > 1e-12 {
				t.Errorf("n = %d, gaps: MSD(%d) = %.15g of %d pairs, want %.15g of %d", n, lag, values[i], pairs[i], want, count)
			}
		}
	}
}

// Short lags of a slow bead: the increments are 1e-4 of the positions, and the sums of
// products would lose eight digits; pair by pair they keep them.
func TestShortLagsKeepDigits(t *testing.T) {
	x := noise(4000, 9)
	sum := 0.0
	for i := range x {
		sum += 1e-4 * x[i]
		x[i] = 100*math.Sin(float64(i)/600) + sum
	}
	lags := []int{1, 2, 3, 100}
	values, _ := Displacements(x, false, lags, nil)
	for i, lag := range lags {
		want, _ := bruteMSD(x, lag)
		// beyond closeLag: 1e-15 of the mean square over the displacement
		if math.Abs(values[i]/want-1) > 1e-12 {
			t.Errorf("MSD(%d) = %.15g, want %.15g", lag, values[i], want)
		}
	}
}

// At every lag a straight line of slope s has (s lag)^2, which fixes the scale.
func TestDisplacementsOfLine(t *testing.T) {
	x := make([]float64, 500)
	for i := range x {
		x[i] = 0.5 * (float64(i) - 249.5)
	}
	lags := []int{1, 2, 3, 10, 100}
	values, _ := Displacements(x, false, lags, nil)
	for i, lag := range lags {
		want := 0.25 * float64(lag*lag)
		if math.Abs(values[i]-want) > 1e-11*2500 { // mean square 5000, to 1e-14
			t.Errorf("MSD(%d) = %.15g, want %.15g", lag, values[i], want)
		}
	}
}

// With the periodogram of all samples, or of all but the last few, the displacements are the same. The sums err by rounding
// of the sum at lag 0, 2e-13 here; displacements at close lags are smaller than that by up to a hundred.
func TestDisplacementsFromSpectrum(t *testing.T) {
	for _, n := range []int{6000, 6007} {
		x := make([]float64, n)
		rng := rand.New(rand.NewPCG(3, 1))
		for i := range x {
			if i > 0 {
				x[i] = 0.99*x[i-1] + 0.1*rng.NormFloat64()
			}
		}
		lags := Lags(n, 100)
		want, _ := Displacements(x, false, lags, nil)
		plan, err := transform.NewPlan(6000)
		if err != nil {
			t.Fatal(err)
		}
		got, pairs := Displacements(x, false, lags, &Spectrum{Power: plan.Power(nil, x[:6000]), Length: 6000})
		for i := range lags {
			if math.Abs(got[i]/want[i]-1) > 1e-11 || pairs[i] != n-lags[i] {
				t.Errorf("%d samples, lag %d: %.14g from %d pairs, want %.14g", n, lags[i], got[i], pairs[i], want[i])
			}
		}
	}
}
