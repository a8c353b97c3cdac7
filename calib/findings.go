package calib

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"beadwell/calib/drag"
	"beadwell/psd"
)

// nearFactor is the parallel wall factor at a height.
func nearFactor(radius, height float64) (float64, error) { return drag.Parallel(height / radius) }

// Limits of the findings of one axis.
const (
	shortRelaxations = 30 // T fc below which a record is called short: relative uncertainty of 1/sqrt(pi T fc) = 10 %
)

// findings lists what the user should know of one axis.
func (w *work) findings() []Finding {
	var out []Finding
	nan := Float(math.NaN())
	for leg, reason := range w.legs.reason {
		if reason == "" || reason == selfScaled || reason == byDrive || leg > displacementLeg {
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
	if u := w.axis.Adopted.Stiffness.Combined; u != nil && !u.Interval95[1].Known() {
		out = append(out, Finding{Code: CodeOneSided, Severity: Doubtful, Axis: w.axisName,
			Text:   "The recording bounds the adopted stiffness from below only: its interval has no upper end, and the value says little.",
			Remedy: "state the localisation noise, sample faster, or record longer", Value: u.Interval95[0], Limit: nan, Unit: "N/m"})
	}
	out = append(out, w.lineFindings()...)
	out = append(out, w.diodeFindings()...)
	if w.background != nil {
		out = append(out, w.background.findingsOf(w.axisName)...)
	}
	if w.takesDrag() {
		out = append(out, Finding{Code: CodeSelfScaled, Severity: Note, Axis: w.axisName,
			Text:   "No sensitivity is stated; it was found from the spectrum and the computed drag. The stiffness then rests on the corner frequency alone, and a wrong bead diameter, viscosity or height cannot show.",
			Remedy: `drive the stage by a known amplitude (--role driven), or state the sensitivity with --sensitivity "1.31(4) um/V"`, Value: nan, Limit: nan})
	}
	if f, ok := w.hydrodynamicFinding(); ok {
		out = append(out, f)
	}
	return out
}

// mostLines is the number of narrow lines of one axis that are told one by one.
const mostLines = 3

// lineFindings tell of the narrow lines that were removed.
func (w *work) lineFindings() []Finding {
	var lines []psd.Line
	for _, l := range w.record.Lines {
		if w.drive == nil || l.Frequency != w.drive.frequency {
			lines = append(lines, l)
		}
	}
	const remedy = "look for mains pickup or a vibration"
	finding := func(l psd.Line, text string) Finding {
		return Finding{Code: CodeLine, Severity: Note, Axis: w.axisName, Text: text, Remedy: remedy, Value: Float(l.Frequency), Limit: Float(math.NaN()), Unit: "Hz"}
	}
	if n := len(lines); n > mostLines {
		largest := slices.MaxFunc(lines, func(a, b psd.Line) int { return cmp.Compare(a.Amplitude, b.Amplitude) })
		return []Finding{finding(largest, fmt.Sprintf("%d narrow lines from %.6g Hz to %.6g Hz were removed; the largest, at %.6g Hz, has an amplitude of %.3g nm.",
			n, lines[0].Frequency, lines[n-1].Frequency, largest.Frequency, largest.Amplitude*1e9))}
	}
	var out []Finding
	for _, l := range lines {
		out = append(out, finding(l, fmt.Sprintf("A narrow line at %.6g Hz with an amplitude of %.3g nm was removed.", l.Frequency, l.Amplitude*1e9)))
	}
	return out
}
