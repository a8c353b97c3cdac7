package calib_test

import (
	"errors"
	"math"
	"testing"

	"beadwell/calib"
	"beadwell/calib/simulate"
)

const roomTemperature = 4.116404435e-21 // kT at 298.15 K [J]: 1.380649e-23 J/K (SI 2019) times 298.15 K

// trapResult is a result of one axis x with a stiffness of 50 pN/um and a harmonic potential.
func trapResult() *calib.Result {
	stiffness := func(v, u float64) calib.Quantity {
		return calib.Quantity{Value: calib.Float(v), Unit: "N/m", Statistical: &calib.Uncertainty{Standard: calib.Float(u / 2)}, Combined: &calib.Uncertainty{Standard: calib.Float(u)}}
	}
	sigma := math.Sqrt(roomTemperature / 50e-6)
	a := calib.Axis{Name: "x", Drag: calib.Exact(1.6e-8, "N s/m"),
		Adopted: calib.Adopted{Stiffness: stiffness(50e-6, 1e-6), Weights: map[string]calib.Float{calib.RouteDrag: 0.25, calib.RouteAmplitude: 0.75}},
		Estimates: []calib.Estimate{{Leg: calib.LegSpectrum, Route: calib.RouteDrag, Stiffness: stiffness(51e-6, 1.5e-6)},
			{Leg: calib.LegEquipartition, Route: calib.RouteAmplitude, Stiffness: stiffness(49e-6, 1.2e-6)},
			{Leg: calib.LegDisplacement, Route: calib.RouteAmplitude, Stiffness: calib.Withheld("N/m", "too short")}}}
	a.Spectrum.Noise = calib.Exact(2e-9, "m")
	p := &a.Equipartition.Potential
	p.BinWidth, p.Gaussian, p.Curvature = calib.Float(sigma/5), [2]calib.Float{0, calib.Float(sigma)}, calib.Exact(50e-6, "N/m")
	for i := -20; i <= 20; i++ {
		u := float64(i) / 5
		count := int(1e6 * math.Exp(-u*u/2))
		b := calib.HistogramBin{Centre: calib.Float(u * sigma), Count: count, Energy: calib.Float(u * u / 2), EnergyU: calib.Float(1 / math.Sqrt(float64(count)/1000))}
		p.Bins = append(p.Bins, b)
	}
	return &calib.Result{Axes: []calib.Axis{a}, Medium: calib.Medium{ThermalEnergy: calib.Exact(roomTemperature, "J")},
		ReadAs: calib.ReadAs{Columns: []calib.Column{{Header: "x (px)", Role: "x", Unit: "px"}}}}
}

func trapOf(t *testing.T, r *calib.Result, estimate string) calib.Trap {
	t.Helper()
	trap, err := r.Trap("x", estimate)
	if err != nil {
		t.Fatal(err)
	}
	return trap
}

// A length scale that is 3 % wrong makes displacements 3 % wrong, stiffness by amplitude -6 %, by drag 0:
// force by amplitude -3 %, by drag 3 %. The rest of the uncertainty is not touched.
func TestTrapLengthScale(t *testing.T) {
	r := trapResult()
	near(t, "lengths exact", calib.Float(trapOf(t, r, "").Relative), 0.02, 1e-12)
	r.Settings = []calib.Setting{{Key: "recording.pixel", Value: 100e-9, StandardUncertainty: 0.5e-9}}
	u := 0.005
	near(t, "by drag", calib.Float(trapOf(t, r, calib.LegSpectrum).Relative), math.Hypot(1.5/51, u), 1e-12)
	near(t, "by amplitude", calib.Float(trapOf(t, r, calib.LegEquipartition).Relative), math.Sqrt(math.Pow(1.2/49, 2)-4*u*u+u*u), 1e-12)
	near(t, "adopted", calib.Float(trapOf(t, r, "").Relative), math.Sqrt(0.02*0.02-math.Pow(1.5*u, 2)+math.Pow(0.5*u, 2)), 1e-12)
	// that of another axis has no part in it
	r.Settings[0].Axis = "y"
	near(t, "pixel of y", calib.Float(trapOf(t, r, "").Relative), 0.02, 1e-12)
}

// With the sensitivity from the drag, F = 2 pi gamma fc sqrt(kT/(gamma D)) x goes with the root of gamma: of a drag known
// to 4 % the force has 2 %, and not the 4.5 % of stiffness and sensitivity apart.
func TestTrapSelfScaled(t *testing.T) {
	r := trapResult()
	uncertain := func(v, stat, all float64) calib.Quantity {
		return calib.Quantity{Value: calib.Float(v), Statistical: &calib.Uncertainty{Standard: calib.Float(v * stat)}, Combined: &calib.Uncertainty{Standard: calib.Float(v * all)}}
	}
	r.Axes[0].Adopted.Stiffness = uncertain(50e-6, 0, 0.04)
	r.Axes[0].Sensitivity = &calib.Sensitivity{Used: uncertain(1e-6, 0, 0.02), Unit: "V", Origin: calib.SensitivityDrag}
	near(t, "inputs alone", calib.Float(trapOf(t, r, "").Relative), 0.02, 1e-9)
	r.Axes[0].Adopted.Stiffness = uncertain(50e-6, 0.01, 0.01)
	r.Axes[0].Sensitivity.Used = uncertain(1e-6, 0.005, 0.005)
	near(t, "statistics alone", calib.Float(trapOf(t, r, "").Relative), math.Hypot(0.01, 0.005), 1e-9)
}

