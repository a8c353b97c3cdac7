// Package specimen makes a complete calib.Result for the tests of what draws and
// prints results. Its numbers come from a simulated relaxation process with a
// fixed seed; the uncertainties are of a realistic size and not derived.
package specimen

import (
	"math"
	"math/rand/v2"

	"beadwell/calib"
)

// The simulated trap: water at 22 C, bead of 1.02 um, 8 um above the surface.
const (
	rate    = 10e3        // sampling rate [Hz]
	samples = 1 << 16     // 6.6 s
	kT      = 4.07505e-21 // thermal energy at 295.15 K [J], 1.380649e-23 J/K times 295.15 K
	gamma   = 9.41e-9     // drag [N s/m], 3 pi 0.954 mPa s 1.02 um times 1.037 for the surface
)

// Result returns a calibration of three axes. Every call returns a new value.
func Result() *calib.Result {
	r := &calib.Result{
		Schema: calib.SchemaVersion,
		Program: calib.Program{Name: "beadwell", Version: "0.1.0",
			Command: []string{"beadwell", "calibrate", "--diameter", "1.02(3) um", "harbour/float-3.csv"}},
		Input: calib.Input{Name: "harbour/float-3.csv", Size: 2483012,
			SHA256: "5f1d7a84d23f2f0c7e2a8c7f6d4f0b8ad2a5b9b8a1f3e6c0d9b7a6958473625e"},
		ReadAs: calib.ReadAs{
			Line: "comma separated, decimal point, time in s, x, y and z in um, 10 kHz, 65536 rows",
			Columns: []calib.Column{{Header: "t (s)", Role: "time", Unit: "s"}, {Header: "x (um)", Role: "x", Unit: "um"},
				{Header: "y (um)", Role: "y", Unit: "um"}, {Header: "z (um)", Role: "z", Unit: "um"}, {Header: "sum", Role: "ignored"}},
			Notes: []string{"the column sum was not used"},
		},
		Recording: calib.Recording{Rate: rate, RateOrigin: "time column", Samples: samples, Duration: samples / rate,
			Exposure: 0, Jitter: 2e-9, Start: 0},
		Medium: calib.Medium{Fluid: "water",
			Temperature: input(295.15, 2, "K"), Viscosity: input(0.954367e-3, 0.045e-3, "Pa s"), Density: input(997.77, 0.5, "kg/m3"),
			ThermalEnergy: input(kT, 2.8e-23, "J"), Source: "IAPWS SR6-08(2011)"},
		Bead: calib.Bead{Diameter: input(1.02e-6, 3e-8, "m"), Height: input(8e-6, 5e-7, "m")},
	}
	r.Settings = settings()
	r.Findings = findings()
	r.Verdict = calib.Verdict{Status: calib.Consistent, Text: "The two routes agree: the stiffness may be used.",
		Reason: "family-wise p = 0.41 over 3 axes", FamilyWiseP: 0.41}
	random := rand.New(rand.NewPCG(20, 26))
	for i, stiffness := range []float64{52.3e-6, 47.9e-6, 11.4e-6} { // N/m
		r.Axes = append(r.Axes, axis("xyz"[i:i+1], stiffness, random))
	}
	return r
}

func settings() []calib.Setting {
	nan := calib.Float(math.NaN())
	return []calib.Setting{
		{Key: "bead.diameter", Text: "1.02(3) um", Value: 1.02e-6, Unit: "m", StandardUncertainty: 3e-8, Origin: "flag", Where: "--diameter"},
		{Key: "medium.fluid", Text: "water", Value: nan, StandardUncertainty: nan, Origin: "default", Assumed: true},
		{Key: "medium.temperature", Text: "22(2) C", Value: 295.15, Unit: "K", StandardUncertainty: 2, Origin: "default", Assumed: true},
		{Key: "chamber.height", Text: "8.0(5) um", Value: 8e-6, Unit: "m", StandardUncertainty: 5e-7, Origin: "session file", Where: "session.toml:9:1"},
		{Key: "recording.noise", Axis: "z", Text: "4(1) nm", Value: 4e-9, Unit: "m", StandardUncertainty: 1e-9, Origin: "track list", Where: "tracks.csv:3:4"},
	}
}

func findings() []calib.Finding {
	nan := calib.Float(math.NaN())
	return []calib.Finding{
		{Code: "drifting", Severity: calib.Doubtful, Axis: "x", Text: "the mean moves by 9 nm between 2.1 s and 3.0 s",
			Remedy: "let the stage settle and repeat the recording; if the laser was switched on just before, wait for it to warm up",
			Value:  9e-9, Limit: 5e-9, Unit: "m", Range: &[2]calib.Float{2.1, 3.0}},
		{Code: "temperature-assumed", Severity: calib.Note, Text: "no temperature was stated; 22(2) C was assumed",
			Remedy: "measure the temperature of the chamber and give --temperature", Value: nan, Limit: nan},
	}
}

// input is a quantity without a statistical part.
func input(value, u float64, unit string) calib.Quantity {
	return calib.Quantity{Value: calib.Float(value), Unit: unit, Combined: uncertainty(value, u)}
}

// estimated is a quantity with both parts.
func estimated(value, statistical, combined float64, unit string) calib.Quantity {
	return calib.Quantity{Value: calib.Float(value), Unit: unit,
		Statistical: uncertainty(value, statistical), Combined: uncertainty(value, combined)}
}

func uncertainty(value, u float64) *calib.Uncertainty {
	around := func(k float64) [2]calib.Float {
		return [2]calib.Float{calib.Float(value - k*u), calib.Float(value + k*u)}
	}
	return &calib.Uncertainty{Standard: calib.Float(u), Interval68: around(1), Interval95: around(1.96)}
}
