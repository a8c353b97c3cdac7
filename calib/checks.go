package calib

import (
	"math"

	"beadwell/calib/health"
	"beadwell/calib/relaxation"
	"beadwell/calib/track"
	"beadwell/psd"
)

// Check is one check of the recording, also when it found nothing.
type Check struct {
	Code   string     `json:"code"`                    // stable name, for beadwell explain
	Name   string     `json:"name"`                    // in words
	Axis   string     `json:"axis,omitempty"`          // absent when it is about the whole recording
	Level  string     `json:"level"`                   // "ok", "doubtful", "bad"
	Judged bool       `json:"judged"`                  // false: the check could not be made, and the text says why
	Value  Float      `json:"value"`                   // the number that was judged; null when there is none
	Limit  Float      `json:"threshold"`               // from which on it is doubtful; null when there is none
	Unit   string     `json:"unit"`                    // of value and threshold
	Text   string     `json:"text"`                    // what was found, for a person
	Reason string     `json:"reason,omitempty"`        // why it matters
	Remedy string     `json:"remedy,omitempty"`        // what to do
	Ranges [][2]Float `json:"time_ranges_s,omitempty"` // on the clock of the recording
}

// examine checks the recording with what the fits know of it, and returns the part that
// nothing bad has a claim on.
func (r *Result) examine(rec *track.Recording, works []*work) stretch {
	in := health.Input{Rate: rec.Rate, Missing: rec.Missing, JitterRMS: rec.JitterRMS, Start: rec.Start}
	for _, w := range works {
		in.Exposure = w.exposure
		process, cornerSD := w.soundProcess()
		a := health.Axis{Name: w.axisName, X: w.positions(), Process: process, Known: w.fitErr == nil || w.poolErr == nil, CornerSD: cornerSD, GoodnessP: math.NaN()}
		if w.gathered != nil {
			a.Gathered = w.gatheredHealth()
		}
		if w.fitErr == nil {
			a.GoodnessP = w.fit.Goodness.PValue
		}
		a.Spectrum = w.tones
		if w.drive != nil {
			a.X = w.undriven()
		}
		for _, l := range w.record.Lines {
			if w.drive != nil && l.Frequency == w.drive.frequency {
				continue
			}
			a.Lines = append(a.Lines, health.Line{Frequency: l.Frequency, Amplitude: l.Amplitude})
		}
		in.Axes = append(in.Axes, a)
	}
	if len(works) > 0 && works[0].gathered != nil {
		in.Products = works[0].opt.Gathered.products(works)
	}
	checks := health.Run(in)
	for _, w := range works {
		w.unload()
	}
	good := goodStretch(in, checks)
	r.Checks = []Check{}
	for _, c := range checks {
		if c.Code == slowSampling && c.Level == health.Bad && pooledFit(works, c.Axis) {
			c.Level = health.Doubtful
		}
		r.Checks = append(r.Checks, newCheck(c, rec.Start))
	}
	return good
}

// soundProcess returns the process that the record is checked against: the drag-free fit,
// or the pooled one where the record hardly determines its corner frequency.
//
// With it comes the standard uncertainty of the logarithm of its corner frequency, 0 when nothing is known of it.
func (w *work) soundProcess() (p relaxation.Process, cornerSD float64) {
	pooled := func() float64 { return math.Sqrt(math.Max(0, w.pooled.total[0][0])) }
	if w.fitErr != nil {
		free, _, _, _ := w.bestProcess()
		return free, pooled()
	}
	if f, ok := w.withNoiseFree(); ok {
		sd, _ := f.SD(alongCorner)
		return relaxation.Process{Corner: f.Corner, Variance: f.Variance, Noise: f.NoiseQ, Interval: 1 / w.rate, Exposure: w.exposure}, sd
	}
	if w.poolErr != nil || w.pooled.regimeFC <= w.limit() {
		sd, _ := w.fit.SD(alongCorner)
		return w.fit.Process(), sd
	}
	return w.processAt(w.pooled.maximum.At), pooled()
}

// withNoiseFree is a fit that does not trust the stated noise, where the one that does misses the
// shape of the spectrum: a wrong noise or exposure would otherwise show as drifts, jumps and tones that nobody made.
func (w *work) withNoiseFree() (*psd.Fit, bool) {
	if !w.noise.Known || w.form != nil || !(w.fit.Goodness.PValue < misfitLevel) {
		return nil, false
	}
	o := w.fitOptions()
	o.KeepLines, o.Noise = true, psd.Noise{}
	f, err := psd.Estimate(w.record, o)
	if err != nil || f.Goodness.PValue < w.fit.Goodness.PValue {
		return nil, false
	}
	return f, true
}

// misfitLevel is the p-value of the fitted spectrum from which the health checks call it odd.
const misfitLevel = 1e-4

// newCheck turns a check into the form of a result; start is the time of the first sample [s].
func newCheck(c health.Check, start float64) Check {
	out := Check{Code: c.Code, Name: c.Name, Axis: c.Axis, Level: c.Level.String(), Judged: c.Judged, Value: Float(c.Value), Limit: Float(c.Threshold),
		Unit: c.Unit, Text: c.Text, Reason: c.Reason, Remedy: c.Remedy}
	for _, s := range c.Ranges {
		out.Ranges = append(out.Ranges, [2]Float{Float(start + s[0]), Float(start + s[1])})
	}
	return out
}

// slowSampling is the check that white samples fail. They say nothing of the corner
// frequency, but their variance still does of the stiffness, together with the computed drag: a
// stiffness that rests on both is doubtful, not bad.
const slowSampling = "slow-sampling"

func pooledFit(works []*work, axis string) bool {
	for _, w := range works {
		if w.axisName == axis {
			return w.poolErr == nil && w.axis.Adopted.Stiffness.Known()
		}
	}
	return false
}

// worst returns the first bad check.
func (r *Result) worst() (Check, bool) {
	for _, c := range r.Checks {
		if c.Level == Bad {
			return c, true
		}
	}
	return Check{}, false
}

// checkFindings turns the checks that found something into findings.
func (r *Result) checkFindings() {
	for _, c := range r.Checks {
		if c.Level != Doubtful && c.Level != Bad {
			continue
		}
		f := Finding{Code: c.Code, Severity: c.Level, Axis: c.Axis, Text: c.Text, Remedy: c.Remedy, Value: c.Value, Limit: c.Limit, Unit: c.Unit}
		if len(c.Ranges) > 0 {
			first, last := c.Ranges[0], c.Ranges[len(c.Ranges)-1]
			f.Range = &[2]Float{first[0], last[1]}
		}
		r.Findings = append(r.Findings, f)
	}
}
