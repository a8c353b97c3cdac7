package calib

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"

	"beadwell/calib/relaxation"
	"beadwell/psd"
)

// evidence is what the record of one axis says under one hypothesis: the greatest
// log-likelihood of a fit that does not know the drag, and its readings with their statistical covariance.
type evidence struct {
	likelihood float64
	readings   []float64
	covariance [][]float64
}

// reading is a number that the physics predicts, as the logarithm of what was measured over what is stated.
type reading int

const (
	diffusionReading reading = iota // the diffusion coefficient: kT over drag, in recorded lengths squared
	scaleReading                    // true over recorded length, by the motion of a stage
)

// readings lists what the axis measures.
func (w *work) readings() []reading {
	if w.drive != nil && !w.scaledByDrive() {
		return []reading{diffusionReading, scaleReading}
	}
	return []reading{diffusionReading}
}

// bench holds the axes that a diagnosis is made of, of all recordings that are compared; those of the
// recording in question come first.
type bench struct {
	works  []*work
	own    int        // axes of the recording in question
	asRead []evidence // under the settings as stated
}

func newBench(works, others []*work) *bench {
	b := &bench{}
	for _, list := range [][]*work{works, others} {
		for _, w := range list {
			if e, ok := w.asStated(); ok {
				b.works = append(b.works, w)
				b.asRead = append(b.asRead, e)
			}
		}
		if b.own == 0 {
			b.own = len(b.works)
		}
	}
	return b
}

// size is the number of readings.
func (b *bench) size() int {
	n := 0
	for _, w := range b.works {
		n += len(w.readings())
	}
	return n
}

// asStated is the evidence under the settings as stated; ok is false where nothing can be compared.
func (w *work) asStated() (evidence, bool) {
	if w.loose != nil {
		return w.freeEvidence(*w.loose), w.axis.Free.Test.PValue.Known()
	}
	if !w.axis.CrossCheck.Routes.PValue.Known() {
		return evidence{}, false
	}
	return w.evidenceAt(w.fit.Maximum.Value, w.fit.Maximum.At, w.fit.Data, w.exposure), true
}

// freeEvidence is that of a free bead.
func (w *work) freeEvidence(fit relaxation.FreeFit) evidence {
	return evidence{fit.Value, []float64{math.Log(fit.Diffusion * w.phys.gamma / w.phys.kT)}, [][]float64{{fit.LogTotal * fit.LogTotal}}}
}

// evidenceAt reads the evidence from a fit that does not know the drag: its log-likelihood, parameters and their
// covariance by the data, and the exposure [s] under which it was made (docs/method.md, Eq. 60).
func (w *work) evidenceAt(value float64, at relaxation.Parameters, data relaxation.Matrix, exposure float64) evidence {
	e := evidence{likelihood: value}
	var weights []relaxation.Parameters
	var record []float64 // what one standard uncertainty of the answer to the stage does
	for _, kind := range w.readings() {
		r, along, move := at[0]+at[1]-w.pooled.expected, alongDrag, 0.0
		if w.drive != nil {
			// the length scale by the stage, under this corner frequency and this exposure
			scale := w.reply.logScale + w.scaleMoved(at[0]-w.fit.Maximum.At[0]) + w.stageBlurred(exposure)
			if kind == scaleReading {
				r, along, move = scale, relaxation.Parameters{-w.reply.bend, 0, 0}, w.reply.record
			} else if w.scaledByDrive() {
				r += 2 * scale
				along[0] -= 2 * w.reply.bend
				move = 2 * w.reply.record
			}
		}
		e.readings = append(e.readings, r)
		weights = append(weights, along)
		record = append(record, move)
	}
	wide := w.bartlett() * w.bartlett()
	for i := range weights {
		row := make([]float64, len(weights))
		for j := range weights {
			row[j] = wide*data.Form(weights[i], weights[j]) + record[i]*record[j]
		}
		e.covariance = append(e.covariance, row)
	}
	return e
}

