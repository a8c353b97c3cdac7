package calib

import (
	"errors"
	"math"
)

// ErrNoCentre means that a stretch holds no position to take a mean of.
var ErrNoCentre = errors.New("no position is recorded in it")

// Centre returns the mean of positions x [m], NaN where missing, sampled at a rate [Hz], and
// its standard uncertainty [m] for a relaxation process of the corner frequency [Hz]:
// s sqrt((1+c)/(1-c)/n), c the correlation from one sample to the next and n the number of
// independent samples that are long against 1/fc. With an unknown corner frequency the
// uncertainty is NaN.
//
// The error is ErrNoCentre when there is no position.
func Centre(x []float64, rate, corner float64) (mean, u float64, err error) {
	n, mean, variance := moments(x)
	if n == 0 {
		return mean, math.NaN(), ErrNoCentre
	}
	return mean, math.Sqrt(variance * inflation(rate, corner) / float64(n)), nil
}

// inflation is the variance of a mean of correlated samples over that of independent ones.
func inflation(rate, corner float64) float64 {
	return 1 / math.Tanh(math.Pi*corner/rate) // (1+c)/(1-c)
}

// moments returns number, mean and variance of what is not NaN, in two passes.
func moments(x []float64) (n int, mean, variance float64) {
	sum := 0.0
	for _, v := range x {
		if v == v {
			sum += v
			n++
		}
	}
	if n == 0 {
		return 0, math.NaN(), math.NaN()
	}
	mean = sum / float64(n)
	for _, v := range x {
		if v == v {
			variance += (v - mean) * (v - mean)
		}
	}
	return n, mean, variance / float64(max(1, n-1))
}

// ForceTrace are the forces of one axis. The force is that of whatever holds the bead out of
// the centre of the trap, stiffness times displacement: positive towards positive
// positions. The trap pulls with the opposite force.
type ForceTrace struct {
	Trap      Trap
	Centre    float64   // m
	CentreU   float64   // standard uncertainty [m]; NaN counts as 0
	Noise     float64   // localisation noise of the recording [m]; NaN when it is not known
	Positions []float64 // m; NaN where missing
	Rate      float64   // Hz
}

// At returns displacement [m] and force [N] of a sample, NaN where it is missing, and the
// standard uncertainty of the force that stiffness and centre leave [N]: an error that all samples share.
func (f *ForceTrace) At(i int) (displacement, force, calibrationU float64) {
	displacement = f.Positions[i] - f.Centre
	return f.of(displacement)
}

func (f *ForceTrace) of(x float64) (displacement, force, calibrationU float64) {
	k := float64(f.Trap.Stiffness.Value)
	centre := 0.0
	if f.CentreU > 0 {
		centre = f.CentreU
	}
	return x, k * x, math.Hypot(k*x*f.Trap.Relative, k*centre)
}

// StatisticalU is the standard uncertainty of one force by the localisation noise [N],
// independent from sample to sample; NaN when the noise is not known. The thermal motion of
// the bead is part of the force that is shown, and the blur of the exposure is not corrected.
func (f *ForceTrace) StatisticalU() float64 { return float64(f.Trap.Stiffness.Value) * f.Noise }

// ForceSummary describes a trace. Forces in N, displacements in m.
type ForceSummary struct {
	Axis         string   `json:"axis"`                    // "x", "y" or "z"
	Estimate     string   `json:"estimate"`                // "adopted", or the estimate taken
	Stiffness    Quantity `json:"stiffness"`               // N/m
	Relative     Float    `json:"relative_uncertainty"`    // of a force by the calibration, 1
	Centre       Quantity `json:"centre"`                  // m
	Samples      int      `json:"samples"`                 // with the missing ones
	Missing      int      `json:"missing"`                 // samples without a position
	Mean         Quantity `json:"mean_force"`              // N
	Spread       Float    `json:"force_sd_N"`              // standard deviation of the forces, thermal motion included
	Lowest       Float    `json:"lowest_force_N"`          // // of all samples
	Highest      Float    `json:"highest_force_N"`         // // of all samples
	Statistical  Float    `json:"statistical_u_N"`         // of one force, by localisation noise alone; null when that is not known
	Linear       [2]Float `json:"linear_range_m"`          // displacements over which the calibration saw a harmonic potential; null when unknown
	LinearReason string   `json:"linear_range_reason"`     // what ends the range
	Beyond       int      `json:"samples_beyond_linear"`   // samples outside of that range
	Furthest     Float    `json:"furthest_displacement_m"` // the largest in size, with its sign
}

// Summary describes the trace. The statistical uncertainty of the mean force counts the
// samples as those of a relaxation process in the trap; a force that changes is no part of it.
func (f *ForceTrace) Summary() ForceSummary {
	t := f.Trap
	n, mean, variance := moments(f.Positions)
	s := ForceSummary{Axis: t.Axis, Estimate: t.Estimate, Stiffness: t.Stiffness, Relative: Float(t.Relative), Centre: input(f.Centre, f.CentreU, "m"),
		Samples: len(f.Positions), Missing: len(f.Positions) - n, Statistical: Float(f.StatisticalU()),
		Linear: [2]Float{Float(t.Linear.Low), Float(t.Linear.High)}, LinearReason: t.Linear.Reason}
	k := float64(t.Stiffness.Value)
	s.Spread = Float(k * math.Sqrt(variance))
	low, high := math.Inf(1), math.Inf(-1)
	for _, v := range f.Positions {
		if v != v {
			continue
		}
		x := v - f.Centre
		low, high = math.Min(low, x), math.Max(high, x)
		if !t.Linear.Holds(x) {
			s.Beyond++
		}
	}
	s.Lowest, s.Highest, s.Furthest = Float(k*low), Float(k*high), Float(high)
	if -low > high {
		s.Furthest = Float(low)
	}
	if n == 0 {
		unknown := Float(math.NaN())
		s.Mean, s.Lowest, s.Highest, s.Furthest = Withheld("N", "no position is recorded"), unknown, unknown, unknown
		return s
	}
	_, force, calibration := f.of(mean - f.Centre)
	s.Mean = around(force, k*math.Sqrt(variance*inflation(f.Rate, t.Corner)/float64(n)), "N")
	s.Mean.Combined = around(force, math.Hypot(calibration, float64(s.Mean.Statistical.Standard)), "N").Statistical
	if !s.Mean.Statistical.Standard.Known() {
		s.Mean.Statistical = nil
		s.Mean.Combined = around(force, calibration, "N").Statistical
	}
	return s
}
