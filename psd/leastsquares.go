package psd

import (
	"errors"
	"math"
)

// ErrNoLorentzian tells that the closed-form fit has no solution with positive
// coefficients.
var ErrNoLorentzian = errors.New("the closed-form fit finds no Lorentzian")

// LeastSquares fits P = 1/(a + b f^2) to a two-sided power spectrum [m2/Hz] at the
// frequencies f [Hz] in closed form and returns the corner frequency sqrt(a/b) [Hz] and
// the diffusion coefficient 2 pi^2/b [m2/s]. Each power is an average of bins values of a periodogram, for
// which the amplitude is biased by (bins+1)/bins; that is corrected (Norrelykke and
// Flyvbjerg, Rev. Sci. Instrum. 81 (2010) 075103). With bins = 0 it is not.
//
// The model knows nothing of aliasing, blur or noise: the fit is a check and a
// starting value. Source: Berg-Sorensen and Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594.
func LeastSquares(f, power []float64, bins int) (corner, diffusion float64, err error) {
	if len(f) != len(power) {
		panic("psd: frequencies and powers differ in number")
	}
	// powers relative to the largest keep the sums in range
	unit := 0.0
	for _, p := range power {
		unit = math.Max(unit, p)
	}
	var s01, s02, s11, s12, s22 float64
	for i, p := range power {
		p /= unit
		f2 := f[i] * f[i]
		s01 += p
		s02 += p * p
		s11 += f2 * p
		s12 += f2 * p * p
		s22 += f2 * f2 * p * p
	}
	det := s02*s22 - s12*s12
	a := (s01*s22 - s11*s12) / det
	b := (s11*s02 - s01*s12) / det
	if !(a > 0 && b > 0) {
		return math.NaN(), math.NaN(), ErrNoLorentzian
	}
	corner = math.Sqrt(a / b)
	diffusion = 2 * math.Pi * math.Pi / b * unit
	if bins > 0 {
		diffusion *= float64(bins) / float64(bins+1)
	}
	return corner, diffusion, nil
}
