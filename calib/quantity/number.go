package quantity

import (
	"math"
	"regexp"
	"strconv"
	"strings"
)

// decimal is a number as it stands in the text: its digits, and its power of
// ten apart. It becomes a float64 once, with the decade of its unit, so that
// "65.0 nm" is the float64 nearest to 65.0e-9.
type decimal struct {
	digits string
	decade int
}

// maxDecade bounds a stated exponent, so that sums with the decade of a unit stay exact.
const maxDecade = 1000

// float returns the number times 10^decade. It reports false when the result
// overflows, or when digits other than 0 vanish to 0.
func (d decimal) float(decade int) (float64, bool) {
	value, err := strconv.ParseFloat(d.digits+"e"+strconv.Itoa(d.decade+decade), 64)
	if err != nil || math.IsInf(value, 0) {
		return 0, false
	}
	if value == 0 && strings.ContainsAny(d.digits, "123456789") {
		return 0, false
	}
	return value + 0, true
}

var (
	numberPattern   = regexp.MustCompile(`^([+-]?(?:\d+\.?\d*|\.\d+))(?:\((\d+\.?\d*|\.\d+)\))?(?:[eE]([+-]?\d+))?`)
	positivePattern = regexp.MustCompile(`^((?:\d+\.?\d*|\.\d+))(?:[eE]([+-]?\d+))?`)
)

// decade reads the exponent of a number; "" is 0. One beyond maxDecade is cut
// to it: the number overflows or vanishes all the same.
func decade(text string) int {
	value, err := strconv.Atoi(text)
	if err != nil && text != "" { // more digits than an int holds
		value = maxDecade
		if strings.HasPrefix(text, "-") {
			value = -maxDecade
		}
	}
	return max(-maxDecade, min(value, maxDecade))
}

// readNumber reads a number, with its bracketed uncertainty if it has one, from
// the front of the text, and returns what follows. An uncertainty that is not
// there has no digits.
func readNumber(text string) (number, uncertainty decimal, rest string, ok bool) {
	match := numberPattern.FindStringSubmatch(text)
	if match == nil {
		return decimal{}, decimal{}, text, false
	}
	power := decade(match[3])
	number = decimal{match[1], power}
	if match[2] != "" {
		uncertainty = decimal{match[2], power}
		if !strings.Contains(match[2], ".") {
			uncertainty.decade -= decimalsOf(match[1])
		}
	}
	return number, uncertainty, text[len(match[0]):], true
}

// readPositive reads a number without sign and brackets, as it stands behind +-.
func readPositive(text string) (number decimal, rest string, ok bool) {
	match := positivePattern.FindStringSubmatch(text)
	if match == nil {
		return decimal{}, text, false
	}
	return decimal{match[1], decade(match[2])}, text[len(match[0]):], true
}

// decimalsOf counts the digits behind the point.
func decimalsOf(digits string) int {
	_, fraction, _ := strings.Cut(digits, ".")
	return len(fraction)
}
