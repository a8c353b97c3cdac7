package calib

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"beadwell/calib/msd"
	"beadwell/calib/relaxation"
	"beadwell/equipartition"
	"beadwell/psd"
)

// hopeless is the Cramer-Rao bound of a logarithm above which a leg is withheld: beyond
// it the likelihood is so far from normal that neither the estimate nor its interval
// means what it says (docs/method.md, Eq. 42).
const hopeless = 0.5

// hopelessNoise takes its place where the noise is not stated: noise, blur and relaxation
// then trade places, and the likelihood bends away from a normal one sooner.
const hopelessNoise = 0.35

// limit returns the bound above which a leg of this axis is withheld.
func (w *work) limit() float64 {
	if w.noise.Known {
		return hopeless
	}
	return hopelessNoise
}

// smallEnough is the relative uncertainty below which an interval is taken as normal in the logarithm. The
// skewness of a variance estimate of relative uncertainty s moves both ends of its 95 % interval up or down by
// about s^2, here by 1.5 % of the half-width: 0.2 % of coverage go from one tail to the other, and none is lost.
const smallEnough = 0.03

// estimate fills the legs: values, intervals and covariances.
func (w *work) estimate() {
	l := &w.legs
	for i := range l.value {
		l.value[i] = math.NaN()
	}
	w.spectrumLegs()
	process, total, data, drawn := w.bestProcess()
	w.equipartitionLeg(process, total, data, drawn)
	w.displacementLegs(process, total, drawn)
	w.covariances()
	w.influences()
	w.recordInfluences()
	w.totals()
}

// processAt returns the process of parameters of the fit.
func (w *work) processAt(at relaxation.Parameters) relaxation.Process {
	scale := w.fit.Scale()
	return relaxation.Process{Corner: math.Exp(at[0]) * w.rate, Variance: scale * math.Exp(at[1]), Noise: scale * at[2],
		Interval: 1 / w.rate, Exposure: w.exposure}
}

// bestProcess returns the drag-free fit, or, where that has no maximum, the one that
// knows the drag. The covariance is drag-free as long as that can be computed; drawn
// tells that it could not.
func (w *work) bestProcess() (p relaxation.Process, total, data relaxation.Matrix, drawn bool) {
	if w.fitErr == nil {
		return w.fit.Process(), w.fit.Total, w.fit.Data, false
	}
	p = w.processAt(w.pooled.maximum.At)
	if w.poolErr != nil {
		return p, total, data, true
	}
	total, data, err := w.fit.Problem.Covariance(w.pooled.maximum.Information)
	if err != nil {
		return p, w.pooled.total, w.pooled.data, true
	}
	return p, total, data, false
}

func (w *work) spectrumLegs() {
	l, p := &w.legs, &w.pooled
	switch {
	case w.fitErr != nil:
		reason := "corner frequency, variance and noise cannot be told apart in this recording; the likelihood has no maximum"
		l.reason[spectrumLeg], l.reason[amplitudeLeg] = reason, reason
		return
	}
	sdC, _ := w.fit.SD(alongCorner)
	sdV, _ := w.fit.SD(alongVariance)
	if p.regimeFC > w.limit() || sdC > 2*hopeless {
		l.reason[spectrumLeg] = tooUncertain(math.Max(p.regimeFC, sdC))
	} else {
		l.value[spectrumLeg] = math.Log(2 * math.Pi * w.phys.gamma * w.fit.Corner)
		l.offsets[spectrumLeg] = w.profile(alongCorner, sdC)
	}
	if p.regimeV > w.limit() || sdV > 2*hopeless {
		l.reason[amplitudeLeg] = tooUncertain(math.Max(p.regimeV, sdV))
	} else {
		l.value[amplitudeLeg] = math.Log(w.phys.kT / w.fit.Variance)
		l.offsets[amplitudeLeg] = w.profile(alongVariance, sdV).Mirrored()
	}
}

// nothing is the uncertainty of a logarithm beyond which a recording says nothing of it: a
// factor of e^10 either way.
const nothing = 10

func tooUncertain(bound float64) string {
	if bound > nothing {
		return "the recording does not determine it: noise, blur and relaxation cannot be told apart"
	}
	return fmt.Sprintf("no estimate from this recording can be better than %.0f %% (Cramer-Rao bound)", 100*bound)
}

