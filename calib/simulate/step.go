package simulate

import "math"

// step holds the coefficients of the exact update from one sample to the next.
// With x the position at the start of an exposure and z, y independent standard
// normal deviates,
//
//	recorded = held x + shared z + own y
//	next x   = decay x + kick z
type step struct {
	decay  float64 // c = exp(-2 pi fc/fs)
	kick   float64 // sqrt(V(1-c²)) [m]
	held   float64 // mean of the decaying position over the exposure, (1-exp(-a))/a
	shared float64 // covariance of the exposure mean with the kick, over kick [m]
	own    float64 // what remains of the blur, with the localisation noise [m]
}

// newStep returns the coefficients for an axis sampled at interval [s] with exposure [s].
func newStep(a Axis, interval, exposure float64) step {
	if a.Fixed {
		return step{decay: 1, held: 1, own: a.Noise}
	}
	if a.Diffusion != 0 {
		return freeStep(a.Diffusion, a.Noise, interval, exposure)
	}
	rate := 2 * math.Pi * a.Corner
	return trappedStep(a.Variance, a.Noise, rate*interval, rate*exposure)
}

// trappedStep takes the variance [m²], the noise [m], and interval and exposure in
// units of the relaxation time.
//
// The exposure mean is first conditioned on the positions at both ends of the
// exposure, where its variance is V bridge(a), and then the position at its end on the
// start of the next interval. Every term is positive, so nothing cancels.
func trappedStep(variance, noise, interval, exposure float64) step {
	loss := -math.Expm1(-2 * interval) // 1 - c²
	rest := math.Max(interval-exposure, 0)
	s := step{
		decay: 1 + math.Expm1(-interval),
		kick:  math.Sqrt(variance * loss),
		held:  meanDecay(exposure),
	}
	gain := -math.Expm1(-exposure) // 1 - exp(-a)
	s.shared = variance * (1 + math.Expm1(-rest)) * s.held * gain / s.kick
	ends := halfTanh(exposure)
	endVariance := math.Expm1(-2*exposure) * math.Expm1(-2*rest) / loss
	s.own = math.Sqrt(variance*(bridge(exposure)+ends*ends*endVariance) + noise*noise)
	return s
}

// freeStep is the limit of trappedStep without a trap, for a diffusion coefficient [m²/s].
func freeStep(diffusion, noise, interval, exposure float64) step {
	exposure = math.Min(exposure, interval)
	s := step{decay: 1, kick: math.Sqrt(2 * diffusion * interval), held: 1}
	s.shared = diffusion * exposure / s.kick
	blur := 2 * diffusion * exposure * (1.0/3 - exposure/(4*interval))
	s.own = math.Sqrt(blur + noise*noise)
	return s
}

// meanDecay returns (1 - exp(-a))/a, which is 1 at a = 0.
func meanDecay(a float64) float64 {
	if a == 0 {
		return 1
	}
	return -math.Expm1(-a) / a
}

// halfTanh returns tanh(a/2)/a, which is 1/2 at a = 0.
func halfTanh(a float64) float64 {
	if a == 0 {
		return 0.5
	}
	return math.Expm1(-a) / (-2 - math.Expm1(-a)) / a
}

// bridge returns the variance of the mean over an exposure a (in relaxation
// times) of a bead whose positions at both ends are known, in units of the thermal
// variance: 2/a - 4 tanh(a/2)/a². Below bridgeSeries that difference loses its
// digits and the series of tanh is summed instead.
func bridge(a float64) float64 {
	if a < bridgeSeries {
		y := a * a / 4
		return a / 6 * (1 - y*(2.0/5-y*(17.0/105-y*62.0/945)))
	}
	return (2 - 4*halfTanh(a)) / a
}

// bridgeSeries balances the first neglected term of the series, 0.03 y⁴ relative
// (2e-13 here), against the cancellation of the closed form, 12/a² units of rounding (3e-13).
const bridgeSeries = 0.1
