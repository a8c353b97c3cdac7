package calib

import "reflect"

var floatType = reflect.TypeFor[float64]()

// SchemaVersion names the layout of a stored Result. Keys are added under the
// same version; a key never changes its meaning or unit.
const SchemaVersion = "beadwell-result/1"

// Result is the calibration of one recording: everything that any output is
// made from, and the contract of the JSON file. It is a plain value that is
// stored and read back without loss. All numbers are SI.
type Result struct {
	Schema     string      `json:"schema"`                // layout of this object, with its version
	Program    Program     `json:"program"`               // what made the result
	Created    string      `json:"created,omitempty"`     // RFC 3339; the only field that depends on the clock
	Input      Input       `json:"input"`                 // the file that was read
	ReadAs     ReadAs      `json:"read_as"`               // how the file was understood
	Settings   []Setting   `json:"settings"`              // every setting that was in force
	Role       string      `json:"role,omitempty"`        // of the recording: "trapped", "free", "driven", "background"
	Choices    *Choices    `json:"choices,omitempty"`     // that are no settings; absent when none was made
	Recording  Recording   `json:"recording"`             // the samples that were analysed
	Medium     Medium      `json:"medium"`                // the liquid as it was used
	Bead       Bead        `json:"bead"`                  // the bead as it was used
	Axes       []Axis      `json:"axes"`                  // the calibration of each axis, in the order of the file
	TrapAxes   *TrapAxes   `json:"trap_axes,omitempty"`   // of the trap itself; with two or three recorded axes
	Verdict    Verdict     `json:"verdict"`               // whether the calibration may be used
	Diagnosis  *Diagnosis  `json:"diagnosis,omitempty"`   // single causes that would reconcile the routes; only when they disagree
	MonteCarlo *MonteCarlo `json:"monte_carlo,omitempty"` // propagation of distributions, when it was asked for
	Findings   []Finding   `json:"findings"`              // never null
	Checks     []Check     `json:"checks"`                // of the recording, those that found nothing too
}

// Program says what made the result.
type Program struct {
	Name    string   `json:"name"`              // beadwell
	Version string   `json:"version"`           // of the program, with the commit when it is known
	Command []string `json:"command,omitempty"` // the command line, program name first
}

// Input identifies the file that was read.
type Input struct {
	Name      string `json:"name"`                 // as given, e.g. "tonight/run7.csv"; "-" for standard input
	NameBytes string `json:"name_bytes,omitempty"` // hexadecimal; in a stored result whose name is no UTF-8
	Bead      string `json:"bead,omitempty"`       // identifier when the file holds several beads
	Size      int64  `json:"size"`                 // bytes
	SHA256    string `json:"sha256"`               // hexadecimal
}

// ReadAs tells how the file was understood.
type ReadAs struct {
	Line    string   `json:"line"`            // one sentence for a person
	Columns []Column `json:"columns"`         // in the order of the file
	Notes   []string `json:"notes,omitempty"` // what was unusual, a sentence each
}

// Column is one column of the file and the use that was made of it.
type Column struct {
	Header string `json:"header"` // as it stands in the file
	Role   string `json:"role"`   // "time", "x", "y", "z", "stage", "ignored"
	Unit   string `json:"unit"`   // as it was read; empty when there is none
}

// Setting is one setting that was in force, with its origin.
type Setting struct {
	Key                 string `json:"key"`                  // e.g. "bead.diameter"
	Axis                string `json:"axis,omitempty"`       // empty: all axes
	Text                string `json:"text"`                 // as it was given
	Value               Float  `json:"value"`                // SI; null for a word
	Unit                string `json:"unit,omitempty"`       // of the value, SI; absent for a word
	StandardUncertainty Float  `json:"standard_uncertainty"` // SI; null when none was stated
	Origin              string `json:"origin"`               // "flag", "track list", "session file", "header", "default"
	Where               string `json:"where,omitempty"`      // e.g. "session.toml:4:1"
	Assumed             bool   `json:"assumed,omitempty"`    // a default that matters
}

