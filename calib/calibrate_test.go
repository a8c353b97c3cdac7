package calib

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"math"
	"runtime"
	"strings"
	"testing"

	"beadwell/calib/drag"
	"beadwell/calib/medium"
	"beadwell/calib/session"
	"beadwell/calib/simulate"
	"beadwell/calib/track"
)

// scene is a simulated recording and what is stated of it. Constant drag throughout.
type scene struct {
	kappa    float64 // N/m
	diameter float64 // m
	kelvin   float64
	height   float64 // m
	rate     float64 // Hz
	samples  int
	exposure float64 // s
	noise    float64 // m
	drift    float64 // m
	axes     []string
	events   []simulate.Event
	settings map[string]string
}

// usual is a bead of 1 um in water at 25 C, 5 um above the surface: fc = 500 Hz.
func usual() scene {
	return scene{kappa: 2.79192228e-5, diameter: 1e-6, kelvin: 298.15, height: 5e-6, rate: 10e3, samples: 20000, axes: []string{"x"},
		settings: map[string]string{"bead.diameter": "1 um", "medium.temperature": "25 C", "medium.fluid": "water", "chamber.height": "5 um",
			"recording.exposure": "0 s", "recording.noise": "0 nm", "fit.drag": "constant"}}
}

func (s scene) with(key, text string) scene {
	next := map[string]string{key: text}
	for k, v := range s.settings {
		if k != key {
			next[k] = v
		}
	}
	if text == "" {
		delete(next, key)
	}
	s.settings = next
	return s
}

func (s scene) set(t *testing.T) *session.Settings {
	t.Helper()
	flags := &session.Settings{}
	for k, v := range s.settings {
		if err := flags.Set(k, "", v, session.FromFlag, "--"+k); err != nil {
			t.Fatal(err)
		}
	}
	set, err := session.ForTrack(session.Sources{Flags: flags})
	if err != nil {
		t.Fatal(err)
	}
	return set
}

