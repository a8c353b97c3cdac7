package report

import (
	"math"
	"regexp"
	"strconv"
	"strings"

	"beadwell/calib"
	"beadwell/calib/quantity"
)

// asymmetryShown is the difference between the two arms of a 68 % interval, in
// standard uncertainties, from which on the interval itself is shown: below it
// the two digits of the concise notation hide it.
const asymmetryShown = 0.1

// dash stands for a number that there is none of.
const dash = "-"

// number prints a value with an uncertainty in the given unit, without the
// unit: "52.3(11)", or "52.3 [51.4, 53.9]" when the interval is lopsided. Without
// an uncertainty the value is exact.
func number(value calib.Float, u *calib.Uncertainty, unit string) string {
	if !value.Known() {
		return dash
	}
	if u == nil {
		return bare(quantity.Format(float64(value), 0, unit), unit)
	}
	text := bare(quantity.Format(float64(value), float64(u.Standard), unit), unit)
	if !lopsided(value, u) {
		return text
	}
	low, high := float64(u.Interval68[0]), float64(u.Interval68[1])
	return brackets.ReplaceAllString(text, "") + " " + bare(quantity.FormatInterval(low, high, unit), unit)
}

var brackets = regexp.MustCompile(`\([^)]*\)`)

// lopsided tells whether the 68 % interval is not symmetric about the value.
func lopsided(value calib.Float, u *calib.Uncertainty) bool {
	low, high := u.Interval68[0], u.Interval68[1]
	if !u.Standard.Known() || (!low.Known() && !high.Known()) {
		return false
	}
	if !low.Known() || !high.Known() {
		return true
	}
	return math.Abs(float64(high+low-2*value)) > asymmetryShown*float64(u.Standard)
}

// combined prints a quantity with its combined uncertainty, or the statistical
// one when it has no other; without the unit.
func combined(q calib.Quantity, unit string) string {
	u := q.Combined
	if u == nil {
		u = q.Statistical
	}
	return number(q.Value, u, unit)
}

// Of prints a quantity with its combined standard uncertainty and its unit; "withheld" where it is not known.
func Of(q calib.Quantity, unit string) string {
	if !q.Known() {
		return "withheld"
	}
	return withUnit(combined(q, unit), unit)
}

// withUnit adds the unit to a number that is there.
func withUnit(text, unit string) string {
	if text == dash || unit == "1" || unit == "" {
		return text
	}
	return text + " " + unit
}

// plainNumber prints a number that has no uncertainty, with few digits.
func plainNumber(value calib.Float, unit string) string {
	if !value.Known() {
		return dash
	}
	return quantity.Format(float64(value), 0, unit)
}

// interval prints an interval without the unit.
func interval(ends [2]calib.Float, unit string) string {
	if !ends[0].Known() && !ends[1].Known() {
		return dash
	}
	return bare(quantity.FormatInterval(float64(ends[0]), float64(ends[1]), unit), unit)
}

func bare(text, unit string) string { return strings.TrimSuffix(text, " "+unit) }

// probability prints a p-value: two digits, and a bound below a thousandth,
// where its digits mean nothing.
func probability(p calib.Float) string {
	switch {
	case !p.Known():
		return dash
	case p < 0.001:
		return "<0.001"
	}
	return twoDigits(float64(p))
}

// twoDigits prints a positive number with two significant digits.
func twoDigits(v float64) string {
	switch {
	case v >= 10:
		return strconv.FormatFloat(v, 'f', 0, 64)
	case v >= 0.1:
		return strconv.FormatFloat(v, 'f', max(1-int(math.Floor(math.Log10(v))), 0), 64)
	}
	return strconv.FormatFloat(v, 'g', 2, 64)
}