// Choices are what the user asked of the calibration beside the settings.
type Choices struct {
	Adopt string `json:"adopt,omitempty"`             // the route to adopt, "drag", "amplitude", "free-bead", "driven" or "flow", whatever the cross-check says
	Use   string `json:"use,omitempty"`               // "good": the longest part without what is bad
	Draws int    `json:"monte_carlo_draws,omitempty"` // of the propagation of distributions
	Seed  string `json:"monte_carlo_seed,omitempty"`  // of it, decimal
}

// Recording describes the samples that were analysed.
type Recording struct {
	Rate       Float  `json:"rate_hz"`               // sampling rate
	RateOrigin string `json:"rate_origin"`           // what the rate rests on, in words
	Samples    int    `json:"samples"`               // on the regular grid, missing ones included
	Missing    int    `json:"missing"`               // samples missing on every axis
	Duration   Float  `json:"duration_s"`            // samples over rate
	Exposure   Float  `json:"exposure_s"`            // time over which a position is averaged; 0 for a detector
	Jitter     Float  `json:"jitter_s"`              // rms of the stamps about the grid; null without stamps
	Start      Float  `json:"start_s"`               // stamp of the first sample; null without stamps
	UsedFrom   *Float `json:"used_from_s,omitempty"` // beginning of the part that was used, on the clock of the recording; absent when all was
	UsedTo     *Float `json:"used_to_s,omitempty"`   // its end
	Parts      *Parts `json:"parts,omitempty"`       // into which it was cut because it is too long for the memory; absent when it was not
}

// Medium is the liquid as it was used.
type Medium struct {
	Fluid         string   `json:"fluid"`          // name, with its amount; empty when the viscosity was stated
	Temperature   Quantity `json:"temperature"`    // K
	Viscosity     Quantity `json:"viscosity"`      // Pa s
	Density       Quantity `json:"density"`        // kg/m3
	ThermalEnergy Quantity `json:"thermal_energy"` // kT, J
	Source        string   `json:"source"`         // of the viscosity, in words
}

// Bead is the bead as it was used.
type Bead struct {
	Diameter Quantity `json:"diameter"` // m
	Height   Quantity `json:"height"`   // centre above the nearer surface, m; null: far from any
}

// Axis is the calibration of one axis.
type Axis struct {
	Name          string                 `json:"axis"`                     // "x", "y" or "z"
	Orientation   string                 `json:"orientation"`              // "parallel" or "perpendicular" to the surface
	Mean          Float                  `json:"mean_m"`                   // mean position
	Wall          Wall                   `json:"wall"`                     // effect of the surface on the drag
	Drag          Quantity               `json:"drag"`                     // computed, Stokes times wall factor, N s/m
	Adopted       Adopted                `json:"adopted"`                  // the stiffness to use
	Estimates     []Estimate             `json:"estimates"`                // in the order of the Leg constants, those of a moving stage last
	Covariance    Covariance             `json:"covariance"`               // of the logarithms of the estimates
	CrossCheck    CrossCheck             `json:"cross_check"`              // comparison of the estimates
	MeasuredDrag  Quantity               `json:"measured_drag"`            // kT / D of the spectrum, N s/m
	DragRatio     Quantity               `json:"drag_ratio"`               // measured over computed drag, 1
	Spectrum      Spectrum               `json:"power_spectrum"`           // fit of the spectrum
	Equipartition Equipartition          `json:"equipartition"`            // variance of the positions, and the potential
	Displacement  MeanSquareDisplacement `json:"mean_square_displacement"` // fit of the mean-square displacement
	Trace         Trace                  `json:"trace"`                    // position against time, decimated
	Driven        *Driven                `json:"driven,omitempty"`         // of the axis that follows a moving stage
	Free          *FreeBead              `json:"free,omitempty"`           // of a recording with the laser off
	FreeDrag      *FreeDrag              `json:"free_drag,omitempty"`      // of a trapped recording: what one with the laser off says of its drag
	Background    *Background            `json:"background,omitempty"`     // the noise without a bead, where it was recorded
	Sensitivity   *Sensitivity           `json:"sensitivity,omitempty"`    // of a recording in detector units
	Photodiode    *Photodiode            `json:"photodiode,omitempty"`     // of a detector whose low-pass was stated or fitted
}

