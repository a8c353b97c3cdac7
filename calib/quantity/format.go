package quantity

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// Format prints a value with its standard uncertainty u, both in SI units, in
// the given unit: the concise notation of JCGM 100:2008, 7.2.2, with two
// digits of uncertainty, such as "52.3(11) pN/um".
//
// When u is 0 the value is exact, or none was stated: it stands alone with up
// to six significant digits. When u is NaN, infinite or negative it is not
// known: four digits and a question mark, "52.34(?) pN/um". A value that is
// NaN is printed as "unknown", an infinite one as "inf". The last digit is
// rounded half to even in decimal.
//
// A temperature in C has its offset taken from the value, not from u. A unit
// that Parse does not know is the caller's mistake: Format panics.
func Format(value, u float64, unit string) string {
	s := mustScale(unit)
	x, ux := s.fromSI(value), s.differenceFromSI(u)
	return withUnit(formatNumber(x, ux), unit)
}

// FormatInterval prints an interval, in SI units, in the given unit, with
// two significant digits of its width: "[51.2, 53.5] pN/um". An end that is
// NaN is printed as "unknown", one that is infinite as "inf", and the other then with three
// significant digits. It panics on an unknown unit, as Format does.
func FormatInterval(low, high float64, unit string) string {
	s := mustScale(unit)
	a, b := s.fromSI(low), s.fromSI(high)
	show := func(x float64) string { return formatNumber(x, 0) }
	wide, largest, digits := math.Abs(b-a), math.Max(math.Abs(a), math.Abs(b)), 2
	if math.IsNaN(wide) || math.IsInf(wide, 0) { // the end that is there, if any
		wide, digits = math.Abs(a), 3
		if math.IsNaN(wide) || math.IsInf(wide, 0) {
			wide = math.Abs(b)
		}
		largest = wide
	}
	if wide > 0 && !math.IsInf(wide, 0) {
		_, exponent := roundDigits(wide, digits)
		decimals := digits - 1 - exponent
		if !needsExponent(largest, decimals) {
			show = func(x float64) string {
				if math.IsNaN(x) || math.IsInf(x, 0) {
					return formatNumber(x, 0)
				}
				return fixed(x, decimals)
			}
		}
	}
	return withUnit("["+show(a)+", "+show(b)+"]", unit)
}

// Convert returns an SI value in the given unit; for C, with the offset. The
// error says that the unit is not known.
func Convert(value float64, unit string) (float64, error) {
	s, unknown := parseUnit(unit)
	if unknown != "" {
		return math.NaN(), fmt.Errorf("%q is not a known unit", unknown)
	}
	return s.fromSI(value), nil
}

func withUnit(number, unit string) string {
	if unit == "" || unit == "1" {
		return number
	}
	return number + " " + unit
}

func mustScale(unit string) scale {
	if unit == "" {
		unit = "1"
	}
	s, unknown := parseUnit(unit)
	if unknown != "" {
		panic(fmt.Sprintf("quantity: unknown unit %q", unit))
	}
	return s
}

// fromSI converts a value in SI units to the unit of the scale.
func (s scale) fromSI(value float64) float64 { return s.differenceFromSI(value - s.offset) }

// differenceFromSI converts a difference in SI units, such as an uncertainty.
func (s scale) differenceFromSI(value float64) float64 {
	value /= s.factor
	if s.decade < 0 {
		return value * math.Pow10(-s.decade)
	}
	return value / math.Pow10(s.decade)
}

// formatNumber prints x with its uncertainty u in the same unit.
func formatNumber(x, u float64) string {
	switch {
	case math.IsNaN(x):
		return "unknown"
	case math.IsInf(x, 1):
		return "inf"
	case math.IsInf(x, -1):
		return "-inf"
	case math.IsNaN(u) || math.IsInf(u, 0) || u < 0:
		number, power := significant(x, 4)
		return number + "(?)" + power
	case u == 0:
		number, power := significant(x, 6)
		return trimZeros(number) + power
	}
	return concise(x, u)
}

