package report

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"beadwell/calib"
)

// ForceVersion names the layout of a stored Force.
const ForceVersion = "beadwell-force/1"

// Force is the summary of the forces of one recording.
type Force struct {
	Schema      string               `json:"schema"`            // layout of this object, with its version
	Program     calib.Program        `json:"program"`           // what made the forces
	Created     string               `json:"created,omitempty"` // RFC 3339; the only field that depends on the clock
	Input       calib.Input          `json:"input"`             // the recording
	Calibration calib.Input          `json:"calibration"`       // the recording that was calibrated
	Verdict     calib.Verdict        `json:"verdict"`           // on the calibration
	Centre      string               `json:"centre"`            // how the centre was found, in words
	Rate        calib.Float          `json:"rate_hz"`           // sampling rate
	Start       calib.Float          `json:"start_s"`           // time of the first sample
	Duration    calib.Float          `json:"duration_s"`        // samples over rate
	Axes        []calib.ForceSummary `json:"axes"`              // one for each axis, in the order of the recording
	Findings    []calib.Finding      `json:"findings"`          // never null
}

// forceUnit is the unit in which forces are printed.
const forceUnit = "pN"

// ForceJSON writes the summary as indented JSON.
func ForceJSON(w io.Writer, f Force) error {
	f.Schema, f.Input, f.Calibration = ForceVersion, storableInput(f.Input), storableInput(f.Calibration)
	if f.Findings == nil {
		f.Findings = []calib.Finding{}
	}
	return WriteJSON(w, f)
}

// ForceText writes the summary for a person.
func ForceText(w io.Writer, f Force) error {
	p := &printer{}
	p.paragraph("", fmt.Sprintf("%s: forces by the calibration of %s (%s)", Plain(InputName(f.Input)), Plain(InputName(f.Calibration)), Plain(f.Verdict.Status)))
	p.paragraph("", fmt.Sprintf("%s at %s; centre: %s", plainNumber(f.Duration, "s"), plainNumber(f.Rate, "Hz"), f.Centre))
	p.WriteString("\n")
	p.table(func(row func(...string)) {
		row("axis", "mean force, "+forceUnit, "lowest", "highest", "spread", "stiffness, "+stiffnessUnit, "centre, nm")
		for _, a := range f.Axes {
			row(a.Axis, combined(a.Mean, forceUnit), inUnit(a.Lowest, 1e12), inUnit(a.Highest, 1e12), inUnit(a.Spread, 1e12),
				combined(a.Stiffness, stiffnessUnit), combined(a.Centre, "nm"))
		}
	})
	p.WriteString("\n")
	for _, a := range f.Axes {
		p.paragraph("", a.Axis+": "+strings.Join(forceFacts(a), "; "))
	}
	p.paragraph("", "The force is that which holds the bead out of the centre, positive towards positive positions. "+
		"Each sample shows the thermal motion of the bead too, and is not corrected for the exposure.")
	for i, finding := range f.Findings {
		if i == 0 {
			p.WriteString("\n")
		}
		p.paragraph("", findingLine(finding))
	}
	_, err := io.WriteString(w, p.String())
	return err
}

func forceFacts(a calib.ForceSummary) []string {
	var facts []string
	if a.Estimate != calib.EstimateAdopted {
		facts = append(facts, "stiffness by "+strings.ReplaceAll(a.Estimate, "_", " "))
	}
	facts = append(facts, "calibration "+relative(a.Relative)+" of each force, the same error in all samples")
	if a.Statistical.Known() {
		facts = append(facts, "localisation noise "+inUnit(a.Statistical, 1e12)+" pN in each sample")
	} else {
		facts = append(facts, "localisation noise not known")
	}
	if a.Linear[0].Known() {
		facts = append(facts, fmt.Sprintf("harmonic as far as seen from %s to %s nm (%s)", inUnit(a.Linear[0], 1e9), inUnit(a.Linear[1], 1e9), a.LinearReason))
	}
	if a.Missing > 0 {
		facts = append(facts, fmt.Sprintf("%d of %d samples missing", a.Missing, a.Samples))
	}
	return facts
}

// inUnit prints a number of a trace in a unit that is factor to the SI unit, to three digits.
func inUnit(f calib.Float, factor float64) string {
	if !f.Known() {
		return dash
	}
	return strconv.FormatFloat(float64(f)*factor, 'g', 3, 64)
}

// anyAxis stands in the name of a column for x, y or z.
const anyAxis = "AXIS"

// forceColumns are the columns of ForceCSV, each with its meaning: the time, then those of
// each axis.
var forceColumns = [][2]string{
	{"time_s", "time of the sample, on the clock of the recording; from 0 when it has no time column"},
	{anyAxis + "_displacement_m", "position minus the centre of the trap; empty for a missing sample, and so are those that follow"},
	{anyAxis + "_force_N", "stiffness times displacement: the force that holds the bead there, positive towards positive positions"},
	{anyAxis + "_force_noise_u_N", "standard uncertainty of the force by localisation noise, independent in each sample; empty when the noise is not known"},
	{anyAxis + "_force_calibration_u_N", "standard uncertainty by stiffness and centre, one error that all samples share"},
}

// ForceCSV writes the forces, one row a sample, in SI units: the time of the sample, and for each axis displacement, force, the standard uncertainty of the force by
// localisation noise (independent in each sample), and by stiffness and centre (one error
// that all samples share). What is missing or not known is an empty cell. It writes as it
// goes: memory does not grow with the recording. Times have 15 significant digits, displacements
// and forces 12, which is far below any noise and above the rounding of the last bits, and
// uncertainties 4.
func ForceCSV(w io.Writer, start, rate float64, traces []calib.ForceTrace) error {
	out := bufio.NewWriterSize(w, 1<<16)
	out.WriteString(forceColumns[0][0]) // errors stay until Flush
	for _, t := range traces {
		for _, c := range forceColumns[1:] {
			out.WriteString("," + strings.Replace(c[0], anyAxis, t.Trap.Axis, 1))
		}
	}
	out.WriteString("\n")
	samples := 0
	for _, t := range traces {
		samples = max(samples, len(t.Positions))
	}
	noise := make([][]byte, len(traces)) // the same in each row
	for j := range traces {
		noise[j] = appendCell(nil, traces[j].StatisticalU(), 4)
	}
	line := make([]byte, 0, 256)
	for i := range samples {
		line = strconv.AppendFloat(line[:0], start+float64(i)/rate, 'g', 15, 64)
		for j := range traces {
			displacement, force, calibration := traces[j].At(i)
			if displacement != displacement { // missing
				line = append(line, ",,,,"...)
				continue
			}
			line = appendCell(line, displacement, 12)
			line = appendCell(line, force, 12)
			line = append(line, noise[j]...)
			line = appendCell(line, calibration, 4)
		}
		line = append(line, '\n')
		if _, err := out.Write(line); err != nil {
			return err
		}
	}
	return out.Flush()
}

func appendCell(line []byte, v float64, digits int) []byte {
	line = append(line, ',')
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return line
	}
	return strconv.AppendFloat(line, v, 'g', digits, 64)
}
