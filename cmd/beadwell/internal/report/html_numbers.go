package report

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"beadwell/calib"
	"beadwell/calib/quantity"
)

// readable gives SI units the one that a reader expects.
var readable = map[string]string{"m": "nm", "N/m": stiffnessUnit, "N s/m": dragUnit, "Pa s": "mPa s", "m2": "nm2", "m2/s": "um2/s"}

// inOwnUnit prints a number with three digits in the reader's unit, or as it
// stands when the unit is not known to the program.
func inOwnUnit(v calib.Float, unit string) string {
	if u, ok := readable[unit]; ok {
		return rounded(v, 3, u)
	}
	if _, err := quantity.Convert(float64(v), unit); err != nil {
		return strings.TrimSpace(fmt.Sprintf("%.3g %s", float64(v), unit))
	}
	return rounded(v, 3, unit)
}

// rounded prints a number that has no uncertainty with the given number of digits.
func rounded(v calib.Float, digits int, unit string) string {
	if !v.Known() {
		return dash
	}
	// The text of a number with few digits reads back without an error.
	short, _ := strconv.ParseFloat(strconv.FormatFloat(float64(v), 'e', digits-1, 64), 64)
	return plainNumber(calib.Float(short), unit)
}

// percent prints a relative number with two digits, and a bound where it is too
// small for any of them to matter.
func percent(f calib.Float) string {
	v := 100 * math.Abs(float64(f))
	switch {
	case !f.Known():
		return dash
	case v == 0:
		return typeset("0 %")
	case v < 0.01:
		return typeset("below 0.01 %")
	case v >= 10:
		return typeset(fmt.Sprintf("%.0f %%", 100*float64(f)))
	}
	return typeset(fmt.Sprintf("%.2g %%", 100*float64(f)))
}

// moment prints a time [s] in a unit, as 0 where it is below a nanosecond: what
// is left there is the rounding of the stamps.
func moment(t calib.Float, unit string) string {
	const nanosecond = 1e-9
	if math.Abs(float64(t)) < nanosecond {
		t = 0
	}
	return typeset(plainNumber(t, unit))
}
