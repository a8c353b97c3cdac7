package cli

import (
	"fmt"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/report"
)

// printHealth prints the checks that found something, and a count of the others.
func (a *app) printHealth(checks []calib.Check) {
	fine, unjudged := 0, 0
	for _, c := range checks {
		switch {
		case !c.Judged:
			unjudged++
		case c.Level != calib.Doubtful && c.Level != calib.Bad:
			fine++
		default:
			where := ""
			if c.Axis != "" {
				where = " on " + c.Axis
			}
			fmt.Fprintf(a.Out, "  %s, %s%s: %s\n", c.Level, c.Code, report.Plain(where), report.Plain(c.Text))
			fmt.Fprintf(a.Out, "    remedy: %s\n", report.Plain(c.Remedy))
		}
	}
	fmt.Fprintf(a.Out, "  checks: %d ok, %d need the fit of calibrate or more data\n", fine, unjudged)
}
