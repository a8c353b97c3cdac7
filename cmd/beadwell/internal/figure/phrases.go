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
// statistical one, typeset for a figure: "52.3(11) pN/µm".
func measured(q calib.Quantity, unit string) string {
	if !q.Known() {
		return "unknown"
	}
	u := q.Combined
	if u == nil {
		u = q.Statistical
	}
	standard := math.NaN()
	if u != nil {
		standard = float64(u.Standard)
	}
	return typeset(quantity.Format(float64(q.Value), standard, unit))
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
		return strconv.FormatFloat(v, 'f', 0, 64) + " " + unit
	}
	return strconv.FormatFloat(v, 'g', 3, 64) + " " + unit
}

func count(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}

func axisName(a *calib.Axis) string { return clean(a.Name) }
