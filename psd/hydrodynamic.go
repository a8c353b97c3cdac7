package psd

import (
	"errors"
	"fmt"
	"math"

	"beadwell/calib/relaxation"
)

// Hydrodynamic is the spectrum of a trapped bead whose drag depends on frequency, as
// the inertia of the fluid around it has it, seen by a detector that may lose part of
// its signal at high frequency. The zero value is the relaxation process.
//
// The position has the one-sided spectrum
//
//	P(f) = (D/pi^2) Re g / [(fc + f Im g - f^2/f_m)^2 + (f Re g)^2],  D = 2 pi fc V,
//
// with g = gamma(f)/gamma(0), fc = kappa/(2 pi gamma(0)) and V = kT/kappa
// (Berg-Sorensen and Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594; docs/method.md, Eq. 43). By equipartition
// its integral is V as long as Drag is the response of a causal system.
//
// A photodiode multiplies it by alpha^2 + (1 - alpha^2)/(1 + (f/f3dB)^2) (Berg-Sorensen
// et al., J. Appl. Phys. 93 (2003) 3167). What is recorded is blurred by the exposure
// and aliased by the sampling; white noise q comes on top.
type Hydrodynamic struct {
	// Drag returns gamma(f)/gamma(0) at f [Hz] > 0, for the time factor
	// exp(-i 2 pi f t): its real part dissipates, a negative imaginary part is inertia
	// of the fluid. Where the real part is not positive the spectrum counts as 0. Nil is a
	// constant drag. With a DragKey it must be safe for concurrent use; without, it is called from one goroutine.
	Drag func(f float64) complex128
	// DragKey, of a comparable type, tells Drag from other functions: equal keys are equal functions. What was
	// computed with it is then used again. Nil computes all anew.
	DragKey any
	// MassCorner is f_m = gamma(0)/(2 pi m), m the mass of the bead [Hz]; 0 and +Inf
	// leave out the inertia of the bead.
	MassCorner float64
	// Alpha is the share of the signal's amplitude that the photodiode gives at once,
	// from 0 to 1; it counts only with F3dB.
	Alpha float64
	// F3dB is the corner frequency of the rest [Hz]; 0 is a detector without low-pass.
	F3dB float64
	// FitAlpha and FitF3dB make them free: they are fitted together with the other
	// parameters, and a given F3dB only says where to search, within a factor of four.
	FitAlpha, FitF3dB bool
}

// Check returns an error that names the first field that is not possible.
func (h Hydrodynamic) Check() error {
	switch {
	case !(h.MassCorner >= 0):
		return fmt.Errorf("corner frequency of the mass %g Hz is not a positive number", h.MassCorner)
	case !(h.Alpha >= 0 && h.Alpha <= 1):
		return fmt.Errorf("photodiode alpha %g is not a share from 0 to 1", h.Alpha)
	case !(h.F3dB >= 0):
		return fmt.Errorf("photodiode f3dB %g Hz is not a positive number", h.F3dB)
	case h.FitAlpha && !h.FitF3dB && h.F3dB == 0:
		return errors.New("photodiode alpha cannot be fitted without f3dB, which is neither given nor fitted")
	}
	return nil
}

// Position returns the one-sided spectrum of the position itself [m2/Hz] at f [Hz], for
// a corner frequency [Hz] and a variance V [m2]: neither detector, nor exposure, nor sampling.
func (h Hydrodynamic) Position(f, corner, variance float64) float64 {
	return 2 * variance * h.site(f, 1).moving(corner)
}

// Response returns the share of the power at f [Hz] that the detector passes.
func (h Hydrodynamic) Response(f float64) float64 {
	return h.diode().power(f)
}

// Form returns what Options.Form takes: the Whittle likelihood of this spectrum as it is
// recorded at a sampling rate [Hz] with an exposure of each sample [s]. The fields must pass Check.
//
// The expectation of each block is that of a finite record: the difference between the
// mean periodogram and the spectrum is that of the relaxation process of the same fc and V, which has
// it in closed form. Against the spectrum it is of the relative order 1/(2 pi fc T).
// The likelihood knows its own Density, by which Fit.Spectrum draws it.
// With a free photodiode it is not safe for concurrent use by several goroutines; else it is.
func (h Hydrodynamic) Form(rate, exposure float64) func(relaxation.Blocks, float64) relaxation.Likelihood {
	return func(b relaxation.Blocks, scale float64) relaxation.Likelihood {
		w := newWhittle(h.lattice(b, rate, exposure), b, scale)
		if h.FitAlpha || h.FitF3dB {
			return newFreeDiode(w, h)
		}
		w.model = w.lattice.model(h.diode().power, h.diode().prompt())
		return w
	}
}

// site is a frequency at which the spectrum is needed, with the drag there. Frequencies are
// in units of the sampling rate, or in any other, that of the corner too.
type site struct {
	hz      float64 // f [Hz]
	square  float64 // f^2
	drag    float64 // Re g
	elastic float64 // f Im g - f^2/f_m
	viscous float64 // (f Re g)^2
	weight  float64 // of the site in a sum, over pi
}

// site returns the site of f [Hz] for frequencies in units of a rate [Hz].
func (h Hydrodynamic) site(f, rate float64) site {
	phi := f / rate
	s := site{hz: f, square: phi * phi, drag: 1, viscous: phi * phi, weight: 1 / math.Pi}
	if h.MassCorner > 0 {
		s.elastic = -phi * f / h.MassCorner
	}
	if h.Drag == nil || f == 0 {
		return s
	}
	g := h.Drag(f)
	s.drag = math.Max(0, real(g))
	s.elastic += phi * imag(g)
	s.viscous = s.square * s.drag * s.drag
	if s.drag == 0 {
		s.viscous = s.square // any finite value: it divides 0
	}
	return s
}

// moving returns the two-sided spectrum for V = 1, times pi and the weight, at the corner x.
func (s site) moving(x float64) float64 {
	u := x + s.elastic
	return x * s.weight * s.drag / (u*u + s.viscous)
}
