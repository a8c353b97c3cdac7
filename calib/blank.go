package calib

import "math"

// blankAxis is an axis of which nothing is known but its name, place and trace.
func blankAxis(w *work, reason string) Axis {
	nan := Float(math.NaN())
	none := [2]Float{nan, nan}
	goodness := Goodness{ChiSquare: nan, PValue: nan}
	a := Axis{Name: w.axisName, Orientation: "parallel", Mean: nan, Drag: Withheld("N s/m", reason),
		Wall:         Wall{Factor: Withheld("1", reason), Faxen: nan, FaxenError: nan},
		Adopted:      Adopted{Stiffness: Withheld("N/m", reason), Withheld: reason},
		Estimates:    []Estimate{},
		Covariance:   Covariance{Legs: []string{}, Statistical: [][]Float{}, Combined: [][]Float{}},
		CrossCheck:   CrossCheck{Equality: noTest(reason), Routes: noTest(reason), Amplitudes: noTest(reason), Text: "not tested: " + reason},
		MeasuredDrag: Withheld("N s/m", reason), DragRatio: Withheld("1", reason)}
	a.Spectrum = Spectrum{Corner: Withheld("Hz", reason), Variance: Withheld("m2", reason), Diffusion: Withheld("m2/s", reason), Noise: Withheld("m", reason),
		NoiseVariance: Withheld("m2", reason), LeastSquares: LeastSquares{Corner: nan, Diffusion: nan, Reason: reason}, Band: none, Goodness: goodness,
		Points: []SpectrumPoint{}, Model: []Point{}}
	a.Equipartition = Equipartition{RawVariance: nan, BlurFactor: nan, NoiseShare: nan, LengthFactor: nan, EffectiveN: nan, Variance: Withheld("m2", reason),
		Potential: Potential{BinWidth: nan, Bins: []HistogramBin{}, Gaussian: none, Curvature: Withheld("N/m", reason), Anharmonic: Withheld("1", reason),
			Skewness: Withheld("1", reason), Reason: reason}}
	a.Displacement = MeanSquareDisplacement{Plateau: Withheld("m2", reason), RelaxationTime: Withheld("s", reason), Goodness: goodness,
		Points: []MSDPoint{}, Model: []Point{}}
	if mean, n := meanOf(w.positions()); n > 0 && !w.unscaled {
		a.Mean = Float(mean)
	}
	if p := w.phys; p.gamma > 0 {
		a.Wall = Wall{Factor: Exact(p.wall.Factor, "1"), Faxen: Float(p.wall.Faxen), FaxenError: Float(p.wall.FaxenError), Method: p.wall.Method}
		if !p.parallel {
			a.Orientation = "perpendicular"
		}
	}
	a.Trace = w.trace()
	return a
}
