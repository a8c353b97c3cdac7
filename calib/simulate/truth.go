package simulate

import (
	"fmt"
	"math"
)

// Truth describes a recording: what the bead does and how it is sampled. It is
// stored as JSON beside a simulated recording. All numbers are in SI units.
type Truth struct {
	Samples  int     `json:"samples"`    // samples per axis
	Rate     float64 `json:"rate_Hz"`    // sampling rate fs [Hz]
	Exposure float64 `json:"exposure_s"` // exposure W of each sample [s], from 0 to 1/fs
	Axes     []Axis  `json:"axes"`       // one entry per recorded axis
}

// Axis is the truth of one axis. A trapped bead has Corner and Variance; a free
// one has Diffusion instead.
type Axis struct {
	Corner    float64 `json:"corner_Hz,omitempty"`          // corner frequency fc [Hz]
	Variance  float64 `json:"variance_m2,omitempty"`        // thermal variance V = kT/kappa [m²], before blur and noise
	Diffusion float64 `json:"diffusion_m2_per_s,omitempty"` // diffusion coefficient D of a free bead [m²/s]
	Noise     float64 `json:"noise_m,omitempty"`            // standard deviation of the localisation noise [m]
	Mean      float64 `json:"mean_m,omitempty"`             // rest position [m]; of a free bead, where it starts
	Drift     float64 `json:"drift_m,omitempty"`            // linear drift over the whole record [m], centred on Mean
	Lines     []Line  `json:"lines,omitempty"`              // sinusoidal pickup
}

// Line is a sinusoid added to the recorded positions, as mains pickup would be:
// Amplitude sin(2 pi Frequency t + Phase), not blurred by the exposure.
type Line struct {
	Frequency float64 `json:"frequency_Hz"`        // [Hz]
	Amplitude float64 `json:"amplitude_m"`         // half of the peak-to-peak excursion [m]
	Phase     float64 `json:"phase_rad,omitempty"` // [rad]
}

// Validate returns an error that names the first value of the truth that no
// recording can have, or nil.
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
	return nil
}

// exposureSlack lets an exposure of a full frame pass that was written as the
// rounded reciprocal of the rate, such as 0.033333333 s at 30 Hz.
const exposureSlack = 1e-6

func (a Axis) validate() error {
	free := a.Diffusion != 0
	switch {
	case free && (a.Corner != 0 || a.Variance != 0):
		return fmt.Errorf("diffusion coefficient %v m²/s: a bead is either free or has a corner frequency and a variance", a.Diffusion)
	case free && !positive(a.Diffusion):
		return fmt.Errorf("diffusion coefficient %v m²/s: must be positive and finite", a.Diffusion)
	case !free && !positive(a.Corner):
		return fmt.Errorf("corner frequency %v Hz: must be positive and finite", a.Corner)
	case !free && !positive(a.Variance):
		return fmt.Errorf("variance %v m²: must be positive and finite", a.Variance)
	case !(a.Noise >= 0) || math.IsInf(a.Noise, 0):
		return fmt.Errorf("localisation noise %v m: must be 0 or positive", a.Noise)
	case !finite(a.Mean):
		return fmt.Errorf("mean %v m: must be finite", a.Mean)
	case !finite(a.Drift):
		return fmt.Errorf("drift %v m: must be finite", a.Drift)
	}
	for _, l := range a.Lines {
		if !(l.Frequency >= 0) || !finite(l.Frequency) || !finite(l.Amplitude) || !finite(l.Phase) {
			return fmt.Errorf("line of %v m at %v Hz: frequency, amplitude and phase must be finite, the frequency not negative", l.Amplitude, l.Frequency)
		}
	}
	return nil
}

func finite(v float64) bool   { return !math.IsNaN(v) && !math.IsInf(v, 0) }
func positive(v float64) bool { return v > 0 && !math.IsInf(v, 1) }
