package calib

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"beadwell/calib/relaxation"
	"beadwell/psd"
)

// evidence is what the record of one axis says under one hypothesis: the greatest
// log-likelihood of a fit that does not know the drag, and the logarithm of the
// measured over the stated diffusion coefficient with its statistical uncertainty.
type evidence struct{ likelihood, excess, sd float64 }

// bench holds the axes that a diagnosis is made of.
type bench struct {
	works  []*work
	asRead []evidence // under the settings as stated
}

func newBench(works []*work) *bench {
	b := &bench{}
	for _, w := range works {
		if !w.axis.CrossCheck.Routes.PValue.Known() {
			continue
		}
		sd, _ := w.fit.SD(alongDrag)
		b.works = append(b.works, w)
		b.asRead = append(b.asRead, evidence{w.fit.Maximum.Value, w.dragExcess(), sd * w.bartlett()})
	}
	return b
}

// outcome of one hypothesis at one value of its parameter.
type weighed struct {
	value float64 // log-likelihood of all axes, the other inputs at their best within their uncertainties
	left  float64 // chi-square of the routes
}

// weigh compares the measured diffusion coefficients with the stated ones moved by
// shift, allowing for the uncertainties of all inputs but those that are freed.
//
// Inputs enter as normal priors and are maximised over, which for errors that are
// linear in the logarithms gives -r' C^-1 r / 2 with C the covariance of the residuals r
// (docs/method.md, Eq. 59).
func (b *bench) weigh(found []evidence, shift []float64, freed func(influence, int) bool) (weighed, bool) {
	n := len(found)
	c := mat.NewSymDense(n, nil)
	r := mat.NewVecDense(n, nil)
	var out weighed
	for i, e := range found {
		c.SetSym(i, i, e.sd*e.sd)
		r.SetVec(i, e.excess-shift[i])
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

// shared returns, for every input, what one standard uncertainty of it does to the
// logarithm of the expected over the recorded diffusion coefficient of each axis.
func (b *bench) shared(freed func(influence, int) bool) [][]float64 {
	rows := map[string][]float64{}
	var order []string
	for i, w := range b.works {
		for _, in := range w.phys.influences {
			name := w.sharedName(in)
			if rows[name] == nil {
				rows[name] = make([]float64, len(b.works))
				order = append(order, name)
			}
			if freed == nil || !freed(in, i) {
				rows[name][i] = in.energy - in.drag - 2*in.length
			}
		}
	}
	out := make([][]float64, len(order))
	for i, name := range order {
		out[i] = rows[name]
	}
	return out
}

const wallModel = "wall model" // name of the influence

// refitted returns the evidence of an axis under another exposure [s] and noise, the
// record and its blocked spectrum being those of the fit.
func (w *work) refitted(exposure float64, noise psd.Noise) (evidence, bool) {
	scale := w.fit.Scale()
	pr := relaxation.Problem{Likelihood: w.likelihoodAt(exposure)}
	at := w.fit.Maximum.At
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
	return w.evidenceOf(pr, m)
}

// likelihoodAt is the likelihood of the fit with another exposure [s].
func (w *work) likelihoodAt(exposure float64) relaxation.Likelihood {
	o, share, scale := w.fitOptions(), exposure*w.rate, w.fit.Scale()
	switch {
	case w.form != nil:
		h, _ := w.hydrodynamic(w.dragModel == FrequencyDependentDrag)
		return h.Form(w.rate, exposure)(w.fit.Blocks, scale)
	case w.fit.Method == psd.Exact:
		e := relaxation.NewExact(w.record.X, relaxation.RemovedLine, true, share, scale)
		e.StartFrom(w.fit.Blocks)
		return e
	case o.Band.High == 0 && len(o.Exclude) == 0:
		return relaxation.NewSpectral(w.fit.Blocks, w.record.X[:w.record.Length], share, scale)
	}
	return relaxation.NewSpectral(w.fit.Blocks, nil, share, scale)
}

// evidenceOf reads the evidence from the maximum of a problem that does not know the drag.
func (w *work) evidenceOf(pr relaxation.Problem, m relaxation.Maximum) (evidence, bool) {
	_, data, err := pr.Covariance(m.Information)
	if err != nil {
		return evidence{}, false
	}
	sd := math.Sqrt(math.Max(0, data.Form(alongDrag, alongDrag)))
	return evidence{m.Value, m.At[0] + m.At[1] - w.pooled.expected, sd * w.bartlett()}, true
}

// all refits every axis; ok is false when one of them has no maximum.
func (b *bench) all(refit func(w *work) (evidence, bool)) ([]evidence, bool) {
	out := make([]evidence, len(b.works))
	for i, w := range b.works {
		var ok bool
		if out[i], ok = refit(w); !ok {
			return nil, false
		}
	}
	return out, true
}
