package msd

import (
	"math"

	"beadwell/calib/relaxation"
)

// kernel holds the autocovariance r(k) = A c^|k| + W [k=0] of a recorded process for
// sums over time.
type kernel struct {
	amplitude, white, decay, rate float64 // A, W [m2], c, -ln c
}

func newKernel(p relaxation.Process) kernel {
	b, _ := relaxation.BlurCovariance(2 * math.Pi * p.Corner * p.Exposure)
	a := p.Variance * b
	return kernel{amplitude: a, white: p.RecordedVariance() - a, decay: p.Decay(), rate: 2 * math.Pi * p.Corner * p.Interval}
}

// overlap returns sum over all k of r(k) r(k+d) [m4]: with t = tanh(rate),
// A^2 c^|d| (|d| + 1/t) + 2 A W c^|d| + W^2 [d=0].
func (k kernel) overlap(d int) float64 {
	n := math.Abs(float64(d))
	cd := math.Exp(-k.rate * n)
	s := k.amplitude * cd * (k.amplitude*(n+1/math.Tanh(k.rate)) + 2*k.white)
	if d == 0 {
		s += k.white * k.white
	}
	return s
}

// squares returns the sum over all k of R(k)^2 [m4], where R(k) is the covariance of
// the increment over n samples with the one over m samples that starts k later:
// R(k) = r(k) + r(k+m-n) - r(k-n) - r(k+m).
func (k kernel) squares(n, m int) float64 {
	shift := [4]int{0, m - n, -n, m}
	sign := [4]float64{1, 1, -1, -1}
	s := 0.0
	for i := range shift {
		for j := range shift {
			s += sign[i] * sign[j] * k.overlap(shift[i]-shift[j])
		}
	}
	return s
}

// Covariance returns the covariance [m4] of the time-averaged mean-square
// displacements at the given lags, from pairs[i] pairs of samples each. It is
//
//	Cov(M_n, M_m) = (2/max(N_n, N_m)) sum_k R_nm(k)^2,
//
// exact but for the ends of the record, and positive definite since a
// minimum of 1/N is.
func Covariance(p relaxation.Process, lags, pairs []int) [][]float64 {
	k := newKernel(p)
	c := make([][]float64, len(lags))
	for i := range c {
		c[i] = make([]float64, len(lags))
	}
	for i, n := range lags {
		for j := 0; j <= i; j++ {
			v := 2 / float64(max(pairs[i], pairs[j])) * k.squares(n, lags[j])
			c[i][j], c[j][i] = v, v
		}
	}
	return c
}

// withMeanSquare returns the covariance [m4] of the mean square of the record with the
// mean-square displacement at a lag of n samples: (4/N)(G(0) - G(n)), G = overlap.
func (k kernel) withMeanSquare(n, samples int) float64 {
	return 4 / float64(samples) * (k.overlap(0) - k.overlap(n))
}
