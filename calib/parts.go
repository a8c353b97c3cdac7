package calib

import (
	"fmt"
	"math"

	"beadwell/calib/health"
	"beadwell/calib/msd"
	"beadwell/calib/relaxation"
	"beadwell/calib/track"
)

// Parts tells how a recording was cut that is too long for the memory.
type Parts struct {
	Count    int   `json:"count"`              // parts that were used, each as a record of its own
	Samples  int   `json:"samples_each"`       // of a part
	Duration Float `json:"duration_each_s"`    // of a part
	GivenUp  int   `json:"given_up"`           // parts, for missing samples
	Bridged  int   `json:"bridged_samples"`    // missing samples in used parts, filled by straight lines
	LeftOut  int   `json:"left_out_samples"`   // in given-up parts, and behind the last one
	Memory   Float `json:"memory_limit_bytes"` // what the reader was to keep to
	// of what the whole record holds, for the axis that loses most
	Lost [2]Float `json:"information_lost"` // share of that on stiffness by drag, and by amplitude
}

// CodeParts is the code of the finding that a recording was gone through in parts.
const CodeParts = "gone-through-in-parts"

// fewPartRelaxations is the length of a part in relaxation times, T fc, below which the user is told that it is short.
const fewPartRelaxations = 100

// check refuses what needs the samples themselves.
func (g *Gatherer) check(rec *track.Recording, role string) error {
	if role != RoleTrapped {
		return &SettingError{Key: "role", Problem: fmt.Sprintf("is %q, and the recording is too long for the memory: only trapped beads are calibrated from parts", role),
			Remedy: "raise --max-memory, or split the file"}
	}
	if g.parts == 0 {
		return &DataError{Name: rec.Name, Problem: fmt.Sprintf("no part of %d samples has fewer than %.2g %% of its samples missing, and the recording is too long for the memory", g.length, 100*mostFilled),
			Remedy: "raise --max-memory: with all samples at hand gaps do no harm"}
	}
	return nil
}

// describeParts tells how the recording was cut, and what that costs.
func (r *Result) describeParts(rec *track.Recording, works []*work, g *Gatherer) {
	if g == nil {
		return
	}
	p := &Parts{Count: g.parts, Samples: g.length, Duration: Float(float64(g.length) / rec.Rate), GivenUp: g.holes, Bridged: g.bridged,
		LeftOut: g.seen - g.parts*g.length, Memory: Float(g.memory)}
	for _, w := range works {
		for i, lost := range w.lostByParts(g.seen) {
			p.Lost[i] = Float(math.Max(float64(p.Lost[i]), lost))
		}
	}
	r.Recording.Parts = p
}

// lostByParts returns the share of the Fisher information on ln fc and ln V that the parts do not have of a record
// of so many samples. Each part gives up mean and line of its own, and what it shares with the next one.
func (w *work) lostByParts(samples int) [2]float64 {
	process, _, _, _ := w.bestProcess()
	parts := float64(w.record.Parts)
	at := relaxation.Parameters{math.Log(process.Corner / w.rate), math.Log(process.Variance / w.fit.Scale()), process.Noise / w.fit.Scale()}
	information := func(line bool) relaxation.Matrix {
		b := relaxation.NewBlocks(w.record.Power, w.record.Length, line, nil)
		_, _, f := relaxation.NewSpectral(b, nil, w.exposure*w.rate, w.fit.Scale()).Score(at)
		return f
	}
	with, without := information(true), information(false)
	var whole, cut relaxation.Matrix
	for i := range whole {
		for j := range whole {
			whole[i][j] = without[i][j]*float64(samples)/float64(w.record.Length) - (without[i][j] - with[i][j])
			cut[i][j] = with[i][j] * parts
		}
	}
	problem := w.fit.Problem
	problem.Priors = nil
	a, _, errA := problem.Covariance(whole)
	b, _, errB := problem.Covariance(cut)
	if errA != nil || errB != nil {
		lost := 1 - parts*float64(w.record.Length)/float64(samples)
		return [2]float64{lost, lost}
	}
	return [2]float64{1 - a[0][0]/b[0][0], 1 - a[1][1]/b[1][1]}
}