// Wall is the effect of the surface on the drag.
type Wall struct {
	Factor     Quantity `json:"factor"`      // drag over Stokes drag, 1; used
	Faxen      Float    `json:"faxen"`       // Faxen's fifth-order value for parallel motion, for comparison; null when perpendicular or far
	FaxenError Float    `json:"faxen_error"` // (Faxen - exact) / exact
	Method     string   `json:"method"`      // of the factor, in words
}

// The names of the stiffness estimates.
const (
	LegSpectrum          = "power_spectrum"                // 2 pi gamma fc
	LegEquipartition     = "equipartition"                 // kT / variance
	LegDisplacement      = "mean_square_displacement"      // kT / half the plateau
	LegSpectrumAmplitude = "power_spectrum_amplitude"      // kT / variance of the fitted spectrum
	LegDisplacementTime  = "mean_square_displacement_time" // gamma / relaxation time
)

// The two routes from a recording to a stiffness.
const (
	RouteDrag      = "drag"      // corner frequency or relaxation time, times Stokes drag and wall factor
	RouteAmplitude = "amplitude" // kT over variance, plateau or spectrum amplitude
)

// Estimate is one stiffness estimate.
type Estimate struct {
	Leg       string   `json:"leg"`       // which estimate: "power_spectrum", "equipartition", "mean_square_displacement" and so on
	Route     string   `json:"route"`     // "drag" or "amplitude"
	Stiffness Quantity `json:"stiffness"` // N/m
}

// Covariance holds the covariance of ln(stiffness) over the legs named, in that
// order; an entry of a withheld leg is null.
type Covariance struct {
	Legs        []string  `json:"legs"`        // estimates, in the order of rows and columns
	Statistical [][]Float `json:"statistical"` // inputs taken as exact
	Combined    [][]Float `json:"combined"`    // with the stated uncertainties of the inputs
}

// CrossCheck compares the estimates of one axis.
//
// Equality tests that the stiffness estimates are one and the same number. They
// share the data, so the test uses their joint covariance. Routes tests the two
// routes alone: the measured against the computed drag. Amplitudes compares the
// estimates of the amplitude route with each other; they are nearly one
// statistic, so agreement there says little.
type CrossCheck struct {
	Equality   Test   `json:"equality"`         // of all estimates
	Routes     Test   `json:"routes"`           // of the route through drag and that through amplitude
	Amplitudes Test   `json:"amplitudes"`       // of the estimates of the amplitude route
	Free       *Test  `json:"free,omitempty"`   // drag of the free bead against the computed one and the one measured in the trap
	Driven     *Test  `json:"driven,omitempty"` // driven estimate against drag leg and amplitude of the spectrum
	Text       string `json:"text"`             // what the tests say, for a person
}

// Test is a chi-square test.
type Test struct {
	ChiSquare         Float  `json:"chi_square"`          // statistical
	DegreesOfFreedom  int    `json:"degrees_of_freedom"`  // of both chi-squares
	PValue            Float  `json:"p_value"`             // inputs taken as exact
	ChiSquareCombined Float  `json:"chi_square_combined"` // with the stated uncertainties of the inputs
	PValueCombined    Float  `json:"p_value_combined"`    // of it
	MeanDifference    Float  `json:"log_difference"`      // routes: ln(drag route) - ln(amplitude route)
	Reason            string `json:"reason,omitempty"`    // why the test could not be made
}

// Adopted is the stiffness to use.
type Adopted struct {
	Stiffness Quantity         `json:"stiffness"`                          // N/m; null when withheld, with the reason
	Basis     string           `json:"basis"`                              // which legs it rests on, in words
	Weights   map[string]Float `json:"weights,omitempty"`                  // weight of each route in ln(stiffness)
	Withheld  string           `json:"withheld,omitempty"`                 // why there is no adopted stiffness
	Budget    []BudgetLine     `json:"budget,omitempty"`                   // contributions to the combined standard uncertainty
	Expanded  *Expanded        `json:"expanded,omitempty"`                 // the combined uncertainty with a coverage factor
	Halving   string           `json:"to_halve_the_uncertainty,omitempty"` // what to measure better
}

