package calib

import (
	"fmt"
	"math"

	"beadwell/calib/drag"
)

// nearFactor is the parallel wall factor at a height.
func nearFactor(radius, height float64) (float64, error) { return drag.Parallel(height / radius) }

// Limits of the findings of one axis.
const (
	shortRelaxations = 30   // T fc below which a record is called short: relative uncertainty of 1/sqrt(pi T fc) = 10 %
	hydroBias        = 0.25 // share of the statistical uncertainty that a neglected bias may have
)

// findings lists what the user should know of one axis.
func (w *work) findings() []Finding {
	var out []Finding
	nan := Float(math.NaN())
	for leg, reason := range w.legs.reason {
		if reason == "" || leg > displacementLeg {
			continue
		}
		out = append(out, Finding{Code: CodeWithheld, Severity: Note, Axis: w.axisName, Text: fmt.Sprintf("The estimate %q is withheld: %s.", legNames[leg], reason),
			Remedy: "record longer or faster, or state the localisation noise", Value: nan, Limit: nan})
	}
	if !w.noise.Known && (w.fitErr != nil || w.pooled.regimeFC > hopeless || w.pooled.regimeV > hopeless) {
		out = append(out, Finding{Code: CodeNoiseUnknown, Severity: Doubtful, Axis: w.axisName,
			Text:   "The localisation noise is not stated, and at this sampling rate it cannot be told from the motion of the bead; the adopted stiffness rests on the computed drag.",
			Remedy: `measure the noise with a stuck bead and state it with --noise "4(1) nm"`, Value: nan, Limit: nan})
	}
	for _, l := range w.record.Lines {
		out = append(out, Finding{Code: CodeLine, Severity: Note, Axis: w.axisName,
			Text:   fmt.Sprintf("A narrow line at %.6g Hz with an amplitude of %.3g nm was removed.", l.Frequency, l.Amplitude*1e9),
			Remedy: "look for mains pickup or a vibration", Value: Float(l.Frequency), Limit: nan, Unit: "Hz"})
	}
	if f, ok := w.hydrodynamics(); ok {
		out = append(out, f)
	}
	return out
}

// hydrodynamics warns where the inertia of the liquid matters: drag grows with
// frequency as 1 + sqrt(f/f_nu), f_nu = nu/(pi R^2), so that a constant-drag fit up to half
// the sampling rate is low in fc and D by about (2/3) sqrt(f/f_nu) together.
func (w *work) hydrodynamics() (Finding, bool) {
	if math.IsNaN(w.phys.density) || w.fitErr != nil {
		return Finding{}, false
	}
	nu := w.phys.viscosity / w.phys.density
	fNu := nu / (math.Pi * w.phys.radius * w.phys.radius)
	size := 0.5 * math.Sqrt(w.rate/2/fNu)
	sd, _ := w.fit.SD(alongDrag)
	if math.Pow(w.fit.Corner*2/w.rate, 1) > 0.5 || size < hydroBias*sd {
		return Finding{}, false
	}
	return Finding{Code: CodeHydrodynamics, Severity: Doubtful, Axis: w.axisName,
		Text:   fmt.Sprintf("The bandwidth is large enough for the inertia of the liquid to matter: the drag grows by up to %.1f %% within the band, and the fit with constant drag may be low by about half of that.", 200*size),
		Remedy: "restrict the fit with --band to a few times the corner frequency", Value: Float(size), Limit: Float(hydroBias * sd), Unit: "1"}, true
}
