package health

import (
	"fmt"
	"math"
	"slices"
)

// values is what the second pass finds about the exact values of the samples.
type values struct {
	grid      float64 // spacing of the values that occur, when it is coarse enough to be seen [unit of X]; 0 when there is none
	low, high rail
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
	v := values{grid: grid(sampled(x, 4096), s.scale)}
	if s.total.n == 0 {
		return v
	}
	sd := math.Sqrt(s.total.variance()) * s.scale
	// One level of a coarse grid, or the width in which a Gaussian tail at 2.5
	// standard deviations holds a seventh of what is beyond it.
	width := math.Max(1.5*v.grid, 0.05*sd)
	low, high := math.Inf(1), math.Inf(-1)
	for _, y := range x {
		if y-y == 0 {
			low, high = min(low, y), max(high, y)
		}
	}
	v.low, v.high = rail{value: low}, rail{value: high}
	nearLow, nearHigh := low+width, high-width
	lastLow, lastHigh := -2, -2
	for i, y := range x {
		if y <= nearLow {
			v.low.hit(i, y == low, &lastLow)
		}
		if y >= nearHigh && y-y == 0 {
			v.high.hit(i, y == high, &lastHigh)
		}
	}
	return v
}

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

const (
	gridDoubtful = 0.5 // grid over rms: rounding adds grid^2/12, 2 % of the variance
	gridBad      = 1.5 // 19 %
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
		c.Text = "The values are fine enough."
		return c
	}
	c.Text = fmt.Sprintf("The positions come in steps of %s, %s of their rms: rounding alone adds %s to the variance.",
		length(v.values.grid, v.Unit), digits(c.Value), percent(c.Value*c.Value/12))
	c.Remedy = "Write more digits, use more of the digitiser's range, or track with sub-pixel resolution."
	return c
}

const (
	frozenDoubtful = 1e-3 // share of samples that repeat the one before
	frozenBad      = 0.05
)

// frozenSamples looks for samples that repeat their predecessor.
func (v *view) frozenSamples() Check {
	c := v.check("frozen-samples")
	c.Threshold = frozenDoubtful
	if v.total.steps == 0 {
		return c.spared("no two neighbouring samples are there")
	}
	steps := v.total.steps
	if v.coarseSteps() {
		return c.spared("the values are so coarse that neighbours are often equal by themselves")
	}
	chance := v.equalByChance()
	c.Value = math.Max(v.total.equal/steps-chance, 0)
	// on a grid, equal samples come in bunches: their number scatters more than that of single ones
	margin := 0.1*chance + 8*math.Sqrt(chance/steps)
	switch {
	case c.Value < frozenDoubtful+margin:
		c.Text = "Samples do not repeat more often than chance makes them."
		return c
	case c.Value > frozenBad+margin:
		c.Level = Bad
	default:
		c.Level = Doubtful
	}
	c.Text = fmt.Sprintf("%s of the samples repeat the one before exactly, the longest time for %d samples from %s on.",
		percent(c.Value), v.frozen, moment(v.second(float64(v.frozenAt)), v.duration()))
	c.Remedy = "Find out whether the program that records writes old values when a new one is late; record slower or to a faster disk."
	if v.frozen > 10 {
		c.Ranges = [][2]float64{{v.second(float64(v.frozenAt)), v.second(float64(v.frozenAt + v.frozen))}}
	}
	return c
}

// coarseSteps tells whether the spacing of the values is so large, against the steps
// between neighbours, that rounding has changed the distribution of the steps.
func (v *view) coarseSteps() bool {
	grid := v.values.grid / v.scale
	return grid*grid > 0.5*v.total.d2/math.Max(v.total.steps, 1)
}

// equalByChance returns the share of neighbours that rounding to the grid makes
// equal: the mean of max(0, 1 - |d|/grid) over normal steps d. Rounding has added
// grid^2/6 to the mean square of the steps.
func (v *view) equalByChance() float64 {
	if v.values.grid == 0 {
		return 0
	}
	grid := v.values.grid / v.scale
	a := grid / math.Sqrt(v.total.d2/v.total.steps-grid*grid/6)
	density := func(x float64) float64 { return math.Exp(-x*x/2) / math.Sqrt(2*math.Pi) }
	return math.Erf(a/math.Sqrt2) - 2/a*(density(0)-density(a))
}
