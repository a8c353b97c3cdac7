package track

import (
	"math"
	"slices"
)

// setRole changes what ReadAs says of a column.
func setRole(columns []ColumnUse, k int, role string) {
	if k < len(columns) {
		columns[k].Role = role
	}
}

// scatter puts values on the grid and fills the rest with NaN.
func (g *grid) scatter(values []float64) []float64 {
	if g.place == nil {
		return values
	}
	out := make([]float64, g.samples)
	for i := range out {
		out[i] = math.NaN()
	}
	for i, v := range values {
		out[g.place[i]] = v
	}
	return out
}

// extent counts the missing values and finds the smallest and the largest of the others.
func extent(values []float64) (missing int, low, high float64) {
	found := blockSums(len(values), func(lo, hi int) (s sums) {
		low, high := math.Inf(1), math.Inf(-1)
		missing := 0
		for _, v := range values[lo:hi] {
			switch {
			case v != v:
				missing++
			case v < low:
				low = v
				high = max(high, v)
			case v > high:
				high = v
			}
		}
		return sums{a: float64(missing), max: high, min: low}
	})
	return int(found.a), found.min, found.max
}

// survey counts the missing values and says why an axis carries no motion; empty
// if it does.
func (a *Axis) survey() string {
	missing, low, high := extent(a.Values)
	a.Missing = missing
	switch {
	case missing == len(a.Values):
		return "holds no number"
	case low == high:
		return "has one value in every row"
	}
	return ""
}

// countMissing counts the grid points without a value on any axis.
func (r *Recording) countMissing() {
	for _, a := range r.Axes {
		if a.Missing == 0 {
			return
		}
	}
	for i := range r.Samples {
		if !slices.ContainsFunc(r.Axes, func(a Axis) bool { return a.Values[i] == a.Values[i] }) {
			r.Missing++
		}
	}
	if r.Missing > 0 {
		r.Notes = note(r.Notes, "samples-missing", "%d of %d samples are missing (%.2g %%)", r.Missing, r.Samples, 100*float64(r.Missing)/float64(r.Samples))
	}
}
