package calib

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"beadwell/calib/health"
	"beadwell/calib/session"
)

// familyLevel is the family-wise combined p-value below which the estimates are
// called inconsistent.
const familyLevel = 0.005

// judge compares all axes and withholds what cannot be adopted.
func (r *Result) judge(works []*work, opt Options) {
	lowest, tested := 1.0, 0
	var worst *work
	said := "" // of the worst
	for _, w := range works {
		c := w.axis.CrossCheck
		tests := []Test{c.Equality}
		if c.Driven != nil {
			tests = append(tests, *c.Driven)
		}
		if c.Free != nil {
			tests = append(tests, *c.Free)
		}
		for _, t := range tests {
			p := float64(t.PValueCombined)
			if math.IsNaN(p) {
				continue
			}
			tested++
			if p <= lowest {
				lowest, worst, said = p, w, c.Text
				if c.Free != nil && t == *c.Free {
					said = w.axis.FreeDrag.Text
				}
			}
		}
	}
	v := &r.Verdict
	v.Status = Consistent
	defer r.judgeHealth()
	if tested == 0 && !r.anyAdopted() || tested > 0 && !r.anyAdopted() && lowest*float64(tested) >= familyLevel {
		v.Status, v.FamilyWiseP = Unfit, Float(math.NaN())
		v.Text = "No stiffness can be given from this recording."
		v.Reason = r.Axes[0].Adopted.Withheld
		return
	}
	if tested == 0 {
		v.Status, v.FamilyWiseP = Unchecked, Float(math.NaN())
		if works[0].takesDrag() {
			v.Text = "Nothing to cross-check: the sensitivity of the detector was taken from the computed drag."
			v.Reason = "corner frequency and computed drag are the only independent leg; the stiffness is as good as bead diameter, viscosity and height are"
			return
		}
		v.Text = "No cross-check was possible: the recording does not determine drag and amplitude apart."
		v.Reason = "the adopted stiffness rests on the computed drag and the temperature together"
		return
	}
	v.FamilyWiseP = Float(math.Min(1, lowest*float64(tested))) // Bonferroni: axes share their inputs
	if float64(v.FamilyWiseP) >= familyLevel {
		v.Text = "The estimates agree within their uncertainties."
		v.Reason = fmt.Sprintf("smallest p-value over %d %s, corrected for their number: %s (inconsistent below %g)",
			tested, comparisons(tested, len(works)), pText(float64(v.FamilyWiseP)), familyLevel)
		return
	}
	v.Status = Inconsistent
	v.Text = "The estimates disagree: do not use this calibration before the cause is found."
	v.Reason = fmt.Sprintf("axis %s: %s; family-wise %s, inconsistent below %g", worst.axisName, said, pText(float64(v.FamilyWiseP)), familyLevel)
	byStage := opt.Adopt == RouteDriven || opt.Adopt == RouteFlow
	if opt.Adopt != "" && !byStage {
		return
	}
	for i := range r.Axes {
		if byStage && r.Axes[i].Driven != nil {
			continue
		}
		reason := works[i].disagreement()
		a := &r.Axes[i].Adopted
		a.Stiffness, a.Withheld = Withheld("N/m", reason), reason
		a.Basis, a.Weights, a.Budget = "", nil, nil
	}
}

// disagreement says why the stiffness of an axis is withheld when estimates disagree, and what can be taken all the same.
func (w *work) disagreement() string {
	switch {
	case w.takesDrag():
		return "the estimates disagree, and the sensitivity of this axis was taken from the computed drag; --adopt drag takes it all the same"
	case w.scaledByDrive():
		return "the drag route and the driven stage disagree; --adopt drag or --adopt driven takes one of them"
	case w.axis.Driven != nil:
		return "drag route, amplitude route and driven stage do not agree; --adopt drag, --adopt amplitude or --adopt driven takes one of them"
	case w.axis.FreeDrag != nil:
		return "computed drag, drag of the free bead and amplitude disagree; --adopt drag, --adopt free-bead or --adopt amplitude takes one of them"
	}
	return "the drag route and the amplitude route disagree; --adopt drag or --adopt amplitude takes one of them"
}

// judgeHealth lets a bad check overrule the verdict of the cross-check.
func (r *Result) judgeHealth() {
	c, found := r.worst()
	if !found {
		return
	}
	v := &r.Verdict
	v.Status = Unfit
	v.Text = "The recording is not fit for a calibration: do not use it before the cause is found."
	reason := c.Text
	if c.Axis != "" {
		reason = "axis " + c.Axis + ": " + reason
	}
	v.Reason = strings.TrimSuffix(reason, ".") + "; cross-check: " + v.Reason
	if _, upset := r.event(); !upset {
		return
	}
	v.Reason = strings.TrimSuffix(reason, ".") + "; what was estimated from all of the recording together means nothing then"
	for i := range r.Axes {
		if a := &r.Axes[i].Adopted; !a.Stiffness.Known() || r.Choices == nil || r.Choices.Adopt == "" {
			a.Withheld = "the recording is not one process: " + lower(strings.TrimSuffix(c.Text, "."))
			a.Stiffness = Withheld("N/m", a.Withheld)
			a.Basis, a.Weights, a.Budget = "", nil, nil
		}
	}
}

