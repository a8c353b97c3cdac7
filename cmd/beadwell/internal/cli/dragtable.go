package cli

import (
	"fmt"
	"math"

	"beadwell/calib"
	"beadwell/calib/drag"
	"beadwell/calib/medium"
	"beadwell/calib/quantity"
	"beadwell/calib/session"
)

// measure is a number with its standard uncertainty.
type measure struct{ value, u float64 }

// relative is the relative standard uncertainty.
func (m measure) relative() float64 { return m.u / m.value }

// dragInput is a bead in a fluid, in SI units.
type dragInput struct {
	diameter    measure // m
	temperature measure // K
	fluid       string  // its name; empty when only the viscosity is known
	viscosity   measure // Pa s
	perKelvin   float64 // d ln(viscosity)/dT [1/K]; 0 for a stated viscosity
	model       float64 // relative standard uncertainty of the viscosity that the temperature has no part in
	density     measure // kg/m3; NaN when it is not known
	source      string
	stiffness   measure // N/m; NaN when none was given
	depth       measure // m; 0 when there is no second surface
}

// dragRow is the drag at one height in one direction.
type dragRow struct {
	height        measure // m; +Inf for far
	perpendicular bool
	factor        measure // wall factor, 1
	drag          measure // N s/m
	diffusion     measure // m2/s
	corner        measure // Hz; NaN without a stiffness
	method        string
}

// newDragInput takes bead and fluid from the settings.
func newDragInput(settings *session.Settings, stiffness measure) (dragInput, error) {
	in, err := newLiquid(settings, stiffness)
	if err == nil && in.diameter.value == 0 {
		err = usageError("state it: --diameter '1.02(3) um'", "the diameter of the bead is not given, and has no default")
	}
	return in, err
}

// newLiquid is newDragInput where there need be no bead.
func newLiquid(settings *session.Settings, stiffness measure) (dragInput, error) {
	in := dragInput{stiffness: stiffness, depth: measured(settings, "chamber.depth"),
		diameter: measured(settings, "bead.diameter"), temperature: measured(settings, "medium.temperature"),
		density: measure{math.NaN(), math.NaN()}}
	if own := measured(settings, "medium.viscosity"); own.value != 0 {
		in.viscosity, in.model, in.source = own, own.relative(), "stated"
		if density := measured(settings, "medium.density"); density.value != 0 {
			in.density = density
		}
		return in, nil
	}
	name, _ := settings.Lookup("medium.fluid", "")
	fluid, err := medium.ParseFluid(name.Text)
	if err != nil {
		return in, settingsError(err)
	}
	p, err := fluid.At(in.temperature.value)
	if err != nil {
		return in, settingsError(err)
	}
	in.fluid, in.perKelvin, in.model, in.source = fluid.Name, p.ViscosityTemp, p.ViscosityU, p.Source
	in.viscosity = measure{p.Viscosity, p.Viscosity * math.Hypot(p.ViscosityU, p.ViscosityTemp*in.temperature.u)}
	in.density = measure{p.Density, p.Density * p.DensityU}
	return in, nil
}

// measured returns a setting; zero when it is not given.
func measured(settings *session.Settings, key string) measure {
	setting, _ := settings.Lookup(key, "")
	return measure{setting.Value.SI, setting.Value.U}
}

// stokes is the drag far from walls [N s/m].
func (in dragInput) stokes() measure {
	value := drag.Stokes(in.viscosity.value, in.diameter.value/2)
	return measure{value, value * math.Hypot(in.viscosity.relative(), in.diameter.relative())}
}

// thermalEnergy is kT [J].
func (in dragInput) thermalEnergy() measure {
	return measure{medium.Boltzmann * in.temperature.value, medium.Boltzmann * in.temperature.u}
}

// row computes one row. Uncertainties add in first order (JCGM 100:2008, Eq. 10) in
// the logarithms, in which the radius acts on the Stokes drag and on the wall
// factor, and the temperature on the viscosity and on kT.
func (in dragInput) row(height measure, perpendicular bool) (dragRow, error) {
	chamber := drag.Chamber{Radius: in.diameter.value / 2, Height: height.value, Depth: in.depth.value, Perpendicular: perpendicular}
	wall, err := chamber.Wall()
	if err != nil {
		return dragRow{}, usageError("height and depth are measured to the centre of the bead and from surface to surface", "%w", err)
	}
	r := dragRow{height: height, perpendicular: perpendicular, method: wall.Method}
	lengths := 0.0
	if !math.IsInf(height.value, 1) {
		lengths = math.Hypot(wall.LogSlopeHeight*height.relative(), wall.FactorU)
		if in.depth.value != 0 {
			lengths = math.Hypot(lengths, wall.LogSlopeDepth*in.depth.relative())
		}
	}
	radius, temperature := in.diameter.relative(), in.temperature.relative()
	slope := in.perKelvin * in.temperature.value // d ln(viscosity)/d ln(T)
	quadrature := func(radiusSlope, temperatureSlope, viscosity float64) float64 {
		return math.Hypot(math.Hypot(lengths, radiusSlope*radius), math.Hypot(temperatureSlope*temperature, viscosity))
	}
	r.factor = scaled(wall.Factor, quadrature(wall.LogSlopeRadius, 0, 0))
	gamma := in.stokes().value * wall.Factor
	r.drag = scaled(gamma, quadrature(1+wall.LogSlopeRadius, slope, in.model))
	r.diffusion = scaled(in.thermalEnergy().value/gamma, quadrature(1+wall.LogSlopeRadius, 1-slope, in.model))
	r.corner = scaled(in.stiffness.value/(2*math.Pi*gamma), math.Hypot(r.drag.relative(), in.stiffness.relative()))
	return r, nil
}

func scaled(value, relative float64) measure { return measure{value, math.Abs(value) * relative} }

// parseHeights reads the heights of the command line; far is +Inf.
func parseHeights(texts []string) ([]measure, error) {
	if len(texts) == 0 {
		texts = []string{"far"}
	}
	heights := make([]measure, len(texts))
	for i, text := range texts {
		if text == "far" {
			heights[i] = measure{math.Inf(1), 0}
			continue
		}
		v, err := quantity.Parse(text, quantity.Length)
		if err != nil {
			return nil, settingsError(fmt.Errorf("--height %w", err))
		}
		heights[i] = measure{v.SI, v.U}
	}
	return heights, nil
}

// quantity is the measure with normal intervals; one that is not finite has no value.
func (m measure) quantity(unit string) calib.Quantity {
	q := calib.Exact(m.value, unit)
	if m.u > 0 && q.Known() {
		const z95 = 1.959963984540054 // 97.5 % point of the standard normal distribution
		at := func(z float64) [2]calib.Float {
			return [2]calib.Float{calib.Float(m.value - z*m.u), calib.Float(m.value + z*m.u)}
		}
		q.Combined = &calib.Uncertainty{Standard: calib.Float(m.u), Interval68: at(1), Interval95: at(z95)}
	}
	return q
}
