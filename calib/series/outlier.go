package series

import (
	"math"
	"slices"
)

// Outlier is a point that does not belong to the line of the others.
type Outlier struct {
	Index       int     // of the point, from 0
	Studentised float64 // distance from the line of the points that are left without it, over its standard uncertainty
	PValue      float64 // two-sided, for this one point; it was named below Level over the number of points
}

// outlierShare bounds how many points may be named: a line that more than a third of
// the points leave is not their line.
const outlierShare = 1.0 / 3

// outliers names points by the generalised procedure of Rosner, Technometrics 25 (1983)
// 165, with leave-one-out studentised residuals (Cook and Weisberg 1982, section 2.2): the
// worst point is taken out again and again; then the last one taken out that exceeds the limit
// of its turn, and all before it, are named. So two outliers that hide each other are
// found. Each turn's limit is Level over the points that are left, and over the turns. A point
// that was taken out only because others had bent the line goes back when the line of the
// points that stay finds nothing wrong with it.
//
// The turns end early when patience points in a row were none, so that the time of a long series goes with its length.
func outliers(points []Point, unknown bool, opt LineOptions) []Outlier {
	left := make([]int, len(points))
	for i := range left {
		left[i] = i
	}
	var taken []Outlier
	named := 0
	turns := int(float64(len(points)) * outlierShare)
	for range turns {
		worst, ok := worstPoint(points, left, unknown, opt)
		if !ok {
			break
		}
		taken = append(taken, Outlier{Index: left[worst.Index], Studentised: worst.Studentised, PValue: worst.PValue})
		if worst.PValue < opt.Level/float64(len(left)*turns) {
			named = len(taken)
		}
		if len(taken)-named >= patience {
			break
		}
		left = slices.Delete(left, worst.Index, worst.Index+1)
	}
	taken = putBack(points, taken[:named], unknown, opt, opt.Level/float64(len(points)*max(turns, 1)))
	slices.SortFunc(taken, func(a, b Outlier) int { return a.Index - b.Index })
	return taken
}

// patience is the number of points taken out in a row, none of them beyond its limit, after which outliers that hide each
// other are no longer looked for: so many would be a bent line.
const patience = 30

// putBack takes out of the named, again and again, the point that is the likeliest with
// respect to those that stay, as long as its chance is not below the limit.
func putBack(points []Point, named []Outlier, unknown bool, opt LineOptions, limit float64) []Outlier {
	for len(named) > 0 {
		kept := withoutOutliers(points, named)
		likeliest := 0
		for k := range named {
			i := named[k].Index
			// The point comes last, and is judged by the fit with it.
			some := append(slices.Clone(kept), points[i])
			fit, err := fitLine(some, unknown, opt)
			if err != nil {
				return named
			}
			last := len(some) - 1
			named[k].Studentised, named[k].PValue = deletion(fit.Residuals[last], fit.leverage[last], fit.squares(), fit.Goodness.Freedom, unknown)
			if named[k].PValue > named[likeliest].PValue {
				likeliest = k
			}
		}
		if named[likeliest].PValue < limit {
			return named
		}
		named = slices.Delete(named, likeliest, likeliest+1)
	}
	return nil
}

// squares is the sum of the squares of the residuals.
func (f *LineFit) squares() float64 {
	sum := 0.0
	for _, r := range f.Residuals {
		sum += r * r
	}
	return sum
}

// worstPoint finds the point that is least likely with respect to the others; Index
// counts within left.
func worstPoint(points []Point, left []int, unknown bool, opt LineOptions) (worst Outlier, ok bool) {
	some := make([]Point, len(left))
	for k, i := range left {
		some[k] = points[i]
	}
	fit, err := fitLine(some, unknown, opt)
	if err != nil {
		return worst, false
	}
	chiSquare := fit.squares()
	worst.PValue = math.Inf(1)
	for k, r := range fit.Residuals {
		t, p := deletion(r, fit.leverage[k], chiSquare, fit.Goodness.Freedom, unknown)
		if p < worst.PValue || p == worst.PValue && math.Abs(t) > math.Abs(worst.Studentised) {
			worst, ok = Outlier{Index: k, Studentised: t, PValue: p}, true
		}
	}
	return worst, ok
}

// deletion is the leave-one-out studentised residual and its p-value. Stated
// uncertainties are believed as long as the other points do not scatter more than
// they say; then, and when none are stated, the scatter of the others is the measure.
func deletion(residual, leverage, chiSquare float64, freedom int, unknown bool) (t, p float64) {
	rest := 1 - leverage
	if rest < 1e-9 { // the point alone holds the line: it cannot be judged
		return 0, 1
	}
	internal := residual / math.Sqrt(rest)
	others := float64(freedom - 1)
	left := math.Max(0, chiSquare-internal*internal)
	if !unknown && (others < 1 || left <= others) {
		return internal, normalTwoSided(internal)
	}
	if others < 1 {
		return 0, 1
	}
	t = internal / math.Sqrt(left/others)
	if left <= 1e-20*chiSquare { // all others lie on one line to the last digit
		t = math.Copysign(math.Inf(1), internal)
	}
	return t, studentTwoSided(t, others)
}

func withoutOutliers(points []Point, named []Outlier) []Point {
	var kept []Point
	for i, p := range points {
		if !slices.ContainsFunc(named, func(o Outlier) bool { return o.Index == i }) {
			kept = append(kept, p)
		}
	}
	return kept
}
