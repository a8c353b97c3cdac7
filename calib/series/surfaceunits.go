package series

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// stated is the parameter of an input that was not fitted.
func (m *wall) stated(k int) Parameter {
	in := m.inputs[k]
	p := newParameter(in.Value, 0, in.Uncertainty, math.Inf(1))
	p.Fitted = false
	return p
}

func unknownParameter() Parameter {
	n := math.NaN()
	return Parameter{Value: n, Statistical: n, Shared: n, Combined: n, Low: n, High: n}
}

// inUnits turns a parameter of the model into SI units. Logarithms become factors,
// and their intervals lopsided.
func (m *wall) inUnits(k int, p Parameter) Parameter {
	unit := m.inputs[radius].Value
	switch k {
	case surface:
		return p.times(unit)
	case stiffnessSlope:
		return p.times(1 / unit)
	case scale:
		return p.exponential(m.inputs[scale].Value)
	case radius:
		return p.exponential(unit)
	}
	return p.exponential(1)
}

func (p Parameter) times(factor float64) Parameter {
	for _, v := range []*float64{&p.Value, &p.Statistical, &p.Shared, &p.Combined, &p.Low, &p.High} {
		*v *= factor
	}
	return p
}

// exponential makes of ln(value/unit) the value.
func (p Parameter) exponential(unit float64) Parameter {
	value := unit * math.Exp(p.Value)
	low, high := unit*math.Exp(p.Low), unit*math.Exp(p.High)
	size := math.Abs(value)
	return Parameter{Value: value, Statistical: size * p.Statistical, Shared: size * p.Shared, Combined: size * p.Combined,
		Low: math.Min(low, high), High: math.Max(low, high), Fitted: p.Fitted}
}

// covarianceInUnits gives the surface in m and the slope in 1/m.
func (m *wall) covarianceInUnits(c *mat.SymDense) *mat.SymDense {
	unit := m.inputs[radius].Value
	units := make([]float64, len(m.free))
	for j, k := range m.free {
		units[j] = 1
		switch k {
		case surface:
			units[j] = unit
		case stiffnessSlope:
			units[j] = 1 / unit
		}
	}
	out := mat.NewSymDense(len(units), nil)
	for i := range units {
		for j := i; j < len(units); j++ {
			out.SetSym(i, j, c.At(i, j)*units[i]*units[j])
		}
	}
	return out
}