// scaleMoved is the change of the logarithm of the length scale by the stage when ln fc is another: that of Eq. 55 for a
// sine, and all of it for constant speed.
func (w *work) scaleMoved(by float64) float64 {
	if w.drive.waveform != sineWave {
		return -w.reply.bend * by
	}
	ratio := w.fit.Corner / w.drive.frequency
	return math.Log(expectedPower(1, ratio*math.Exp(by))/expectedPower(1, ratio)) / 2
}

// stageBlurred is the change of the logarithm of the length scale when the exposure was another: what it took
// off the bead's line was undone with the stated one. A stage's own column is blurred as the bead is.
func (w *work) stageBlurred(exposure float64) float64 {
	if w.reply.blur == 0 || w.drive.tracked != nil {
		return 0
	}
	return math.Log(blurOf(w.drive.frequency, exposure) / w.reply.blur)
}

// outcome of one hypothesis at one value of its parameter.
type weighed struct {
	value float64 // log-likelihood of all axes, the other inputs at their best within their uncertainties
	left  float64 // chi-square of the readings
}

// weigh compares the readings with the stated values moved by shift, allowing for the
// uncertainties of all inputs but those that are freed.
//
// Inputs enter as normal priors and are maximised over, which for errors that are
// linear in the logarithms gives -r' C^-1 r / 2 with C the covariance of the residuals r
// (docs/method.md, Eq. 59).
func (b *bench) weigh(found []evidence, shift func(w *work, kind reading) float64, freed func(influence, *work) bool) (weighed, bool) {
	n := b.size()
	c := mat.NewSymDense(n, nil)
	r := mat.NewVecDense(n, nil)
	var out weighed
	first := 0
	for i, e := range found {
		for j, kind := range b.works[i].readings() {
			r.SetVec(first+j, e.readings[j]-shift(b.works[i], kind))
			for k := j; k < len(e.readings); k++ {
				c.SetSym(first+j, first+k, e.covariance[j][k])
			}
		}
		first += len(e.readings)
		out.value += e.likelihood
	}
	for _, row := range b.shared(freed) {
		for i := range n {
			for j := i; j < n; j++ {
				c.SetSym(i, j, c.At(i, j)+row[i]*row[j])
			}
		}
	}
	var chol mat.Cholesky
	var z mat.VecDense
	if !chol.Factorize(c) || chol.SolveVecTo(&z, r) != nil {
		return out, false
	}
	out.left = mat.Dot(r, &z)
	out.value -= out.left / 2
	return out, !math.IsNaN(out.value)
}

// unmoved is the shift of a hypothesis that changes the fits alone.
func unmoved(*work, reading) float64 { return 0 }

// shared returns, for every input, what one standard uncertainty of it does to the
// readings: the logarithms of the measured over the stated values.
func (b *bench) shared(freed func(influence, *work) bool) [][]float64 {
	rows := map[string][]float64{}
	var order []string
	first := 0
	for _, w := range b.works {
		kinds := w.readings()
		for _, in := range w.allInfluences() {
			name := w.sharedName(in)
			if len(b.works) > b.own { // several recordings share what is stated of them alike
				name += " " + w.identity(in)
			}
			if rows[name] == nil {
				rows[name] = make([]float64, b.size())
				order = append(order, name)
			}
			if freed != nil && freed(in, w) {
				continue
			}
			for j, kind := range kinds {
				rows[name][first+j] = w.moves(in, kind)
			}
		}
		first += len(kinds)
	}
	out := make([][]float64, len(order))
	for i, name := range order {
		out[i] = rows[name]
	}
	return out
}

// stageInput is the name of the influence of the stated amplitude of the stage.
const stageInput = "amplitude of the stage"

// allInfluences are the inputs of the axis, the amplitude of the stage among them.
func (w *work) allInfluences() []influence {
	if w.drive == nil || w.reply.stage == 0 {
		return w.phys.influences
	}
	return append(slices.Clip(w.phys.influences), influence{name: stageInput, value: w.drive.stated, unit: "m", u: w.reply.stage * w.drive.stated, base: w.drive.stated})
}

// moves is what one standard uncertainty of an input, by which the truth is above what is
// stated, does to a reading.
func (w *work) moves(in influence, kind reading) float64 {
	stage := 0.0
	if in.name == stageInput {
		stage = -in.u / in.base
	}
	switch {
	case kind == scaleReading:
		return in.length + stage
	case w.scaledByDrive():
		return in.energy - in.drag + 2*stage
	}
	return in.energy - in.drag - 2*in.length
}

