package health

import (
	"math"
	"slices"

	"beadwell/calib/relaxation"
)

const (
	roughBlocks = 64
	// medianSquare is the median of the square of a standard normal deviate (the
	// chi-square distribution of one degree of freedom).
	medianSquare = 0.4549364
)

// rough returns a process that was not fitted: the variance of the samples within
// blocks, and the memory that makes the scatter of the means of neighbouring blocks.
// Both are medians over the blocks, so that an event in the record does not count. It is
// right within a factor of two for records of more than a hundred relaxation times.
func (v *view) rough() relaxation.Process {
	dt := 1 / v.rate
	p := relaxation.Process{Interval: dt, Corner: 1 / dt}
	variance, _, k := v.within()
	p.Variance = variance * v.scale * v.scale
	if variance > 0 {
		p.Corner = -math.Log((k-1)/(k+1)) / (2 * math.Pi * dt)
	}
	return p
}

// within returns the median variance within blocks, the standard deviation of the
// difference of neighbouring block means [units of the scale], and the inflation
// (1+c)/(1-c), above 1, that both together mean.
func (v *view) within() (variance, difference, inflation float64) {
	coarse, _ := v.joined(roughBlocks)
	var inside, squares, counts []float64
	for i, b := range coarse {
		if b.n < 2 {
			continue
		}
		inside = append(inside, b.variance())
		counts = append(counts, b.n)
		if i > 0 && coarse[i-1].n > 1 {
			d := b.mean() - coarse[i-1].mean()
			squares = append(squares, d*d)
		}
	}
	variance = median(inside)
	square := median(squares) / medianSquare
	inflation = 1.0001
	if variance > 0 {
		inflation = math.Max(inflation, square/2*median(counts)/variance)
	}
	return variance, math.Sqrt(square), inflation
}

// median sorts x and returns its upper median, or 0 of nothing.
func median(x []float64) float64 {
	if len(x) == 0 {
		return 0
	}
	slices.Sort(x)
	return x[len(x)/2]
}

// misled tells whether the fit has taken an event for slow motion: its memory is far
// longer than that of the parts of the record.
func (v *view) misled() bool {
	return v.Known && v.local.usable() && v.h.memory() > 5*v.local.memory()
}
