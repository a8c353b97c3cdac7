package series

import "math"

// change finds the most likely step of the mean and how likely a steady series
// would show one as large.
func change(values []Measured, between float64, opt ChartOptions) *Change {
	if len(values) < 4 {
		return nil
	}
	ratios := stepRatios(values, between)
	best := 1
	for k := range ratios {
		if k > 0 && ratios[k] > ratios[best] {
			best = k
		}
	}
	c := &Change{Index: best, Statistic: ratios[best]}
	c.Earliest, c.Latest = positionRange(ratios, best)
	before, beforeU := weightedMean(values[:best], between)
	after, afterU := weightedMean(values[best:], between)
	c.Before, c.After = newParameter(before, beforeU, 0, math.Inf(1)), newParameter(after, afterU, 0, math.Inf(1))
	c.Step = newParameter(after-before, math.Hypot(beforeU, afterU), 0, math.Inf(1))
	c.PValue = changePValue(values, between, c.Statistic, opt)
	return c
}

// stepRatios gives for each k from 1 twice the log likelihood ratio of a step in front of
// point k: the square of the difference of the weighted means over its variance.
func stepRatios(values []Measured, between float64) []float64 {
	total, moment := 0.0, 0.0
	reference := values[0].Value
	weights := make([]float64, len(values))
	for i, v := range values {
		weights[i] = 1 / (v.Uncertainty*v.Uncertainty + between)
		total += weights[i]
		moment += weights[i] * (v.Value - reference)
	}
	ratios := make([]float64, len(values))
	left, leftMoment := 0.0, 0.0
	for k := 1; k < len(values); k++ {
		left += weights[k-1]
		leftMoment += weights[k-1] * (values[k-1].Value - reference)
		right := total - left
		d := (moment-leftMoment)/right - leftMoment/left
		ratios[k] = d * d * left * right / total
	}
	return ratios
}

// positionRange spans the positions whose statistic is within 5.99, the 95 % point
// of a chi-square of two degrees of freedom (the position and the step), of the best. The law of
// a position is not that of a smooth parameter; the range is measured in the tests.
func positionRange(ratios []float64, best int) (earliest, latest int) {
	const drop = 5.99
	earliest, latest = best, best
	for k := 1; k < len(ratios); k++ {
		if ratios[best]-ratios[k] <= drop {
			earliest, latest = min(earliest, k), max(latest, k)
		}
	}
	return earliest, latest
}

// changePValue draws steady series with the same stated uncertainties and the same
// variance between points, and treats each like the measured one.
func changePValue(values []Measured, between, statistic float64, opt ChartOptions) float64 {
	drawn := make([]Measured, len(values))
	above := 0
	for range opt.Draws {
		for i, v := range values {
			drawn[i] = Measured{Value: opt.Random.NormFloat64() * math.Sqrt(v.Uncertainty*v.Uncertainty+between), Uncertainty: v.Uncertainty}
		}
		variance := successiveVariance(drawn)
		if !varies(drawn, variance) {
			continue
		}
		for _, r := range stepRatios(drawn, variance)[1:] {
			if r >= statistic {
				above++
				break
			}
		}
	}
	return float64(above+1) / float64(opt.Draws+1)
}
