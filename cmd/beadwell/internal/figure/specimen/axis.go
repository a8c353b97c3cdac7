package specimen

import (
	"math"
	"math/rand/v2"

	"beadwell/calib"
)

// axis simulates one axis of the given stiffness [N/m] and fills in what a
// calibration of it would say.
func axis(name string, k float64, random *rand.Rand) calib.Axis {
	x := relaxation(k, random)
	variance := kT / k
	corner := k / (2 * math.Pi * gamma)
	a := calib.Axis{
		Name: name, Orientation: "parallel", Mean: 3.1e-9,
		Wall: calib.Wall{Factor: input(1.0371, 0.0024, "1"), Faxen: 1.0370, FaxenError: -1e-4, Method: "exact series"},
		Drag: input(gamma, 5.2e-10, "N s/m"),
		CrossCheck: calib.CrossCheck{
			Equality: calib.Test{ChiSquare: 3.6, DegreesOfFreedom: 4, PValue: 0.46, ChiSquareCombined: 3.1, PValueCombined: 0.54, MeanDifference: calib.Float(math.NaN())},
			Routes:   calib.Test{ChiSquare: 2.3, DegreesOfFreedom: 1, PValue: 0.13, ChiSquareCombined: 0.4, PValueCombined: 0.53, MeanDifference: 0.021},
			Amplitudes: calib.Test{ChiSquare: 1.1, DegreesOfFreedom: 2, PValue: 0.58, ChiSquareCombined: 1.1, PValueCombined: 0.58,
				MeanDifference: calib.Float(math.NaN())},
			Text: "the estimates agree",
		},
		MeasuredDrag: estimated(gamma*0.98, 1.1e-10, 1.3e-10, "N s/m"),
		DragRatio:    estimated(0.98, 0.012, 0.056, "1"),
		Trace:        traceOf(x),
	}
	if name == "z" {
		a.Orientation = "perpendicular"
		a.Wall = calib.Wall{Factor: input(1.0768, 0.005, "1"), Faxen: calib.Float(math.NaN()), FaxenError: calib.Float(math.NaN()), Method: "exact series"}
	}
	a.Estimates = []calib.Estimate{
		{Leg: calib.LegSpectrum, Route: calib.RouteDrag, Stiffness: estimated(k*1.013, k*0.011, k*0.056, "N/m")},
		{Leg: calib.LegEquipartition, Route: calib.RouteAmplitude, Stiffness: estimated(k*0.992, k*0.010, k*0.014, "N/m")},
		{Leg: calib.LegDisplacement, Route: calib.RouteAmplitude, Stiffness: estimated(k*0.996, k*0.011, k*0.015, "N/m")},
		{Leg: calib.LegSpectrumAmplitude, Route: calib.RouteAmplitude, Stiffness: estimated(k*0.994, k*0.012, k*0.015, "N/m")},
		{Leg: calib.LegDisplacementTime, Route: calib.RouteDrag, Stiffness: estimated(k*1.02, k*0.014, k*0.058, "N/m")},
	}
	a.Adopted = calib.Adopted{Stiffness: estimated(k*0.994, k*0.010, k*0.014, "N/m"), Basis: "both routes, weighted by their uncertainties",
		Weights: map[string]calib.Float{calib.RouteDrag: 0.07, calib.RouteAmplitude: 0.93}, Budget: budget()}
	a.Spectrum = spectrumOf(x, variance, corner)
	a.Equipartition = equipartitionOf(x, k)
	a.Displacement = displacementOf(x, variance, corner)
	return a
}

func budget() []calib.BudgetLine {
	return []calib.BudgetLine{
		{Input: "statistics", Value: calib.Float(math.NaN()), StandardUncertainty: calib.Float(math.NaN()), Sensitivity: calib.Float(math.NaN()), Contribution: 0.010, Share: 0.51},
		{Input: "temperature", Value: 295.15, Unit: "K", StandardUncertainty: 2, Sensitivity: 1.2, Contribution: 0.0081, Share: 0.34},
		{Input: "bead diameter", Value: 1.02e-6, Unit: "m", StandardUncertainty: 3e-8, Sensitivity: 0.18, Contribution: 0.0053, Share: 0.14},
		{Input: "height", Value: 8e-6, Unit: "m", StandardUncertainty: 5e-7, Sensitivity: -0.004, Contribution: 0.0003, Share: 0.01},
	}
}

// relaxation draws an exact Ornstein-Uhlenbeck process [m].
func relaxation(k float64, random *rand.Rand) []float64 {
	sigma := math.Sqrt(kT / k)
	keep := math.Exp(-k / (gamma * rate))
	step := sigma * math.Sqrt(1-keep*keep)
	x := make([]float64, samples)
	position := sigma * random.NormFloat64()
	for i := range x {
		x[i] = position
		position = keep*position + step*random.NormFloat64()
	}
	return x
}

func traceOf(x []float64) calib.Trace {
	const stretch = 64
	t := calib.Trace{Start: 0, Step: stretch / rate}
	for from := 0; from+stretch <= len(x); from += stretch {
		low, high := x[from], x[from]
		for _, v := range x[from : from+stretch] {
			low, high = math.Min(low, v), math.Max(high, v)
		}
		t.Low, t.High = append(t.Low, calib.Float(low)), append(t.High, calib.Float(high))
	}
	return t
}
