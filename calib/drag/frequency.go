package drag

import (
	"fmt"
	"math"
	"math/cmplx"
)

// Shape is how the wall's part of the drag depends on frequency.
type Shape int

const (
	// Recommended is Published for parallel motion from h/R = 2 on, and PointForce for parallel motion
	// below that and for perpendicular motion.
	Recommended Shape = iota
	// Published is the form of Berg-Sorensen and Flyvbjerg, Rev. Sci. Instrum. 75
	// (2004) 594, to first order in R/h, for parallel motion alone. Against the exact
	// flow Re g is 6 % low at h/R = 2 and R/delta = 0.1 (f = f_nu/100), 5 % low at
	// h/R = 5 and 1.2 % low at 20 (TestOscillating).
	Published
	// PointForce is the exact reaction of the wall on an oscillating point force, with
	// the finite size of the sphere to the order that gives the right added mass. It is
	// off by at most 0.15 % at h/R = 5, 0.9 % at 3 and 3 % at 2 over all frequencies, and
	// for parallel motion up to R/delta = 0.1 by 0.4 % at 2 (TestOscillating).
	PointForce
	// BulkShape multiplies the drag of bulk by the static wall factor. It does not
	// tend to bulk at high frequency, and is 10 % high at R/delta = 0.1 and h/R <= 5.
	BulkShape
)

// Frequency is the drag of a sphere that oscillates in a fluid, in bulk or near a wall,
// with the inertia of the fluid. SI units.
type Frequency struct {
	Radius        float64 // R [m]
	Height        float64 // height h of the centre above the nearer wall [m]; +Inf for bulk
	Viscosity     float64 // eta [Pa s]
	Density       float64 // density rho of the fluid [kg/m3]
	StaticFactor  float64 // wall factor lambda at zero frequency, from Chamber.Wall; 1 in bulk
	Perpendicular bool    // motion at right angles to the wall; else parallel
	Shape         Shape
}

// Check returns an error that names the first field that is not possible.
func (d Frequency) Check() error {
	switch {
	case !(d.Radius > 0) || math.IsInf(d.Radius, 1):
		return fmt.Errorf("radius %g m is not a positive length", d.Radius)
	case !(d.Viscosity > 0) || math.IsInf(d.Viscosity, 1):
		return fmt.Errorf("viscosity %g Pa s is not a positive number", d.Viscosity)
	case !(d.Density > 0) || math.IsInf(d.Density, 1):
		return fmt.Errorf("density %g kg/m3 of the fluid is not a positive number", d.Density)
	case !(d.Height > d.Radius):
		return fmt.Errorf("height %g m of the centre is not above the radius %g m: the sphere would touch the wall", d.Height, d.Radius)
	case !(d.StaticFactor >= 1) || math.IsInf(d.StaticFactor, 1):
		return fmt.Errorf("static wall factor %g is not a number from 1", d.StaticFactor)
	case d.Shape < Recommended || d.Shape > BulkShape:
		return fmt.Errorf("shape %d of the frequency dependence is not known", d.Shape)
	case d.Shape == Published && d.Perpendicular:
		return fmt.Errorf("the published form is for motion parallel to the wall: use the recommended shape")
	}
	return nil
}

// Approximate reports whether Factor is a form whose frequency dependence near the
// wall is not derived for this motion (BulkShape near a wall).
func (d Frequency) Approximate() bool {
	return d.shape() == BulkShape && !d.bulk()
}

// Nu returns f_nu = eta/(rho pi R^2) [Hz], where the penetration depth
// delta = sqrt(eta/(rho pi f)) is the radius.
func (d Frequency) Nu() float64 {
	return d.Viscosity / (d.Density * math.Pi * d.Radius * d.Radius)
}

