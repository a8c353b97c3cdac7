package report

import (
	"fmt"
	"slices"
	"strings"

	"beadwell/calib"
)

// kindRow is one number that a particular kind of recording gives of one axis.
type kindRow struct{ axis, name, value, remark string }

// kindRows lists what a detector in volts, a moving stage, a free bead and a background give beyond stiffness.
func kindRows(r *calib.Result) []kindRow {
	var rows []kindRow
	for _, a := range r.Axes {
		add := func(name string, q calib.Quantity, unit, remark string) {
			if q.Known() {
				rows = append(rows, kindRow{a.Name, name, withUnit(combined(q, unit), unit), remark})
			}
		}
		if s := a.Sensitivity; s != nil {
			unit := perDetectorUnit(s.Unit)
			add("sensitivity", s.Used, unit, "by "+originWords(s.Origin))
			if s.Origin != calib.SensitivityDrag {
				add("sensitivity by computed drag", s.FromDrag, unit, "")
			}
		}
		if d := a.Photodiode; d != nil {
			add("alpha of the photodiode", d.Alpha, "1", d.AlphaOrigin+correlationWords(d.WithAlpha))
			add("f3dB of the photodiode", d.F3dB, "kHz", d.F3dBOrigin+correlationWords(d.WithF3dB))
			if d.Kept.Known() {
				rows = append(rows, kindRow{a.Name, "variance that the detector passes", fmt.Sprintf("%.1f %%", 100*float64(d.Kept)), "of that of the position"})
			}
		}
		if d := a.Driven; d != nil {
			drivenRows(a, d, add)
		}
		if f := a.Free; f != nil {
			add("diffusion coefficient", f.Diffusion, "um2/s", "free bead")
			add("expected diffusion coefficient", f.Expected, "um2/s", "kT over the computed drag")
			add("localisation noise", f.Noise, "nm", "")
			add("drift", f.Speed, "um/s", "")
		}
		if f := a.FreeDrag; f != nil {
			freeDragRows(a, f, add)
		}
		if b := a.Background; b != nil {
			unit := b.Noise.Unit
			if unit == "m" {
				unit = "nm"
			}
			remark := ""
			if b.Name != "" {
				remark = "from " + b.Name
			}
			add("noise of the background", b.Noise, unit, remark)
			for _, l := range b.Lines {
				rows = append(rows, kindRow{a.Name, "narrow line of the background", fmt.Sprintf("%.6g Hz", float64(l.Frequency)), "amplitude " + lineAmplitude(l, b.Noise.Unit)})
			}
		}
	}
	return append(rows, trapRows(r)...)
}

// trapRows lists the axes of the trap where they are not the recorded ones.
func trapRows(r *calib.Result) []kindRow {
	var rows []kindRow
	if r.TrapAxes == nil || !slices.ContainsFunc(r.Findings, func(f calib.Finding) bool { return f.Code == calib.CodeTilted }) {
		return nil
	}
	for _, p := range r.TrapAxes.Principal {
		angle := "direction not determined"
		if p.Angle.Known() {
			angle = "turned by " + combined(p.Angle, "1") + " rad"
		}
		rows = append(rows, kindRow{p.Nearest, "stiffness along the trap's own axis", withUnit(combined(p.Stiffness, stiffnessUnit), stiffnessUnit), angle})
	}
	return rows
}

// drivenRows lists what the moving stage gives of one axis.
func drivenRows(a calib.Axis, d *calib.Driven, add func(string, calib.Quantity, string, string)) {
	for _, e := range a.Estimates {
		switch e.Leg {
		case calib.LegDriven:
			add("stiffness by the driven stage", e.Stiffness, stiffnessUnit, "without viscosity")
		case calib.LegFlow:
			add("stiffness by constant flow", e.Stiffness, stiffnessUnit, "Stokes drag x speed / displacement")
		}
	}
	add("drag by the driven stage", d.Drag, dragUnit, "without viscosity")
	add("its ratio to the computed drag", d.DragRatio, "1", "")
	if a.Sensitivity == nil || a.Sensitivity.Origin != calib.SensitivityDriven {
		add("true over recorded length", d.LengthScale, "1", "")
	}
	if e := d.Escape; e != nil {
		lost := fmt.Sprintf("lost at %s", plainNumber(e.Time, "s"))
		add("largest force before the bead was lost", e.Force, "pN", lost+"; stiffness x displacement")
		add("the same by Stokes drag", e.Drag, "pN", "computed drag x largest speed before")
		add("drag when the bead was lost", e.AtLoss, "pN", "computed drag x speed of the stage")
		add("its largest displacement before", e.Displacement, "nm", "without thermal motion")
	}
	if f := d.Flow; f != nil {
		add("slope of displacement against speed", f.Slope, "us", fmt.Sprintf("drag over stiffness; %d strokes, the first %.2g ms of each left out", len(f.Points), 1e3*float64(f.Skipped)))
		add("displacement at rest", f.Intercept, "nm", "intercept of the line, from the mean of the record; p of the line "+probability(f.Goodness.PValue))
	}
	add("amplitude of the stage", d.Amplitude, "nm", "by "+map[string]string{"column": "its column", "settings": "the settings"}[d.Origin])
	add("lead of the bead before the stage", d.Lead, "1", "rad; expected "+plainNumber(d.LeadExpect, "1"))
}

