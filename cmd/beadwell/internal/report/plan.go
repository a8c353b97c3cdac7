package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"strconv"

	"beadwell/calib"
	"beadwell/calib/quantity"
)

// PlanJSON writes a plan as indented JSON.
func PlanJSON(w io.Writer, p *calib.Plan) error { return WriteJSON(w, p) }

// PlanText writes a plan for a person.
func PlanText(w io.Writer, plan *calib.Plan) error {
	p := &planPrinter{plan: plan}
	p.head()
	p.answers()
	p.times()
	p.rates()
	p.footnotes()
	_, err := io.WriteString(w, p.String())
	return err
}

// planPrinter gathers the text of one plan.
type planPrinter struct {
	printer
	plan *calib.Plan
}

func (p *planPrinter) head() {
	plan := p.plan
	p.paragraph("", fmt.Sprintf("plan for axis %s, %s to the surface: stiffness %s, corner frequency %s, thermal motion %s (rms)", plan.Axis, plan.Orientation,
		short(plan.Stiffness, stiffnessUnit), short(plan.Corner, "Hz"), short(plan.RMS, "nm")))
	height := "far from any surface"
	if plan.Bead.Height.Known() {
		height = withUnit(combined(plan.Bead.Height, "um"), "um") + " above the surface"
	}
	p.paragraph("", fmt.Sprintf("bead of %s, %s, at %s: drag %s", withUnit(combined(plan.Bead.Diameter, "um"), "um"), height,
		withUnit(combined(plan.Medium.Temperature, "C"), "C"), withUnit(combined(plan.Drag, dragUnit), dragUnit)))
	noise := "localisation noise to be fitted"
	if plan.Noise.Known() {
		noise = "localisation noise " + withUnit(combined(plan.Noise, "nm"), "nm")
	}
	p.paragraph("", fmt.Sprintf("sampling rate %s, exposure %s, %s", plainNumber(plan.Rate, "Hz"), plainNumber(plan.Exposure, "ms"), noise))
	p.WriteString("\n")
}

// short prints a number that a plan expects, to four digits.
func short(q calib.Quantity, unit string) string {
	if !q.Known() {
		return dash
	}
	v, err := quantity.Convert(float64(q.Value), unit)
	if err != nil {
		return dash
	}
	return digits(v, 4) + " " + unit
}

// digits prints a number with n significant digits and without an exponent.
func digits(v float64, n int) string {
	rounded, err := strconv.ParseFloat(strconv.FormatFloat(v, 'g', n, 64), 64)
	if err != nil {
		rounded = v
	}
	return strconv.FormatFloat(rounded, 'f', -1, 64)
}

// answers prints how long, how fast, and what limits.
func (p *planPrinter) answers() {
	plan := p.plan
	if want := plan.Wanted; want != nil {
		line := fmt.Sprintf("for %s: ", relative(want.Uncertainty))
		if want.Both.Known() {
			line += "record for " + duration(want.Both)
		} else {
			line += "not reachable, " + want.Both.Reason
		}
		p.paragraph("", line+fmt.Sprintf(" (by drag alone %s, by amplitude alone %s)", durationOr(want.Drag), durationOr(want.Amplitude)))
	}
	switch {
	case plan.Enough.Known():
		p.paragraph("", fmt.Sprintf("enough: longer than %s gains less than 5 %%; the inputs leave %s, mostly %s", duration(plan.Enough), relative(plan.Floor.Both), plan.Floor.Dominant))
	default:
		p.paragraph("", "enough: "+plan.Enough.Reason)
	}
	if best := plan.Rates.Best; best.Known() {
		p.paragraph("", fmt.Sprintf("rate: %s is enough; a faster one gains less than 5 %% in %s", short(best, "Hz"), duration(calib.Exact(float64(plan.Rates.Duration), "s"))))
	}
	p.WriteString("\n")
}

func duration(q calib.Quantity) string {
	return digits(float64(q.Value), 3) + " s"
}

func durationOr(q calib.Quantity) string {
	if q.Known() {
		return duration(q)
	}
	return "never: " + q.Reason
}

// relative prints a relative uncertainty.
func relative(f calib.Float) string {
	if !f.Known() {
		return dash
	}
	return twoDigits(100*float64(f)) + " %"
}

