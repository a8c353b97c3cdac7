package series

import (
	"fmt"
	"math"
)

// LineOptions are choices for Line. The zero value fits an intercept too, and
// knows of no shared uncertainty.
type LineOptions struct {
	ThroughOrigin bool
	// SharedX and SharedY are relative standard uncertainties that all x, or all y, have in
	// common, such as that of a power meter's scale. 0: none.
	SharedX, SharedY float64
	// Level is the chance that a series without outliers has one named. 0: 0.05.
	Level float64
}

// LineFit is a straight line y = Intercept + Slope x.
type LineFit struct {
	Slope     Parameter // [y/x]
	Intercept Parameter // [y]; exactly 0 when the line goes through the origin
	// Correlation is that of slope and intercept from the points alone; 0 through the origin.
	Correlation float64
	Goodness    Goodness
	// Scatter is the standard deviation of the points about the line [y], known only when
	// their uncertainties were not stated; else NaN.
	Scatter   float64
	Fitted    []float64 // Intercept + Slope x at each point [y]
	Residuals []float64 // over the uncertainty of each point, that of x included; over Scatter when unknown
	Outliers  []Outlier // in the order of the points
	// Without is the fit to the other points, nil when no outlier was named.
	Without *LineFit

	leverage []float64
}

// Line fits a straight line to points by Eq. 1 of the package.
//
// The uncertainties follow York et al. 2004; when no u(y) is stated they come from the scatter,
// with Student's factor. Points that do not belong are named in Outliers, and stay in
// this fit; Without leaves them out.
//
// It returns a *PointError for a point that cannot be used, ErrTooFew unless there are
// more points than parameters, and ErrNotIdentifiable when all x are equal (or all 0
// through the origin).
func Line(points []Point, opt LineOptions) (*LineFit, error) {
	unknown, err := checkPoints(points)
	if err != nil {
		return nil, err
	}
	if opt.Level == 0 {
		opt.Level = 0.05
	}
	fit, err := fitLine(points, unknown, opt)
	if err != nil {
		return nil, err
	}
	fit.Outliers = outliers(points, unknown, opt)
	if kept := withoutOutliers(points, fit.Outliers); len(kept) < len(points) {
		if fit.Without, err = fitLine(kept, unknown, opt); err != nil {
			return nil, err
		}
	}
	return fit, nil
}

type straight struct{ throughOrigin bool }

func (s straight) at(_ int, x float64, theta, gradient []float64) (value, slope float64, ok bool) {
	last := len(theta) - 1
	gradient[last] = x
	value = theta[last] * x
	if !s.throughOrigin {
		gradient[0] = 1
		value += theta[0]
	}
	return value, theta[last], true
}

func fitLine(points []Point, unknown bool, opt LineOptions) (*LineFit, error) {
	start := make([]float64, 2)
	if opt.ThroughOrigin {
		start = start[:1]
	}
	freedom := len(points) - len(start)
	if freedom < 1 {
		return nil, fmt.Errorf("%w: a line with %s needs %d or more, there are %d", ErrTooFew, parameterCount(len(start)), len(start)+1, len(points))
	}
	// A start from exact abscissae; a slope of 0 is a stationary point for steep errors in x.
	exact := make([]Point, len(points))
	for i, p := range points {
		exact[i] = Point{X: p.X, Y: p.Y, UY: p.UY}
	}
	model := straight{opt.ThroughOrigin}
	s, err := fitCurve(model, exact, start)
	if err == nil {
		s, err = fitCurve(model, points, s.theta)
	}
	if err != nil {
		return nil, fmt.Errorf("straight line through %d points: %w", len(points), err)
	}
	return newLineFit(points, s, unknown, freedom, opt), nil
}

func parameterCount(n int) string {
	if n == 1 {
		return "1 parameter"
	}
	return fmt.Sprintf("%d parameters", n)
}

func newLineFit(points []Point, s *solution, unknown bool, freedom int, opt LineOptions) *LineFit {
	fit := &LineFit{Scatter: math.NaN(), Goodness: newGoodness(s.chiSquare, freedom)}
	unit, studentFreedom := 1.0, math.Inf(1)
	if unknown {
		unit, studentFreedom = math.Sqrt(s.chiSquare/float64(freedom)), float64(freedom)
		fit.Scatter, fit.Goodness = unit, newGoodness(math.NaN(), freedom)
	}
	last := len(s.theta) - 1
	slope := s.theta[last]
	fit.Slope = newParameter(slope, unit*math.Sqrt(s.covariance.At(last, last)), math.Abs(slope)*math.Hypot(opt.SharedX, opt.SharedY), studentFreedom)
	if !opt.ThroughOrigin {
		intercept := s.theta[0]
		// A common factor in x leaves the intercept where it is.
		fit.Intercept = newParameter(intercept, unit*math.Sqrt(s.covariance.At(0, 0)), math.Abs(intercept*opt.SharedY), studentFreedom)
		fit.Correlation = s.covariance.At(0, 1) / math.Sqrt(s.covariance.At(0, 0)*s.covariance.At(1, 1))
	}
	fit.leverage = leverages(s)
	for i, p := range points {
		fit.Fitted = append(fit.Fitted, fit.Intercept.Value+slope*p.X)
		fit.Residuals = append(fit.Residuals, s.residuals[i]/unit)
	}
	return fit
}

// leverages is the diagonal of the projection on the columns of the design.
func leverages(s *solution) []float64 {
	rows, columns := s.design.Dims()
	h := make([]float64, rows)
	for i := range h {
		for j := range columns {
			for k := range columns {
				h[i] += s.design.At(i, j) * s.covariance.At(j, k) * s.design.At(i, k)
			}
		}
	}
	return h
}
