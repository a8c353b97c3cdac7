package calib

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"
)

// Diagnosis compares the single causes that could have made the routes disagree. It
// is made only when they do.
//
// Each cause frees one statement (a length scale, a temperature, an exposure) and is
// given the value at which the likelihood of all axes together is greatest, the other
// statements being held within their standard uncertainties. Causes whose likelihood is
// within a factor of ten of the best are a tie: the recording cannot tell them apart.
type Diagnosis struct {
	Text       string   `json:"text"`                 // for a person
	Companions []string `json:"companions,omitempty"` // names of the other recordings that were weighed together with this one
	Causes     []Cause  `json:"causes"`               // the tie first, by the change needed; then the others, by likelihood
}

// Cause is one thing that, being other than stated, would explain the disagreement.
type Cause struct {
	Code        string   `json:"code"`                    // stable name, for beadwell explain
	Name        string   `json:"name"`                    // in words
	Axis        string   `json:"axis,omitempty"`          // of a cause on one axis alone
	Stated      Quantity `json:"stated"`                  // what was used; its uncertainty as it was stated
	Needed      Quantity `json:"needed"`                  // what would reconcile; null when nothing would
	Ratio       Float    `json:"ratio"`                   // needed over stated; null when either is zero or unknown
	Change      Float    `json:"change"`                  // needed less stated, in standard uncertainties of what was stated; null when none was
	Likelihood  Float    `json:"log_likelihood"`          // relative to the best cause; 0 or below
	ChiSquare   Float    `json:"chi_square_left"`         // disagreement of the routes that is left
	Freedom     int      `json:"degrees_of_freedom_left"` // of it
	PValue      Float    `json:"p_value_left"`            // of it; 1 when nothing can be left
	Tied        bool     `json:"tied"`                    // within a likelihood ratio of ten of the best
	Text        string   `json:"text"`                    // what would have to be
	Measurement string   `json:"deciding_measurement"`    // what to measure to confirm or exclude it
	Caution     string   `json:"caution,omitempty"`       // where that touches the laser
}

// Codes of the causes.
const (
	CauseScale       = "cause-length-scale"
	CauseScaleOne    = "cause-length-scale-of-one-axis"
	CauseTemperature = "cause-temperature"
	CauseViscosity   = "cause-viscosity"
	CauseDiameter    = "cause-bead-diameter"
	CauseHeight      = "cause-height"
	CauseExposure    = "cause-exposure"
	CauseNoise       = "cause-localisation-noise"
	CauseDrift       = "cause-slow-drift"
	CauseInertia     = "cause-inertia-of-the-liquid"
	CauseRate        = "cause-sampling-rate"
	CauseStage       = "cause-stage-amplitude"
	CauseHeating     = "cause-laser-heating"
)

// tieRatio is the likelihood ratio up to which two causes cannot be told apart.
const tieRatio = 10

// findCause makes the diagnosis when the routes disagree.
func (r *Result) findCause(ctx context.Context, works []*work, opt Options) error {
	if p := r.Verdict.FamilyWiseP; !p.Known() || p >= familyLevel {
		return nil
	}
	var others []*work
	var names, unused []string
	for _, c := range opt.allCompanions() {
		list, err := c.analyse(ctx)
		var unfit *DataError
		switch {
		case errors.As(err, &unfit):
			unused = append(unused, firstLine(err))
		case err != nil:
			return err
		default:
			others, names = append(others, list...), append(names, c.Recording.Name)
		}
	}
	r.Diagnosis = diagnose(newBench(works, others))
	if _, upset := r.event(); upset && !r.Diagnosis.blamesDrift() { // the event is the cause
		r.Diagnosis = nil
	}
	if r.Diagnosis != nil {
		r.Diagnosis.Companions = names
		r.Diagnosis.Text += weighedWith(names, unused)
		if c, bad := r.worst(); bad && !r.Diagnosis.blamesDrift() {
			r.Diagnosis.Text += " But the recording itself has a fault (" + c.Name + onAxis(c.Axis) + "), which may be the cause: mend that first."
		}
	}
	return nil
}

// onAxis names an axis, if there is one.
func onAxis(axis string) string {
	if axis == "" {
		return ""
	}
	return " on " + axis
}

// blamesDrift tells whether a slow drift reconciles the routes: it can pass for an event in the recording, and is
// none.
func (d *Diagnosis) blamesDrift() bool {
	return d != nil && slices.ContainsFunc(d.Causes, func(c Cause) bool { return c.Code == CauseDrift && c.Tied && c.PValue >= familyLevel })
}

// allCompanions are the companions and the recordings of the free bead, each once.
func (o Options) allCompanions() []Companion {
	all := slices.Clone(o.Companions)
	for _, f := range o.FreeBead {
		same := func(c Companion) bool { return c.Recording.Name == f.name && c.Recording.Bead == f.bead }
		if f.reason == "" && f.whole.Recording != nil && !slices.ContainsFunc(all, same) {
			all = append(all, f.whole)
		}
	}
	return all
}