// waterAt returns the properties of water.
func waterAt(t testing.TB, kelvin float64) medium.Properties {
	t.Helper()
	liquid, err := medium.ParseFluid("water")
	if err != nil {
		t.Fatal(err)
	}
	p, err := liquid.At(kelvin)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func (s scene) record(t *testing.T, seed uint64) *track.Recording {
	t.Helper()
	p := waterAt(t, s.kelvin)
	truth := simulate.Truth{Samples: s.samples, Rate: s.rate, Exposure: s.exposure, Events: s.events}
	rec := &track.Recording{Name: "simulated", Rate: s.rate, RateOrigin: "setting", Samples: s.samples, JitterRMS: math.NaN(), JitterMax: math.NaN(), RateU: math.NaN()}
	for _, name := range s.axes {
		wall, err := drag.Chamber{Radius: s.diameter / 2, Height: s.height, Perpendicular: name == "z"}.Wall()
		if err != nil {
			t.Fatal(err)
		}
		gamma := drag.Stokes(p.Viscosity, s.diameter/2) * wall.Factor
		truth.Axes = append(truth.Axes, simulate.Axis{Name: name, Corner: s.kappa / (2 * math.Pi * gamma), Variance: medium.Boltzmann * s.kelvin / s.kappa,
			Noise: s.noise, Drift: s.drift, Mean: 3e-7})
	}
	for i, x := range simulate.Record(truth, seed) {
		rec.Axes = append(rec.Axes, track.Axis{Name: s.axes[i], Header: s.axes[i], Unit: "m", ToMetre: 1, Values: x})
	}
	return rec
}

// gamma is the drag of the bead for motion parallel to the surface [N s/m].
func (s scene) gamma(t *testing.T) float64 {
	t.Helper()
	p := waterAt(t, s.kelvin)
	wall, err := drag.Chamber{Radius: s.diameter / 2, Height: s.height}.Wall()
	if err != nil {
		t.Fatal(err)
	}
	return drag.Stokes(p.Viscosity, s.diameter/2) * wall.Factor
}

// trapped are the axes of the scene for the simulator, all parallel to the surface.
func (s scene) trapped(t *testing.T) (axes []simulate.Axis) {
	t.Helper()
	for _, name := range s.axes {
		axes = append(axes, simulate.Axis{Name: name, Corner: s.kappa / (2 * math.Pi * s.gamma(t)), Variance: medium.Boltzmann * s.kelvin / s.kappa, Noise: s.noise})
	}
	return axes
}

func (s scene) calibrate(t *testing.T, seed uint64) *Result {
	t.Helper()
	r, err := Calibrate(context.Background(), s.record(t, seed), s.set(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func (a Axis) leg(name string) Quantity {
	return a.estimate(name)
}

// The absolute scale: all estimates of long recordings meet the true stiffness. At
// T fc = 1000 the relative uncertainty is 1.8 % (1/sqrt(pi T fc)); five of them bound a fixed seed.
func TestCalibrateFindsTheStiffness(t *testing.T) {
	detector := usual()
	camera := usual().with("recording.exposure", "0.8 ms").with("recording.noise", "4 nm")
	camera.rate, camera.samples, camera.exposure, camera.noise = 1250, 2500, 0.8e-3, 4e-9
	axial := usual()
	axial.axes = []string{"x", "y", "z"}
	for name, s := range map[string]scene{"detector": detector, "camera": camera, "three axes": axial} {
		r := s.calibrate(t, 11)
		if r.Verdict.Status != Consistent {
			t.Errorf("%s: verdict %q: %s", name, r.Verdict.Status, r.Verdict.Reason)
		}
		for _, a := range r.Axes {
			for _, e := range append(a.Estimates, Estimate{Leg: "adopted", Stiffness: a.Adopted.Stiffness}) {
				if !e.Stiffness.Known() {
					t.Errorf("%s: axis %s: %s is withheld: %s", name, a.Name, e.Leg, e.Stiffness.Reason)
					continue
				}
				u := float64(e.Stiffness.Statistical.Standard)
				if d := float64(e.Stiffness.Value) - s.kappa; math.Abs(d) > 5*u || u > 0.12*s.kappa {
					t.Errorf("%s: axis %s: %s = %.4g(%.2g) N/m, want %.4g", name, a.Name, e.Leg, float64(e.Stiffness.Value), u, s.kappa)
				}
			}
		}
	}
}

// Coverage, bias and test size over seeded recordings, reduced from the accuracy study.
// A 95 % interval holds the truth in 0.95 k of k recordings, give or take the binomial
// sqrt(0.0475 k); 3.5 of those bound a fixed set of seeds. The bias of n estimates is known to
// 1/sqrt(n) = 0.08 of the scatter; 0.2 + 3.5 x 0.08 bounds it.
func TestCoverage(t *testing.T) {
	detector, camera := usual(), usual().with("recording.exposure", "1 ms").with("recording.noise", "5 nm")
	detector.samples = 1200 // T fc = 60
	camera.rate, camera.samples, camera.exposure, camera.noise = 1000, 600, 1e-3, 5e-9
	const n = 150
	for name, s := range map[string]scene{"detector": detector, "camera": camera} {
		inside, known, sum, square := map[string]int{}, map[string]float64{}, map[string]float64{}, map[string]float64{}
		rejected := 0
		for seed := range uint64(n) {
			a := s.calibrate(t, seed+1).Axes[0]
			for _, e := range append(a.Estimates, Estimate{Leg: "adopted", Stiffness: a.Adopted.Stiffness}) {
				q := e.Stiffness
				if !q.Known() {
					continue
				}
				known[e.Leg]++
				if i := q.Statistical.Interval95; float64(i[0]) <= s.kappa && s.kappa <= float64(i[1]) {
					inside[e.Leg]++
				}
				z := math.Log(float64(q.Value) / s.kappa)
				sum[e.Leg] += z
				square[e.Leg] += z * z
			}
			if float64(a.CrossCheck.Equality.PValue) < 0.05 {
				rejected++
			}
		}
		for leg, k := range inside {
			m := known[leg]
			if least := 0.95*m - 3.5*math.Sqrt(0.0475*m); float64(k) < least {
				t.Errorf("%s: the 95 %% interval of %s holds the truth in %d of %g recordings, want at least %.1f", name, leg, k, m, least)
			}
			mean := sum[leg] / m
			scatter := math.Sqrt(square[leg]/m - mean*mean)
			if m == n && math.Abs(mean/scatter) > 0.2+3.5/math.Sqrt(n) { // withholding selects
				t.Errorf("%s: bias of %s is %.2f of its scatter", name, leg, mean/scatter)
			}
		}
		if rejected > 17 { // 7.5 expected, 3.5 standard deviations of 2.7
			t.Errorf("%s: the equality test rejects %d of %d clean recordings at the 5 %% level", name, rejected, n)
		}
	}
}

// Combined intervals hold the truth when the inputs are wrong by what was stated: here
// every recording has a bead 2 standard uncertainties larger.
func TestCombinedIntervalCoversInputs(t *testing.T) {
	s := usual().with("bead.diameter", "1.00(3) um")
	s.diameter = 1.06e-6
	a := s.calibrate(t, 3).Axes[0]
	q := a.leg(LegSpectrum)
	if i := q.Combined.Interval95; !(float64(i[0]) < s.kappa && s.kappa < float64(i[1])) {
		t.Errorf("combined interval %v of the drag route misses %g", i, s.kappa)
	}
	if i := q.Statistical.Interval95; float64(i[0]) < s.kappa && s.kappa < float64(i[1]) && float64(i[1])/float64(i[0]) > 1.2 {
		t.Errorf("statistical interval %v counts the uncertainty of the inputs", i)
	}
	// u(kappa) by drag is 1.06 u(diameter)/diameter (worked case of the wall factor at h/R = 10)
	u := math.Sqrt(math.Pow(float64(q.Combined.Standard/q.Value), 2) - math.Pow(float64(q.Statistical.Standard/q.Value), 2))
	if math.Abs(u-math.Hypot(1.0593*0.03, 0.002)) > 3e-4 {
		t.Errorf("the inputs add %.5f to the drag route, want %.5f", u, 1.0593*0.03)
	}
}

// A length scale 6 % off changes the amplitude route alone: 12 %.
func TestWrongScaleIsInconsistent(t *testing.T) {
	s := usual()
	rec := s.record(t, 5)
	for i := range rec.Axes[0].Values {
		rec.Axes[0].Values[i] *= 1.06
	}
	r, err := Calibrate(context.Background(), rec, s.set(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if r.Verdict.Status != Inconsistent {
		t.Fatalf("verdict %q, want inconsistent (p %g)", r.Verdict.Status, float64(r.Verdict.FamilyWiseP))
	}
	a := r.Axes[0]
	if a.Adopted.Stiffness.Known() || a.Adopted.Withheld == "" {
		t.Error("a value is adopted although the routes disagree")
	}
	// ln(1.06^2) = 0.1165; D of 20000 samples is known to sqrt(2/N) = 1 % and more
	if d := float64(a.CrossCheck.Routes.MeanDifference); math.Abs(d-0.1165) > 0.06 {
		t.Errorf("the routes differ by %.3f, want 0.1165 (6 %% of length, squared)", d)
	}
	for _, route := range []string{RouteDrag, RouteAmplitude} {
		r, err := Calibrate(context.Background(), rec, s.set(t), Options{Adopt: route})
		if err != nil {
			t.Fatal(err)
		}
		if q := r.Axes[0].Adopted.Stiffness; !q.Known() || r.Axes[0].Adopted.Weights[route] != 1 {
			t.Errorf("--adopt %s adopts %v with weights %v", route, q.Value, r.Axes[0].Adopted.Weights)
		}
	}
}

// Drift of one thermal rms and 2 % of missing samples leave the estimates unbiased:
// mean over 40 seeds within 3.5 standard errors.
func TestDriftAndGaps(t *testing.T) {
	s := usual()
	s.samples = 3000
	s.drift = math.Sqrt(medium.Boltzmann * s.kelvin / s.kappa)
	const n = 40
	var sum, variance float64
	for seed := range uint64(n) {
		rec := s.record(t, seed+1)
		for i := int(seed); i < s.samples; i += 47 {
			rec.Axes[0].Values[i] = math.NaN()
			rec.Missing++
		}
		rec.Axes[0].Missing = rec.Missing
		r, err := Calibrate(context.Background(), rec, s.set(t), Options{})
		if err != nil {
			t.Fatal(err)
		}
		q := r.Axes[0].leg(LegSpectrumAmplitude)
		sum += math.Log(float64(q.Value) / s.kappa)
		u := float64(q.Statistical.Standard / q.Value)
		variance += u * u
	}
	if mean, se := sum/n, math.Sqrt(variance)/n; math.Abs(mean) > 3.5*se {
		t.Errorf("mean error of ln(stiffness) %.4f with drift and gaps, standard error %.4f", mean, se)
	}
}

// Units and scale: positions in pixels of 100 nm give the same stiffness as in metres.
func TestPixelsAreMetres(t *testing.T) {
	s := usual()
	rec := s.record(t, 9)
	want := s.calibrate(t, 9).Axes[0].Adopted.Stiffness.Value
	for i := range rec.Axes[0].Values {
		rec.Axes[0].Values[i] /= 100e-9
	}
	rec.Axes[0].Unit, rec.Axes[0].ToMetre = "px", math.NaN()
	set := s.with("recording.pixel", "100 nm").set(t)
	r, err := Calibrate(context.Background(), rec, set, Options{})
	if err != nil {
		t.Fatal(err)
	}
	// a division and a multiplication of every sample, and the settling of the search (1e-5 standard errors)
	if got := r.Axes[0].Adopted.Stiffness.Value; math.Abs(float64(got/want)-1) > 1e-6 {
		t.Errorf("stiffness from pixels %g, from metres %g", got, want)
	}
	var missing *SettingError
	if _, err := Calibrate(context.Background(), rec, s.set(t), Options{}); !errors.As(err, &missing) || missing.Key != "recording.pixel" {
		t.Errorf("without a pixel size: error %v, want one that names recording.pixel", err)
	}
}

// The result is a plain value: JSON gives it back to the last bit, and it is the same for
// any number of processors.
func TestResultIsStable(t *testing.T) {
	s := usual()
	s.axes = []string{"x", "y"}
	first, err := json.Marshal(s.calibrate(t, 2))
	if err != nil {
		t.Fatal(err)
	}
	var back Result
	if err := json.Unmarshal(first, &back); err != nil {
		t.Fatal(err)
	}
	again, err := json.Marshal(&back)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(first, again) {
		t.Error("a result read back from JSON is another one")
	}
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	single, err := json.Marshal(s.calibrate(t, 2))
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(first, single) {
		t.Error("the result depends on the number of processors")
	}
}

// What cannot be calibrated is refused with its place and a remedy.
func TestRefusals(t *testing.T) {
	s := usual()
	constant := s.record(t, 1)
	for i := range constant.Axes[0].Values {
		constant.Axes[0].Values[i] = 1e-7
	}
	short := s.record(t, 1)
	short.Axes[0].Values = short.Axes[0].Values[:8]
	short.Samples = 8
	for name, c := range map[string]struct {
		rec  *track.Recording
		s    scene
		want string
	}{
		"no diameter":    {s.record(t, 1), s.with("bead.diameter", ""), "bead.diameter"},
		"in the surface": {s.record(t, 1), s.with("chamber.height", "0.4 um"), "chamber.height"},
		"long exposure":  {s.record(t, 1), s.with("recording.exposure", "1 ms"), "recording.exposure"},
		"constant":       {constant, s, "does not change"},
		"short":          {short, s, "too few samples"},
	} {
		_, err := Calibrate(context.Background(), c.rec, c.s.set(t), Options{})
		if err == nil || !strings.Contains(err.Error(), c.want) || !strings.Contains(err.Error(), "hint:") {
			t.Errorf("%s: error %v, want one that says %q, with a hint", name, err, c.want)
		}
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Calibrate(ctx, s.record(t, 1), s.set(t), Options{}); !errors.Is(err, context.Canceled) {
		t.Errorf("cancelled: error %v", err)
	}
}
