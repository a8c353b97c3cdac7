package calib

import (
	"math"
	"strings"
)

// Standard uncertainties that are usual in labs, for the order of causes that nobody
// stated an uncertainty of. Judgement, not measurement.
const (
	usualScale     = 0.02 // relative: a stage micrometre read in an image
	usualKelvin    = 1.0  // K: a room thermometer
	usualViscosity = 0.03 // relative: a buffer taken as water
	usualDiameter  = 0.03 // relative: a supplier's data sheet
	usualHeight    = 0.1  // relative: a focus drive
)

// scanSteps is the number of values of an input that are tried before the search; each costs
// microseconds.
const scanSteps = 240

// hypotheses lists the causes that this recording can have.
func (b *bench) hypotheses() []hypothesis {
	list := b.scales()
	list = append(list, b.temperature(), b.viscosity(), b.diameter())
	if h, ok := b.height(); ok {
		list = append(list, h)
	}
	list = append(list, b.ofTheRecord()...)
	return list
}

// shifted makes the weighing of a hypothesis that changes conditions of every axis.
func (b *bench) shifted(freed func(influence, int) bool, change func(c *conditions, parameter float64)) func(float64) (weighed, bool) {
	return func(parameter float64) (weighed, bool) {
		shift := make([]float64, len(b.works))
		for i, w := range b.works {
			c := w.phys.conditions()
			change(&c, parameter)
			var err error
			if shift[i], err = w.phys.mobility(c); err != nil {
				return weighed{}, false
			}
		}
		return b.weigh(b.asRead, shift, freed)
	}
}

// widestFactor bounds factors on scale, viscosity and diameter.
const widestFactor = 20

// factor is a hypothesis of a factor on one statement.
func factor(code, name string, stated Quantity, usual float64) hypothesis {
	base := float64(stated.Value)
	return hypothesis{code: code, name: name, stated: stated, low: -math.Log(widestFactor), high: math.Log(widestFactor), steps: scanSteps,
		value: func(p float64) float64 { return base * math.Exp(p) },
		order: func(needed float64) float64 { return math.Abs(needed/base-1) / usual }, text: textOfFactor}
}

// scales are the length scale of all axes, and, with several axes, of each alone.
func (b *bench) scales() []hypothesis {
	scale := func(code string, axis int) hypothesis {
		w := b.works[max(axis, 0)]
		name := "length scale"
		if axis >= 0 {
			name += " of " + w.axisName
		}
		h := factor(code, name, w.phys.lengthScale(), usualScale)
		if axis >= 0 {
			h.axis = w.axisName
		}
		h.at = func(p float64) (weighed, bool) {
			shift := make([]float64, len(b.works))
			for i := range shift {
				if axis < 0 || i == axis {
					shift[i] = -2 * p // lengths are recorded too small by the factor
				}
			}
			return b.weigh(b.asRead, shift, func(in influence, i int) bool { return in.length != 0 && (axis < 0 || i == axis) })
		}
		return h
	}
	list := []hypothesis{scale(CauseScale, -1)}
	for i := range b.works {
		if len(b.works) > 1 {
			list = append(list, scale(CauseScaleOne, i))
		}
	}
	return list
}

// lengthScale is the stated length of a recorded unit, or 1 where the file has a unit of length.
func (p *physics) lengthScale() Quantity {
	for _, in := range p.influences {
		if strings.HasPrefix(in.name, "pixel size") || strings.HasPrefix(in.name, "sensitivity") {
			return input(in.value, in.u, in.unit)
		}
	}
	return Exact(1, "1")
}

func (b *bench) temperature() hypothesis {
	p := b.works[0].phys
	low, high := p.fluid.Range()
	if math.IsNaN(low) { // a liquid of stated viscosity: about where water is one
		low, high = 250, 400
	}
	here := p.conditions().temperature
	return hypothesis{code: CauseTemperature, name: "temperature", stated: p.medium.Temperature, low: low, high: high, steps: scanSteps,
		at:    b.shifted(func(in influence, _ int) bool { return in.energy != 0 || in.name == "temperature" }, func(c *conditions, t float64) { c.temperature = t }),
		value: func(p float64) float64 { return p }, order: func(needed float64) float64 { return math.Abs(needed-here) / usualKelvin }, text: textOfTemperature}
}

func (b *bench) viscosity() hypothesis {
	h := factor(CauseViscosity, "viscosity", b.works[0].phys.medium.Viscosity, usualViscosity)
	h.at = b.shifted(func(in influence, _ int) bool { return strings.HasPrefix(in.name, "viscosity") }, func(c *conditions, p float64) { c.thickness = math.Exp(p) })
	return h
}

func (b *bench) diameter() hypothesis {
	h := factor(CauseDiameter, "bead diameter", b.works[0].phys.bead.Diameter, usualDiameter)
	h.at = b.shifted(func(in influence, _ int) bool { return in.name == "bead diameter" }, func(c *conditions, p float64) { c.radius *= math.Exp(p) })
	return h
}

// Range of the gap between bead and surface, in radii: from where the wall models end
// to where the drag is that of the bulk within 0.1 %.
const (
	leastGap = 0.01
	mostGap  = 600
)

// height is the distance to the surface; there is none to ask for where a second surface
// is stated and the first is not.
func (b *bench) height() (hypothesis, bool) {
	p := b.works[0].phys
	stated := p.bead.Height
	if !stated.Known() {
		stated.Unit = "m"
	}
	radius := p.radius
	h := hypothesis{code: CauseHeight, name: "height", stated: stated, low: math.Log(leastGap), high: math.Log(mostGap), steps: scanSteps,
		value: func(q float64) float64 { return radius * (1 + math.Exp(q)) }, text: textOfHeight}
	h.at = b.shifted(func(in influence, _ int) bool { return in.name == "height" }, func(c *conditions, q float64) { c.height = c.radius * (1 + math.Exp(q)) })
	h.order = func(needed float64) float64 {
		if !stated.Known() {
			return math.Log(100*radius/needed) / usualHeight
		}
		return math.Abs(needed/float64(stated.Value)-1) / usualHeight
	}
	return h, true
}
