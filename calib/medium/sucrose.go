package medium

import "math"

// sucrose returns the properties of sucrose-water solutions at mass fraction w
// up to 0.65, 0 to 60 C, by Barber, Natl. Cancer Inst. Monogr. 21 (1966) 219, a
// fit to the tables of Swindells et al., NBS Circular 440 supplement (1958).
//
// Coefficients from memory; at 20 C they meet the handbook values at 10 to 40 %
// within 0.4 % and at 60 % within 0.8 %, and water within 0.3 %. Another published
// correlation (Laliberte 2009) lies up to 1.9 % higher: the standard uncertainty is 1 %.
// Density: the ratio to water of Barber's quadratic, times the density of water,
// 0.1 %; the quadratic itself drifts from water above 30 C.
func sucrose(kelvin, w float64) state {
	t := kelvin - zeroCelsius
	return state{
		viscosity:  sucroseViscosity(t, w),
		viscosityU: 0.01,
		density:    waterDensity(kelvin) * sucroseDensity(t, w) / sucroseDensity(t, 0),
		densityU:   1e-3,
	}
}

// sucroseViscosity is log10(eta/mPa s) = A(y) + B(y)/(t + C(y)), y the mole
// fraction of sucrose and t in C; A and B have one branch up to 48 % and one above. [Pa s]
func sucroseViscosity(t, w float64) float64 {
	const sugar, water = 342.32, 18.0 // molar masses that Barber took [g/mol]
	y := (w / sugar) / (w/sugar + (1-w)/water)
	var a, b float64
	if w <= 0.48 {
		a = polynomial(y, -1.5018327, 9.4112153, -1.1435741e3, 1.0504137e5,
			-4.6927102e6, 1.0323349e8, -1.1028981e9, 4.5921911e9)
		b = polynomial(y, 2.1169907e2, 1.6077073e3, 1.6911611e5, -1.4184371e7,
			6.0654775e8, -1.2985834e10, 1.3532907e11, -5.4970416e11)
	} else {
		a = polynomial(y, -1.0803314, -2.0003484e1, 4.6066898e2, -5.9517023e3, 3.5627216e4, -7.8542145e4)
		b = polynomial(y, 1.3975568e2, 6.6747329e3, -7.8716105e4, 9.0967578e5, -5.5380830e6, 1.2451219e7)
	}
	c := 146.06635 - 25.251728*math.Sqrt(1+(y/0.070674842)*(y/0.070674842))
	return 1e-3 * math.Pow(10, a+b/(t+c))
}

// sucroseDensity is Barber's density in g/cm3, t in C.
func sucroseDensity(t, w float64) float64 {
	return polynomial(w,
		polynomial(t, 1.0003698, 3.9680504e-5, -5.8513271e-6),
		polynomial(t, 0.38982371, -1.0578919e-3, 1.2392833e-5),
		polynomial(t, 0.17097594, 4.7530081e-4, -8.9239737e-6))
}
