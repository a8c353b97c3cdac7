package cli

import (
	"fmt"
	"math"
	"strings"

	"beadwell/calib/quantity"
	"beadwell/calib/session"
	"beadwell/calib/track"
)

// axisFacts tells the range of the positions and what is missing.
func axisFacts(axis track.Axis) string {
	low, high := math.Inf(1), math.Inf(-1)
	for _, v := range axis.Values {
		if !math.IsNaN(v) {
			low, high = min(low, v), max(high, v)
		}
	}
	text := "no values"
	if low <= high {
		text = "from " + inFileUnit(low, axis) + " to " + inFileUnit(high, axis)
	}
	if axis.Missing > 0 {
		text += fmt.Sprintf(", %d missing", axis.Missing)
	}
	return text
}

// inFileUnit prints a position in the unit that the file has.
func inFileUnit(v float64, axis track.Axis) string {
	switch axis.Unit {
	case "m", "mm", "um", "nm", "pm", "V", "mV", "uV":
		return quantity.Format(v, 0, axis.Unit)
	case "":
		return fmt.Sprintf("%.6g (in a unit that nobody stated)", v)
	case "1":
		return fmt.Sprintf("%.6g", v)
	}
	return fmt.Sprintf("%.6g %s", v, axis.Unit)
}

// settingLine is one setting with its origin.
func settingLine(s session.Setting) string {
	name := s.Key
	if s.Axis != "" {
		name += "." + s.Axis
	}
	origin := s.Origin.String()
	switch {
	case s.Assumed:
		origin = "assumed"
	case s.Where != "":
		origin += " " + s.Where
	}
	return fmt.Sprintf("%s = %s (%s)", name, strings.TrimSpace(s.Text), origin)
}
