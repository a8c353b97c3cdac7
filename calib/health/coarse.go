package health

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// grid returns the spacing of which all values are whole multiples apart, or 0 when
// there is none as large as 1e-5 of the scale.
func grid(v []float64, scale float64) float64 {
	if len(v) < 16 {
		return 0
	}
	v = slices.Clone(v)
	slices.Sort(v)
	v = slices.Compact(v)
	if len(v) < 2 {
		return 0
	}
	smallest := math.Inf(1)
	tiny := 1e-12 * math.Max(math.Abs(v[0]), math.Abs(v[len(v)-1])) // rounding of the values themselves
	for i := 1; i < len(v); i++ {
		if d := v[i] - v[i-1]; d > 100*tiny {
			smallest = min(smallest, d)
		}
	}
	if smallest < 1e-5*scale || math.IsInf(smallest, 0) {
		return 0
	}
	for i := 1; i < len(v); i++ {
		k := (v[i] - v[i-1]) / smallest
		if math.Abs(k-math.Round(k)) > 0.02 {
			return 0
		}
	}
	return smallest
}

// gridGroups are the groups, by size, of the values that grids looks at.
const gridGroups = 16

// grids are the spacings of equal shares of the values, from the smallest to the largest in size. Numbers that were written with a
// fixed count of digits have a coarser one beyond each power of ten.
type grids [gridGroups]float64

// gridsOf finds the spacings; v is reordered.
func gridsOf(v []float64, scale float64) (g grids) {
	slices.SortFunc(v, func(a, b float64) int { return cmp.Compare(math.Abs(a), math.Abs(b)) })
	for k := range g {
		g[k] = grid(v[k*len(v)/gridGroups:(k+1)*len(v)/gridGroups], scale)
	}
	return g
}

func (g grids) scaled(factor float64) grids {
	for k := range g {
		g[k] *= factor
	}
	return g
}

const (
	gridDoubtful = 0.5  // grid over rms: rounding adds grid^2/12, 2 % of the variance
	gridBad      = 1.5  // 19 %
	combDoubtful = 0.05 // amplitude of a regular pattern in the histogram, over half its mean height
	combBad      = 0.5
)

// coarse looks for steps of quantisation, and for positions that prefer some places
// of a regular pattern.
func (v *view) coarse() Check {
	c := v.check("coarse-steps")
	if v.total.low == v.total.high {
		return c.spared("all samples have the same value")
	}
	sd := math.Sqrt(v.total.variance()) * v.scale
	c.Value, c.Threshold = v.values.grid/sd, gridDoubtful
	switch {
	case c.Value > gridBad:
		c.Level = Bad
	case c.Value > gridDoubtful:
		c.Level = Doubtful
	default:
		return v.locked(c, sd)
	}
	c.Text = fmt.Sprintf("The positions come in steps of %s, %s of their rms: rounding alone adds %s to the variance.",
		length(v.values.grid, v.Unit), digits(c.Value), percent(c.Value*c.Value/12))
	c.Remedy = "Write more digits, use more of the digitiser's range, or track with sub-pixel resolution."
	return c
}

// locked looks for places of a regular pattern that the positions prefer, as the
// centres of pixels are by some tracking methods.
func (v *view) locked(c Check, sd float64) Check {
	c.Text = "The values are fine enough."
	if !v.judgeable() || v.upset() != "" || c.Value > combWidth/20 {
		return c
	}
	period, size := v.values.comb.pattern(v.h)
	if size < combDoubtful {
		return c
	}
	c.Level = Doubtful
	if size > combBad {
		c.Level = Bad
	}
	c.Value, c.Threshold = size, combDoubtful
	c.Text = fmt.Sprintf("The positions prefer places that repeat every %s: a pattern of %s in their distribution.", length(period*sd, v.Unit), percent(2*size))
	c.Remedy = "If this is the size of a pixel, use a tracking method without this bias, such as a fit of the image of the bead, or a larger magnification."
	return c
}
