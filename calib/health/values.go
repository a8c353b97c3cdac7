package health

import (
	"fmt"
	"math"
)

// values is what the second pass finds about the exact values of the samples.
type values struct {
	grid      float64 // spacing of the values that occur, when it is coarse enough to be seen [unit of X]; 0 when there is none
	grids     grids   // the same of the values by size
	low, high rail
	comb      histogram
}

// rail counts samples at an extreme value.
type rail struct {
	value    float64 // [unit of X]
	at       int     // samples exactly there
	visits   int     // separate stretches of them
	beside   int     // samples within one width of it, not there
	from, to int     // first and last of them
}

// survey reads the record a second time and counts the samples at its two extremes
// and just inside them.
func survey(x []float64, s summary) values {
	some := sampled(x, 4096)
	v := values{grid: grid(some, s.scale), grids: gridsOf(some, s.scale)}
	if s.total.n == 0 {
		return v
	}
	sd := math.Sqrt(s.total.variance()) * s.scale
	width := railWidth(v.grid, sd)
	low, high := s.low, s.high
	v.low, v.high = rail{value: low}, rail{value: high}
	v.comb = newHistogram(s.total.mean()*s.scale+s.centre, sd)
	nearLow, nearHigh := low+width, high-width
	lastLow, lastHigh := -2, -2
	for i, y := range x {
		v.comb.add(y)
		if y <= nearLow {
			v.low.hit(i, y == low, &lastLow)
		}
		if y >= nearHigh && y-y == 0 {
			v.high.hit(i, y == high, &lastHigh)
		}
	}
	return v
}

// railWidth is one level of a coarse grid, or the width in which a Gaussian tail at 2.5
// standard deviations holds a seventh of what is beyond it.
func railWidth(grid, sd float64) float64 { return math.Max(1.5*grid, 0.05*sd) }

func (r *rail) hit(i int, there bool, last *int) {
	if !there {
		r.beside++
		return
	}
	if r.at == 0 {
		r.from = i
	}
	r.at++
	r.to = i
	if i != *last+1 {
		r.visits++
	}
	*last = i
}

// struck tells whether more samples are at the extreme than a smooth tail puts there.
// Samples that are on no grid never meet exactly: three separate visits to the same
// value, or twenty samples there in one, are a rail. On a grid the outermost level of
// a smooth tail holds fewer samples than the next one, up to chance in the number of
// visits.
func (r rail) struck(grid float64) bool {
	if r.at == 0 {
		return false
	}
	if grid == 0 {
		return r.visits >= 3 && r.at > r.beside/4 || r.at >= 20 && r.at > r.beside
	}
	each := float64(r.at) / float64(r.visits)
	excess := float64(r.at) - 1.2*float64(r.beside)
	return r.visits >= 4 && excess/each > 4*math.Sqrt(float64(r.visits))
}

const (
	railDoubtful = 1e-4 // share of samples at a rail; below it the variance changes by less than 0.1 %
	railBad      = 4e-3 // a rail at 2.65 standard deviations on both sides, which takes 1.4 % off the variance
)

// rail looks for clipping.
func (v *view) rail() Check {
	c := v.check("rail")
	c.Threshold = railDoubtful
	count, where := 0, ""
	from, to := v.samples, 0
	for _, side := range []struct {
		rail
		name string
	}{{v.values.low, "lowest"}, {v.values.high, "highest"}} {
		if !side.struck(v.values.grid) {
			continue
		}
		count += side.at
		from, to = min(from, side.from), max(to, side.to)
		if where != "" {
			where += " and "
		}
		where += "the " + side.name + " value " + length(side.value, v.Unit)
	}
	c.Value = float64(count) / math.Max(v.total.n, 1)
	switch {
	case v.total.low == v.total.high:
		return c.spared("all samples have the same value")
	case count == 0:
		c.Text = "No value is a limit where samples pile up."
		return c
	case c.Value > railBad:
		c.Level = Bad
	case c.Value > railDoubtful:
		c.Level = Doubtful
	}
	c.Text = fmt.Sprintf("%s of the samples stand exactly at %s: the signal is clipped there.", percent(c.Value), where)
	if c.Level != OK {
		c.Remedy = "Give the detector or the digitiser more range (lower gain, larger field, bead in the centre) and record again." + caution
		c.Ranges = [][2]float64{{v.second(float64(from)), v.second(float64(to + 1))}}
	}
	return c
}