// analyse returns the analysed axes of a companion.
func (c Companion) analyse(ctx context.Context) ([]*work, error) {
	works, err := newWorks(c.Recording, c.Settings, Options{})
	if err != nil {
		return nil, fmt.Errorf("companion %s: %w", c.Recording.Name, err)
	}
	switch roleOf(c.Settings) {
	case RoleFree:
		for _, w := range works {
			if err := w.runFree(); err != nil {
				return nil, err
			}
		}
	case RoleBackground:
		return nil, &SettingError{Key: "recording.companions", Problem: fmt.Sprintf("names %s, which has the role %s and no bead that moves", c.Recording.Name, RoleBackground),
			Remedy: "name recordings of the same bead, trapped, free or driven"}
	default:
		if err := runTrapped(ctx, c.Recording, c.Settings, works, Options{}); err != nil {
			return nil, err
		}
		if err := firstHopeless(works); err != nil {
			return nil, err
		}
	}
	return works, nil
}

// firstMeasurement is what to measure first when the routes disagree.
func (r *Result) firstMeasurement() string {
	const otherwise = "check length scale, temperature, bead diameter and height; repeat the recording"
	if r.Diagnosis == nil || len(r.Diagnosis.Causes) == 0 || r.Diagnosis.Causes[0].PValue < familyLevel {
		return otherwise
	}
	first := r.Diagnosis.Causes[0]
	text := "first, to decide on the " + first.Name + ": " + first.Measurement
	if !strings.Contains(text, "repeat") {
		text += "; then repeat the recording"
	}
	if first.Caution != "" {
		text += caution
	}
	return text
}

// diagnose compares single causes over the axes whose routes could be compared.
// It returns nil when there is none.
func diagnose(b *bench) *Diagnosis {
	if b.own == 0 || len(b.works) == 0 {
		return nil
	}
	var found []candidate
	for _, h := range b.hypotheses() {
		if c, ok := b.try(h); ok {
			found = append(found, c)
		}
	}
	d := &Diagnosis{Causes: rank(found)}
	d.Text = diagnosisText(d.Causes)
	return d
}

// candidate is a cause with the size of its change in standard uncertainties, stated or usual.
type candidate struct {
	Cause
	size float64
}

// rank sets the likelihoods relative to the best, marks the tie and sorts.
func rank(found []candidate) []Cause {
	best := math.Inf(-1)
	for _, c := range found {
		best = math.Max(best, float64(c.Likelihood))
	}
	for i := range found {
		c := &found[i]
		c.Likelihood -= Float(best)
		c.Tied = float64(c.Likelihood) > -math.Log(tieRatio)
	}
	slices.SortStableFunc(found, func(a, b candidate) int {
		switch {
		case a.Tied && b.Tied:
			return cmp.Compare(a.size, b.size)
		case a.Tied:
			return -1
		case b.Tied:
			return 1
		}
		return cmp.Compare(b.Likelihood, a.Likelihood)
	})
	causes := make([]Cause, len(found))
	for i, c := range found {
		causes[i] = c.Cause
	}
	return causes
}

// try finds the value of a hypothesis at which it explains most.
func (b *bench) try(h hypothesis) (candidate, bool) {
	top, ok := h.maximise()
	if !ok {
		return candidate{}, false
	}
	if h.also != nil {
		if other, ok := h.also(top); ok {
			if second, ok := other.maximise(); ok && second.value > top.value {
				h, top = other, second
			}
		}
	}
	c := Cause{Code: h.code, Name: h.name, Axis: h.axis, Stated: h.stated, Ratio: Float(math.NaN()), Change: Float(math.NaN()),
		Likelihood: Float(top.value), ChiSquare: Float(top.left), Freedom: b.size() - 1, PValue: 1, Measurement: measurements[h.code]}
	if h.fixed() || top.atBound {
		c.Freedom = b.size()
	}
	if c.Freedom > 0 {
		c.PValue = survival(top.left, c.Freedom)
	}
	if cautious[h.code] {
		c.Caution = trimmedCaution
	}
	c.Needed = h.needed(top)
	needed, stated := float64(c.Needed.Value), float64(h.stated.Value)
	if stated != 0 && needed != 0 {
		c.Ratio = Float(needed / stated)
	}
	if u := h.stated.Combined; u != nil && u.Standard > 0 {
		c.Change = Float((needed - stated) / float64(u.Standard))
	}
	size := h.order(needed)
	if c.Change.Known() {
		size = math.Abs(float64(c.Change))
	}
	c.Text = h.text(c)
	if c.PValue < familyLevel {
		c.Needed = Withheld(h.stated.Unit, "no value of it brings the routes together")
	}
	return candidate{c, size}, true
}
