package figure

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"beadwell/calib"
	"beadwell/calib/quantity"
)

// maxPoints is the largest number of points of a curve or a set of marks. It is
// more than a column has dots at 150 per inch, and keeps a figure below 150 kB.
const maxPoints = 500

// thinned returns at most most indices of a list of n, evenly spread and with
// both ends.
func thinned(n, most int) []int {
	m := min(n, most)
	indices := make([]int, m)
	for i := range indices {
		indices[i] = i
		if m < n {
			indices[i] = int(math.Round(float64(i) * float64(n-1) / float64(m-1)))
		}
	}
	return indices
}

// measured prints a quantity with its combined standard uncertainty, or the
// statistical one, typeset for a figure: "52.3(11) pN/µm", or with its 68 %
// interval where that is lopsided: "48.1 [47.5, 49.6] pN/µm".
func measured(q calib.Quantity, unit string) string {
	if !q.Known() {
		return "unknown"
	}
	u := q.Combined
	if u == nil {
		u = q.Statistical
	}
	value, standard := float64(q.Value), math.NaN()
	if u != nil {
		standard = float64(u.Standard)
		if low, high := float64(u.Interval68[0]), float64(u.Interval68[1]); lopsided(value, standard, low, high) {
			number, _, _ := strings.Cut(quantity.Format(value, standard, unit), "(")
			return typeset(number + " " + quantity.FormatInterval(low, high, unit))
		}
	}
	return typeset(quantity.Format(value, standard, unit))
}

// lopsided tells whether the arms of an interval differ by more than a tenth of
// a standard uncertainty, which two digits of it would not show.
func lopsided(value, standard, low, high float64) bool {
	return finite(standard, low, high) && math.Abs(low+high-2*value) > 0.1*standard
}

// typeset replaces the plain spellings of a printed quantity: "um" by "µm",
// "nm2" by "nm²", a hyphen before a digit by a minus sign.
func typeset(s string) string {
	fields := strings.Split(s, " ")
	for i, field := range fields {
		switch field {
		case "um", "us":
			fields[i] = "µ" + field[1:]
		case "pN/um":
			fields[i] = "pN/µm"
		case "nm2":
			fields[i] = "nm²"
		}
	}
	return minus(strings.Join(fields, " "))
}

// plain prints a number of three digits with its unit, for a description.
func plain(v float64, unit string) string {
	if math.Abs(v) >= 100 && math.Abs(v) < 1e6 {
		return minus(strconv.FormatFloat(v, 'f', 0, 64)) + " " + unit
	}
	return minus(strconv.FormatFloat(v, 'g', 3, 64)) + " " + unit
}

func count(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}

// axisName is the name of an axis, short enough for a title.
func axisName(a *calib.Axis) string {
	name := []rune(clean(a.Name))
	return string(name[:min(len(name), 24)])
}
