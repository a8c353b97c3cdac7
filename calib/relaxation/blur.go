package relaxation

import "math"

// BlurVariance returns S(a), the share of the position variance that is left
// when every sample is an average over the exposure, a = 2 pi fc W >= 0
// (dimensionless; Wong and Halvorsen, Opt. Express 14 (2006) 12517), and its
// derivative dS/da.
//
// Below a = 0.05 the series sum 2 (-a)^n/(n+2)! replaces the closed form, which
// there loses digits to cancellation; 7 terms leave a relative error below 1e-15.
func BlurVariance(a float64) (s, ds float64) {
	if a < 0.05 {
		term := 1.0 // 2 (-a)^n / (n+2)!
		for n := 0; n < 8; n++ {
			s += term
			if n > 0 {
				ds += float64(n) * term / a
			}
			term *= -a / float64(n+3)
		}
		if a == 0 {
			ds = -1.0 / 3
		}
		return s, ds
	}
	e := math.Exp(-a)
	m := -math.Expm1(-a)
	s = 2/a - 2*m/(a*a)
	ds = -2/(a*a) - 2*e/(a*a) + 4*m/(a*a*a)
	return s, ds
}

// BlurCovariance returns B(a) = (sinh(a/2)/(a/2))^2, the factor by which exposure
// raises the autocovariance at all lags of one sample or more, and dB/da.
func BlurCovariance(a float64) (b, db float64) {
	h := a / 2
	if h < 0.03 {
		// sinh(h)/h = 1 + h^2/6 + h^4/120 + h^6/5040; the next term is below 1e-18
		h2 := h * h
		u := 1 + h2/6*(1+h2/20*(1+h2/42))
		du := h/3 + h*h2/30 + h*h2*h2/840
		return u * u, u * du
	}
	u := math.Sinh(h) / h
	du := (math.Cosh(h) - u) / h
	return u * u, u * du
}
