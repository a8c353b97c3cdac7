package drag

import "math"

// Thresholds in h/R between the forms of the wall factor.
const (
	// farRatio: above it the factor is Faxen's series (parallel) or that of Lorentz (perpendicular
	// above veryFarRatio). At 20 Faxen differs from the exact series by 3e-9 of the factor.
	farRatio = 20
	// veryFarRatio: the next term left out of the perpendicular series, R^5/(8 h^5),
	// is 1e-16 there.
	veryFarRatio = 1000
	// contactRatio: below it the sums need 10^4 terms and more, and the asymptotes
	// at contact differ from them by less than 1e-5.
	contactRatio = 1 + 1e-5
)

// Parallel returns the factor lambda by which one wall raises the drag of a
// sphere that moves parallel to it, at h/R = ratio > 1; +Inf gives 1.
//
// It is the exact solution of O'Neill, Mathematika 11 (1964) 67, in the form of
// Goldman, Cox and Brenner, Chem. Eng. Sci. 22 (1967) 637, up to h/R = 20, and Faxen's
// series beyond (docs/method.md, Eq. 48). Its error is below 1e-6 for h/R > 1.001, and below 1e-5 down to
// contact, where the logarithmic asymptote of Chaoui and Feuillebois, Q. J. Mech. Appl.
// Math. 56 (2003) 381 takes over (Goldman, Cox and Brenner print 0.9588 for its constant).
// It returns an error if ratio is not above 1.
func Parallel(ratio float64) (float64, error) {
	if err := checkRatio(ratio); err != nil {
		return math.NaN(), err
	}
	return parallel(ratio), nil
}

// ParallelSlope returns d ln(lambda)/d ln(h/R) of Parallel, which is negative. It is
// minus the same derivative with respect to the radius.
func ParallelSlope(ratio float64) (float64, error) {
	if err := checkRatio(ratio); err != nil {
		return math.NaN(), err
	}
	return parallelSlope(ratio), nil
}

// Faxen returns Faxen's factor for motion parallel to one wall,
// 1/(1 - 9s/16 + s^3/8 - 45 s^4/256 - s^5/16) with s = R/h (Faxen 1923; Happel and
// Brenner, Low Reynolds Number Hydrodynamics, Eq. 7-4.28), and its relative error
// against the exact solution: 0.02 % at h/R = 3, 0.24 % at 2, +4.4 % near 1.12. It
// returns an error if ratio is not above 1.
func Faxen(ratio float64) (factor, relativeError float64, err error) {
	if err := checkRatio(ratio); err != nil {
		return math.NaN(), math.NaN(), err
	}
	factor = faxen(ratio)
	return factor, factor/parallel(ratio) - 1, nil
}

func faxen(ratio float64) float64 {
	s := 1 / ratio
	return 1 / (1 + s*(-9.0/16+s*s*(1.0/8+s*(-45.0/256-s/16))))
}

func parallel(ratio float64) float64 {
	switch {
	case ratio > farRatio:
		return faxen(ratio)
	case ratio < contactRatio:
		return -8.0/15*math.Log(ratio-1) + 0.954293 // constant from memory, checked against the sum
	}
	return parallelSeries(ratio)
}

func parallelSlope(ratio float64) float64 {
	switch {
	case ratio > farRatio:
		s := 1 / ratio
		return s * (-9.0/16 + s*s*(3.0/8+s*(-4*45.0/256-5*s/16))) * faxen(ratio)
	case ratio < contactRatio:
		return -8.0 / 15 * ratio / (ratio - 1) / parallel(ratio)
	}
	return centralSlope(parallelSeries, ratio)
}

// centralSlope is d ln f/d ln ratio by a central difference over a thousandth of the
// gap: its truncation is some 1e-6 of the slope, its rounding below that.
func centralSlope(f func(float64) float64, ratio float64) float64 {
	step := 1e-3 * (ratio - 1)
	return ratio * math.Log(f(ratio+step)/f(ratio-step)) / (2 * step)
}

// parallelSeries sums O'Neill's solution: a tridiagonal system for A_n, n >= 1, with
// A_0 = 0, and from it C_n and E_n;
// lambda = (sqrt 2/6) sinh(alpha) sum [E_n + n(n+1) C_n], cosh(alpha) = h/R.
func parallelSeries(ratio float64) float64 {
	alpha := math.Acosh(ratio)
	// Terms fall like n^3 exp(-n alpha); 32/alpha of them leave 1e-9.
	terms := 8 + int(32/alpha)
	coth := halfCotangents(alpha, terms+1)
	k := make([]float64, terms+1) // k_n = (n+1/2) coth((n+1/2) alpha) - coth(alpha)
	for n := range k {
		k[n] = (float64(n)+0.5)*coth[n] - 1/math.Tanh(alpha)
	}
	a := solveParallel(coth, k, terms)
	// n = 0: A_-1 does not enter, A_0 = 0.
	sum := 2*math.Sqrt2*(coth[0]-1) - 2.0/3*k[0]*a[1]
	for n := 1; n < terms-1; n++ {
		m := float64(n)
		below, above := a[n-1]/(2*m-1), a[n+1]/(2*m+3)
		c := -2 * k[n] * ((m-1)*below - a[n] + (m+2)*above)
		// 2 sqrt 2 exp(-y)/sinh(y) = 2 sqrt 2 (coth(y) - 1), y = (n+1/2) alpha
		e := 2*math.Sqrt2*(coth[n]-1) + k[n]*(m*(m-1)*below-(m+1)*(m+2)*above)
		sum += e + m*(m+1)*c
	}
	return math.Sqrt2 / 6 * math.Sinh(alpha) * sum
}

// halfCotangents returns coth((n+1/2) alpha) for n = 0 .. count-1. The exponentials are
// built by multiplication; their rounding grows to count*1e-16.
func halfCotangents(alpha float64, count int) []float64 {
	coth := make([]float64, count)
	x, step := math.Exp(-alpha), math.Exp(-2*alpha)
	for n := range coth {
		coth[n] = (1 + x) / (1 - x)
		x *= step
	}
	return coth
}

// solveParallel returns A_0 .. A_(terms-1) by elimination without pivoting.
func solveParallel(coth, k []float64, terms int) []float64 {
	a, upper := make([]float64, terms), make([]float64, terms)
	for n := 1; n < terms; n++ {
		m := float64(n)
		first := (2*m-1)*k[n-1] - (2*m-3)*k[n]
		second := (2*m+5)*k[n] - (2*m+3)*k[n+1]
		lower := first * (m - 1) / (2*m - 1)
		diagonal := -(first*m + second*(m+1)) / (2*m + 1)
		over := second * (m + 2) / (2*m + 3)
		right := math.Sqrt2 * (2*coth[n] - coth[n-1] - coth[n+1])
		pivot := diagonal - lower*upper[n-1]
		upper[n] = over / pivot
		a[n] = (right - lower*a[n-1]) / pivot
	}
	for n := terms - 2; n >= 1; n-- {
		a[n] -= upper[n] * a[n+1]
	}
	return a
}