// freeDragRows lists what a recording of the free bead gives of one axis of a trapped one.
func freeDragRows(a calib.Axis, f *calib.FreeDrag, add func(string, calib.Quantity, string, string)) {
	var names []string
	for _, used := range f.Recordings {
		names = append(names, used.Name)
	}
	add("drag by the free bead", f.Drag, dragUnit, "from "+strings.Join(names, ", "))
	add("its ratio to the computed drag", f.Ratio, "1", "")
	for _, e := range a.Estimates {
		if e.Leg == calib.LegFreeDrag {
			add("stiffness by the free bead's drag", e.Stiffness, stiffnessUnit, "2 pi x drag x corner frequency")
		}
	}
}

// perDetectorUnit is the unit in which a sensitivity is printed.
func perDetectorUnit(unit string) string {
	if unit == "1" {
		return "um"
	}
	return "um/" + unit
}

// lineAmplitude prints the amplitude of a line with three digits.
func lineAmplitude(l calib.NoiseLine, unit string) string {
	if unit == "m" {
		return fmt.Sprintf("%.3g nm", 1e9*float64(l.Amplitude))
	}
	return fmt.Sprintf("%.3g %s", float64(l.Amplitude), unit)
}

// correlationWords tells how a fitted value goes with the corner frequency.
func correlationWords(c calib.Float) string {
	if !c.Known() {
		return ""
	}
	return fmt.Sprintf("; correlation with the corner frequency %.2f", float64(c))
}

func originWords(origin string) string {
	if origin == calib.SensitivityStated {
		return "the setting"
	}
	return "the " + origin
}

// kindSentences are what is said of each axis, in words.
func kindSentences(r *calib.Result) []string {
	var list []string
	for _, a := range r.Axes {
		var parts []string
		if a.Driven != nil && a.Driven.Text != "" {
			parts = append(parts, a.Driven.Text)
		}
		if a.FreeDrag != nil {
			parts = append(parts, a.FreeDrag.Text)
		}
		if a.Free != nil && a.Free.Text != "" {
			parts = append(parts, a.Free.Text)
		}
		if len(parts) > 0 {
			list = append(list, a.Name+": "+strings.Join(parts, "; "))
		}
	}
	return list
}

// kinds prints what the kind of the recording gives beyond stiffness.
func (p *printer) kinds() {
	rows := kindRows(p.result)
	if len(rows) == 0 {
		return
	}
	p.table(func(row func(...string)) {
		row("axis", "further result", "value", "")
		for _, k := range rows {
			row(k.axis, k.name, k.value, k.remark)
		}
	})
	for _, sentence := range kindSentences(p.result) {
		p.paragraph("  ", sentence)
	}
	p.WriteString("\n")
}

// holdsTrap tells that the recording is one of a trapped bead.
func holdsTrap(r *calib.Result) bool {
	return r.Role != calib.RoleFree && r.Role != calib.RoleBackground
}

// kindSections is the part of the page on the kind of the recording, if it has any.
func kindSections(r *calib.Result) []section {
	rows := kindRows(r)
	if len(rows) == 0 {
		return nil
	}
	t := table{Caption: "What this kind of recording gives beyond stiffness; combined standard uncertainty of the last digits in brackets",
		Head: heads("axis", "quantity", "value", "how")}
	t.Head[2].Number = true
	var list []tableRow
	for _, k := range rows {
		list = append(list, tableRow{Name: Plain(k.axis), Cells: []cellText{{Text: k.name}, {Text: typeset(k.value), Number: true}, {Text: typeset(Plain(k.remark))}}})
	}
	t.Groups = []rowGroup{{Rows: list}}
	return []section{{ID: "kind", Title: "Detector, stage and noise", Paragraphs: kindSentences(r), Tables: []table{t}}}
}