const wallModel = "wall model" // name of the influence

// refits holds where the last maximum of each axis was: the next one, at a value of the
// parameter near by, is near it.
type refits map[*work]relaxation.Parameters

// of returns the evidence of an axis under another exposure [s] and noise, the
// record and its blocked spectrum being those of the fit.
func (f refits) of(w *work, exposure float64, noise psd.Noise) (evidence, bool) {
	if w.loose != nil {
		return w.freeRefitted(exposure, noise)
	}
	scale := w.fit.Scale()
	pr := relaxation.Problem{Likelihood: w.likelihoodAt(exposure)}
	at, known := f[w]
	if !known {
		at = w.fit.Maximum.At
	}
	switch {
	case noise.Known && noise.VarianceU > 0:
		pr.Priors = []relaxation.Prior{{Weights: alongNoise, Mean: noise.Variance / scale, SD: noise.VarianceU / scale}}
	case noise.Known:
		pr.Directions = []relaxation.Parameters{alongCorner, alongVariance}
		at[2] = noise.Variance / scale
	}
	m, err := pr.Maximise(at)
	if err != nil {
		if m, err = pr.Maximise(pr.Start(noise.Variance, !noise.Known)); err != nil {
			return evidence{}, false
		}
	}
	f[w] = m.At
	return w.evidenceOf(pr, m, exposure)
}

// freeRefitted is the evidence of a free bead under another exposure [s] and noise.
func (w *work) freeRefitted(exposure float64, noise psd.Noise) (evidence, bool) {
	fit, err := relaxation.FitFree(w.positions(), relaxation.FreeOptions{Interval: 1 / w.rate, Exposure: exposure,
		NoiseKnown: noise.Known, Noise: noise.Variance, NoiseU: noise.VarianceU, Brief: true})
	if err != nil {
		return evidence{}, false
	}
	return w.freeEvidence(fit), true
}

// likelihoodAt is the likelihood of the fit with another exposure [s].
func (w *work) likelihoodAt(exposure float64) relaxation.Likelihood {
	o, share, scale := w.fitOptions(), exposure*w.rate, w.fit.Scale()
	switch {
	case w.form != nil:
		h, _ := w.hydrodynamic(w.dragModel == FrequencyDependentDrag)
		return h.Form(w.rate, exposure)(w.fit.Blocks, scale)
	case w.fit.Method == psd.Exact:
		w.record.Restore()
		e := relaxation.NewExact(w.record.X, relaxation.RemovedLine, true, share, scale)
		e.StartFrom(w.fit.Blocks)
		return e
	case o.Band.High == 0 && len(o.Exclude) == 0:
		return relaxation.NewSpectralOf(w.fit.Blocks, w.record.Ends, share, scale)
	}
	return relaxation.NewSpectralOf(w.fit.Blocks, nil, share, scale)
}

// evidenceOf reads the evidence from the maximum of a problem that does not know the drag.
func (w *work) evidenceOf(pr relaxation.Problem, m relaxation.Maximum, exposure float64) (evidence, bool) {
	_, data, err := pr.Covariance(m.Information)
	if err != nil {
		return evidence{}, false
	}
	return w.evidenceAt(m.Value, m.At, data, exposure), true
}

// all refits the trapped axes for which change holds, and leaves the others as they were read; ok is
// false when one of them has no maximum.
func (b *bench) all(change func(w *work) bool, refit func(w *work) (evidence, bool)) ([]evidence, bool) {
	out := make([]evidence, len(b.works))
	for i, w := range b.works {
		out[i] = b.asRead[i]
		if !change(w) {
			continue
		}
		var ok bool
		if out[i], ok = refit(w); !ok {
			return nil, false
		}
	}
	return out, true
}

// trapped tells that the axis is one of a trapped bead.
func trapped(w *work) bool { return w.loose == nil }

// alike tells which axes have the exposure and the rate of the recording in question.
func (b *bench) alike(w *work) bool {
	first := b.works[0]
	return w.exposure == first.exposure && w.rate == first.rate
}
