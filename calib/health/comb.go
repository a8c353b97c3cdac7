package health

import (
	"math"

	"beadwell/calib/transform"
)

const (
	combBins  = 128
	combReach = 5.0                      // standard deviations to either side
	combWidth = 2 * combReach / combBins // of a bin, in standard deviations
	// combFirst is the first wave of the histogram that is looked at, of a period of 1.4
	// standard deviations: of a Gaussian it has the amplitude exp(-(2 pi/1.43)^2/2) = 6e-5.
	combFirst = 7
)

// histogram counts positions within combReach standard deviations.
type histogram struct {
	low, per float64 // lower end [unit of X]; bins in one unit of X
	count    [combBins]float64
}

func newHistogram(mean, sd float64) histogram {
	return histogram{low: mean - combReach*sd, per: 1 / (combWidth * sd)}
}

func (h *histogram) add(x float64) {
	if k := (x - h.low) * h.per; k >= 0 && k < combBins { // false for NaN
		h.count[int(k)]++
	}
}

// pattern returns the period [standard deviations] of the strongest wave in the
// histogram and its size, |mean exp(2 pi i x/period)|, or zeros when chance makes one.
//
// For N samples of a Gaussian process the square of the size, of waves that are short
// against the standard deviation, has an exponential distribution of mean
// sum_k exp(-u^2 (1 - rho(k)))/N with u = 2 pi/period, the covariance of
// exp(iux) at a lag of k samples.
func (h histogram) pattern(p null) (period, size float64) {
	plan, err := transform.NewPlan(combBins)
	if err != nil { // a power of two is a good length
		return 0, 0
	}
	n := 0.0
	for _, c := range h.count {
		n += c
	}
	if n == 0 {
		return 0, 0
	}
	power := plan.Power(nil, h.count[:])
	best := math.Log(combBins / 2 / chance)
	for k := combFirst; k < combBins/2; k++ {
		u := 2 * math.Pi * float64(k) / (2 * combReach)
		square := power[k] / (n * n)
		if r := square * n / p.phaseInflation(u); r > best {
			best = r
			// a bin averages the wave over its width
			x := math.Pi * float64(k) / combBins
			period, size = 2*combReach/float64(k), math.Sqrt(square)*x/math.Sin(x)
		}
	}
	return period, size
}

// phaseInflation returns sum_k exp(-u^2 (1 - rho(k))) for a wave of u radians per
// standard deviation.
func (h null) phaseInflation(u float64) float64 {
	sum := 1.0
	c := h.vb / h.r0 * h.observed
	for range 10000 { // within which a wave of u > 4 has lost its phase unless fc dt < 1e-6
		c *= math.Exp(-h.rho)
		term := math.Exp(-u * u * (1 - c))
		sum += 2 * term
		if term < 1e-3 {
			break
		}
	}
	return sum
}
