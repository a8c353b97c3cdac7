package series

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/mat"
)

// Limits of what counts as told by the points.
const (
	// surfaceLimit is the largest standard uncertainty of the surface, in radii: beyond it the
	// wall factor is not near a straight line over the interval, and the number is of no use.
	surfaceLimit = 1.0
	// relativeLimit is the same for scale, radius and viscosity: beyond it an interval from
	// the curvature reaches zero.
	relativeLimit = 0.4
)

func (m *wall) fit(readings []Reading) (*SurfaceFit, error) {
	if err := checkReadings(readings); err != nil {
		return nil, err
	}
	if err := m.checkInputs(); err != nil {
		return nil, err
	}
	for k, in := range m.inputs {
		if in.Free {
			m.free = append(m.free, k)
		}
	}
	if len(readings) <= len(m.free) {
		return nil, fmt.Errorf("%w: to fit %s takes %d or more heights, there are %d", ErrTooFew, m.names(), len(m.free)+1, len(readings))
	}
	if err := m.checkDegenerate(); err != nil {
		return nil, err
	}
	data, s, err := m.solve(readings)
	if err == nil {
		err = m.checkTold(s)
	}
	if err != nil {
		return nil, m.explain(err, readings)
	}
	fit := m.result(readings, data, s)
	fit.Outliers = m.outliers(readings, s)
	if len(fit.Outliers) > 0 {
		rest := *m
		kept := without(readings, fit.Outliers)
		if data, s, err := rest.solve(kept); err == nil && rest.checkTold(s) == nil {
			fit.Without = rest.result(kept, data, s)
		}
	}
	return fit, nil
}

// solve fits to these readings.
func (m *wall) solve(readings []Reading) ([]Point, *solution, error) {
	m.orient(readings)
	data := points(readings)
	s, err := m.search(data)
	return data, s, err
}

func (m *wall) orient(readings []Reading) {
	m.perpendicular = make([]bool, len(readings))
	for i, r := range readings {
		m.perpendicular[i] = r.Perpendicular
	}
}

func (m *wall) names() string {
	var names []string
	for _, k := range m.free {
		names = append(names, m.name(k))
	}
	return strings.Join(names, ", ")
}

func (m *wall) name(k int) string {
	if k == amplitude && m.corner {
		return "corner frequency"
	}
	return parameterNames[k]
}

// checkDegenerate refuses what no points can tell apart.
func (m *wall) checkDegenerate() error {
	if m.inputs[scale].Free && m.inputs[radius].Free && m.inputs[amplitude].Free {
		remedy := "state the viscosity, the height scale or the diameter"
		if m.corner {
			remedy = "state the height scale or the diameter"
		}
		return fmt.Errorf("%w: height scale and radius act through their ratio only while the %s is fitted: %s", ErrNotIdentifiable, m.name(amplitude), remedy)
	}
	return nil
}

// search fits from the best of several positions of the surface.
func (m *wall) search(data []Point) (*solution, error) {
	var best *solution
	var failed error
	for _, start := range m.starts(data) {
		s, err := fitCurve(m, data, start)
		switch {
		case err != nil:
			failed = err
		case best == nil || s.chiSquare < best.chiSquare:
			best = s
		}
	}
	if best == nil {
		return nil, failed
	}
	return best, nil
}

// starts are the positions of the surface, with the lowest chi-square first, from
// which the search begins. The gap below the lowest bead runs over powers of two from a
// 500th of the radius; that of a bead whose reading errs may be closer than the truth.
func (m *wall) starts(data []Point) [][]float64 {
	const tries, firstGap, kept = 17, 0.002, 3
	type candidate struct {
		theta     []float64
		chiSquare float64
	}
	var all []candidate
	lowest := math.Inf(1)
	unit, factor := m.inputs[radius].Value, m.inputs[scale].Value
	for _, p := range data {
		lowest = math.Min(lowest, factor*p.X/unit)
	}
	for try := range tries {
		m.full = m.start()
		m.full[surface] = (lowest - 1 - firstGap*math.Exp2(float64(try))) / factor
		chiSquare, ok := m.settleAmplitude(data)
		if ok {
			var theta []float64
			for _, k := range m.free {
				theta = append(theta, m.full[k])
			}
			all = append(all, candidate{theta, chiSquare})
		}
	}
	slices.SortStableFunc(all, func(a, b candidate) int {
		if a.chiSquare < b.chiSquare {
			return -1
		}
		return 1
	})
	var thetas [][]float64
	for _, c := range all[:min(kept, len(all))] {
		thetas = append(thetas, c.theta)
	}
	m.full = m.start()
	return thetas
}