// profile returns the statistical interval of a combination of the fit's parameters. Where the noise was stated
// with an uncertainty, the profile covers that too and is scaled to the record's part.
func (w *work) profile(weights relaxation.Parameters, data float64) relaxation.Offsets {
	_, total := w.fit.SD(weights)
	if data < smallEnough || total == 0 {
		return relaxation.Normal(data)
	}
	for _, known := range w.profiles {
		if known.fit == w.fit && known.weights == weights {
			return known.offsets.Scaled(data / total * w.bartlett())
		}
	}
	o := w.fit.Problem.Profile(w.fit.Maximum, weights, total)
	w.profiles = append(w.profiles, profileOf{w.fit, weights, o})
	return o.Scaled(data / total * w.bartlett())
}

// profileOf is a profile that was computed before.
type profileOf struct {
	fit     *psd.Fit
	weights relaxation.Parameters
	offsets relaxation.Offsets
}

// bartlettExcess is the mean excess over one of the likelihood-ratio statistic of one
// parameter, times the number of independent samples pi T fc: measured as 3 +- 1 over the
// regimes of the accuracy study at T fc = 30.
const bartlettExcess = 3

// bartlett returns the factor by which profile-likelihood intervals of a short record
// are widened (Bartlett, Proc. R. Soc. A 160 (1937) 268; docs/method.md, Eq. 22).
func (w *work) bartlett() float64 {
	at := w.pooled.maximum.At
	if w.poolErr != nil && w.fitErr == nil {
		at = w.fit.Maximum.At
	}
	return math.Sqrt(1 + bartlettExcess/math.Max(3, math.Pi*math.Exp(at[0])*float64(w.record.Observed())))
}

func (w *work) equipartitionLeg(p relaxation.Process, total, data relaxation.Matrix, drawn bool) {
	l := &w.legs
	if drawn || w.pooled.regimeV > w.limit() {
		l.reason[equipartitionLeg] = tooUncertain(w.pooled.regimeV)
		if !w.noise.Known {
			l.reason[equipartitionLeg] = "the noise is not stated, and the recording does not determine it"
		}
		return
	}
	lost := 0.0
	for _, line := range w.record.Lines {
		lost += 3 * p.Spectrum(line.Frequency) * w.rate
	}
	kept, keptSlope := w.keptShare(p.Corner)
	in := equipartition.Input{Kept: kept, KeptSlope: keptSlope, KeptU: w.keptU(p.Corner), MeanSquare: w.record.MeanSquare(), Samples: w.record.Samples, Observed: w.record.Observed(),
		Process: p, Lost: lost, Scale: w.fit.Scale(), Total: total, Data: data}
	if w.gathered != nil { // the mean of records of which nothing was taken but mean and line
		in.Samples, in.Observed, in.Records, in.Lost = w.record.Length, w.record.Length, w.record.Parts, 0
	}
	eq, err := equipartition.Estimate(in)
	l.eq = eq
	if err != nil {
		l.reason[equipartitionLeg] = err.Error()
		return
	}
	if eq.SD > 2*hopeless {
		l.reason[equipartitionLeg] = tooUncertain(eq.SD)
		return
	}
	// kT over a mean square is biased by the square of its relative uncertainty, its logarithm by half that; noise and corner
	// frequency, which are maximum-likelihood estimates, add none of the kind
	own := math.Min(eq.SD, eq.OwnSD)
	l.value[equipartitionLeg] = math.Log(w.phys.kT/eq.Variance) - own*own/2
	l.offsets[equipartitionLeg] = w.shaped(amplitudeLeg, eq.SD)
}

// shaped returns the interval of an estimate that is nearly the same statistic as a leg
// of the spectrum: its shape, at the scale of the estimate's own uncertainty.
func (w *work) shaped(like int, sd float64) relaxation.Offsets {
	if !math.IsNaN(w.legs.value[like]) {
		weights := alongVariance
		if like == spectrumLeg {
			weights = alongCorner
		}
		if own, _ := w.fit.SD(weights); own > 0 && !math.IsInf(w.legs.offsets[like].Low95, 0) && !math.IsInf(w.legs.offsets[like].High95, 0) {
			return w.legs.offsets[like].Scaled(sd / own)
		}
	}
	if like == amplitudeLeg {
		return chiSquareOffsets(sd).Mirrored()
	}
	return relaxation.Normal(sd)
}

// Cramer-Rao bounds above which the fit of the mean-square displacement is withheld:
// its covariance is that of a linear fit, and its intervals no longer cover beyond.
const (
	linearPlateau = 0.35
	linearTime    = 0.25
)

// relaxationsOfInertia is the first lag, in relaxation times, of a fit of the mean-square
// displacement where the drag depends on frequency: from there on it has all but reached its plateau.
const relaxationsOfInertia = 2

