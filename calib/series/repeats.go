package series

import (
	"fmt"
	"math"
)

// Measured is one of several measurements of the same thing.
type Measured struct {
	Value       float64 // [unit of the caller]
	Uncertainty float64 // standard, independent of the others [same unit], above 0
}

// RepeatsFit says what repeats give together. All in the unit of the values.
type RepeatsFit struct {
	Fixed    Parameter // weighted mean, when the stated uncertainties tell the whole scatter
	Goodness Goodness  // of one value for all: chi-square is Cochran's Q
	// Random is the mean over recordings that differ among each other by Between, with the
	// weights 1/(u^2 + Between^2) and an interval of Student's law (Hartung and Knapp, Stat.
	// Med. 20 (2001) 3875; never narrower than the plain one), because a few recordings may differ
	// without showing it. It is the value to carry on.
	Random Parameter
	// Between is the standard deviation between recordings that the stated uncertainties do
	// not tell, by Paule and Mandel, J. Res. Natl. Bur. Stand. 87 (1982) 377; 0 when there is none.
	Between float64
	// BetweenMoment is the same by the moments of DerSimonian and Laird, Control. Clin. Trials 7
	// (1986) 177, for comparison.
	BetweenMoment float64
	BetweenHigh   float64 // upper end of the 95 % interval of Between (Viechtbauer, Stat. Med. 26 (2007) 37)
}

// Repeats combines measurements of the same thing. shared is a relative standard
// uncertainty that all have in common; 0: none.
//
// It returns a *PointError for a number that cannot be used, and ErrTooFew below two.
func Repeats(values []Measured, shared float64) (*RepeatsFit, error) {
	for i, v := range values {
		if !finite(v.Value) || !finite(v.Uncertainty) || !(v.Uncertainty > 0) {
			return nil, &PointError{i, fmt.Sprintf("value %g with standard uncertainty %g: the value must be finite, the uncertainty above 0", v.Value, v.Uncertainty)}
		}
	}
	if len(values) < 2 {
		return nil, fmt.Errorf("%w: repeats are 2 or more, there are %d", ErrTooFew, len(values))
	}
	mean, u := weightedMean(values, 0)
	freedom := len(values) - 1
	q := heterogeneity(values, 0)
	fit := &RepeatsFit{
		Fixed:         newParameter(mean, u, math.Abs(mean)*shared, math.Inf(1)),
		Goodness:      newGoodness(q, freedom),
		Between:       math.Sqrt(betweenVariance(values, float64(freedom))),
		BetweenMoment: math.Sqrt(momentVariance(values)),
		// Q falls below this with a chance of 2.5 %.
		BetweenHigh: math.Sqrt(betweenVariance(values, chiSquareQuantile(0.025, freedom))),
	}
	mean, u = weightedMean(values, fit.Between*fit.Between)
	factor := math.Max(1, heterogeneity(values, fit.Between*fit.Between)/float64(freedom))
	fit.Random = newParameter(mean, u*math.Sqrt(factor), math.Abs(mean)*shared, float64(freedom))
	return fit, nil
}

func weightedMean(values []Measured, between float64) (mean, uncertainty float64) {
	// Weights are taken against the first, so that no square under- or overflows.
	first := values[0].Uncertainty*values[0].Uncertainty + between
	total, sum := 0.0, 0.0
	for _, v := range values {
		w := first / (v.Uncertainty*v.Uncertainty + between)
		total += w
		sum += w * (v.Value - values[0].Value)
	}
	return values[0].Value + sum/total, math.Sqrt(first / total)
}

// heterogeneity is the chi-square about the weighted mean for a variance between.
func heterogeneity(values []Measured, between float64) float64 {
	mean, _ := weightedMean(values, between)
	q := 0.0
	for _, v := range values {
		d := v.Value - mean
		q += d * d / (v.Uncertainty*v.Uncertainty + between)
	}
	return q
}

// betweenVariance is the variance for which heterogeneity, which falls as it
// grows, equals the target; 0 when it is below already.
func betweenVariance(values []Measured, target float64) float64 {
	if heterogeneity(values, 0) <= target {
		return 0
	}
	high := 0.0
	for _, v := range values {
		high = math.Max(high, v.Uncertainty*v.Uncertainty)
	}
	for heterogeneity(values, high) > target {
		high *= 4
	}
	low := 0.0
	for range 200 { // halved until the ends are neighbours
		middle := low + (high-low)/2
		if middle == low || middle == high {
			break
		}
		if heterogeneity(values, middle) > target {
			low = middle
		} else {
			high = middle
		}
	}
	return low + (high-low)/2
}

// momentVariance is the estimate of DerSimonian and Laird.
func momentVariance(values []Measured) float64 {
	first := values[0].Uncertainty * values[0].Uncertainty
	total, squares := 0.0, 0.0
	for _, v := range values {
		w := first / (v.Uncertainty * v.Uncertainty)
		total += w
		squares += w * w
	}
	excess := heterogeneity(values, 0) - float64(len(values)-1)
	return math.Max(0, excess*first/(total-squares/total))
}

// Pair is one number on two axes of the same recording.
type Pair struct {
	First, Second Measured // both above 0, in the same unit
	Correlation   float64  // of the two, -1 to 1; 0: none
}

// Ratio returns the ratio First/Second with its standard uncertainty, by the
// logarithm of both: u(ratio)/ratio is the root of a^2 + b^2 - 2 r a b with a and b the
// relative uncertainties (JCGM 100:2008, Eq. 16). ln(ratio) is normal rather
// than the ratio: combine several by Repeats on their logarithms.
func Ratio(p Pair) (Measured, error) {
	if !(p.First.Value > 0) || !(p.Second.Value > 0) || !finite(p.First.Value) || !finite(p.Second.Value) {
		return Measured{}, fmt.Errorf("ratio of %g and %g: both must be above 0", p.First.Value, p.Second.Value)
	}
	if !(math.Abs(p.Correlation) <= 1) {
		return Measured{}, fmt.Errorf("ratio: correlation %g is not between -1 and 1", p.Correlation)
	}
	a, b := p.First.Uncertainty/p.First.Value, p.Second.Uncertainty/p.Second.Value
	if !finite(a) || !finite(b) || a < 0 || b < 0 {
		return Measured{}, fmt.Errorf("ratio: standard uncertainties %g and %g must be finite and not negative", p.First.Uncertainty, p.Second.Uncertainty)
	}
	ratio := p.First.Value / p.Second.Value
	return Measured{Value: ratio, Uncertainty: ratio * math.Sqrt(math.Max(0, a*a+b*b-2*p.Correlation*a*b))}, nil
}
