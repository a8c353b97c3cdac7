package series

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// ErrNotStated says that the model needs a number that was not given.
var ErrNotStated = errors.New("not stated")

// Input is a number that all points share.
type Input struct {
	Value       float64 // [unit of the field]
	Uncertainty float64 // standard [same unit]; 0: exact. Of no use when Free
	Free        bool    // fitted to the points; Value is where the search starts
}

// Reading is one recording of a height series.
type Reading struct {
	Stage, StageU float64 // reading of the stage, or stated height, and its own standard uncertainty [m]
	Value, ValueU float64 // measured drag [N s/m], or corner frequency [Hz], and its standard uncertainty
	Perpendicular bool    // motion at right angles to the surface; false: parallel
}

// SurfaceOptions describe a height series. The height of the bead's centre is
// Scale times (Stage - Surface).
type SurfaceOptions struct {
	Radius Input // of the bead [m]; needed
	// Viscosity of the fluid [Pa s], for Drag. Zero value: free.
	Viscosity Input
	// Scale is the travel of the bead over the travel of the stage, 1; negative when readings
	// fall as the bead rises. Value 0: 1.
	Scale Input
	// StiffnessSlope is d ln(stiffness)/d height [1/m], needed by CornerAgainstHeight:
	// without it a change of stiffness would pass for drag. Nil: not stated.
	StiffnessSlope *Input
}

// SurfaceFit is where the surface is, by the wall's effect on the drag.
type SurfaceFit struct {
	Surface        Parameter // reading of the stage at which the centre of the bead would be in the surface [m]
	Scale          Parameter // 1
	Radius         Parameter // m
	Viscosity      Parameter // Pa s; NaN for a corner frequency
	CornerFar      Parameter // corner frequency without a wall, at Surface's height [Hz]; NaN for a drag
	StiffnessSlope Parameter // 1/m; 0 for a drag
	// Names and Covariance are those of the fitted parameters, from the points alone, in the
	// order and units above; viscosity, corner frequency, scale and radius stand as logarithms.
	Names      []string
	Covariance *mat.SymDense
	Goodness   Goodness
	Heights    []float64 // of the bead's centre at each point [m], from the readings as they are
	Fitted     []float64 // the model at Heights, in the unit of the values
	Residuals  []float64 // ln(value/model) over its uncertainty, that of the reading included
	Outliers   []int     // points that do not belong to the curve of the others, named in 5 % of clean series or fewer
	// Without is the fit to the other points, nil when no outlier was named.
	Without *SurfaceFit
}

// DragAgainstHeight fits the position of the surface to measured drag coefficients,
//
//	gamma = 6 pi eta R lambda(h/R),  h = Scale (Stage - Surface)
//
// with the exact wall factor of package drag, and with it those of viscosity,
// scale and radius that are Free. It minimises Eq. 1 of the package in ln(gamma).
//
// Stated uncertainties of shared inputs are carried on by the derivatives of the fit (JCGM
// 100:2008, Eq. 16). Scale and radius act on the wall factor through their ratio alone: both can
// be fitted only when the viscosity is known, and the heights reach close enough.
// Otherwise, or when the points bend too little, the error is ErrNotIdentifiable with the
// reason. Further errors: *PointError, ErrTooFew, ErrNotStated, ErrNotConverged.
func DragAgainstHeight(readings []Reading, opt SurfaceOptions) (*SurfaceFit, error) {
	m := newWall(opt, false)
	if opt.Viscosity == (Input{}) {
		m.inputs[amplitude].Free = true
	}
	return m.fit(readings)
}

// CornerAgainstHeight fits the position of the surface to corner frequencies,
//
//	fc = fc_far exp(StiffnessSlope h)/lambda(h/R)
//
// where fc_far, the stiffness over 2 pi times Stokes drag, is always fitted. The slope of the
// stiffness must be stated (0 is a statement) or Free; without it the error is
// ErrNotStated. The rest is as in DragAgainstHeight, but scale and radius can never be
// fitted together.
func CornerAgainstHeight(readings []Reading, opt SurfaceOptions) (*SurfaceFit, error) {
	if opt.StiffnessSlope == nil {
		return nil, fmt.Errorf("the change of the stiffness with height is %w: give it with its uncertainty (0 if there is none), or have it fitted", ErrNotStated)
	}
	m := newWall(opt, true)
	m.inputs[amplitude] = Input{Free: true}
	m.inputs[stiffnessSlope] = *opt.StiffnessSlope
	return m.fit(readings)
}

func checkReadings(readings []Reading) error {
	for i, r := range readings {
		switch {
		case !finite(r.Stage) || !(r.StageU >= 0) || !finite(r.StageU):
			return &PointError{i, fmt.Sprintf("reading %g m with standard uncertainty %g m: both must be finite", r.Stage, r.StageU)}
		case !(r.Value > 0) || !finite(r.Value) || !(r.ValueU > 0) || !finite(r.ValueU):
			return &PointError{i, fmt.Sprintf("value %g with standard uncertainty %g: both must be finite and above 0", r.Value, r.ValueU)}
		}
	}
	return nil
}

func (m *wall) checkInputs() error {
	if !(m.inputs[radius].Value > 0) {
		return fmt.Errorf("the radius of the bead is %w: give a length above 0 m, it is %g m", ErrNotStated, m.inputs[radius].Value)
	}
	if a := m.inputs[amplitude]; !a.Free && !(a.Value > 0) {
		return fmt.Errorf("viscosity %g Pa s: give one above 0, or have it fitted", a.Value)
	}
	for k, in := range m.inputs {
		if !finite(in.Value) || !(in.Uncertainty >= 0) || !finite(in.Uncertainty) {
			return fmt.Errorf("%s %g with standard uncertainty %g: both must be finite", parameterNames[k], in.Value, in.Uncertainty)
		}
	}
	return nil
}

// points takes logarithms.
func points(readings []Reading) []Point {
	p := make([]Point, len(readings))
	for i, r := range readings {
		p[i] = Point{X: r.Stage, UX: r.StageU, Y: math.Log(r.Value), UY: r.ValueU / r.Value}
	}
	return p
}
