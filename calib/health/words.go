package health

import (
	"fmt"
	"math"
	"strconv"
)

// length prints a distance [m, or unit] with three digits.
func length(v float64, unit string) string {
	if unit != "" && unit != "m" {
		return digits(v) + " " + unit
	}
	switch a := math.Abs(v); {
	case a >= 0.9995e-6:
		return digits(v*1e6) + " um"
	case a >= 0.9995e-9 || a == 0:
		return digits(v*1e9) + " nm"
	}
	return digits(v*1e12) + " pm"
}

// seconds prints a time or a duration [s] with three digits.
func seconds(v float64) string {
	switch a := math.Abs(v); {
	case a >= 0.9995 || a == 0:
		return digits(v) + " s"
	case a >= 0.9995e-3:
		return digits(v*1e3) + " ms"
	}
	return digits(v*1e6) + " us"
}

// moment prints a time in the record [s] with decimals that resolve a thousandth of it.
func moment(t, duration float64) string {
	decimals := int(math.Ceil(3 - math.Log10(math.Max(duration, 1e-9))))
	return strconv.FormatFloat(t, 'f', min(max(decimals, 0), 9), 64) + " s"
}

// hertz prints a frequency [Hz] with three digits.
func hertz(v float64) string {
	if math.Abs(v) >= 999.5 {
		return digits(v/1e3) + " kHz"
	}
	return digits(v) + " Hz"
}

// percent prints a share with two digits.
func percent(share float64) string {
	if share != 0 && math.Abs(share) < 1e-5 {
		return "under 0.001 %"
	}
	return fmt.Sprintf("%s %%", strconv.FormatFloat(round(share*100, 2), 'f', -1, 64))
}

// digits prints three significant digits without an exponent.
func digits(v float64) string { return strconv.FormatFloat(round(v, 3), 'f', -1, 64) }

// round keeps a number of significant digits.
func round(v float64, significant int) float64 {
	if v == 0 || math.IsNaN(v) || math.IsInf(v, 0) {
		return v
	}
	r, err := strconv.ParseFloat(strconv.FormatFloat(v, 'e', significant-1, 64), 64)
	if err != nil {
		return v
	}
	return r
}

// times prints how often something happened.
func times(n int) string {
	if n == 1 {
		return "once"
	}
	return strconv.Itoa(n) + " times"
}