// partFindings tells the user that the recording was cut.
func (r *Result) partFindings() {
	p := r.Recording.Parts
	if p == nil {
		return
	}
	lost := math.Max(float64(p.Lost[0]), float64(p.Lost[1]))
	f := Finding{Code: CodeParts, Severity: Note, Value: Float(lost), Limit: Float(math.NaN()), Unit: "1",
		Text: fmt.Sprintf("The recording needs more memory than it may take. It was gone through in %d parts of %d samples (%.4g s), each without its own mean and line; spectra, mean squares and displacements are averages over the parts. "+
			"That loses %.2g %% of the information on stiffness by drag and %.2g %% of that by amplitude; %d samples are left out.",
			p.Count, p.Samples, float64(p.Duration), 100*float64(p.Lost[0]), 100*float64(p.Lost[1]), p.LeftOut),
		Remedy: "raise --max-memory to analyse it as a whole"}
	r.Findings = append(r.Findings, f)
	for i := range r.Axes {
		corner := r.Axes[i].Spectrum.Corner
		if !corner.Known() || float64(corner.Value*p.Duration) >= fewPartRelaxations {
			continue
		}
		r.Findings = append(r.Findings, Finding{Code: CodeShortParts, Severity: Doubtful, Axis: r.Axes[i].Name, Value: corner.Value * p.Duration, Limit: fewPartRelaxations, Unit: "1",
			Text:   fmt.Sprintf("The parts of the recording hold only %.2g periods of the corner frequency: what is slower than a part is lost.", float64(corner.Value*p.Duration)),
			Remedy: "raise --max-memory: parts are longer then"})
	}
}

// CodeShortParts is the code of the finding that parts are short against the motion.
const CodeShortParts = "short-parts"

// summedDisplacements are the displacements of a recording in parts, its lines taken off; nil for others.
func (w *work) summedDisplacements() *msd.Summed {
	if w.gathered == nil {
		return nil
	}
	s := w.gathered.lags.Scaled(w.unit)
	for _, l := range w.record.Lines {
		s.TakeOff(l.Frequency/w.rate, l.Amplitude*l.Amplitude/2)
	}
	return s
}

// gatheredTrace is the trace of a recording in parts.
func (w *work) gatheredTrace() Trace {
	low, high, step := w.gathered.health.Extent(traceSteps)
	t := Trace{Start: Float(w.start), Step: Float(float64(step) / w.rate)}
	for i := range low {
		t.Low, t.High = append(t.Low, Float(low[i]*w.unit)), append(t.High, Float(high[i]*w.unit))
	}
	return t
}

// gatheredHealth is what the checks are made from in a recording in parts.
func (w *work) gatheredHealth() *health.Gathered {
	g := *w.gathered.health
	s := &w.gathered.spectrum
	g.Length, g.Segments, g.MeanSquare = s.Length, s.Parts, s.Square/float64(s.Parts)
	g.Power = make([]float64, len(s.Power))
	for k, p := range s.Power {
		g.Power[k] = p / float64(s.Parts)
	}
	return g.Scaled(w.unit)
}

// pairsOf returns the sums of the pairs of axes, in metres.
func (g *Gatherer) pairsOf(works []*work) []pairSums {
	out := append([]pairSums(nil), g.pairs...)
	at := 0
	for i, a := range works {
		for _, b := range works[i+1:] {
			p := &out[at]
			p.product *= a.unit * b.unit
			p.fastXY *= a.unit * b.unit
			p.fastXX *= a.unit * a.unit
			p.fastYY *= b.unit * b.unit
			at++
		}
	}
	return out
}

// products returns the sums of products of the axes for the checks.
func (g *Gatherer) products(works []*work) []health.Product {
	var out []health.Product
	for _, p := range g.pairsOf(works) {
		out = append(out, health.Product{Sum: p.product, Samples: p.n})
	}
	return out
}

// NewGatherer makes a Gatherer for a reader that keeps to a memory limit [bytes], which is recorded.
func NewGatherer(memory int64) *Gatherer { return &Gatherer{memory: float64(memory)} }