// chiSquareOffsets are the offsets of ln V for a variance that is distributed as a
// chi-square with 2/sd^2 degrees of freedom (Satterthwaite, Biometrics Bull. 2 (1946) 110).
func chiSquareOffsets(sd float64) relaxation.Offsets {
	nu := math.Max(1, 2/(sd*sd))
	d := distuv.ChiSquared{K: nu}
	end := func(p float64) float64 { return math.Abs(math.Log(d.Quantile(p) / nu)) }
	return relaxation.Offsets{Low68: end(0.84134), High68: end(0.15866), Low95: end(0.975), High95: end(0.025)}
}

// spectrumOfPositions is the periodogram of the record, where it is that of all its samples.
func (w *work) spectrumOfPositions() *msd.Spectrum {
	if r := w.record; r.Missing == 0 && r.Parts <= 1 && r.X != nil {
		return &msd.Spectrum{Power: r.Power, Length: r.Length}
	}
	return nil
}

func (w *work) displacementLegs(p relaxation.Process, total relaxation.Matrix, drawn bool) {
	l := &w.legs
	if w.poolErr != nil && w.fitErr != nil {
		reason := tooUncertain(math.Inf(1))
		l.reason[displacementLeg], l.reason[timeLeg] = reason, reason
		return
	}
	first := 0
	if w.dragModel == FrequencyDependentDrag { // short lags follow the inertia of the liquid
		first = int(math.Ceil(relaxationsOfInertia / (2 * math.Pi * p.Corner / w.rate)))
	}
	m, err := msd.Estimate(msd.Input{FirstLag: first, Detected: w.detected(p), X: w.record.X, Known: w.spectrumOfPositions(), Summed: w.summedDisplacements(), Missing: w.record.Missing > 0, Guess: p, Scale: w.fit.Scale(), FitCovariance: total,
		Noise: msd.Noise{Known: w.noise.Known, Variance: w.noise.Variance, VarianceU: w.noise.VarianceU}})
	if err != nil {
		l.reason[displacementLeg], l.reason[timeLeg] = err.Error(), err.Error()
		return
	}
	l.msd = m
	sdV, sdC := math.Sqrt(m.Covariance[1][1]), math.Sqrt(m.Covariance[0][0])
	bound := w.pooled.regimeV
	if bound > linearPlateau || sdV > 2*hopeless || drawn {
		l.reason[displacementLeg] = tooUncertain(math.Max(sdV, bound))
	} else {
		l.value[displacementLeg] = math.Log(w.phys.kT / m.Variance)
		l.offsets[displacementLeg] = w.shaped(amplitudeLeg, sdV)
	}
	if w.dragModel == FrequencyDependentDrag {
		l.reason[timeLeg] = "the relaxation of the mean-square displacement is modelled with constant drag, and here the drag depends on frequency"
	} else if bound = w.pooled.regimeFC; bound > linearTime || sdC > 2*hopeless || drawn {
		l.reason[timeLeg] = tooUncertain(math.Max(sdC, bound))
	} else {
		l.value[timeLeg] = math.Log(2 * math.Pi * w.phys.gamma * m.Corner)
		l.offsets[timeLeg] = w.shaped(spectrumLeg, sdC)
	}
}

// covariances fills the joint covariance of the legs, inputs taken as exact.
func (w *work) covariances() {
	l := &w.legs
	type row = [legCount]float64
	s := &l.stat
	if w.fitErr == nil {
		f := w.fit.Data
		s[spectrumLeg] = row{spectrumLeg: f[0][0], amplitudeLeg: -f[0][1]}
		s[amplitudeLeg] = row{spectrumLeg: -f[0][1], amplitudeLeg: f[1][1]}
		with := l.eq.WithFit // with ln V of equipartition; kappa changes the sign
		set(s, equipartitionLeg, spectrumLeg, -with[0])
		set(s, equipartitionLeg, amplitudeLeg, with[1])
	}
	set(s, equipartitionLeg, equipartitionLeg, l.eq.SD*l.eq.SD)
	if m := l.msd; m != nil {
		c := m.Covariance
		set(s, displacementLeg, displacementLeg, c[1][1])
		set(s, timeLeg, timeLeg, c[0][0])
		set(s, displacementLeg, timeLeg, -c[0][1])
		if w.fitErr == nil {
			set(s, spectrumLeg, displacementLeg, -m.WithFit[1][0])
			set(s, amplitudeLeg, displacementLeg, m.WithFit[1][1])
			set(s, spectrumLeg, timeLeg, m.WithFit[0][0])
			set(s, amplitudeLeg, timeLeg, -m.WithFit[0][1])
		}
		s2 := w.record.MeanSquare()
		for leg, k := range map[int]int{displacementLeg: 1, timeLeg: 0} {
			cov := l.eq.Gain * m.WithMeanSquare[k] / s2
			for j, b := range l.eq.Slope {
				cov += b * m.WithFit[k][j]
			}
			if leg == timeLeg {
				cov = -cov
			}
			set(s, equipartitionLeg, leg, cov)
		}
	}
}

