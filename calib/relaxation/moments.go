package relaxation

import "math"

// Removed says what was subtracted from a record before its variance was taken.
type Removed int

const (
	RemovedNothing Removed = iota // the mean is known
	RemovedMean                   // the mean of the record
	RemovedLine                   // the least-squares straight line
)

// SampleVariance returns the expectation [m2] and the variance [m4] of the mean
// square (1/N) sum x_i^2 of a record of n samples after what is named in removed
// was subtracted, for a Gaussian record.
//
// With P the projection that subtracts, and C the covariance matrix, these are
// tr(P C)/N and 2 tr(P C P C)/N^2. The first is exact: tr(C) minus the
// variances u' C u of the removed unit directions. The second is exact for
// tr(C^2) and counts u' C^2 u once for each direction, with the squares of
// the u' C u restored; for a mean alone that is exact.
func (p Process) SampleVariance(n int, removed Removed) (mean, variance float64) {
	a := 2 * math.Pi * p.Corner * p.Exposure
	b, _ := BlurCovariance(a)
	r0 := p.RecordedVariance()
	vb := p.Variance * b
	rho := 2 * math.Pi * p.Corner * p.Interval
	white := r0 - vb // the part of C on the diagonal alone
	nn := float64(n)

	tr := nn * r0
	tr2 := nn*r0*r0 + 2*vb*vb*weightedPowers(2*rho, n)
	for d := RemovedMean; d <= removed; d++ {
		uCu, uC2u := p.project(d, n, vb, white)
		tr -= uCu
		tr2 += -2*uC2u + uCu*uCu
	}
	return tr / nn, 2 * tr2 / (nn * nn)
}

// fewestCoarse is the least number of steps of a coarse-grained record: the sums over steps
// differ from those over samples by its inverse squared.
const fewestCoarse = 1 << 12

// project returns u' C u and u' C^2 u for a removed direction. A record of very
// many samples is coarse-grained first: as long as m samples are within 0.05
// relaxation times, one in m with m times the covariance gives the same sums to
// (0.05)^2/12 = 2e-4 of themselves; with more than 1e4 relaxation times both are the
// long-run variance and its square to better than 1e-3 of themselves.
func (p Process) project(d Removed, n int, vb, white float64) (uCu, uC2u float64) {
	rho := 2 * math.Pi * p.Corner * p.Interval
	if n > 1<<16 {
		if rho*float64(n) > 1e4 {
			long := white + vb/math.Tanh(rho/2)
			return long, long * long
		}
		if m := min(int(0.05/rho), n/fewestCoarse); m > 1 {
			coarse := n / m
			ratio := float64(n) / float64(coarse) // m, but for the rest of the division
			n, rho, vb = coarse, rho*ratio, vb*ratio
		}
	}
	u := direction(d, n)
	cu := toeplitz(u, math.Exp(-rho), vb, white)
	return dot(u, cu), dot(cu, cu)
}

// weightedPowers returns sum_{k=1}^{n-1} (n-k) z^k for z = exp(-x).
func weightedPowers(x float64, n int) float64 {
	z := math.Exp(-x)
	one := -math.Expm1(-x)
	zn := -math.Expm1(-x * float64(n)) // 1 - z^n
	return z / one * (float64(n) - zn/one)
}

// direction returns the unit vector of the constant, or of the straight line about
// its mean.
func direction(d Removed, n int) []float64 {
	u := make([]float64, n)
	if d == RemovedMean {
		for i := range u {
			u[i] = 1 / math.Sqrt(float64(n))
		}
		return u
	}
	mid := float64(n-1) / 2
	norm := math.Sqrt(float64(n) * (float64(n)*float64(n) - 1) / 12)
	for i := range u {
		u[i] = (float64(i) - mid) / norm
	}
	return u
}

// toeplitz returns C u in O(n) for C_ij = vb c^|i-j| + white delta_ij.
func toeplitz(u []float64, c, vb, white float64) []float64 {
	out := make([]float64, len(u))
	acc := 0.0
	for i, v := range u {
		out[i] = vb*(v+acc) + white*v
		acc = c * (acc + v)
	}
	acc = 0
	for i := len(u) - 1; i >= 0; i-- {
		out[i] += vb * acc
		acc = c * (acc + u[i])
	}
	return out
}

func dot(a, b []float64) float64 {
	s := 0.0
	for i, v := range a {
		s += v * b[i]
	}
	return s
}
