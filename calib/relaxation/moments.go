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

// fewestSpans is the number of relaxation times in a record from which the sums of project are taken in closed form. Below it
// they would lose digits to cancellation, as its inverse squared.
const fewestSpans = 30

// project returns u' C u and u' C^2 u for a removed direction. With g = (1+c)/(1-c), h = white + vb g,
//
//	sum_j c^|i-j|         = g - (c^(i+1) + c^(n-i))/(1-c)
//	sum_j c^|i-j| (j - m) = g (i - m) + ((1+m)/(1-c) + c/(1-c)^2) (c^(i+1) - c^(n-i))
//
// about the middle m = (n-1)/2, and the sums over i of these and of their squares are geometric.
func (p Process) project(d Removed, n int, vb, white float64) (uCu, uC2u float64) {
	rho := 2 * math.Pi * p.Corner * p.Interval
	c, nn := math.Exp(-rho), float64(n)
	if rho*nn < fewestSpans {
		u := direction(d, n)
		cu := toeplitz(u, c, vb, white)
		return dot(u, cu), dot(cu, cu)
	}
	one := -math.Expm1(-rho)      // 1 - c
	cn := math.Exp(-rho * nn)     // c^n
	first := c * (1 - cn) / one   // sum of c^(i+1)
	second := c * c * (1 - cn*cn) // sum of its square
	second /= -math.Expm1(-2 * rho)
	cross := nn * c * cn // sum of c^(i+1) c^(n-i)
	h := white + vb*(1+c)/one
	if d == RemovedMean {
		end := vb / one
		return h - 2*end*first/nn, h*h - 4*h*end*first/nn + 2*end*end*(second+cross)/nn
	}
	mid := (nn - 1) / 2
	norm := nn * (nn*nn - 1) / 12
	end := vb * ((1+mid)/one + c/(one*one))
	// sum of (i - m) (c^(i+1) - c^(n-i)), twice that of (i - m) c^(i+1)
	lever := 2 * (c*(c-nn*cn+(nn-1)*cn*c)/(one*one) - mid*first)
	return h + end*lever/norm, h*h + (2*h*end*lever+2*end*end*(second-cross))/norm
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
