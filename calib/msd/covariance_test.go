package msd

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"beadwell/calib/relaxation"
)

var processes = []relaxation.Process{
	{Corner: 0.02, Variance: 2.5, Interval: 1},
	{Corner: 0.05, Variance: 0.3, Noise: 0.05, Interval: 1},
	{Corner: 0.1, Variance: 1, Interval: 1, Exposure: 1},
	{Corner: 0.4, Variance: 1, Noise: 0.25, Interval: 1, Exposure: 1},
	{Corner: 1, Variance: 1, Noise: 0.01, Interval: 1, Exposure: 1},
}

// increments returns the covariance of x(n) - x(0) with x(k+m) - x(k).
func increments(p relaxation.Process, n, m, k int) float64 {
	r := p.Autocovariance
	return r(k+m-n) - r(k-n) - r(k+m) + r(k)
}

// The closed sums over time against the sums themselves, to |k| = 2000 where the
// covariances are below exp(-200). Each term is a difference of four autocovariances, so that
// what cancels is up to (V/R)^2 = 1e4 for the shortest lag of the slowest bead.
func TestSumsOverTime(t *testing.T) {
	for i, p := range processes {
		k := newKernel(p)
		for _, n := range []int{1, 2, 5, 40} {
			for _, m := range []int{1, 2, 7, 40} {
				want := 0.0
				for d := -2000; d <= 2000; d++ {
					r := increments(p, n, m, d)
					want += r * r
				}
				if got := k.squares(n, m); math.Abs(got/want-1) > 1e-10 {
					t.Errorf("process %d: squares(%d, %d) = %.14g, want %.14g (sum)", i, n, m, got, want)
				}
			}
			want := 0.0
			for d := -2000; d <= 2000; d++ {
				r := p.Autocovariance(d+n) - p.Autocovariance(d)
				want += r * r
			}
			if got := k.withMeanSquare(n, 100); math.Abs(got/(2*want/100)-1) > 1e-11 {
				t.Errorf("process %d: withMeanSquare(%d) = %.14g, want %.14g (sum)", i, n, got, 2*want/100)
			}
		}
	}
}

// Covariance against Isserlis' theorem over all pairs of pairs of samples. The two differ by
// what the ends take away: in units of the standard deviations, up to the length over which two
// increments are correlated, n + m and two relaxation times, over the number of pairs.
func TestCovarianceIsIsserlis(t *testing.T) {
	const samples = 400
	lags := []int{1, 2, 3, 8, 20, 60}
	for i, p := range processes {
		tau := 1 / (2 * math.Pi * p.Corner)
		pairs := make([]int, len(lags))
		dense := make([][]float64, len(lags))
		for a, n := range lags {
			pairs[a] = samples - n
			dense[a] = make([]float64, len(lags))
		}
		for a, n := range lags {
			for b, m := range lags {
				sum := 0.0
				for d := -(pairs[a] - 1); d < pairs[b]; d++ {
					// pairs (j, j+d) with 0 <= j < N_n, 0 <= j+d < N_m
					count := min(pairs[a], pairs[b]-d) - max(0, -d)
					r := increments(p, n, m, d)
					sum += float64(count) * r * r
				}
				dense[a][b] = 2 * sum / float64(pairs[a]) / float64(pairs[b])
			}
		}
		got := Covariance(p, lags, pairs)
		for a, n := range lags {
			for b, m := range lags {
				unit := math.Sqrt(dense[a][a] * dense[b][b])
				bound := (float64(n+m) + 2*tau) / float64(min(pairs[a], pairs[b]))
				if gap := math.Abs(got[a][b]-dense[a][b]) / unit; gap > bound {
					t.Errorf("process %d: Cov(%d, %d) = %.5g, want %.5g (Isserlis), gap %.3f of the deviations, bound %.3f", i, n, m, got[a][b], dense[a][b], gap, bound)
				}
				if got[a][b] != got[b][a] {
					t.Errorf("process %d: Cov(%d, %d) is not symmetric", i, n, m)
				}
			}
		}
	}
}

// The covariance that a fit uses is positive definite, with the ridge: its correlation matrix
// has a Cholesky factor.
func TestCovariancePositive(t *testing.T) {
	for i, p := range processes {
		lags := Lags(5000, 1/(2*math.Pi*p.Corner))
		pairs := make([]int, len(lags))
		for a, n := range lags {
			pairs[a] = 5000 - n
		}
		cov := Covariance(p, lags, pairs)
		corr := mat.NewSymDense(len(lags), nil)
		for a := range lags {
			for b := range lags {
				corr.SetSym(a, b, cov[a][b]/math.Sqrt(cov[a][a]*cov[b][b]))
			}
			corr.SetSym(a, a, 1+ridge)
		}
		var chol mat.Cholesky
		if !chol.Factorize(corr) {
			t.Errorf("process %d: the correlation matrix of %d lags is not positive definite", i, len(lags))
		}
	}
}
