package simulate

// Truth describes a recording: what the bead does, how it is sampled, and what
// goes wrong. It is stored as JSON beside a simulated recording. All numbers are in SI units.
type Truth struct {
	Samples  int     `json:"samples"`    // samples per axis
	Rate     float64 `json:"rate_Hz"`    // sampling rate fs [Hz]
	Exposure float64 `json:"exposure_s"` // exposure W of each sample [s], from 0 to 1/fs
	Axes     []Axis  `json:"axes"`       // one entry per recorded axis

	Hydrodynamics *Hydrodynamics `json:"hydrodynamics,omitempty"` // frequency-dependent drag on every axis; nil is constant drag
	Photodiode    *Photodiode    `json:"photodiode,omitempty"`    // partial low-pass of the detector; nil is none
	Stage         *Stage         `json:"stage,omitempty"`         // moving stage; nil is a stage at rest

	Rotation float64 `json:"rotation_rad,omitempty"` // angle from the first recorded axis to the first axis of the trap, towards the second [rad]
	Leaks    []Leak  `json:"leaks,omitempty"`        // cross-talk between recorded axes
	Events   []Event `json:"events,omitempty"`       // what happens to the bead during the record, in order of time
	Faults   Faults  `json:"faults,omitzero"`        // what the detector or the computer spoils
}

// Axis is the truth of one axis. A trapped bead has Corner and Variance; a free
// one has Diffusion instead; a fixed one has none of them.
type Axis struct {
	Name      string  `json:"name,omitempty"`               // such as x; used in headers
	Corner    float64 `json:"corner_Hz,omitempty"`          // corner frequency fc [Hz]
	Variance  float64 `json:"variance_m2,omitempty"`        // thermal variance V = kT/kappa [m²], before blur and noise
	Diffusion float64 `json:"diffusion_m2_per_s,omitempty"` // diffusion coefficient D of a free bead [m²/s]
	Fixed     bool    `json:"fixed,omitempty"`              // stuck to the surface for the whole record, or no bead at all
	Noise     float64 `json:"noise_m,omitempty"`            // standard deviation of the localisation noise [m]
	Mean      float64 `json:"mean_m,omitempty"`             // rest position [m]; of a free bead, where it starts
	Drift     float64 `json:"drift_m,omitempty"`            // linear drift over the whole record [m], centred on Mean
	Lines     []Line  `json:"lines,omitempty"`              // sinusoidal pickup

	// Quartic makes the trap anharmonic: its potential is kT(u²/2 + Quartic u⁴/4) with
	// u = x/sqrt(V). From -0.01, where the bead sits 25 kT deep, to 1.
	Quartic float64 `json:"quartic,omitempty"`

	WallFactor    float64 `json:"wall_factor,omitempty"`   // static drag over that far from walls; 0 means 1; enters with Hydrodynamics only
	Perpendicular bool    `json:"perpendicular,omitempty"` // normal to the wall; enters with Hydrodynamics only
}

// Line is a sinusoid added to the recorded positions, as mains pickup would be:
// Amplitude sin(2 pi Frequency t + Phase), not blurred by the exposure.
type Line struct {
	Frequency float64 `json:"frequency_Hz"`        // [Hz]
	Amplitude float64 `json:"amplitude_m"`         // half of the peak-to-peak excursion [m]
	Phase     float64 `json:"phase_rad,omitempty"` // [rad]
}

// Leak is cross-talk: Share times the motion of one axis is added to another.
type Leak struct {
	From  int     `json:"from"`  // index of the axis that leaks, from 0
	Into  int     `json:"into"`  // index of the axis that receives, from 0
	Share float64 `json:"share"` // dimensionless
}

func (a Axis) wallFactor() float64 {
	if a.WallFactor == 0 {
		return 1
	}
	return a.WallFactor
}

// synthesised tells whether the motion comes from its spectrum.
func (t Truth) synthesised() bool {
	return t.Hydrodynamics != nil || t.Photodiode != nil
}

// mixed tells whether axes are combined before noise is added.
func (t Truth) mixed() bool {
	return t.Rotation != 0 || len(t.Leaks) > 0
}
