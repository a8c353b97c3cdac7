package medium

import (
	"errors"
	"fmt"
	"math"
)

// Properties are what a fluid is at one temperature, in SI units.
type Properties struct {
	Viscosity     float64 // dynamic viscosity eta [Pa s]
	ViscosityU    float64 // standard uncertainty of the correlation, relative to Viscosity
	ViscosityTemp float64 // d ln(eta)/dT [1/K]
	Density       float64 // rho [kg/m3]
	DensityU      float64 // standard uncertainty of the correlation, relative to Density
	Source        string  // author and year of the correlations
}

// Range returns the lowest and the highest temperature [K] at which At answers;
// both are NaN for the zero Fluid.
func (f Fluid) Range() (low, high float64) {
	if f.solution == nil {
		return math.NaN(), math.NaN()
	}
	return f.solution.low, f.solution.high
}

// slack is how far outside its range a temperature may be [K]: enough for the
// rounding of a conversion from C, and far below any effect on the result.
const slack = 1e-6

// At returns the properties of the fluid at a temperature [K] and atmospheric
// pressure.
//
// The derivative is that of the correlation itself, by central difference over
// 0.02 K: truncation and rounding are both below 1e-9 of it. At returns an error
// for the zero Fluid and for a temperature that is not finite or outside Range:
// correlations are not extrapolated.
func (f Fluid) At(kelvin float64) (Properties, error) {
	if f.solution == nil {
		return Properties{}, errors.New("no fluid is given: name one, such as \"water\"")
	}
	s := f.solution
	if math.IsNaN(kelvin) || kelvin < s.low-slack || kelvin > s.high+slack {
		return Properties{}, f.outside(kelvin)
	}
	const step = 0.01 // K
	now := s.evaluate(kelvin, f.amount)
	below := s.evaluate(kelvin-step, f.amount).viscosity
	above := s.evaluate(kelvin+step, f.amount).viscosity
	return Properties{
		Viscosity:     now.viscosity,
		ViscosityU:    now.viscosityU,
		ViscosityTemp: math.Log(above/below) / (2 * step),
		Density:       now.density,
		DensityU:      now.densityU,
		Source:        s.source,
	}, nil
}

// outside names the temperature, the range and the likely slip.
func (f Fluid) outside(kelvin float64) error {
	s := f.solution
	text := fmt.Sprintf("temperature %.6g K (%.6g C) is outside %g K to %g K (%.4g C to %.4g C), the range of the correlation for %s",
		kelvin, kelvin-zeroCelsius, s.low, s.high, s.low-zeroCelsius, s.high-zeroCelsius, f.Name)
	if asCelsius := kelvin + zeroCelsius; asCelsius >= s.low && asCelsius <= s.high {
		return fmt.Errorf("%s: is the temperature in C? %.6g C is %.6g K", text, kelvin, asCelsius)
	}
	return fmt.Errorf("%s: correct the temperature, or give the viscosity itself", text)
}

// polynomial returns c[0] + c[1] x + c[2] x^2 + ...
func polynomial(x float64, c ...float64) float64 {
	sum := 0.0
	for i := len(c) - 1; i >= 0; i-- {
		sum = sum*x + c[i]
	}
	return sum
}