func TestTrapRefused(t *testing.T) {
	r := trapResult()
	for _, c := range []struct{ axis, estimate string }{{"z", ""}, {"x", "guess"}, {"x", calib.LegDisplacement}} {
		_, err := r.Trap(c.axis, c.estimate)
		var wrong *calib.TrapError
		if !errors.As(err, &wrong) || wrong.Remedy == "" {
			t.Errorf("Trap(%q, %q): %v, want a TrapError with a remedy", c.axis, c.estimate, err)
		}
	}
}

// The range reaches to where bins hold four independent visits, 1000 counts each: 1e6 exp(-u^2/2) > 4000 up to
// u = 3.32, so the bin at 3.2, whose edge is 3.3. A kink ends it before.
func TestLinearRange(t *testing.T) {
	r := trapResult()
	sigma := math.Sqrt(roomTemperature / 50e-6)
	l := trapOf(t, r, "").Linear
	near(t, "high", calib.Float(l.High), 3.3*sigma, 1e-9)
	near(t, "low", calib.Float(l.Low), -3.3*sigma, 1e-9)
	bins := r.Axes[0].Equipartition.Potential.Bins
	bins[30].Energy += 5 * bins[30].EnergyU // u = 2
	l = trapOf(t, r, "").Linear
	near(t, "high with a kink at 2 sigma", calib.Float(l.High), 1.9*sigma, 1e-9)
	near(t, "low with a kink on the other side", calib.Float(l.Low), -3.3*sigma, 1e-9)
	if !l.Holds(1.8*sigma) || l.Holds(2*sigma) || l.Holds(-4*sigma) {
		t.Error("Holds does not go by the range")
	}
	r.Axes[0].Equipartition.Potential = calib.Potential{}
	if l = trapOf(t, r, "").Linear; !math.IsNaN(l.High) || !l.Holds(1) || l.Reason == "" {
		t.Errorf("without a potential: %+v, want an unknown range that holds all", l)
	}
}

// 50 pN/um times 100 nm is 5 pN.
func TestForceScale(t *testing.T) {
	f := calib.ForceTrace{Trap: trapOf(t, trapResult(), ""), Centre: 1e-6, CentreU: 2e-9, Noise: 3e-9, Positions: []float64{1.1e-6, math.NaN(), 0.9e-6}, Rate: 1000}
	x, force, u := f.At(0)
	near(t, "displacement", calib.Float(x), 100e-9, 1e-12)
	near(t, "force", calib.Float(force), 5e-12, 1e-12)
	near(t, "by stiffness and centre", calib.Float(u), math.Hypot(0.02*5e-12, 50e-6*2e-9), 1e-12)
	near(t, "by noise", calib.Float(f.StatisticalU()), 50e-6*3e-9, 1e-12)
	if _, force, u = f.At(1); !math.IsNaN(force) || !math.IsNaN(u) {
		t.Errorf("missing sample: force %g, uncertainty %g", force, u)
	}
	s := f.Summary()
	if s.Samples != 3 || s.Missing != 1 || s.Beyond != 2 {
		t.Errorf("summary of 3 samples, 1 missing, 2 beyond the range: %+v", s)
	}
	near(t, "lowest", s.Lowest, -5e-12, 1e-9)
	near(t, "highest", s.Highest, 5e-12, 1e-9)
	empty := calib.ForceTrace{Trap: f.Trap, Positions: []float64{math.NaN()}, Rate: 1}
	if s = empty.Summary(); s.Mean.Known() || s.Mean.Reason == "" || s.Highest.Known() {
		t.Errorf("nothing recorded: %+v", s)
	}
}

// The mean of 2000 recordings of 0.2 s scatters as Centre states, within 5 % (1/sqrt(4000) = 1.6 %, and a
// finite record of 63 relaxation times: 1/63).
func TestCentre(t *testing.T) {
	const rate, corner, variance, runs = 2000.0, 50.0, 1e-16, 2000
	truth := simulate.Truth{Samples: 400, Rate: rate, Axes: []simulate.Axis{{Corner: corner, Variance: variance, Mean: 3e-6}}}
	var sum, sum2, stated float64
	for seed := range runs {
		mean, u, err := calib.Centre(simulate.Record(truth, uint64(seed))[0], rate, corner)
		if err != nil {
			t.Fatal(err)
		}
		sum += mean - 3e-6
		sum2 += (mean - 3e-6) * (mean - 3e-6)
		stated += u / runs
	}
	near(t, "scatter of the centre", calib.Float(math.Sqrt(sum2/runs)), stated, 0.05)
	if bias := sum / runs; math.Abs(bias) > 4*stated/math.Sqrt(runs) {
		t.Errorf("centre is off by %g m", bias)
	}
	if _, _, err := calib.Centre([]float64{math.NaN()}, rate, corner); !errors.Is(err, calib.ErrNoCentre) {
		t.Errorf("without a position: %v", err)
	}
}
