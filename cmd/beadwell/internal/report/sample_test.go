package report

import (
	"math"

	"beadwell/calib"
)

// unknown is the number of which nothing is known.
var unknown = calib.Float(math.NaN())

// about makes a quantity with symmetric normal intervals.
func about(value, statistical, combined float64, unit string) calib.Quantity {
	return calib.Quantity{Value: calib.Float(value), Unit: unit, Statistical: normal(value, statistical), Combined: normal(value, combined)}
}

func normal(value, u float64) *calib.Uncertainty {
	const z95 = 1.959964 // 97.5 % point of the normal distribution
	return &calib.Uncertainty{
		Standard:   calib.Float(u),
		Interval68: [2]calib.Float{calib.Float(value - u), calib.Float(value + u)},
		Interval95: [2]calib.Float{calib.Float(value - z95*u), calib.Float(value + z95*u)},
	}
}

// storedSample is an invented result with every part filled in: x is adopted,
// y has a lopsided interval, z is withheld.
func storedSample() *calib.Result {
	x := sampleAxis("x", 52.34e-6)
	y := sampleAxis("y", 48.1e-6)
	y.Adopted.Stiffness.Combined.Interval68 = [2]calib.Float{47.5e-6, 49.6e-6}
	z := sampleAxis("z", 9.7e-6)
	z.Orientation = "perpendicular"
	z.Adopted = calib.Adopted{Stiffness: calib.Withheld("N/m", "the routes differ"), Withheld: "the drag route is 31(6) % above the amplitude route", Basis: "nothing"}
	z.Estimates[1].Stiffness = calib.Withheld("N/m", "too short")
	return &calib.Result{
		Schema:  calib.SchemaVersion,
		Program: calib.Program{Name: "beadwell", Version: "test", Command: []string{"beadwell", "calibrate", "tonight/run7.csv"}},
		Created: "2026-01-02T03:04:05Z",
		Input:   calib.Input{Name: "tonight/run7.csv", Size: 123456, SHA256: "00ff"},
		ReadAs: calib.ReadAs{Line: "comma, decimal point, time t (s), x (um), y (um), z (um), 10 kHz, 100000 rows",
			Columns: []calib.Column{{Header: "t (s)", Role: "time", Unit: "s"}, {Header: "x (um)", Role: "x", Unit: "um"}},
			Notes:   []string{"column temp is not used"}},
		Settings: []calib.Setting{
			{Key: "bead.diameter", Text: "1.02(3) um", Value: 1.02e-6, Unit: "m", StandardUncertainty: 3e-8, Origin: "session file", Where: "session.toml:2:12"},
			{Key: "medium.fluid", Text: "water", Value: unknown, StandardUncertainty: unknown, Origin: "default", Assumed: true},
			{Key: "recording.noise", Axis: "x", Value: 4e-9, Unit: "m", StandardUncertainty: 1e-9, Origin: "flag", Where: "--noise"},
		},
		Recording: calib.Recording{Rate: 1e4, RateOrigin: "time column", Samples: 100000, Missing: 12, Duration: 10, Exposure: 0, Jitter: 1e-7, Start: 0},
		Medium: calib.Medium{Fluid: "water", Temperature: about(297.65, 0, 0.5, "K"), Viscosity: about(0.9e-3, 0, 1e-5, "Pa s"),
			Density: about(997, 0, 0.1, "kg/m3"), ThermalEnergy: about(4.11e-21, 0, 7e-24, "J"), Source: "IAPWS SR6-08(2011)"},
		Bead:    calib.Bead{Diameter: about(1.02e-6, 0, 3e-8, "m"), Height: about(8e-6, 0, 5e-7, "m")},
		Axes:    []calib.Axis{x, y, z},
		Verdict: calib.Verdict{Status: calib.Inconsistent, Text: "do not use z before its cause is known", Reason: "on z the routes differ by 31(6) %, p = 0.0002", FamilyWiseP: 0.0006},
		Diagnosis: &calib.Diagnosis{Text: "Any one of these would reconcile the routes: a length scale 6 % smaller; or a temperature 5.4 K higher.", Causes: []calib.Cause{
			{Code: calib.CauseScale, Name: "length scale", Stated: about(100e-9, 0, 1e-9, "m"), Needed: about(94e-9, 0, 1.2e-9, "m"), Ratio: 0.94, Change: -6, PValue: 1, Tied: true,
				Text: "length scale 6 % smaller", Measurement: "image a stage micrometre"},
			{Code: calib.CauseTemperature, Name: "temperature", Stated: about(297.65, 0, 0.5, "K"), Needed: about(303.05, 0, 1.2, "K"), Ratio: 1.018, Change: 10.8, Likelihood: -0.2, PValue: 1, Tied: true,
				Text: "temperature 5.4 K higher", Measurement: "measure it with the laser on", Caution: "Trained users only."},
			{Code: calib.CauseHeight, Name: "height", Stated: calib.Withheld("m", "far from any surface"), Needed: calib.Withheld("m", "no value of it brings the routes together"), Ratio: unknown, Change: unknown,
				Likelihood: -9, ChiSquare: 18, Freedom: 1, PValue: 2e-5, Text: "surface", Measurement: "repeat higher up"}}},
		MonteCarlo: &calib.MonteCarlo{Draws: 10000, Seed: "1", Text: "10000 draws agree with the budget.", Correlation: [][]calib.Float{{1}}, Axes: []calib.MonteCarloAxis{
			{Axis: "x", Mean: 52.4e-6, Standard: 1.1e-6, Interval95: [2]calib.Float{50.3e-6, 54.6e-6}, Shortest95: [2]calib.Float{50.2e-6, 54.5e-6}, Tolerance: 5e-8, EndError: 3e-8, Agrees: true}}},
		Findings: []calib.Finding{
			{Code: "slow-drift", Severity: calib.Doubtful, Axis: "x", Text: "the mean moves by 12 nm over the recording", Remedy: "let the stage settle, then record again",
				Value: 12e-9, Limit: 8e-9, Unit: "m", Range: &[2]calib.Float{0, 10}},
			{Code: "assumed-fluid", Severity: calib.Note, Text: "nobody stated the fluid, so water is assumed", Remedy: "state it: --fluid water", Value: unknown, Limit: unknown},
		},
	}
}

