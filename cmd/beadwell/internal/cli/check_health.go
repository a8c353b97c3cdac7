package cli

import (
	"fmt"

	"beadwell/calib/health"
	"beadwell/calib/session"
	"beadwell/calib/track"
	"beadwell/cmd/beadwell/internal/report"
)

// examine makes the checks of a recording that need no fit.
func examine(recording *track.Recording, settings *session.Settings) []health.Check {
	in := health.Input{Rate: recording.Rate, Missing: recording.Missing, JitterRMS: recording.JitterRMS}
	for _, axis := range recording.Axes {
		exposure, _ := settings.Lookup("recording.exposure", axis.Name)
		in.Exposure = max(in.Exposure, exposure.Value.SI)
		in.Axes = append(in.Axes, health.Axis{Name: axis.Name, Unit: siUnit(axis.Unit), X: axis.Values})
	}
	return health.Run(in)
}

// siUnit is the unit in which the reader gives positions of a file's unit; empty is m.
func siUnit(unit string) string {
	switch unit {
	case "m", "mm", "um", "nm", "pm", "":
		return ""
	case "V", "mV", "uV":
		return "V"
	}
	return unit
}

// printHealth prints the checks that found something, and a count of the others.
// It tells whether one of them is bad.
func (a *app) printHealth(checks []health.Check) (bad bool) {
	fine, unjudged := 0, 0
	for _, c := range checks {
		switch {
		case !c.Judged:
			unjudged++
		case c.Level == health.OK:
			fine++
		default:
			bad = bad || c.Level == health.Bad
			where := ""
			if c.Axis != "" {
				where = " on " + c.Axis
			}
			fmt.Fprintf(a.Out, "  %s, %s%s: %s\n", c.Level, c.Code, report.Plain(where), report.Plain(c.Text))
			fmt.Fprintf(a.Out, "    remedy: %s\n", report.Plain(c.Remedy))
		}
	}
	fmt.Fprintf(a.Out, "  checks: %d ok, %d need the fit of calibrate or more data\n", fine, unjudged)
	return bad
}