func set(m *[legCount][legCount]float64, i, j int, v float64) { m[i][j], m[j][i] = v, v }

// influences fills what one standard uncertainty of each input does to each leg; after
// the inputs of physics follow noise and the inputs of the record.
func (w *work) influences() {
	l := &w.legs
	n := len(w.phys.influences)
	for leg := range l.grad {
		l.grad[leg] = make([]float64, n+1+moveCount)
		for i, in := range w.phys.influences {
			if dragLeg[leg] {
				l.grad[leg][i] = in.drag
			} else {
				l.grad[leg][i] = in.energy - 2*in.length
			}
		}
	}
	if !w.noise.Known || w.noise.VarianceU == 0 || w.fitErr != nil {
		return
	}
	sd := w.noise.VarianceU / w.fit.Scale()
	move := relaxation.Parameters{w.fit.Total[0][2] / sd, w.fit.Total[1][2] / sd, w.fit.Total[2][2] / sd}
	l.grad[spectrumLeg][n] = move[0]
	l.grad[amplitudeLeg][n] = -move[1]
	for j, b := range l.eq.Slope {
		l.grad[equipartitionLeg][n] -= b * move[j]
	}
	if l.msd != nil {
		l.grad[displacementLeg][n] = -l.msd.NoiseSlope[1] * w.noise.VarianceU
		l.grad[timeLeg][n] = l.msd.NoiseSlope[0] * w.noise.VarianceU
	}
}

// The inputs of the record that change its likelihood.
const (
	exposureMoves = iota
	alphaMoves
	f3dbMoves
	moveCount
)

// recordInfluences repeats the estimates with exposure, alpha and f3dB changed by their standard uncertainties (the
// exposure to the other side where it would exceed the sampling interval).
func (w *work) recordInfluences() {
	if w.fitErr != nil {
		return
	}
	if u := w.exposureU; u > 0 {
		if (w.exposure+u)*w.rate > 1 {
			u = -math.Min(u, w.exposure)
		}
		if u != 0 {
			shifted := *w
			shifted.exposure = w.exposure + u
			w.influence(exposureMoves, &shifted, w.exposureU/u)
		}
	}
	alpha, f3db := w.diodeU()
	for move, u := range [moveCount]float64{alphaMoves: alpha, f3dbMoves: f3db} {
		if u == 0 {
			continue
		}
		step := 1.0
		if move == alphaMoves && w.seen.Alpha+u > 1 {
			step = -1
		}
		shifted := *w
		shifted.moved[move] = step
		w.influence(move, &shifted, step)
	}
}

// influence sets what one standard uncertainty of an input of the record does, from the analysis with that input
// moved by one over the factor.
func (w *work) influence(move int, shifted *work, factor float64) {
	l, n := &w.legs, len(w.phys.influences)+1+move
	shifted.legs = legs{}
	options := shifted.fitOptions()
	options.KeepLines = true
	if w.form != nil {
		h, _ := shifted.hydrodynamic(w.dragModel == FrequencyDependentDrag)
		options.Form = h.Form(w.rate, shifted.exposure)
		shifted.seen = h
	}
	var err error
	if shifted.fit, _, err = shifted.estimateFilled(options); err != nil {
		return
	}
	if w.form != nil {
		shifted.seen = shifted.seen.Seen(shifted.fit)
	}
	for i := range shifted.legs.value {
		shifted.legs.value[i] = math.NaN()
	}
	if shifted.pool() != nil {
		return
	}
	if w.poolErr == nil {
		w.pooled.moved[move] = (shifted.pooled.value - w.pooled.value) * factor
	}
	shifted.spectrumLegs()
	process, total, data, drawn := shifted.bestProcess()
	shifted.equipartitionLeg(process, total, data, drawn)
	shifted.displacementLegs(process, total, drawn)
	for leg := range l.grad {
		if d := shifted.legs.value[leg] - l.value[leg]; !math.IsNaN(d) {
			l.grad[leg][n] = d * factor
		}
	}
}

// totals adds the inputs to the covariance.
func (w *work) totals() {
	l := &w.legs
	l.total = l.stat
	for i := range l.total {
		for j := range l.total {
			for k := range l.grad[i] {
				l.total[i][j] += l.grad[i][k] * l.grad[j][k]
			}
		}
	}
}