// Spectrum is the power spectrum estimate of one axis.
type Spectrum struct {
	Method        string          `json:"method"`                // "Whittle likelihood" or "exact likelihood"
	Drag          string          `json:"drag"`                  // "constant" or "frequency-dependent"
	Corner        Quantity        `json:"corner_frequency"`      // Hz
	Variance      Quantity        `json:"variance"`              // of the position, blur and noise removed, m2
	Diffusion     Quantity        `json:"diffusion_coefficient"` // m2/s
	Noise         Quantity        `json:"noise"`                 // localisation noise, standard deviation, m
	NoiseVariance Quantity        `json:"noise_variance"`        // m2; may be negative when it was fitted
	NoiseOrigin   string          `json:"noise_origin"`          // "stated", "fitted", "stated and fitted", "background and fitted"
	LeastSquares  LeastSquares    `json:"least_squares"`         // closed-form fit, a check
	Band          [2]Float        `json:"band_hz"`               // of the fit, lowest and highest frequency
	Excluded      []Excluded      `json:"excluded,omitempty"`    // ranges left out of the band
	Bins          int             `json:"bins"`                  // frequencies of the fit
	Goodness      Goodness        `json:"goodness_of_fit"`       // of the fitted spectrum
	Points        []SpectrumPoint `json:"points"`                // blocked spectrum, for the figure
	Model         []Point         `json:"model"`                 // one-sided fitted spectrum, Hz, m2/Hz, over 0 to half the rate
}

// LeastSquares is the closed-form Lorentzian fit (Berg-Sorensen and Flyvbjerg
// 2004), which knows nothing of blur, aliasing or noise.
type LeastSquares struct {
	Corner    Float  `json:"corner_frequency_hz"`            // null when there is no fit
	Diffusion Float  `json:"diffusion_coefficient_m2_per_s"` // null when there is no fit
	Reason    string `json:"reason,omitempty"`               // why there is none
}

// Excluded is a range of frequencies left out of the fit.
type Excluded struct {
	Range  [2]Float `json:"range_hz"` // lowest and highest frequency
	Reason string   `json:"reason"`   // why it was left out
}

// Goodness is a test of the fitted model against the data.
type Goodness struct {
	ChiSquare        Float `json:"chi_square"`         // of data against model
	DegreesOfFreedom int   `json:"degrees_of_freedom"` // of it
	PValue           Float `json:"p_value"`            // probability of a larger one when the model is right
}

// SpectrumPoint is one block of the one-sided power spectrum.
type SpectrumPoint struct {
	Frequency Float `json:"f_hz"`                 // middle of the block
	Power     Float `json:"power_m2_per_hz"`      // mean over the block
	Standard  Float `json:"standard_uncertainty"` // of the power, from the model
	Model     Float `json:"model_m2_per_hz"`      // the fit, in the same block
	Residual  Float `json:"residual"`             // in standard uncertainties
	Bins      int   `json:"bins"`                 // frequencies in the block
	Used      bool  `json:"used"`                 // in the fit
}

// Point is one point of a curve.
type Point struct {
	X Float `json:"x"` // in the first unit that is given with the curve
	Y Float `json:"y"` // in the second
}

// Equipartition is the variance estimate of one axis.
type Equipartition struct {
	RawVariance  Float     `json:"raw_variance_m2"`   // about the mean line
	BlurFactor   Float     `json:"blur_factor"`       // S(a), variance kept by the exposure
	NoiseShare   Float     `json:"noise_share"`       // noise variance over raw variance
	LengthFactor Float     `json:"length_factor"`     // expected share of the variance that a record of this length shows
	Variance     Quantity  `json:"variance"`          // corrected, m2
	EffectiveN   Float     `json:"effective_samples"` // independent samples that would tell the variance as well
	Potential    Potential `json:"potential"`         // from the histogram of the positions
}

