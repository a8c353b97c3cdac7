package simulate

import (
	"fmt"
	"math"
)

// Validate returns an error that names the first value of the truth that no
// recording can have, or that this package cannot simulate, or nil.
func (t Truth) Validate() error {
	switch {
	case t.Samples < 1:
		return fmt.Errorf("samples %d: a recording needs at least 1", t.Samples)
	case !positive(t.Rate):
		return fmt.Errorf("sampling rate %v Hz: must be positive and finite", t.Rate)
	case !(t.Exposure >= 0):
		return fmt.Errorf("exposure %v s: must be 0 or positive", t.Exposure)
	case t.Exposure*t.Rate > 1+exposureSlack:
		return fmt.Errorf("exposure %v s: longer than the sampling interval of %v s", t.Exposure, 1/t.Rate)
	case len(t.Axes) == 0:
		return fmt.Errorf("no axes: at least one is needed")
	}
	for i, a := range t.Axes {
		if err := a.validate(); err != nil {
			return fmt.Errorf("axis %d: %w", i+1, err)
		}
	}
	for _, check := range []func() error{t.validateSpectrum, t.validateMixing, t.validateStage, t.validateEvents} {
		if err := check(); err != nil {
			return err
		}
	}
	return t.Faults.validate()
}

// exposureSlack lets an exposure of a full frame pass that was written as the
// rounded reciprocal of the rate, such as 0.033333334 s at 30 Hz.
const exposureSlack = 1e-6

func (a Axis) validate() error {
	if err := a.validateMotion(); err != nil {
		return err
	}
	switch {
	case !(a.Noise >= 0) || math.IsInf(a.Noise, 0):
		return fmt.Errorf("localisation noise %v m: must be 0 or positive", a.Noise)
	case !finite(a.Mean):
		return fmt.Errorf("mean %v m: must be finite", a.Mean)
	case !finite(a.Drift):
		return fmt.Errorf("drift %v m: must be finite", a.Drift)
	case a.WallFactor != 0 && !(a.WallFactor >= 1 && finite(a.WallFactor)):
		return fmt.Errorf("wall factor %v: a wall never lowers the drag, so 1 or more", a.WallFactor)
	}
	for _, l := range a.Lines {
		if !(l.Frequency >= 0) || !finite(l.Frequency) || !finite(l.Amplitude) || !finite(l.Phase) {
			return fmt.Errorf("line of %v m at %v Hz: frequency, amplitude and phase must be finite, the frequency not negative", l.Amplitude, l.Frequency)
		}
	}
	return nil
}

func (a Axis) validateMotion() error {
	free, trapped := a.Diffusion != 0, a.Corner != 0 || a.Variance != 0
	switch {
	case free && trapped, a.Fixed && (free || trapped):
		return fmt.Errorf("corner frequency %v Hz, diffusion coefficient %v m²/s, fixed %v: a bead is trapped, free or fixed, and only one of them", a.Corner, a.Diffusion, a.Fixed)
	case a.Fixed:
	case free && !positive(a.Diffusion):
		return fmt.Errorf("diffusion coefficient %v m²/s: must be positive and finite", a.Diffusion)
	case !free && !positive(a.Corner):
		return fmt.Errorf("corner frequency %v Hz: must be positive and finite", a.Corner)
	case !free && !positive(a.Variance):
		return fmt.Errorf("variance %v m²: must be positive and finite", a.Variance)
	}
	switch {
	case a.Quartic != 0 && !trapped:
		return fmt.Errorf("quartic term %v: only a trapped bead has one", a.Quartic)
	case !(a.Quartic >= -0.01 && a.Quartic <= 1):
		return fmt.Errorf("quartic term %v: from -0.01, below which the bead soon leaves the trap, to 1", a.Quartic)
	}
	return nil
}

// trapped tells whether the axis is that of a bead in a harmonic trap.
func (a Axis) trapped() bool { return a.Corner != 0 && a.Quartic == 0 }

func (t Truth) validateSpectrum() error {
	if !t.synthesised() {
		return nil
	}
	for i, a := range t.Axes {
		if !a.trapped() {
			return fmt.Errorf("axis %d: frequency-dependent drag and a photodiode need a harmonic trap", i+1)
		}
		if h := t.Hydrodynamics; h != nil {
			if err := h.validate(a); err != nil {
				return fmt.Errorf("axis %d: %w", i+1, err)
			}
		}
	}
	if p := t.Photodiode; p != nil {
		return p.validate()
	}
	return nil
}

func (t Truth) validateMixing() error {
	if !finite(t.Rotation) {
		return fmt.Errorf("rotation %v rad: must be finite", t.Rotation)
	}
	if t.Rotation != 0 && len(t.Axes) < 2 {
		return fmt.Errorf("rotation %v rad: needs two axes, there is %d", t.Rotation, len(t.Axes))
	}
	for _, l := range t.Leaks {
		if !t.has(l.From) || !t.has(l.Into) || l.From == l.Into {
			return fmt.Errorf("leak from axis %d into axis %d: needs two different axes, counted from 0, of %d", l.From, l.Into, len(t.Axes))
		}
		if !finite(l.Share) {
			return fmt.Errorf("leak from axis %d: share %v must be finite", l.From, l.Share)
		}
	}
	return nil
}

func (t Truth) has(axis int) bool { return axis >= 0 && axis < len(t.Axes) }

func finite(v float64) bool   { return !math.IsNaN(v) && !math.IsInf(v, 0) }
func positive(v float64) bool { return v > 0 && !math.IsInf(v, 1) }