// concise prints x(u) with two digits of u.
func concise(x, u float64) string {
	digits, exponent := roundDigits(u, 2)
	decimals := 1 - exponent // of the last digit shown
	if !needsExponent(math.Max(math.Abs(x), u), decimals) {
		if decimals < 0 {
			digits += strings.Repeat("0", -decimals)
			decimals = 0
			return fixed(x, 1-exponent) + "(" + digits + ")"
		}
		return fixed(x, decimals) + "(" + digits + ")"
	}
	_, power := roundDigits(math.Max(math.Abs(x), u), 15)
	return fixedShift(x, power, decimals+power) + "(" + digits + ")e" + strconv.Itoa(power)
}

// Numbers are printed without a power of ten when they have at most this many
// digits before and behind the point: about what an eye takes in.
const (
	maxBefore = 7
	maxBehind = 7
)

func needsExponent(x float64, decimals int) bool {
	return x >= math.Pow10(maxBefore) || decimals > maxBehind
}

// significant prints x with n significant digits, and its power of ten apart when needed.
func significant(x float64, n int) (number, power string) {
	if x == 0 {
		return "0", ""
	}
	_, exponent := roundDigits(math.Abs(x), n)
	if exponent >= -5 && exponent < maxBefore {
		return fixed(x, max(n-1-exponent, 0)), ""
	}
	return fixedShift(x, exponent, n-1), "e" + strconv.Itoa(exponent)
}

func trimZeros(number string) string {
	if !strings.Contains(number, ".") {
		return number
	}
	return strings.TrimRight(strings.TrimRight(number, "0"), ".")
}

// noiseDigits is the number of significant digits that survive a change of
// unit: rounding to 15 first makes 0.012500000000000001 the tie that it is.
const noiseDigits = 15

// shortest returns the digits of |x| to noiseDigits and the exponent of the first: x = d.ddd * 10^exponent.
func shortest(x float64) (digits string, exponent int) {
	text := strconv.FormatFloat(math.Abs(x), 'e', noiseDigits-1, 64)
	mantissa, power, _ := strings.Cut(text, "e")
	exponent, _ = strconv.Atoi(power) // FormatFloat always writes one
	return strings.Replace(mantissa, ".", "", 1), exponent
}

// roundDigits rounds x > 0 half to even to n significant decimal digits, and
// returns them with the exponent of the first.
func roundDigits(x float64, n int) (string, int) {
	digits, exponent := shortest(x)
	if n >= len(digits) {
		return digits, exponent
	}
	rounded := roundAt(digits, n)
	if len(rounded) > n {
		return rounded[:n], exponent + 1
	}
	return rounded, exponent
}

// roundAt keeps the first n >= 0 digits, rounded half to even; a carry out of
// the front makes the result one digit longer.
func roundAt(digits string, n int) string {
	kept, dropped := []byte(digits[:n]), digits[n:]
	up := dropped > "5"
	if strings.TrimRight(dropped, "0") == "5" {
		up = n > 0 && (kept[n-1]-'0')%2 == 1
	}
	if !up {
		return string(kept)
	}
	for i := n - 1; i >= 0; i-- {
		if kept[i] != '9' {
			kept[i]++
			return string(kept)
		}
		kept[i] = '0'
	}
	return "1" + string(kept)
}

// fixed prints x with the given number of decimals, which may be negative:
// fixed(5234, -2) is 5200.
func fixed(x float64, decimals int) string { return fixedShift(x, 0, decimals) }

// fixedShift prints x/10^power with the given number of decimals.
func fixedShift(x float64, power, decimals int) string {
	digits, exponent := shortest(x)
	exponent -= power
	keep := exponent + 1 + decimals // digits in front of the cut
	var whole string                // x*10^(decimals-power), rounded to an integer
	switch {
	case keep < 0:
		whole = ""
	case keep >= len(digits):
		whole = digits + strings.Repeat("0", keep-len(digits))
	default:
		whole = roundAt(digits, keep)
	}
	whole = strings.TrimLeft(whole, "0")
	sign := ""
	if x < 0 && whole != "" {
		sign = "-"
	}
	return sign + placePoint(whole, decimals)
}

// placePoint sets the decimal point in front of the last n digits, or adds
// -n zeros.
func placePoint(whole string, n int) string {
	if n <= 0 {
		if whole == "" {
			return "0"
		}
		return whole + strings.Repeat("0", -n)
	}
	if missing := n + 1 - len(whole); missing > 0 {
		whole = strings.Repeat("0", missing) + whole
	}
	return whole[:len(whole)-n] + "." + whole[len(whole)-n:]
}
