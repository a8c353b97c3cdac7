package health

import (
	"fmt"
	"math"
)

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
		percent(c.Value), v.frozen, v.moment(v.second(float64(v.frozenAt))))
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

// equalByChance returns the share of neighbours that rounding to the grid of their values makes
// equal: the mean of max(0, 1 - |d|/grid) over normal steps d. Rounding has added
// grid^2/6 to the mean square of the steps.
func (v *view) equalByChance() float64 {
	square, sum := v.total.d2/v.total.steps, 0.0
	for _, spacing := range v.values.grids {
		if spacing == 0 {
			spacing = v.values.grid
		}
		grid := spacing / v.scale
		if grid == 0 {
			continue
		}
		a := grid / math.Sqrt(math.Max(square-grid*grid/6, square/2))
		density := func(x float64) float64 { return math.Exp(-x*x/2) / math.Sqrt(2*math.Pi) }
		sum += math.Erf(a/math.Sqrt2) - 2/a*(density(0)-density(a))
	}
	return sum / gridGroups
}
