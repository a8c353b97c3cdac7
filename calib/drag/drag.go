// Package drag gives the drag of a sphere in a viscous fluid: far from walls, near
// one, between two, and oscillating.
//
// A drag coefficient is gamma = lambda 6 pi eta R [N s/m], with eta the viscosity
// [Pa s], R the radius of the sphere [m] and lambda the dimensionless wall factor.
// A height h is that of the sphere's CENTRE above a wall [m], a depth H the distance from
// wall to wall [m]; ratio stands for h/R, s for R/h.
//
// Walls are plane, rigid, without slip, and the flow is slow (Stokes flow), but for
// Frequency, which follows the linear flow of an oscillating sphere. Time dependence is
// exp(-i 2 pi f t).
package drag

import (
	"fmt"
	"math"
)

//go:generate go run ./gen

// Stokes returns 6 pi eta R [N s/m], the drag coefficient far from walls of a
// sphere of radius R [m] in a fluid of viscosity eta [Pa s] (Stokes 1851).
func Stokes(eta, radius float64) float64 {
	return 6 * math.Pi * eta * radius
}

// checkRatio refuses a ratio h/R at or below contact.
func checkRatio(ratio float64) error {
	if !(ratio > 1) {
		return fmt.Errorf("height of the centre over radius h/R = %g: the sphere would touch the wall: h must be above R", ratio)
	}
	return nil
}
