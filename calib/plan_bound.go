package calib

import (
	"math"

	"beadwell/calib/relaxation"
	"beadwell/calib/session"
	"beadwell/psd"
)

// forecast is what a prediction needs, for one axis; SI units.
type forecast struct {
	axis                string
	set                 *session.Settings
	phys                *physics
	kappa               float64 // N/m
	corner, variance    float64 // Hz, m2
	rate                float64 // Hz
	exposure, exposureU float64 // s
	noise               psd.Noise
}

// outlook is the prediction for one recording.
type outlook struct {
	routes PlanRoutes
	weight float64 // of the drag route in the combination
	// what one standard uncertainty of the exposure does to ln kappa of the combination
	exposure float64
}

// endless is a number of samples whose statistics are nothing beside any input: the
// relative uncertainty is below 1e-6.
const endless = 1 << 50

// unknowable is the bound of ln(kappa) from which on a route is given no number.
const unknowable = 1.0

// at predicts a recording of n samples at a rate [Hz].
//
// With F the Fisher information of (ln fc, ln V, q) the bounds of the routes are those of
// ln fc and ln V with all else unknown; the combination adds the computed drag as a prior of
// ln fc + ln V, as Calibrate does.
func (f *forecast) at(rate float64, n int) outlook {
	blocks := planBlocks(n)
	spectrum := relaxation.NewSpectral(blocks, nil, f.exposure*rate, f.variance)
	score, information := f.score(spectrum, rate)
	problem := relaxation.Problem{Likelihood: spectrum}
	switch {
	case f.noise.Known && f.noise.VarianceU > 0:
		problem.Priors = []relaxation.Prior{{Weights: relaxation.Parameters{0, 0, 1}, SD: f.noise.VarianceU / f.variance}}
	case f.noise.Known:
		problem.Directions = []relaxation.Parameters{{1, 0, 0}, {0, 1, 0}}
	}
	gg, _, aa := f.phys.systematics()
	out := outlook{routes: PlanRoutes{Drag: unknown, Amplitude: unknown, Both: unknown}}
	var shift relaxation.Parameters // of ln fc and ln V by the exposure
	if total, data, err := problem.Covariance(information); err == nil {
		shift = relaxation.Parameters{total.Form(alongCorner, score), total.Form(alongVariance, score), 0}
		out.routes.Drag = bounded(data[0][0], total[0][0]+gg+square(shift[0]))
		out.routes.Amplitude = bounded(data[1][1], total[1][1]+aa+square(shift[1]))
	}
	f.combine(&out, problem, information, score)
	switch { // a route that leaves no weight to the other is adopted alone
	case out.weight >= 1 && out.routes.Drag.Statistical.Known():
		out.weight, out.routes.Both, out.exposure = 1, out.routes.Drag, shift[0]
	case out.weight <= 0 && out.routes.Amplitude.Statistical.Known():
		out.weight, out.routes.Both, out.exposure = 0, out.routes.Amplitude, -shift[1]
	}
	return out
}

// score returns the Fisher information of the likelihood, and its gradient in
// a record whose exposure is one standard uncertainty longer than stated: the inverse of
// the information times that gradient is what the error of the exposure does to the fit.
func (f *forecast) score(spectrum *relaxation.Spectral, rate float64) (relaxation.Parameters, relaxation.Matrix) {
	actual := relaxation.Process{Corner: f.corner, Variance: f.variance, Noise: f.noise.Variance, Interval: 1 / rate, Exposure: f.exposure}
	step := f.exposureU
	if (f.exposure+step)*rate > 1 {
		step = -math.Min(step, f.exposure)
	}
	actual.Exposure += step
	blocks := spectrum.Blocks()
	for i, x := range blocks.Frequency {
		blocks.Power[i] = actual.Spectrum(x*rate) * rate
	}
	_, gradient, information := spectrum.Score(relaxation.Parameters{math.Log(f.corner / rate), 0, f.noise.Variance / f.variance})
	for i := range gradient {
		if step == 0 {
			gradient[i] = 0
			continue
		}
		gradient[i] *= f.exposureU / math.Abs(step)
	}
	return gradient, information
}

// combine predicts the combination of the routes: ln kappa = k1 + rho (k1 - k2), k1 by
// drag, k2 by amplitude, with rho the part of their difference that is the error of the
// drag.
func (f *forecast) combine(out *outlook, problem relaxation.Problem, information relaxation.Matrix, score relaxation.Parameters) {
	gg, ga, aa := f.phys.systematics()
	difference := gg + aa - 2*ga
	u := math.Max(math.Sqrt(math.Max(difference, 0)), leastPrior)
	rho := -0.5
	if difference > leastPrior*leastPrior {
		rho = math.Max(-1, math.Min(0, (ga-gg)/difference))
	}
	rest := math.Max(0, square(1+rho)*gg+square(rho)*aa-2*rho*(1+rho)*ga)
	problem.Priors = append([]relaxation.Prior{{Weights: alongDrag, SD: u}}, problem.Priors...)
	total, data, err := problem.Covariance(information)
	if err != nil {
		return
	}
	weights := relaxation.Parameters{1 + rho, rho, 0}
	out.weight = (1 + rho) - total.Form(weights, alongDrag)/(u*u)
	out.exposure = total.Form(weights, score)
	out.routes.Both = bounded(data.Form(weights, weights), total.Form(weights, weights)+rest+square(out.exposure))
}

var unknown = PlanUncertainty{Statistical: Float(math.NaN()), Combined: Float(math.NaN())}

// bounded makes an uncertainty from the variances of ln kappa.
func bounded(data, total float64) PlanUncertainty {
	if !(data >= 0) || total > unknowable*unknowable {
		return unknown
	}
	return PlanUncertainty{Statistical: Float(math.Sqrt(data)), Combined: Float(math.Sqrt(total))}
}

func square(x float64) float64 { return x * x }

// planBlockWidth is the width of a block relative to its frequency: taking the
// spectrum at its middle is off by less than 0.02^2/12 = 0.003 %.
const planBlockWidth = 0.02

// planBlocks are the blocks of a record of n samples from which mean and straight line
// were removed, without the loop over n frequencies that relaxation.NewBlocks needs.
func planBlocks(n int) relaxation.Blocks {
	n -= n % 2
	b := relaxation.Blocks{Samples: n}
	for k := 1; k <= n/2; {
		end := min(n/2, k+int(planBlockWidth*float64(k)))
		middle := float64(k+end) / 2
		weight := float64(end-k+1) * (1 - 3/(math.Pi*math.Pi*middle*middle)) // of the line, as in NewBlocks
		if end == n/2 {
			weight -= 0.5
		}
		h := math.Sin(math.Pi * middle / float64(n))
		b.Frequency = append(b.Frequency, middle/float64(n))
		b.Sigma = append(b.Sigma, 4*h*h)
		b.SigmaVar = append(b.SigmaVar, 0)
		b.Power = append(b.Power, 0)
		b.Weight = append(b.Weight, weight)
		b.Bins = append(b.Bins, end-k+1)
		k = end + 1
	}
	return b
}
