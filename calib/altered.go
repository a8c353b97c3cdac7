package calib

import (
	"fmt"
	"math"

	"beadwell/calib/drag"
	"beadwell/calib/medium"
)

// conditions are what drag and thermal energy follow from, to be changed one at a time.
type conditions struct {
	temperature float64 // K
	thickness   float64 // factor on the viscosity at that temperature
	radius      float64 // m
	height      float64 // m; +Inf far from any surface
	depth       float64 // m; 0 without a second surface
	wall        float64 // factor on the drag, for the error of the wall model
}

// conditions returns those that the settings state.
func (p *physics) conditions() conditions {
	return conditions{temperature: p.kT / medium.Boltzmann, thickness: 1, radius: p.radius, height: p.chamber.Height, depth: p.chamber.Depth, wall: 1}
}

// under returns ln(kT/J) and ln(gamma/(N s/m)) under other conditions. It returns an
// error where the fluid's correlation or the wall model does not reach.
func (p *physics) under(c conditions) (energy, friction float64, err error) {
	viscosity := p.viscosity
	if p.fluid.Name != "" {
		properties, err := p.fluid.At(c.temperature)
		if err != nil {
			return 0, 0, err
		}
		viscosity = properties.Viscosity
	}
	if !(c.temperature > 0) || !(c.thickness > 0) || !(c.wall > 0) || !(c.radius > 0) {
		return 0, 0, fmt.Errorf("no bead has a radius of %g m in a liquid of %g K", c.radius, c.temperature)
	}
	factor := p.wall.Factor
	if here := p.conditions(); c.radius != here.radius || c.height != here.height || c.depth != here.depth {
		chamber := drag.Chamber{Radius: c.radius, Height: c.height, Depth: c.depth, Perpendicular: p.chamber.Perpendicular}
		wall, err := chamber.Wall()
		if err != nil {
			return 0, 0, err
		}
		factor = wall.Factor
	}
	return math.Log(medium.Boltzmann * c.temperature), math.Log(drag.Stokes(viscosity*c.thickness, c.radius) * factor * c.wall), nil
}

// mobility returns ln(kT/gamma) under other conditions less that under the stated ones.
func (p *physics) mobility(c conditions) (float64, error) {
	energy, friction, err := p.under(c)
	if err != nil {
		return 0, err
	}
	return (energy - friction) - math.Log(p.kT/p.gamma), nil
}
