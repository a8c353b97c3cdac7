package calib

import (
	"math"

	"beadwell/calib/relaxation"
)

// pooled is the fit that knows the computed drag: the prior says that ln fc + ln V is
// what Stokes, wall and kT make it, within the uncertainty of the inputs (docs/method.md,
// Eqs 35 to 40).
type pooled struct {
	problem         relaxation.Problem
	maximum         relaxation.Maximum
	expected        float64 // ln fc + ln V in the parameters of the fit, computed
	u               float64 // its standard uncertainty
	along           float64 // rho: part of the routes' difference that is the drag's error
	rest            float64 // variance of ln gamma that the difference does not tell
	weights         relaxation.Parameters
	total           relaxation.Matrix  // covariance with the prior
	data            relaxation.Matrix  // the record's part of it
	sdData, sdTotal float64            // of ln kappa, without rest
	value           float64            // ln kappa
	moved           [moveCount]float64 // change of value for one standard uncertainty of the inputs of the record
	drag            float64            // weight of the drag route
	regimeFC        float64            // Cramer-Rao bound of ln fc, drag and scale unknown; +Inf when singular
	regimeV         float64            // the same of ln V
}

// leastPrior keeps the prior regular when every input is exact: 1e-5 is far below the
// statistical uncertainty of any record (1e10 samples have 1.4e-5 in ln D).
const leastPrior = 1e-5

// pool fits with the computed drag as a prior. Its maximum exists also where drag-free
// fits are hopeless, and tells how hopeless they are.
func (w *work) pool() error {
	p := &w.pooled
	scale := w.fit.Scale()
	dt := 1 / w.rate
	p.expected = math.Log(w.phys.kT / w.phys.gamma / (2 * math.Pi) * dt / scale)
	gg, ga, aa := w.phys.systematics()
	difference := gg + aa - 2*ga // variance of e_a - e_g
	p.u = math.Max(math.Sqrt(math.Max(difference, 0)), leastPrior)
	p.along = -0.5
	if difference > leastPrior*leastPrior {
		p.along = (ga - gg) / difference
	}
	p.along = math.Max(-1, math.Min(0, p.along))
	// variance of e_g (1 + rho) - rho e_a, the error of the combination at a known difference
	k := p.along
	p.rest = math.Max(0, (1+k)*(1+k)*gg+k*k*aa-2*k*(1+k)*ga)

	p.problem = w.fit.Problem
	p.problem.Priors = append([]relaxation.Prior{{Weights: alongDrag, Mean: p.expected, SD: p.u}}, w.fit.Problem.Priors...)
	p.problem.NonNegative = w.physicalNoise
	err := w.settlePool()
	if !w.noise.Known && (err != nil || p.sdTotal > looseNoise && (p.regimeFC > hopeless || p.regimeV > hopeless)) {
		// the record says so little of the noise that its sign, which is known, counts
		p.problem.NonNegative = true
		err = w.settlePool()
	}
	if w.fitErr == nil && (err != nil || 2*(w.fit.Maximum.Value-p.maximum.Value) > farApart) {
		// the computed drag is far from the record's: its fit tells nothing of the regime
		p.regimeFC, p.regimeV = math.Sqrt(w.fit.Total[0][0]), math.Sqrt(w.fit.Total[1][1])
	}
	return err
}

// farApart is the likelihood-ratio statistic (5.5 standard deviations) beyond which the
// record and the computed drag do not describe the same bead.
const farApart = 30

// looseNoise is the relative uncertainty of the pooled stiffness above which an unstated
// noise is kept from turning negative. Below it the unbounded noise keeps the estimate unbiased.
const looseNoise = 0.2

// settlePool searches the maximum of the pooled problem and evaluates it.
func (w *work) settlePool() error {
	p := &w.pooled
	scale, k := w.fit.Scale(), p.along
	p.regimeFC, p.regimeV, p.sdTotal = math.Inf(1), math.Inf(1), 0
	start := w.poolStart()
	var err error
	if p.maximum, err = p.problem.Maximise(start); err != nil {
		p.maximum.At = start
		return err
	}
	w.setRegime()
	if p.total, p.data, err = p.problem.Covariance(p.maximum.Information); err != nil {
		return err
	}
	// ln kappa = k1 + rho (k1 - k2), k1 = ln fc + ln 2 pi gamma, k2 = ln kT - ln V
	p.weights = relaxation.Parameters{1 + k, k, 0}
	k1 := p.maximum.At[0] + math.Log(w.rate*2*math.Pi*w.phys.gamma)
	k2 := math.Log(w.phys.kT/scale) - p.maximum.At[1]
	p.value = k1 + k*(k1-k2)
	p.sdData = math.Sqrt(math.Max(0, p.data.Form(p.weights, p.weights)))
	p.sdTotal = math.Sqrt(math.Max(0, p.total.Form(p.weights, p.weights)))
	p.drag = (1 + k) - p.total.Form(p.weights, alongDrag)/(p.u*p.u)
	return nil
}

// setRegime computes the Cramer-Rao bounds of a drag-free fit at the pooled maximum.
func (w *work) setRegime() {
	p := &w.pooled
	p.regimeFC, p.regimeV = math.Inf(1), math.Inf(1)
	if c, _, err := w.fit.Problem.Covariance(p.maximum.Information); err == nil {
		p.regimeFC, p.regimeV = math.Sqrt(c[0][0]), math.Sqrt(c[1][1])
	}
}

// poolGrid is the number of corner frequencies that are tried, in equal ratios, for a start.
const poolGrid = 64

// A drag-free fit that knows the corner frequency to surelyOne has one maximum, and where the computed drag costs it less than
// nearMaximum of log-likelihood, the maximum with that drag is the same: a scan, which takes longer than the search
// itself, could not find another.
const (
	surelyOne   = 0.1
	nearMaximum = 5
)

// poolStart scans corner frequencies on the line of the computed drag, each with the
// noise that fills up the recorded variance where that is not stated, and returns the
// best of them and of the drag-free fit; only of the latter where that is near, or has a fitted photodiode.
func (w *work) poolStart() relaxation.Parameters {
	p := &w.pooled
	best, bestValue := relaxation.Parameters{}, math.Inf(-1)
	try := func(at relaxation.Parameters) {
		if v := p.problem.Value(at); v > bestValue {
			best, bestValue = at, v
		}
	}
	if w.fitErr == nil {
		at := w.fit.Maximum.At
		try(at)
		gap := (p.expected - at[0] - at[1]) / 2
		at[0] += gap
		at[1] += gap
		try(at)
		if sd, _ := w.fit.SD(alongCorner); sd < surelyOne && bestValue > w.fit.Maximum.Value-nearMaximum {
			return best
		}
	}
	if _, fitted := w.fittedDiode(); fitted {
		return best // each point of a scan would be a search for the photodiode
	}
	low, high := math.Log(0.1/float64(w.record.Observed())), math.Log(2)
	for i := range poolGrid {
		phi := low + (high-low)*float64(i)/(poolGrid-1)
		v := p.expected - phi
		s, _ := relaxation.BlurVariance(2 * math.Pi * math.Exp(phi) * w.exposure * w.rate)
		if w.noise.Known {
			try(relaxation.Parameters{phi, v, w.noise.Variance / w.fit.Scale()})
			continue
		}
		for _, share := range []float64{0, 0.5, 1} {
			try(relaxation.Parameters{phi, v, share * math.Max(0, 1-s*math.Exp(v))})
		}
	}
	return best
}