// pair prints the combined uncertainty, and the statistical one in brackets.
func pair(u calib.PlanUncertainty) string {
	if !u.Combined.Known() {
		return dash
	}
	return relative(u.Combined) + " (" + relative(u.Statistical) + ")"
}

func (p *planPrinter) times() {
	p.paragraph("", "relative standard uncertainty of the stiffness, and in brackets with the inputs exact:")
	p.table(func(row func(...string)) {
		row("duration, s", "samples", "by drag", "by amplitude", "both", "drift, nm")
		for _, t := range p.plan.Times {
			drift := dash
			if t.Drift.Known() {
				drift = twoDigits(1e9 * float64(t.Drift))
			}
			row(plain6(t.Duration), strconv.Itoa(t.Samples), pair(t.Routes.Drag), pair(t.Routes.Amplitude), pair(t.Routes.Both), drift)
		}
		f := p.plan.Floor
		row("without end", "", relative(f.Drag), relative(f.Amplitude), relative(f.Both), "")
	})
	p.WriteString("\n")
}

func plain6(f calib.Float) string { return digits(float64(f), 6) }

func (p *planPrinter) rates() {
	p.paragraph("", fmt.Sprintf("the same at other sampling rates, in %s:", duration(calib.Exact(float64(p.plan.Rates.Duration), "s"))))
	p.table(func(row func(...string)) {
		row("rate, Hz", "samples", "by drag", "by amplitude", "both", "")
		for _, r := range p.plan.Rates.Rows {
			mark := ""
			if r.Planned {
				mark = "as planned"
			}
			row(plain6(r.Rate), strconv.Itoa(r.Samples), pair(r.Routes.Drag), pair(r.Routes.Amplitude), pair(r.Routes.Both), mark)
		}
	})
}

// footnotes prints the findings.
func (p *planPrinter) footnotes() {
	for i, f := range p.plan.Findings {
		if i == 0 {
			p.WriteString("\n")
		}
		p.paragraph("", findingLine(f))
	}
}

// findingLine is a finding in one sentence with its remedy.
func findingLine(f calib.Finding) string {
	line := f.Severity + ", " + f.Code + ": " + f.Text
	if f.Remedy != "" {
		line += " To do: " + f.Remedy + "."
	}
	return line
}

// planColumns are the columns of PlanCSV, each with its meaning.
var planColumns = [][2]string{
	{"sweep", "duration: one of several durations at the planned rate; rate: one of several rates at the duration of `rates`"},
	{"duration_s", "duration of the recording"},
	{"rate_Hz", "sampling rate"},
	{"samples", "number of samples"},
	{"drag_statistical", "relative standard uncertainty of the stiffness through drag, inputs taken as exact"},
	{"drag_combined", "the same with the stated uncertainties of the inputs"},
	{"amplitude_statistical", "that through amplitude, inputs taken as exact"},
	{"amplitude_combined", "the same with the stated uncertainties of the inputs"},
	{"both_statistical", "that of both routes combined, inputs taken as exact"},
	{"both_combined", "the same with the stated uncertainties of the inputs"},
	{"drift_m", "root mean square of a drift, other than a straight line, that moves the amplitude route by its statistical uncertainty; empty for rates"},
}

// PlanCSV writes a row for each duration and each sampling rate; uncertainties are
// relative standard ones of the stiffness, empty where the recording does not
// determine it.
func PlanCSV(w io.Writer, plan *calib.Plan) error {
	out := csv.NewWriter(w)
	names := make([]string, len(planColumns))
	for i, c := range planColumns {
		names[i] = c[0]
	}
	out.Write(names) // errors stay until Flush
	write := func(sweep string, duration, rate calib.Float, samples int, r calib.PlanRoutes, drift calib.Float) {
		cells := []string{sweep, exactCell(duration), exactCell(rate), strconv.Itoa(samples)}
		for _, u := range []calib.PlanUncertainty{r.Drag, r.Amplitude, r.Both} {
			cells = append(cells, exactCell(u.Statistical), exactCell(u.Combined))
		}
		out.Write(append(cells, exactCell(drift)))
	}
	for _, t := range plan.Times {
		write("duration", t.Duration, plan.Rate, t.Samples, t.Routes, t.Drift)
	}
	for _, r := range plan.Rates.Rows {
		write("rate", plan.Rates.Duration, r.Rate, r.Samples, r.Routes, calib.Withheld("m", "").Value)
	}
	out.Flush()
	return out.Error()
}
