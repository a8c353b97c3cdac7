package simulate

import (
	"fmt"
	"math"

	"beadwell/calib/drag"
)

// Hydrodynamics makes the drag depend on frequency, as the inertia of the fluid
// dragged along with the bead, and of the bead itself, has it. The drag is that of
// package drag; its static wall factor is that of each axis.
type Hydrodynamics struct {
	Radius      float64   `json:"radius_m"`               // bead radius R [m]
	Viscosity   float64   `json:"viscosity_Pa_s"`         // dynamic viscosity of the fluid [Pa s]
	Density     float64   `json:"density_kg_per_m3"`      // density of the fluid [kg/m³]
	BeadDensity float64   `json:"bead_density_kg_per_m3"` // density of the bead [kg/m³]
	Height      float64   `json:"height_m,omitempty"`     // bead centre above the nearer wall h [m]; 0 means far from all walls
	Shape       WallShape `json:"wall_shape,omitempty"`   // how the part of the wall depends on frequency; empty is what package drag recommends
}

// validate checks the hydrodynamics of an axis.
func (h Hydrodynamics) validate(a Axis) error {
	if !positive(h.BeadDensity) {
		return fmt.Errorf("hydrodynamics: bead density %v kg/m³: must be positive and finite", h.BeadDensity)
	}
	if _, known := wallShapes[h.Shape]; !known {
		return fmt.Errorf("hydrodynamics: wall shape %q: use %q, %q, %q, or none", h.Shape, PublishedShape, PointForceShape, BulkShape)
	}
	if h.Height == 0 && a.wallFactor() != 1 {
		return fmt.Errorf("hydrodynamics: a wall factor of %v needs the height", a.WallFactor)
	}
	if err := h.frequency(a).Check(); err != nil {
		return fmt.Errorf("hydrodynamics: %w", err)
	}
	return nil
}

// WallShape names the way in which the wall's part of the drag depends on frequency; see
// package drag for the forms.
type WallShape string

// The shapes of package drag. An empty one is drag.Recommended.
const (
	PublishedShape  WallShape = "published"
	PointForceShape WallShape = "point force"
	BulkShape       WallShape = "bulk shape"
)

// wallShapes holds the shapes by their names.
var wallShapes = map[WallShape]drag.Shape{
	"": drag.Recommended, PublishedShape: drag.Published, PointForceShape: drag.PointForce, BulkShape: drag.BulkShape,
}

// frequency returns the drag on an axis.
func (h Hydrodynamics) frequency(a Axis) drag.Frequency {
	d := drag.Frequency{Radius: h.Radius, Height: h.Height, Viscosity: h.Viscosity, Density: h.Density,
		StaticFactor: a.wallFactor(), Perpendicular: a.Perpendicular, Shape: wallShapes[h.Shape]}
	if h.Height == 0 {
		d.Height = math.Inf(1)
	}
	return d
}

// spectrum returns the one-sided power spectral density [m²/Hz] of a trapped bead as a
// function of the frequency f [Hz]: (D/pi²) Re g/[(fc + f Im g - f²/f_m)² + (f Re g)²] with g the
// drag over that of Stokes, fc and D those of the Stokes drag far from walls, and f_m = 6 pi
// eta R/(2 pi m) (Berg-Sorensen & Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594).
func (h Hydrodynamics) spectrum(a Axis) func(f float64) float64 {
	resistance := h.frequency(a)
	corner := a.Corner * a.wallFactor()
	diffusion := 2 * math.Pi * corner * a.Variance
	mass := 4.0 / 3 * math.Pi * h.Radius * h.Radius * h.Radius * h.BeadDensity
	inertial := drag.Stokes(h.Viscosity, h.Radius) / (2 * math.Pi * mass)
	return func(f float64) float64 {
		g := resistance.Factor(f)
		elastic := corner + f*imag(g) - f*f/inertial
		viscous := f * real(g)
		// Far above f_nu some shapes leave their range, and their real part may turn negative.
		return math.Max(0, diffusion/(math.Pi*math.Pi)*real(g)/(elastic*elastic+viscous*viscous))
	}
}

// lorentzian returns the one-sided density [m²/Hz] at f [Hz] with constant drag.
func lorentzian(a Axis, f float64) float64 {
	return 2 * a.Variance * a.Corner / (math.Pi * (a.Corner*a.Corner + f*f))
}