// Factor returns g = gamma(f)/(6 pi eta R) at a frequency f [Hz], for a time factor
// exp(-i 2 pi f t): Re g > 0 dissipates, Im g < 0 is inertia of the fluid. f = 0 gives
// StaticFactor, and a negative f the complex conjugate. Fields must pass Check.
//
// In bulk g = 1 + alpha + alpha^2/9, alpha = (1-i) sqrt(f/f_nu) (Stokes 1851; Landau and
// Lifshitz, Fluid Mechanics, Sect. 24). Near a wall
//
//	g = g_bulk/(1 - w B),  w = 1 - 1/StaticFactor,
//
// with B = 1 at f = 0. The published forms have w = (9/16) R/h, the first order of Faxen
// 1923; putting the exact static factor there scales the correction by the wall and
// nothing else. Published: B = 1 - alpha/3 - alpha^2/9 - (4/3)(1 - exp(-(2h/R-1) alpha)) (from
// memory). It does not quite reach bulk at high frequency: B tends to -1/3 where the
// penetration depth lies between R and h. PointForce:
// B = F (1 + alpha + alpha^2/3)^2/g_bulk, F the reaction of the wall, which reaches
// bulk and then the added masses (3/16)(R/h)^3 and (3/8)(R/h)^3 of Lamb, Hydrodynamics, Sect. 99
// (parallel, perpendicular). docs/method.md, Eqs 44 to 47.
func (d Frequency) Factor(f float64) complex128 {
	if f < 0 {
		return cmplx.Conj(d.Factor(-f))
	}
	alpha := d.alpha(f)
	return d.near(d.shape(), alpha)
}

// ModelU returns the standard model uncertainty of Factor at f [Hz], relative to
// its modulus, apart from that of StaticFactor. It is 0 in bulk and at f = 0. For
// PointForce it is half the gap between two ways to carry the reaction beyond first
// order in w; for the other shapes it is their gap to PointForce. The error against the
// exact flow is within 2.4 times this wherever it was computed (TestOscillating).
func (d Frequency) ModelU(f float64) float64 {
	if d.bulk() {
		return 0
	}
	alpha := d.alpha(math.Abs(f))
	best := d.near(PointForce, alpha)
	if d.shape() != PointForce {
		return cmplx.Abs(d.near(d.shape(), alpha)-best) / cmplx.Abs(best)
	}
	other := bulkFactor(alpha) * (1 + complex(d.StaticFactor-1, 0)*d.pointForce(alpha))
	return cmplx.Abs(other-best) / cmplx.Abs(best) / 2
}

// bulk reports whether there is no wall.
func (d Frequency) bulk() bool { return d.StaticFactor == 1 || math.IsInf(d.Height, 1) }

// nearContact is h/R below which the first order in R/h of the published form fails: at 2 it is 6 % off, and at
// 1.1 the corner frequency of a spectrum up to f_nu/100 would be 10 % off by it, to the wrong side.
const nearContact = 2

func (d Frequency) shape() Shape {
	switch {
	case d.Shape != Recommended:
		return d.Shape
	case d.Perpendicular, d.Height < nearContact*d.Radius:
		return PointForce
	}
	return Published
}

// alpha is (1-i) sqrt(f/f_nu) = (1-i) R/delta.
func (d Frequency) alpha(f float64) complex128 {
	r := math.Sqrt(f / d.Nu())
	return complex(r, -r)
}

func bulkFactor(alpha complex128) complex128 { return 1 + alpha + alpha*alpha/9 }

// near is Factor for one shape.
func (d Frequency) near(shape Shape, alpha complex128) complex128 {
	bulk := bulkFactor(alpha)
	if d.bulk() {
		return bulk
	}
	w := complex(1-1/d.StaticFactor, 0)
	switch shape {
	case BulkShape:
		return complex(d.StaticFactor, 0) * bulk
	case Published:
		return bulk / (1 - w*d.published(alpha))
	}
	return bulk / (1 - w*d.pointForce(alpha))
}

// published is B of Berg-Sorensen and Flyvbjerg 2004; (2i/9) f/f_nu = -alpha^2/9.
func (d Frequency) published(alpha complex128) complex128 {
	path := complex(2*d.Height/d.Radius-1, 0)
	return 1 - alpha/3 - alpha*alpha/9 - 4.0/3*(1-cmplx.Exp(-path*alpha))
}

// pointForce is B of the exact reaction. The sphere acts on the fluid around it
// like a point force of 1 + alpha + alpha^2/3 times Stokes, its drag and the inertia of
// the fluid it displaces, and by reciprocity feels what comes back in the same proportion.
func (d Frequency) pointForce(alpha complex128) complex128 {
	outgoing := 1 + alpha + alpha*alpha/3
	return reaction(d.Perpendicular, real(alpha)*d.Height/d.Radius) * outgoing * outgoing / bulkFactor(alpha)
}
