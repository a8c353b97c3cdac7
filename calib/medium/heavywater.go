package medium

import "math"

// heavyWater returns the properties of liquid heavy water at atmospheric
// pressure: viscosity by the IAPWS formulation of 1984 as revised in 2007 (Kestin et
// al., J. Phys. Chem. Ref. Data 13 (1984) 601), at the density of Kell 1967, brought to
// the newer IAPWS R17-20 from 20 to 37 C (heavyWaterShift), 3.5 to 100 C.
//
// Standard uncertainty of the viscosity: 0.3 % from 20 to 37 C, where the two
// formulations differ by up to 0.25 %; 1 % elsewhere (they differ by 0.8 % at 100 C).
// Density: 2e-4, which leaves room for 0.2 % of light water; the viscosity with 1 % of
// light water is 0.2 % lower.
func heavyWater(kelvin, _ float64) state {
	density := heavyWaterDensity(kelvin)
	s := state{
		viscosity:  heavyWaterViscosity(kelvin, density) * math.Exp(heavyWaterShift(kelvin)),
		viscosityU: 0.01,
		density:    density,
		densityU:   2e-4,
	}
	if kelvin > 293.15-slack && kelvin < 310.15+slack {
		s.viscosityU = 0.003
	}
	return s
}

// heavyWaterShift is the logarithm of the viscosity of IAPWS R17-20 over that of the
// formulation of 1984 at the density of Kell: the cubic through 20, 25, 30 and 37 C, where
// R17-20 gives 1243.001, 1092.774, 970.210 and 832.924 uPa s, and its end values outside.
func heavyWaterShift(kelvin float64) float64 {
	anchors := []struct{ celsius, viscosity float64 }{
		{20, 1243.00128e-6}, {25, 1092.77379e-6}, {30, 970.209810e-6}, {37, 832.923592e-6}, // Pa s
	}
	t := min(max(kelvin-zeroCelsius, 20), 37)
	sum := 0.0
	for i, a := range anchors {
		at := a.celsius + zeroCelsius
		term := math.Log(a.viscosity / heavyWaterViscosity(at, heavyWaterDensity(at)))
		for j, b := range anchors {
			if i != j {
				term *= (t - b.celsius) / (a.celsius - b.celsius)
			}
		}
		sum += term
	}
	return sum
}

// heavyWaterDensity is the equation of Kell 1967 [kg/m3]; coefficients from
// memory, checked against the published 1104.4 kg/m3 at 25 C.
func heavyWaterDensity(kelvin float64) float64 {
	t := kelvin - zeroCelsius
	return polynomial(t, 1104.690, 20.09315, -9.24227e-3, -55.9509e-6, 79.9512e-9) / (1 + 17.96190e-3*t)
}

// heavyWaterTerms are the exponents i, j and the coefficients of the IAPWS
// release on the viscosity of heavy water, revision of 2007, Table 3.
var heavyWaterTerms = []struct {
	i, j        int
	coefficient float64
}{
	{0, 0, 0.4864192}, {1, 0, -0.2448372}, {2, 0, -0.8702035}, {3, 0, 0.8716056}, {4, 0, -1.051126}, {5, 0, 0.3458395},
	{0, 1, 0.3509007}, {1, 1, 1.315436}, {2, 1, 1.297752}, {3, 1, 1.353448},
	{0, 2, -0.2847572}, {1, 2, -1.037026}, {2, 2, -1.287846}, {5, 2, -0.02148229},
	{0, 3, 0.07013759}, {1, 3, 0.4660127}, {2, 3, 0.2292075}, {3, 3, -0.4857462},
	{0, 4, 0.01641220}, {1, 4, -0.02884911}, {3, 4, 0.1607171}, {5, 4, -0.009603846},
	{0, 5, -0.01163815}, {1, 5, -0.008239587}, {5, 5, 0.004559914},
	{3, 6, -0.003886659},
}

// heavyWaterViscosity is the formulation at a temperature [K] and density [kg/m3], in Pa s.
func heavyWaterViscosity(kelvin, density float64) float64 {
	t := kelvin / 643.847 // critical temperature of D2O [K]
	r := density / 358    // its reducing density [kg/m3]
	dilute := math.Sqrt(t) / polynomial(1/t, 1.0, 0.940695, 0.578377, -0.202044)
	sum := 0.0
	for _, term := range heavyWaterTerms {
		sum += term.coefficient * math.Pow(1/t-1, float64(term.i)) * math.Pow(r-1, float64(term.j))
	}
	return 55.2651e-6 * dilute * math.Exp(r*sum)
}
