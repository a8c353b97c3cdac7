package medium

import "math"

// glycerol returns the properties of glycerol-water mixtures at mass fraction w,
// 0 to 100 C: viscosity by Cheng 2008, Eqs 6, 11 to 13, 21 and 22; density by Volk and
// Kaehler 2018.
//
// Standard uncertainty of the viscosity: 3.5 % from 10 to 40 C and w <= 0.9, the
// largest departure from handbook values there (Segur and Oberstar 1951); 5 %
// elsewhere, our judgement. Density: 0.1 % (the authors' figure, from memory).
func glycerol(kelvin, w float64) state {
	s := state{viscosity: glycerolViscosity(kelvin, w), density: glycerolDensity(kelvin, w), viscosityU: 0.05, densityU: 1e-3}
	if w <= 0.9 && kelvin > 283.15-slack && kelvin < 313.15+slack {
		s.viscosityU = 0.035
	}
	return s
}

// glycerolViscosity is the power-law mixture of Cheng 2008 [Pa s].
func glycerolViscosity(kelvin, w float64) float64 {
	t := kelvin - zeroCelsius
	water := 1.790e-3 * math.Exp((-1230-t)*t/(36100+360*t))
	pure := 12.100 * math.Exp((-1233+t)*t/(9900+70*t))
	a := 0.705 - 0.0017*t
	b := (4.9 + 0.036*t) * math.Pow(a, 2.5)
	alpha := 1 - w + a*b*w*(1-w)/(a*w+b*(1-w))
	return math.Pow(water, alpha) * math.Pow(pure, 1-alpha)
}

// glycerolDensity is the ideal mixture times the contraction of Volk and Kaehler
// 2018 [kg/m3]. Coefficients from memory; they reproduce 1126.226 kg/m3 at 20 C, 50 %.
func glycerolDensity(kelvin, w float64) float64 {
	t := kelvin - zeroCelsius
	water := 1000 * (1 - math.Pow(math.Abs((t-3.98)/615), 1.71))
	pure := 1273.3 - 0.6121*t
	ideal := 1 / (w/pure + (1-w)/water)
	// sin(pi) rounds to just above zero at w = 1; Max keeps the power real.
	bulge := math.Pow(math.Max(0, math.Sin(math.Pow(w, 1.31)*math.Pi)), 0.81)
	return ideal * (1 + polynomial(t, 1.41e-2, -1.82e-4, 1.78e-6)*bulge)
}
