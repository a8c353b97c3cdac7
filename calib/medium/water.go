package medium

import "math"

// water returns the properties of liquid water at 0.1 MPa by IAPWS SR6-08(2011),
// Eqs 1, 2 and 7 (Patek et al. 2009), 253.15 to 383.15 K.
//
// Standard uncertainty of the viscosity: 0.2 % from 10 to 40 C, where this
// formulation, that of Kestin et al. 1978 and the primary standard at 20 C
// (ISO/TR 3666, 0.17 %) agree within 0.13 %; 0.5 % elsewhere, half of the 1 %
// at 95 % coverage that Huber et al. 2009 (IAPWS R12-08) state for the liquid (from
// memory). Density: 2e-5 covers the formulation above 0 C, isotopes and dissolved
// air; 5e-4 is taken for supercooled water and above 100 C.
func water(kelvin, _ float64) state {
	s := state{viscosity: waterViscosity(kelvin), density: waterDensity(kelvin), viscosityU: 0.005, densityU: 2e-5}
	if kelvin > 283.15-slack && kelvin < 313.15+slack {
		s.viscosityU = 0.002
	}
	if kelvin < zeroCelsius || kelvin > zeroCelsius+100 {
		s.densityU = 5e-4
	}
	return s
}

// waterViscosity is Eq. 7 of SR6-08(2011) [Pa s].
func waterViscosity(kelvin float64) float64 {
	t := kelvin / 300
	return 1e-6 * (280.68*math.Pow(t, -1.9) + 511.45*math.Pow(t, -7.7) +
		61.131*math.Pow(t, -19.6) + 0.45903*math.Pow(t, -40))
}

// waterDensity is the inverse of Eq. 2 of SR6-08(2011) [kg/m3].
func waterDensity(kelvin float64) float64 {
	const (
		gas      = 461.51805 // specific gas constant of SR6-08 [J/(kg K)]
		reduced  = 10.0      // its reducing temperature [K]
		pressure = 1e5       // its reference pressure [Pa]
	)
	alpha := reduced / (593 - kelvin)
	beta := reduced / (kelvin - 232)
	alpha4 := alpha * alpha * alpha * alpha
	sum := 1.93763157e-2 +
		alpha4*polynomial(alpha, 6.74458446e3, -2.22521604e5, 0, 1.00231247e8, -1.63552118e9, 8.32299658e9) +
		beta*polynomial(beta, 5.78545292e-3, -1.53195665e-2, 3.11337859e-2, -4.23546241e-2, 3.38713507e-2, -1.19946761e-2)
	return 1 / (gas * reduced / pressure * sum)
}