// Potential is the trapping potential from the position histogram.
type Potential struct {
	BinWidth   Float          `json:"bin_width_m"`      // width of a bin of the histogram
	Bins       []HistogramBin `json:"bins"`             // in order of position
	Gaussian   [2]Float       `json:"gaussian"`         // mean [m] and standard deviation [m] of the recorded positions
	Curvature  Quantity       `json:"curvature"`        // of the fitted potential at its minimum, N/m, as recorded (blur and noise included)
	Anharmonic Quantity       `json:"anharmonicity"`    // excess kurtosis of the positions, 1
	Skewness   Quantity       `json:"skewness"`         // 1
	Reason     string         `json:"reason,omitempty"` // why there is no potential
}

// HistogramBin is one bin of the position histogram.
type HistogramBin struct {
	Centre  Float `json:"x_m"`                            // relative to the mean
	Count   int   `json:"count"`                          // samples in the bin
	Density Float `json:"density_per_m"`                  // share of the samples over the width
	Energy  Float `json:"energy_kt"`                      // -ln(density / peak density); null in an empty bin
	EnergyU Float `json:"energy_standard_uncertainty_kt"` // of the energy; null in an empty bin
}

// MeanSquareDisplacement is the MSD estimate of one axis.
type MeanSquareDisplacement struct {
	Plateau        Quantity   `json:"plateau"`         // 2 V, blur and noise removed, m2
	RelaxationTime Quantity   `json:"relaxation_time"` // s
	Goodness       Goodness   `json:"goodness_of_fit"` // of the fitted curve
	Points         []MSDPoint `json:"points"`          // in order of lag
	Model          []Point    `json:"model"`           // s, m2
}

// MSDPoint is the mean-square displacement at one lag.
type MSDPoint struct {
	Lag      Float `json:"lag_s"`                // time between two positions
	MSD      Float `json:"msd_m2"`               // mean-square displacement, as recorded
	Standard Float `json:"standard_uncertainty"` // of it, m2
	Model    Float `json:"model_m2"`             // the fit at this lag
	Used     bool  `json:"used"`                 // in the fit
}

// Trace is the position against time, decimated to minimum and maximum of
// consecutive stretches.
type Trace struct {
	Start Float   `json:"start_s"`        // time of the first sample
	Step  Float   `json:"step_s"`         // length of a stretch
	Low   []Float `json:"low_m"`          // lowest position in each stretch; null without a sample
	High  []Float `json:"high_m"`         // highest position in each stretch
	Unit  string  `json:"unit,omitempty"` // of the positions where no length is known: V, mV, counts or 1; absent when they are in m
}

// The statuses of a verdict.
const (
	Consistent   = "consistent"   // exit status 0
	Unchecked    = "unchecked"    // nothing could be compared: the value rests on the computed drag; exit status 0
	Inconsistent = "inconsistent" // the cross-check says not to trust it, exit status 3
	Unfit        = "unfit"        // a health check says so, exit status 3
)

// Verdict says whether the calibration may be used.
type Verdict struct {
	Status      string `json:"status"`              // "consistent", "unchecked", "inconsistent" or "unfit"
	Text        string `json:"text"`                // one sentence
	Reason      string `json:"reason"`              // why, with the numbers
	FamilyWiseP Float  `json:"family_wise_p_value"` // combined, over all axes and comparisons
}

// The severities of a finding.
const (
	Note     = "note"
	Doubtful = "doubtful"
	Bad      = "bad"
)

// Finding is something that the user should know.
type Finding struct {
	Code     string    `json:"code"`                   // stable name, for beadwell explain
	Severity string    `json:"severity"`               // "note", "doubtful" or "bad"
	Axis     string    `json:"axis,omitempty"`         // absent when it is about the whole recording
	Text     string    `json:"text"`                   // what was found, for a person
	Remedy   string    `json:"remedy,omitempty"`       // what to do
	Value    Float     `json:"value"`                  // the number that was judged; null when there is none
	Limit    Float     `json:"threshold"`              // null when there is none
	Unit     string    `json:"unit,omitempty"`         // of value and threshold
	Range    *[2]Float `json:"time_range_s,omitempty"` // where in the recording
}
