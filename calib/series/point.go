package series

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mathext"
	"gonum.org/v1/gonum/stat/distuv"
)

// Point is one number of a series.
type Point struct {
	X  float64 // abscissa [unit of the caller]
	UX float64 // standard uncertainty of X, independent of other points; 0: exact
	Y  float64 // value [unit of the caller]
	UY float64 // standard uncertainty of Y, independent of other points; 0 in every point: unknown, taken from the scatter
}

// Errors that tell what the points cannot give.
var (
	// ErrTooFew says that there are not more points than parameters.
	ErrTooFew = errors.New("too few points")
	// ErrNotIdentifiable says that the points cannot tell the parameters apart.
	ErrNotIdentifiable = errors.New("the points cannot tell the parameters apart")
	// ErrNotConverged says that no minimum was reached.
	ErrNotConverged = errors.New("the fit reached no minimum")
)

// PointError names a point that cannot be used.
type PointError struct {
	Index   int // of the point, from 0
	Problem string
}

// Error gives the number of the point, from 1, and the problem.
func (e *PointError) Error() string { return fmt.Sprintf("point %d: %s", e.Index+1, e.Problem) }

// checkPoints refuses numbers that are not finite and uncertainties that are
// negative, or are stated for some points only. It tells whether u(y) is unknown.
func checkPoints(points []Point) (unknown bool, err error) {
	for i, p := range points {
		switch {
		case !finite(p.X) || !finite(p.Y):
			return false, &PointError{i, fmt.Sprintf("x %g, y %g: both must be finite numbers", p.X, p.Y)}
		case !(p.UX >= 0) || !finite(p.UX) || !(p.UY >= 0) || !finite(p.UY):
			return false, &PointError{i, fmt.Sprintf("standard uncertainties %g of x, %g of y: they must be finite and not negative", p.UX, p.UY)}
		}
	}
	if len(points) == 0 {
		return false, nil
	}
	unknown = points[0].UY == 0
	for i, p := range points {
		if (p.UY == 0) != unknown {
			return false, &PointError{i, "the uncertainty of y is stated for some points only: state it for all, or for none"}
		}
		if unknown && p.UX > 0 {
			return false, &PointError{i, "an uncertainty of x needs one of y beside it"}
		}
	}
	return unknown, nil
}

func finite(v float64) bool { return !math.IsNaN(v) && !math.IsInf(v, 0) }

// Parameter is one number that a fit used or gave.
type Parameter struct {
	Value       float64 // [unit of the field]
	Statistical float64 // standard uncertainty from the points alone; 0 for an input that was not fitted
	Shared      float64 // standard uncertainty from what all points share
	Combined    float64 // root of the sum of the two squares
	Low, High   float64 // 95 % interval, from Combined
	Fitted      bool    // false: a stated input
}

// newParameter makes a fitted parameter; freedom is +Inf when the uncertainties
// of the points were stated.
func newParameter(value, statistical, shared, freedom float64) Parameter {
	p := Parameter{Value: value, Statistical: statistical, Shared: shared, Combined: math.Hypot(statistical, shared), Fitted: true}
	// The shared part has no scatter to be estimated from: Student's factor is that of the
	// statistical part, by the effective degrees of freedom of JCGM 100:2008, Eq. G.2b.
	effective := math.Inf(1)
	if statistical > 0 && finite(freedom) {
		effective = freedom * math.Pow(p.Combined/statistical, 4)
	}
	half := coverage(effective) * p.Combined
	p.Low, p.High = value-half, value+half
	return p
}

// WithShared adds a relative standard uncertainty that all points share to a fitted parameter above 0. Its interval keeps its shape:
// each end moves away, on the scale of ln(value), by the factor by which the combined uncertainty grows.
func (p Parameter) WithShared(relative float64) Parameter {
	before := p.Combined
	p.Shared = math.Hypot(p.Shared, relative*p.Value)
	p.Combined = math.Hypot(p.Statistical, p.Shared)
	if before > 0 {
		grown := p.Combined / before
		p.Low, p.High = p.Value*math.Pow(p.Low/p.Value, grown), p.Value*math.Pow(p.High/p.Value, grown)
	}
	return p
}

// coverage is the factor of a 95 % interval with that many degrees of freedom.
func coverage(freedom float64) float64 {
	const upper = 0.975
	if !finite(freedom) {
		return distuv.UnitNormal.Quantile(upper)
	}
	return distuv.StudentsT{Mu: 0, Sigma: 1, Nu: freedom}.Quantile(upper)
}

// Goodness is how well a model fits points with stated uncertainties.
type Goodness struct {
	ChiSquare float64 // of the residuals; NaN when the uncertainties are unknown
	Freedom   int     // points minus parameters
	PValue    float64 // chance of a larger chi-square; NaN when unknown
	// Birge is the root of chi-square over Freedom (Birge, Phys. Rev. 40 (1932) 207): the
	// scatter over what the stated uncertainties allow. NaN when unknown.
	Birge float64
}

func newGoodness(chiSquare float64, freedom int) Goodness {
	return Goodness{ChiSquare: chiSquare, Freedom: freedom, PValue: chiSquareSurvival(chiSquare, freedom), Birge: math.Sqrt(chiSquare / float64(freedom))}
}

// chiSquareSurvival is the chance of a chi-square above x; NaN without degrees of freedom.
func chiSquareSurvival(x float64, freedom int) float64 {
	if freedom < 1 || math.IsNaN(x) {
		return math.NaN()
	}
	return mathext.GammaIncRegComp(float64(freedom)/2, x/2)
}

// normalTwoSided is the chance of a standard normal number farther from 0 than z.
func normalTwoSided(z float64) float64 { return math.Erfc(math.Abs(z) / math.Sqrt2) }

// studentTwoSided is the chance of a Student number farther from 0 than t.
func studentTwoSided(t, freedom float64) float64 {
	return 2 * distuv.StudentsT{Mu: 0, Sigma: 1, Nu: freedom}.Survival(math.Abs(t))
}

// chiSquareQuantile is the value below which a chi-square falls with chance p.
func chiSquareQuantile(p float64, freedom int) float64 {
	return distuv.ChiSquared{K: float64(freedom)}.Quantile(p)
}
