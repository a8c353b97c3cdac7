package specimen

import (
	"math"

	"beadwell/calib"

	"gonum.org/v1/gonum/dsp/fourier"
)

// sampledSpectrum is the one-sided spectrum [m2/Hz] of a sampled relaxation
// process: 2 dt V (1 - c^2) / (1 + c^2 - 2 c cos(2 pi f dt)), c = exp(-2 pi fc dt).
func sampledSpectrum(f, variance, corner float64) float64 {
	c := math.Exp(-2 * math.Pi * corner / rate)
	return 2 * variance / rate * (1 - c*c) / (1 + c*c - 2*c*math.Cos(2*math.Pi*f/rate))
}

func spectrumOf(x []float64, variance, corner float64) calib.Spectrum {
	s := calib.Spectrum{
		Method: "Whittle likelihood", Drag: "constant",
		Corner:    estimated(corner*1.013, corner*0.011, corner*0.011, "Hz"),
		Variance:  estimated(variance*1.006, variance*0.012, variance*0.012, "m2"),
		Diffusion: estimated(kT/gamma*1.02, kT/gamma*0.012, kT/gamma*0.012, "m2/s"),
		Noise:     calib.Withheld("m", "the noise floor is not above its uncertainty"), NoiseVariance: estimated(-2e-20, 8e-20, 8e-20, "m2"),
		NoiseOrigin:  "fitted",
		LeastSquares: calib.LeastSquares{Corner: calib.Float(corner * 1.04), Diffusion: calib.Float(kT / gamma)},
		Band:         [2]calib.Float{2, 4500},
		Excluded: []calib.Excluded{{Range: [2]calib.Float{49, 51}, Reason: "mains line"},
			{Range: [2]calib.Float{0, 2}, Reason: "drift"}, {Range: [2]calib.Float{1210, 1290}, Reason: "narrow line"}},
		Bins:     32000,
		Goodness: calib.Goodness{ChiSquare: 151, DegreesOfFreedom: 146, PValue: 0.37},
	}
	coefficients := fourier.NewFFT(len(x)).Coefficients(nil, x)
	spacing := float64(rate) / float64(len(x))
	for from := 1; from < len(coefficients)-1; {
		to := min(max(from+6, int(float64(from)*1.055)), len(coefficients)-1)
		s.Points = append(s.Points, block(coefficients[from:to], from, spacing, len(x), variance, corner))
		from = to
	}
	for i := range 400 {
		f := rate / 2 * float64(i*i) / (399 * 399)
		s.Model = append(s.Model, calib.Point{X: calib.Float(f), Y: calib.Float(sampledSpectrum(f, variance, corner))})
	}
	return s
}

func block(c []complex128, from int, spacing float64, n int, variance, corner float64) calib.SpectrumPoint {
	power := 0.0
	for _, v := range c {
		power += 2 * (real(v)*real(v) + imag(v)*imag(v)) / (rate * float64(n))
	}
	power /= float64(len(c))
	f := (float64(from) + float64(len(c)-1)/2) * spacing
	model := sampledSpectrum(f, variance, corner)
	u := model / math.Sqrt(float64(len(c)))
	return calib.SpectrumPoint{Frequency: calib.Float(f), Power: calib.Float(power), Standard: calib.Float(u),
		Model: calib.Float(model), Residual: calib.Float((power - model) / u), Bins: len(c), Used: f > 2 && f < 4500}
}

func equipartitionOf(x []float64, k float64) calib.Equipartition {
	variance, sigma := kT/k, math.Sqrt(kT/k)
	width := sigma / 5
	counts := make([]int, 41)
	for _, v := range x {
		if i := int(math.Floor(v/width+0.5)) + 20; i >= 0 && i < len(counts) {
			counts[i]++
		}
	}
	peak := 0
	for _, n := range counts {
		peak = max(peak, n)
	}
	p := calib.Potential{BinWidth: calib.Float(width), Gaussian: [2]calib.Float{3.1e-9, calib.Float(sigma)},
		Curvature: estimated(k*0.99, k*0.012, k*0.012, "N/m"), Anharmonic: estimated(0.02, 0.05, 0.05, "1"), Skewness: estimated(-0.01, 0.03, 0.03, "1")}
	for i, n := range counts {
		bin := calib.HistogramBin{Centre: calib.Float(float64(i-20) * width), Count: n,
			Density: calib.Float(float64(n) / (float64(len(x)) * width)), Energy: calib.Float(math.NaN()), EnergyU: calib.Float(math.NaN())}
		if n > 0 {
			bin.Energy = calib.Float(-math.Log(float64(n) / float64(peak)))
			bin.EnergyU = calib.Float(3 / math.Sqrt(float64(n)))
		}
		p.Bins = append(p.Bins, bin)
	}
	return calib.Equipartition{RawVariance: calib.Float(variance * 1.01), BlurFactor: 1, NoiseShare: 0.001, LengthFactor: 0.9998,
		Variance: estimated(variance*1.008, variance*0.01, variance*0.01, "m2"), EffectiveN: 18200, Potential: p}
}

func displacementOf(x []float64, variance, corner float64) calib.MeanSquareDisplacement {
	tau := 1 / (2 * math.Pi * corner)
	m := calib.MeanSquareDisplacement{Plateau: estimated(2*variance, 0.022*variance, 0.022*variance, "m2"),
		RelaxationTime: estimated(tau*0.99, tau*0.014, tau*0.014, "s"), Goodness: calib.Goodness{ChiSquare: 41, DegreesOfFreedom: 38, PValue: 0.34}}
	for lag := 1; lag < len(x)/8; lag = max(lag+1, int(float64(lag)*1.15)) {
		sum := 0.0
		for i := range x[:len(x)-lag] {
			d := x[i+lag] - x[i]
			sum += d * d
		}
		at := float64(lag) / rate
		value := 2 * variance * (1 - math.Exp(-at/tau))
		m.Points = append(m.Points, calib.MSDPoint{Lag: calib.Float(at), MSD: calib.Float(sum / float64(len(x)-lag)),
			Standard: calib.Float(value * 0.011), Model: calib.Float(value), Used: lag < 2000})
	}
	for at := 1 / rate; at < float64(len(x))/8/rate; at *= 1.04 {
		m.Model = append(m.Model, calib.Point{X: calib.Float(at), Y: calib.Float(2 * variance * (1 - math.Exp(-at/tau)))})
	}
	return m
}
