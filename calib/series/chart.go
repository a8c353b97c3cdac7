package series

import (
	"fmt"
	"math"
	"math/rand/v2"
)

// ChartOptions are choices for NewChart. The zero value is the usual chart.
type ChartOptions struct {
	// Width is the distance of the limits from the centre in standard deviations. 0: 3
	// (Shewhart 1931), which a steady series leaves once in 370 points.
	Width float64
	// Run is how many points in a row on one side of the centre are named. 0: 9 (Nelson,
	// J. Qual. Technol. 16 (1984) 237).
	Run int
	// Draws is how many steady series calibrate the change point. 0: 1999.
	Draws int
	// Random draws them. Nil: a generator with a fixed seed, so that the same points
	// give the same p-value.
	Random *rand.Rand
}

// Chart tells whether a number stayed the same from one measurement to the next.
// All in the unit of the values.
type Chart struct {
	Centre Parameter // mean over the points, each weighted by its whole variance
	// Between is the standard deviation between neighbours that the stated uncertainties do not
	// tell, from the squares of successive differences (von Neumann et al., Ann. Math. Stat.
	// 12 (1941) 153): a drift or a step leaves it nearly alone, as it would not the scatter about the mean.
	Between  float64
	Goodness Goodness // of one value for all, by the stated uncertainties alone
	Points   []ChartPoint
	Runs     []Run
	Change   *Change // the most likely change; nil with fewer than 4 points, or none of them differing
}

// ChartPoint is a point with its limits.
type ChartPoint struct {
	Stated   [2]float64 // limits by the stated uncertainty of the point
	Observed [2]float64 // limits by the stated uncertainty and Between
	Score    float64    // (value - centre) over the standard deviation behind Observed
	Outside  bool       // of Observed
}

// Run is a stretch of points on one side of the centre.
type Run struct {
	First, Last int // points, from 0
	Above       bool
}

// Change is a step of the mean.
type Change struct {
	Index         int       // first point after the step, from 0
	Earliest      int       // with Latest the 95 % range of Index, by the likelihood ratio
	Latest        int       //
	Before, After Parameter // means on either side
	Step          Parameter // After - Before; Index was chosen to make it large
	// Statistic is twice the largest log likelihood ratio over all positions, and
	// PValue the chance of one as large in a steady series: the count of simulated
	// steady series, treated in the same way, that exceed it (the plain chi-square law
	// does not hold for a maximum; Hawkins, J. Am. Stat. Assoc. 72 (1977) 180).
	Statistic, PValue float64
}

// NewChart makes the control chart of measurements in the order of time.
//
// It returns a *PointError for a number that cannot be used, and ErrTooFew below 3.
func NewChart(values []Measured, opt ChartOptions) (*Chart, error) {
	for i, v := range values {
		if !finite(v.Value) || !finite(v.Uncertainty) || v.Uncertainty < 0 {
			return nil, &PointError{i, fmt.Sprintf("value %g with standard uncertainty %g: the value must be finite, the uncertainty not negative", v.Value, v.Uncertainty)}
		}
	}
	if len(values) < 3 {
		return nil, fmt.Errorf("%w: a chart needs 3 or more, there are %d", ErrTooFew, len(values))
	}
	opt = opt.filled()
	between := successiveVariance(values)
	chart := &Chart{Between: math.Sqrt(between), Goodness: newGoodness(math.NaN(), len(values)-1)}
	if allStated(values) {
		chart.Goodness = newGoodness(heterogeneity(values, 0), len(values)-1)
	}
	if !varies(values, between) {
		chart.Centre = newParameter(values[0].Value, 0, 0, math.Inf(1))
		chart.Points = make([]ChartPoint, len(values))
		for i := range chart.Points {
			chart.Points[i].Stated = [2]float64{values[0].Value, values[0].Value}
			chart.Points[i].Observed = chart.Points[i].Stated
		}
		return chart, nil
	}
	mean, u := weightedMean(values, between)
	chart.Centre = newParameter(mean, u, 0, math.Inf(1))
	for _, v := range values {
		chart.Points = append(chart.Points, newChartPoint(v, mean, between, opt.Width))
	}
	chart.Runs = runs(values, mean, opt.Run)
	chart.Change = change(values, between, opt)
	return chart, nil
}

func (o ChartOptions) filled() ChartOptions {
	if o.Width == 0 {
		o.Width = 3
	}
	if o.Run == 0 {
		o.Run = 9
	}
	if o.Draws == 0 {
		o.Draws = 1999
	}
	if o.Random == nil {
		o.Random = rand.New(rand.NewPCG(1, 2))
	}
	return o
}

func allStated(values []Measured) bool {
	for _, v := range values {
		if v.Uncertainty == 0 {
			return false
		}
	}
	return true
}

// varies tells whether every point has a variance at all.
func varies(values []Measured, between float64) bool { return between > 0 || allStated(values) }

// successiveVariance is half the mean squared difference of neighbours beyond what
// their stated uncertainties give; 0 when there is nothing beyond.
func successiveVariance(values []Measured) float64 {
	sum := 0.0
	for i := 1; i < len(values); i++ {
		d, a, b := values[i].Value-values[i-1].Value, values[i].Uncertainty, values[i-1].Uncertainty
		sum += d*d - a*a - b*b
	}
	return math.Max(0, sum/2/float64(len(values)-1))
}

func newChartPoint(v Measured, mean, between, width float64) ChartPoint {
	stated, observed := width*v.Uncertainty, math.Sqrt(v.Uncertainty*v.Uncertainty+between)
	score := (v.Value - mean) / observed
	return ChartPoint{Stated: [2]float64{mean - stated, mean + stated},
		Observed: [2]float64{mean - width*observed, mean + width*observed}, Score: score, Outside: math.Abs(score) > width}
}

// runs names stretches of length or more points on one side of the mean.
func runs(values []Measured, mean float64, length int) []Run {
	var found []Run
	for first := 0; first < len(values); {
		above, last := values[first].Value > mean, first
		for last+1 < len(values) && (values[last+1].Value > mean) == above && values[last+1].Value != mean {
			last++
		}
		if last-first+1 >= length && values[first].Value != mean {
			found = append(found, Run{First: first, Last: last, Above: above})
		}
		first = last + 1
	}
	return found
}
