package medium

import "math"

// saline returns the properties of sodium chloride solutions at molality m
// [mol/kg] up to 6, 20 to 100 C: viscosity relative to water by Kestin, Khalifa and
// Correia 1981, Eqs 2, 4 and 5 in the limit of low pressure, on the water of
// IAPWS SR6-08; density by Laliberte and Cooper 2004.
//
// Standard uncertainty of the viscosity 0.5 % (the authors' figure, from memory),
// which also covers that real buffers hold other salts; of the density 5e-4.
func saline(kelvin, m float64) state {
	return state{
		viscosity:  waterViscosity(kelvin) * salineRelativeViscosity(waterViscosity(kelvin), m),
		viscosityU: 0.005,
		density:    salineDensity(kelvin, m),
		densityU:   5e-4,
	}
}

// salineRelativeViscosity is eta/eta_water for water of the given viscosity [Pa s].
func salineRelativeViscosity(water, m float64) float64 {
	const datum = 1002e-6 // viscosity of water at 20 C that Kestin et al. took [Pa s]
	a := m * polynomial(m, 3.324e-2, 3.624e-3, -1.879e-4)
	b := m * polynomial(m, -3.96e-2, 1.02e-2, -7.02e-4)
	return math.Pow(10, a+b*math.Log10(water/datum))
}

// salineDensity sums the volumes of water and of the salt at its apparent density
// [kg/m3]. Coefficients of NaCl from memory; 10 % at 20 C comes to 1070.8 kg/m3 and
// the handbook has 1070.7.
func salineDensity(kelvin, m float64) float64 {
	const molarMass = 58.443e-3 // NaCl [kg/mol]
	t := kelvin - zeroCelsius
	w := m * molarMass / (1 + m*molarMass)
	apparent := (-0.00433*w + 0.06471) * math.Exp(1e-6*(t+3315.6)*(t+3315.6)) / (w + 1.01660 + 0.014624*t)
	return 1 / ((1-w)/waterDensity(kelvin) + w/apparent)
}