func sampleAxis(name string, k float64) calib.Axis {
	stiffness := func(factor, statistical, combined float64) calib.Quantity {
		return about(k*factor, k*statistical, k*combined, "N/m")
	}
	return calib.Axis{
		Name: name, Orientation: "parallel", Mean: 1e-9,
		Wall: calib.Wall{Factor: about(1.04, 0, 0.003, "1"), Faxen: 1.0399, FaxenError: -1e-4, Method: "exact series"},
		Drag: about(9.1e-9, 0, 2.9e-10, "N s/m"),
		Adopted: calib.Adopted{Stiffness: stiffness(1, 0.006, 0.021), Basis: "drag and amplitude", Weights: map[string]calib.Float{calib.RouteDrag: 0.31, calib.RouteAmplitude: 0.69},
			Budget: []calib.BudgetLine{
				{Input: "bead diameter", Value: 1.02e-6, Unit: "m", StandardUncertainty: 3e-8, Sensitivity: 0.65, Contribution: 0.0201, Share: 0.92, Freedom: unknown, Note: "with its effect on the wall factor"},
				{Input: "wall model", Value: 1.04, Unit: "1", StandardUncertainty: 1e-5, Sensitivity: 1, Contribution: 1e-5, Share: 2e-7, Freedom: unknown},
				{Input: "statistics of the recording", Value: calib.Float(k), Unit: "N/m", StandardUncertainty: calib.Float(0.006 * k), Sensitivity: 1, Contribution: 0.006, Share: 0.08, Freedom: 29000}},
			Expanded: &calib.Expanded{Coverage: 0.95, Factor: 1.96, Freedom: unknown, Uncertainty: calib.Float(0.0412 * k)},
			Halving:  "To halve the combined standard uncertainty: know the bead diameter to 1.2 % in place of 2.9 %."},
		Estimates: []calib.Estimate{
			{Leg: calib.LegSpectrum, Route: calib.RouteDrag, Stiffness: stiffness(1.01, 0.005, 0.03)},
			{Leg: calib.LegEquipartition, Route: calib.RouteAmplitude, Stiffness: stiffness(0.99, 0.008, 0.009)},
			{Leg: calib.LegDisplacement, Route: calib.RouteAmplitude, Stiffness: stiffness(0.992, 0.008, 0.009)},
			{Leg: calib.LegSpectrumAmplitude, Route: calib.RouteAmplitude, Stiffness: stiffness(0.991, 0.008, 0.009)},
			{Leg: calib.LegDisplacementTime, Route: calib.RouteDrag, Stiffness: stiffness(1.012, 0.006, 0.03)},
		},
		Covariance: calib.Covariance{Legs: []string{calib.LegSpectrum}, Statistical: [][]calib.Float{{2.5e-5}}, Combined: [][]calib.Float{{9e-4}}},
		CrossCheck: calib.CrossCheck{
			Equality:   calib.Test{ChiSquare: 3.1, DegreesOfFreedom: 4, PValue: 0.54, ChiSquareCombined: 2.2, PValueCombined: 0.7, MeanDifference: unknown},
			Routes:     calib.Test{ChiSquare: 4, DegreesOfFreedom: 1, PValue: 0.0455, ChiSquareCombined: 0.4, PValueCombined: 0.53, MeanDifference: 0.02},
			Amplitudes: calib.Test{PValue: unknown, PValueCombined: unknown, ChiSquare: unknown, ChiSquareCombined: unknown, MeanDifference: unknown, Reason: "one estimate"},
			Text:       "both routes agree",
		},
		MeasuredDrag: about(9.0e-9, 1e-10, 1.2e-10, "N s/m"), DragRatio: about(0.989, 0.01, 0.035, "1"),
		Spectrum: calib.Spectrum{Method: "Whittle likelihood", Drag: "constant", Corner: about(925.1, 4.2, 4.2, "Hz"), Variance: about(7.9e-17, 6e-19, 6e-19, "m2"),
			Noise: about(1.2e-9, 3e-10, 3e-10, "m"), NoiseOrigin: "fitted", Band: [2]calib.Float{10, 5000}, Bins: 50000,
			Goodness: calib.Goodness{ChiSquare: 480, DegreesOfFreedom: 500, PValue: 0.73},
			Points:   []calib.SpectrumPoint{{Frequency: 10, Power: 1e-19, Standard: 1e-20, Model: 1e-19, Residual: 0.1, Bins: 64, Used: true}}},
		Displacement: calib.MeanSquareDisplacement{RelaxationTime: about(1.72e-4, 9e-7, 9e-7, "s"), Points: []calib.MSDPoint{{Lag: 1e-4, MSD: 1e-17, Standard: 1e-19, Model: 1e-17, Used: true}}},
		Trace:        calib.Trace{Start: 0, Step: 0.02, Low: []calib.Float{-1e-8}, High: []calib.Float{2e-8}},
	}
}

// hostileSample carries names that attack terminals, spreadsheets and readers.
func hostileSample() *calib.Result {
	r := storedSample()
	r.Input.Name = "=cmd\x1b[2J\u202e\xff\n.csv"
	r.Input.Bead = "@sum\u0085"
	r.ReadAs.Line = "column \x1b]0;title\x07 <script>"
	r.Findings[0].Text = "header \"\u2066\x00\" was ignored"
	r.Program.Command = append(r.Program.Command, "--note=\u200b</script>")
	return r
}