// settleAmplitude puts a free amplitude where it fits best, and gives chi-square.
func (m *wall) settleAmplitude(data []Point) (chiSquare float64, ok bool) {
	sum, weight := 0.0, 0.0
	offsets := make([]float64, len(data))
	for i, p := range data {
		value, _, ok := m.whole(i, p.X)
		if !ok {
			return 0, false
		}
		offsets[i] = p.Y - value
		w := 1 / (p.UY * p.UY)
		sum, weight = sum+w*offsets[i], weight+w
	}
	shift := 0.0
	if m.inputs[amplitude].Free {
		shift = sum / weight
		m.full[amplitude] += shift
	}
	for i, p := range data {
		d := (offsets[i] - shift) / p.UY
		chiSquare += d * d
	}
	return chiSquare, true
}

// checkTold refuses parameters that the points leave open.
func (m *wall) checkTold(s *solution) error {
	for j, k := range m.free {
		u, limit, unit := math.Sqrt(s.covariance.At(j, j)), relativeLimit, "of its value"
		switch k {
		case surface:
			limit, unit = surfaceLimit, "radii"
		case stiffnessSlope:
			continue // a slope of any uncertainty is a slope
		}
		if u > limit {
			return fmt.Errorf("%w: the standard uncertainty of the %s would be %.2g %s", ErrNotIdentifiable, m.name(k), u, unit)
		}
	}
	return nil
}

// explain adds which heights there were to a refusal.
func (m *wall) explain(err error, readings []Reading) error {
	low, high := math.Inf(1), math.Inf(-1)
	for _, r := range readings {
		low, high = math.Min(low, r.Stage), math.Max(high, r.Stage)
	}
	if errors.Is(err, ErrNotIdentifiable) {
		return fmt.Errorf("%w (fitted: %s; %d readings over %.3g radii): record closer to the surface and over a wider range, or fit fewer",
			err, m.names(), len(readings), (high-low)/m.inputs[radius].Value)
	}
	return fmt.Errorf("%s against %d heights: %w", m.names(), len(readings), err)
}

// result turns the solution into SI units.
func (m *wall) result(readings []Reading, data []Point, s *solution) *SurfaceFit {
	for j, k := range m.free {
		m.full[k] = s.theta[j]
	}
	fit := &SurfaceFit{Goodness: newGoodness(s.chiSquare, len(data)-len(m.free))}
	shared := m.sharedUncertainties(s)
	value := m.full
	at := map[int]int{}
	for j, k := range m.free {
		at[k] = j
		fit.Names = append(fit.Names, m.name(k))
	}
	parameter := func(k int) Parameter {
		j, fitted := at[k]
		if !fitted {
			return m.stated(k)
		}
		return m.inUnits(k, newParameter(value[k], math.Sqrt(s.covariance.At(j, j)), shared[j], math.Inf(1)))
	}
	fit.Surface, fit.Scale, fit.Radius, fit.StiffnessSlope = parameter(surface), parameter(scale), parameter(radius), parameter(stiffnessSlope)
	fit.Viscosity, fit.CornerFar = parameter(amplitude), unknownParameter()
	if m.corner {
		fit.Viscosity, fit.CornerFar = fit.CornerFar, fit.Viscosity
	}
	fit.Covariance = m.covarianceInUnits(s.covariance)
	fit.Residuals = slices.Clone(s.residuals)
	for i, r := range readings {
		fit.Heights = append(fit.Heights, fit.Scale.Value*(r.Stage-fit.Surface.Value))
		model, _, ok := m.whole(i, r.Stage)
		if !ok {
			model = math.NaN() // the reading alone would put the bead into the surface
		}
		fit.Fitted = append(fit.Fitted, math.Exp(model))
	}
	return fit
}

// sharedUncertainties carries the stated uncertainties of inputs on to the fitted
// parameters: d theta/d input = -(A'A)^-1 A' df/d input.
func (m *wall) sharedUncertainties(s *solution) []float64 {
	squares := make([]float64, len(m.free))
	rows, _ := s.design.Dims()
	for k, in := range m.inputs {
		u := m.inputUncertainty(k)
		if in.Free || u == 0 {
			continue
		}
		effect := mat.NewVecDense(rows, nil)
		for i := range rows {
			_, _, _ = m.whole(i, s.abscissae[i])
			effect.SetVec(i, m.derivatives[k]/s.effective[i])
		}
		var projected, change mat.VecDense
		projected.MulVec(s.design.T(), effect)
		change.MulVec(s.covariance, &projected)
		for j := range squares {
			squares[j] += change.AtVec(j) * change.AtVec(j) * u * u
		}
	}
	for j := range squares {
		squares[j] = math.Sqrt(squares[j])
	}
	return squares
}

// inputUncertainty is that of an input in the model's own unit.
func (m *wall) inputUncertainty(k int) float64 {
	in := m.inputs[k]
	if k == stiffnessSlope {
		return in.Uncertainty * m.inputs[radius].Value
	}
	if in.Value == 0 {
		return 0
	}
	return in.Uncertainty / math.Abs(in.Value)
}
