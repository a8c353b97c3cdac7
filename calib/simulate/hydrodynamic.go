package simulate

import (
	"fmt"
	"math"
	"math/cmplx"
)

// Hydrodynamics makes the drag depend on frequency, as the inertia of the fluid
// dragged along with the bead, and of the bead itself, has it.
type Hydrodynamics struct {
	Radius      float64 `json:"radius_m"`               // bead radius R [m]
	Viscosity   float64 `json:"viscosity_Pa_s"`         // dynamic viscosity of the fluid [Pa s]
	Density     float64 `json:"density_kg_per_m3"`      // density of the fluid [kg/m³]
	BeadDensity float64 `json:"bead_density_kg_per_m3"` // density of the bead [kg/m³]
	Height      float64 `json:"height_m,omitempty"`     // bead centre above the nearer wall h [m]; 0 means far from all walls
}

func (h Hydrodynamics) validate() error {
	for _, row := range []struct {
		name, unit string
		value      float64
	}{{"radius", "m", h.Radius}, {"viscosity", "Pa s", h.Viscosity}, {"density", "kg/m³", h.Density}, {"bead density", "kg/m³", h.BeadDensity}} {
		if !positive(row.value) {
			return fmt.Errorf("hydrodynamics: %s %v %s: must be positive and finite", row.name, row.value, row.unit)
		}
	}
	if h.Height != 0 && !(h.Height > h.Radius && finite(h.Height)) {
		return fmt.Errorf("hydrodynamics: height %v m: the bead of radius %v m touches the wall; give the height of its centre", h.Height, h.Radius)
	}
	return nil
}

// characteristic returns the frequency f_nu = nu/(pi R²) [Hz] at which vorticity
// penetrates one bead radius into the fluid.
func (h Hydrodynamics) characteristic() float64 {
	return h.Viscosity / (h.Density * math.Pi * h.Radius * h.Radius)
}

// drag returns the complex drag at f [Hz] over the Stokes drag far from walls, with the
// time factor exp(-2 pi i f t) and the inertia of the displaced fluid, but not
// that of the bead: Stokes, in the form of Berg-Sorensen & Flyvbjerg, Rev. Sci.
// Instrum. 75 (2004) 594. factor is the static wall factor.
//
// Along a wall, the first-order reflection given there is scaled so that the drag tends to the
// exact factor at f = 0 and to the bulk drag where the penetration depth is small. Across
// a wall the static excess, factor - 1, is added to the bulk drag at all frequencies: a model.
func (h Hydrodynamics) drag(f, factor float64, perpendicular bool) complex128 {
	ratio := f / h.characteristic()
	root := math.Sqrt(ratio)
	bulk := 1 + complex(root, -root) - complex(0, 2*ratio/9)
	switch {
	case h.Height == 0:
		return bulk * complex(factor, 0)
	case perpendicular:
		return bulk + complex(factor-1, 0)
	}
	static := 1/(1-9.0/16*h.Radius/h.Height) - 1
	return bulk * (1 + (h.reflection(ratio)-1)*complex((factor-1)/static, 0))
}

// reflection returns the factor by which a wall raises the drag along it, to first order in
// R/h, at the frequency ratio f/f_nu: 1/(1 - (9/16)(R/h)[1 - (1-i)/3 sqrt(f/f_nu) + (2i/9) f/f_nu -
// (4/3)(1 - exp(-(1-i)(2h-R)/delta))]), with delta = R sqrt(f_nu/f) (Berg-Sorensen & Flyvbjerg 2004).
func (h Hydrodynamics) reflection(ratio float64) complex128 {
	root := math.Sqrt(ratio)
	gap := (2*h.Height - h.Radius) / h.Radius * root // (2h-R)/delta
	bracket := 1 - complex(root, -root)/3 + complex(0, 2*ratio/9) - 4.0/3*(1-cmplx.Exp(complex(-gap, gap)))
	return 1 / (1 - complex(9.0/16*h.Radius/h.Height, 0)*bracket)
}

// density returns the one-sided power spectral density [m²/Hz] at f [Hz] of a trapped bead:
// (D/pi²) Re g/[(fc + f Im g - f²/f_m)² + (f Re g)²] with g the relative drag, fc and
// D those of the Stokes drag far from walls, and f_m = 6 pi eta R/(2 pi m) (Berg-Sorensen & Flyvbjerg 2004).
func (h Hydrodynamics) density(a Axis, f float64) float64 {
	factor := a.wallFactor()
	corner := a.Corner * factor
	diffusion := 2 * math.Pi * corner * a.Variance
	mass := 4.0 / 3 * math.Pi * h.Radius * h.Radius * h.Radius * h.BeadDensity
	inertial := 6 * math.Pi * h.Viscosity * h.Radius / (2 * math.Pi * mass)
	g := h.drag(f, factor, a.Perpendicular)
	elastic := corner + f*imag(g) - f*f/inertial
	viscous := f * real(g)
	// Far above f_nu the wall formula leaves its range, and its real part may turn negative.
	return math.Max(0, diffusion/(math.Pi*math.Pi)*real(g)/(elastic*elastic+viscous*viscous))
}

// lorentzian returns the one-sided density [m²/Hz] at f [Hz] with constant drag.
func lorentzian(a Axis, f float64) float64 {
	return 2 * a.Variance * a.Corner / (math.Pi * (a.Corner*a.Corner + f*f))
}
