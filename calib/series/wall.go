package series

import (
	"math"

	"beadwell/calib/drag"
)

// The parameters of the wall model, in the order of the full vector.
const (
	amplitude      = iota // ln(viscosity), or ln(corner frequency far from the wall)
	surface               // position of the surface over the radius that was stated
	scale                 // ln(scale / stated scale)
	radius                // ln(radius / stated radius)
	stiffnessSlope        // d ln(stiffness)/d height, times the stated radius
	parameterTotal
)

var parameterNames = [parameterTotal]string{"viscosity", "surface", "height scale", "radius", "slope of the stiffness"}

// wall is the model of a height series. Inside, lengths are in units of the stated
// radius, so that all parameters are of order 1.
type wall struct {
	inputs        [parameterTotal]Input
	corner        bool // values are corner frequencies; else drags
	perpendicular []bool
	free          []int // which of the parameters are fitted
	full          [parameterTotal]float64
	derivatives   [parameterTotal]float64
}

func newWall(opt SurfaceOptions, corner bool) *wall {
	m := &wall{corner: corner}
	m.inputs[amplitude], m.inputs[radius], m.inputs[scale] = opt.Viscosity, opt.Radius, opt.Scale
	m.inputs[surface].Free = true
	if opt.Scale.Value == 0 {
		m.inputs[scale].Value = 1
	}
	return m
}

// start is the full vector at the stated values.
func (m *wall) start() [parameterTotal]float64 {
	var v [parameterTotal]float64
	if a := m.inputs[amplitude]; !a.Free {
		v[amplitude] = math.Log(a.Value)
	}
	v[stiffnessSlope] = m.inputs[stiffnessSlope].Value * m.inputs[radius].Value
	return v
}

// at gives ln(value) at the reading x [m] of point i.
func (m *wall) at(i int, x float64, theta, gradient []float64) (value, slope float64, ok bool) {
	for j, k := range m.free {
		m.full[k] = theta[j]
	}
	value, slope, ok = m.whole(i, x)
	for j, k := range m.free {
		gradient[j] = m.derivatives[k]
	}
	return value, slope, ok
}

// whole evaluates the model for the full vector, and all derivatives.
func (m *wall) whole(i int, x float64) (value, slope float64, ok bool) {
	v := &m.full
	unit := m.inputs[radius].Value
	factor := m.inputs[scale].Value * math.Exp(v[scale])
	height := factor * (x/unit - v[surface]) // in stated radii
	ratio := height * math.Exp(-v[radius])
	log, logSlope, err := wallFactor(ratio, m.perpendicular[i])
	if err != nil || !finite(log) || !finite(v[amplitude]) {
		return 0, 0, false
	}
	d := &m.derivatives
	d[amplitude] = 1
	if m.corner {
		perHeight := -logSlope/height + v[stiffnessSlope]
		value = v[amplitude] + v[stiffnessSlope]*height - log
		d[surface], slope = -factor*perHeight, factor/unit*perHeight
		d[scale], d[radius], d[stiffnessSlope] = height*perHeight, logSlope, height
		return value, slope, true
	}
	value = v[amplitude] + math.Log(6*math.Pi*unit) + v[radius] + log
	perHeight := logSlope / height
	d[surface], slope = -factor*perHeight, factor/unit*perHeight
	d[scale], d[radius], d[stiffnessSlope] = logSlope, 1-logSlope, 0
	return value, slope, true
}

// wallFactor is ln(lambda) and d ln(lambda)/d ln(h/R).
func wallFactor(ratio float64, perpendicular bool) (log, slope float64, err error) {
	factor, derivative := drag.Parallel, drag.ParallelSlope
	if perpendicular {
		factor, derivative = drag.Perpendicular, drag.PerpendicularSlope
	}
	lambda, err := factor(ratio)
	if err != nil {
		return 0, 0, err
	}
	slope, err = derivative(ratio)
	return math.Log(lambda), slope, err
}