// event returns the first bad check that says where in the recording something happened: an escape, a jump, a bead that
// was held. Before and after it the recording is not one process.
func (r *Result) event() (Check, bool) {
	for _, c := range r.Checks {
		if c.Level == Bad && health.Placed(c.Code) {
			return c, true
		}
	}
	return Check{}, false
}

func lower(s string) string {
	if s == "" {
		return s
	}
	return strings.ToLower(s[:1]) + s[1:]
}

func (r *Result) anyAdopted() bool {
	for _, a := range r.Axes {
		if a.Adopted.Stiffness.Known() {
			return true
		}
	}
	return len(r.Axes) == 0
}

// comparisons names what was tested: the axes, where there was one test of each.
func comparisons(tested, axes int) string {
	if tested <= axes {
		return plural(tested, "axis", "axes")
	}
	return "comparisons"
}

func plural(n int, one, many string) string {
	if n == 1 {
		return one
	}
	return many
}

// Codes of the findings of a calibration; those of the recording itself are in package health.
const (
	CodeAssumed       = "assumed-setting"
	CodeNoHeight      = "height-not-stated"
	CodeNoExposure    = "exposure-not-stated"
	CodeShort         = "short-record" // also a check of package health
	CodeLine          = "narrow-line"
	CodeInconsistent  = "routes-disagree"
	CodeWithheld      = "estimate-withheld"
	CodeOneSided      = "bounded-from-below"
	CodeNoiseUnknown  = "noise-not-separable"
	CodeHydrodynamics = "frequency-dependent-drag"
	CodeSelfScaled    = "sensitivity-from-drag"
)

func (r *Result) collectFindings(set *session.Settings, works []*work) {
	add := func(f Finding) {
		r.Findings = append(r.Findings, f)
	}
	if r.Verdict.Status == Inconsistent {
		add(Finding{Code: CodeInconsistent, Severity: Bad, Text: r.Verdict.Text + " " + capital(r.Verdict.Reason) + ".",
			Remedy: r.firstMeasurement(), Value: r.Verdict.FamilyWiseP, Limit: familyLevel, Unit: "1"})
	}
	r.settingFindings(set, works)
	_, upset := r.event()
	for _, w := range works {
		for _, f := range append(w.findings(), w.freeFindings()...) {
			if !upset || !ofTheFit[f.Code] {
				add(f)
			}
		}
	}
	r.checkFindings()
	slices.SortStableFunc(r.Findings, func(a, b Finding) int { return cmp.Compare(urgency[a.Severity], urgency[b.Severity]) })
}

// urgency orders findings: what spoils the calibration comes first.
var urgency = map[string]int{Bad: 0, Doubtful: 1, Note: 2}

// ofTheFit are the findings on a fit that mean nothing where the recording is not one process.
var ofTheFit = map[string]bool{CodeWithheld: true, CodeLine: true, CodeHydrodynamics: true, CodeNoiseUnknown: true}

// settingFindings tells what was assumed or not stated.
func (r *Result) settingFindings(set *session.Settings, works []*work) {
	nan := Float(math.NaN())
	add := func(f Finding) {
		r.Findings = append(r.Findings, f)
	}
	for _, s := range set.All() {
		if s.Assumed {
			add(Finding{Code: CodeAssumed, Severity: Doubtful, Text: fmt.Sprintf("%s was not stated; %s was assumed.", s.Key, s.Text),
				Remedy: fmt.Sprintf("state it with --%s or in session.toml", flagOf(s.Key)), Value: nan, Limit: nan})
		}
	}
	if len(works) > 0 {
		w := works[0]
		if _, ok := set.Lookup("chamber.height", ""); !ok {
			near, _ := nearFactor(w.phys.radius, 5*w.phys.radius*2)
			add(Finding{Code: CodeNoHeight, Severity: Doubtful, Text: fmt.Sprintf("The height of the bead was not stated; no surface was assumed to be near. At a height of ten radii the drag would be %.1f %% larger.", 100*(near-1)),
				Remedy: `state it with --height "8.0(5) um", or --height far`, Value: nan, Limit: nan})
		}
		if _, ok := set.Lookup("recording.exposure", ""); !ok {
			add(Finding{Code: CodeNoExposure, Severity: Note, Text: "The exposure was not stated; each sample was taken as instantaneous, as of a fast detector.",
				Remedy: `of a camera, state it with --exposure "0.4 ms"`, Value: nan, Limit: nan})
		}
	}
}

func flagOf(key string) string {
	if k, ok := session.Find(key); ok {
		return k.Flag
	}
	return key
}

func capital(s string) string {
	if s == "" {
		return s
	}
	return strings.ToUpper(s[:1]) + s[1:]
}
