package simulate

import (
	"math"

	"beadwell/calib/drag"
	"beadwell/calib/medium"
)

// Physical states the truth of an axis in the terms of the laboratory.
type Physical struct {
	Stiffness   float64 // trap stiffness kappa [N/m]; 0 is a free bead
	Radius      float64 // bead radius R [m]
	Viscosity   float64 // dynamic viscosity eta of the fluid [Pa s]
	WallFactor  float64 // drag over its value far from all walls; 0 means 1
	Temperature float64 // absolute temperature T of the fluid [K]
}

// Drag returns the Stokes drag coefficient 6 pi eta R times the wall factor [N s/m].
func (p Physical) Drag() float64 {
	factor := p.WallFactor
	if factor == 0 {
		factor = 1
	}
	return drag.Stokes(p.Viscosity, p.Radius) * factor
}

// Axis returns the axis with the corner frequency kappa/(2 pi gamma) and the variance
// kT/kappa of the trapped bead, or the diffusion coefficient kT/gamma of the free one.
func (p Physical) Axis() Axis {
	thermal := medium.Boltzmann * p.Temperature
	if p.Stiffness == 0 {
		return Axis{Diffusion: thermal / p.Drag()}
	}
	return Axis{
		Corner:   p.Stiffness / (2 * math.Pi * p.Drag()),
		Variance: thermal / p.Stiffness,

		WallFactor: p.WallFactor,
	}
}
