package calib

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"math"
	"runtime"
	"slices"
	"testing"

	"beadwell/calib/track"
)

// inParts hands a recording to a Gatherer as the reader does, in windows of 32 parts, and returns what takes its place.
func inParts(t *testing.T, rec *track.Recording, part int) (*track.Recording, *Gatherer) {
	t.Helper()
	return inWindows(t, rec, 32*part, func(int) int { return 32 * part })
}

func inWindows(t *testing.T, rec *track.Recording, first int, next func(at int) int) (*track.Recording, *Gatherer) {
	t.Helper()
	g := NewGatherer(250e6)
	for from, size := 0, first; from < rec.Samples; from, size = from+size, next(from) {
		window := cutRecording(rec, stretch{from: from, to: min(from+size, rec.Samples), why: []string{""}})
		if err := g.Part(window, 0); err != nil {
			t.Fatal(err)
		}
	}
	empty := *rec
	empty.InParts, empty.Axes = true, slices.Clone(rec.Axes)
	for i := range empty.Axes {
		empty.Axes[i].Values = nil
	}
	return &empty, g
}

func (s scene) calibrateInParts(t *testing.T, seed uint64, part int) *Result {
	t.Helper()
	rec, g := inParts(t, s.record(t, seed), part)
	r, err := Calibrate(context.Background(), rec, s.set(t), Options{Gathered: g})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// Over seeded recordings the estimates from parts are unbiased, and scatter as their uncertainties say. Bounds: the mean of
// M deviates has the standard deviation 1/sqrt(M), their variance sqrt(2/M), of which four are allowed, and half as much
// again of the mean for the bias of logarithms and shares, which is second order. Slow parts, of 13 periods, are where
// the mean and the line of each part, and the ends of each, count most: without any of these the deviates of the
// slow recording are off by more than one.
func TestPartsCalibrated(t *testing.T) {
	const records = 40
	slow := usual()
	slow.rate, slow.samples, slow.kappa = 20e3, 96*512, 2.79192228e-5
	noisy := usual().with("recording.noise", "")
	noisy.noise, noisy.samples = 4e-9, 96*512
	camera := usual().with("recording.exposure", "0.1 ms")
	camera.exposure, camera.drift, camera.samples = 1e-4, 4e-8, 96*512
	for name, s := range map[string]scene{"slow": slow, "noisy": noisy, "camera with drift": camera} {
		var sum, square [legCount]float64
		for seed := range uint64(records) {
			r := s.calibrateInParts(t, 1000+seed, 512)
			for i, e := range r.Axes[0].Estimates {
				k := e.Stiffness
				if !k.Known() {
					t.Fatalf("%s: %s is withheld: %s", name, e.Leg, k.Reason)
				}
				z := math.Log(float64(k.Value)/s.kappa) / (float64(k.Statistical.Standard) / float64(k.Value))
				sum[i] += z / records
				square[i] += z * z / records
			}
		}
		for i := range sum {
			if bound := 6 / math.Sqrt(records); math.Abs(sum[i]) > bound {
				t.Errorf("%s, %s: mean deviate %.2f, want within %.2f of 0", name, legNames[i], sum[i], bound)
			}
			if v, bound := square[i]-sum[i]*sum[i], 4*math.Sqrt(2.0/records); math.Abs(v-1) > bound {
				t.Errorf("%s, %s: variance of deviates %.2f, want within %.2f of 1", name, legNames[i], v, bound)
			}
		}
	}
}

// The same recording as a whole and in parts: the estimates differ by what the parts lose, a share l of the information, which
// makes a difference of sqrt(l) standard uncertainties, of which five are allowed; and the result says so.
func TestPartsAgainstWhole(t *testing.T) {
	s := usual()
	s.samples, s.axes = 32*4096*2+1000, []string{"x", "y"}
	rec := s.record(t, 7)
	whole, err := Calibrate(context.Background(), rec, s.set(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	empty, g := inParts(t, rec, 4096)
	cut, err := Calibrate(context.Background(), empty, s.set(t), Options{Gathered: g})
	if err != nil {
		t.Fatal(err)
	}
	p := cut.Recording.Parts
	if whole.Recording.Parts != nil || p == nil || p.Count != 64 || p.Samples != 4096 || p.LeftOut != 1000 || p.GivenUp != 0 {
		t.Fatalf("parts %+v, want 64 of 4096 samples with 1000 left out", p)
	}
	// what is left over, mean and line of 64 parts of 205 periods: 2/(pi 205) each, as two of the pi T fc degrees of freedom
	if lost := float64(p.Lost[0]); lost < 0.004 || lost > 0.02 {
		t.Errorf("%.3g of the information is lost, want about 1000/263144 and up to 2/(205 pi)", lost)
	}
	if !slices.ContainsFunc(cut.Findings, func(f Finding) bool { return f.Code == CodeParts && f.Severity == Note }) {
		t.Error("no finding says that the recording was cut")
	}
	for a := range whole.Axes {
		for i, e := range whole.Axes[a].Estimates {
			want, got := e.Stiffness, cut.Axes[a].Estimates[i].Stiffness
			u := float64(want.Statistical.Standard)
			bound := 5 * math.Sqrt(float64(p.Lost[0])) * u
			if i == displacementLeg || i == timeLeg { // other lags, which are a tenth less efficient
				bound = u
			}
			if d := float64(got.Value - want.Value); math.Abs(d) > bound {
				t.Errorf("%s, %s: %g in parts, %g as a whole, differ by %.2f standard uncertainties", whole.Axes[a].Name, e.Leg, got.Value, want.Value, d/u)
			}
			if ratio := float64(got.Statistical.Standard) / u; math.Abs(ratio-1) > 0.03 {
				t.Errorf("%s, %s: the standard uncertainty in parts is %.3f times that of the whole", whole.Axes[a].Name, e.Leg, ratio)
			}
		}
		potential, other := whole.Axes[a].Equipartition.Potential, cut.Axes[a].Equipartition.Potential
		if d := float64(potential.Anharmonic.Value - other.Anharmonic.Value); math.Abs(d) > float64(potential.Anharmonic.Statistical.Standard)/2 {
			t.Errorf("excess kurtosis %g in parts, %g as a whole", other.Anharmonic.Value, potential.Anharmonic.Value)
		}
	}
	for i, pair := range whole.TrapAxes.Pairs {
		got := cut.TrapAxes.Pairs[i]
		if d := float64(got.Correlation.Value - pair.Correlation.Value); math.Abs(d) > 5*math.Sqrt(float64(p.Lost[0]))*float64(pair.Correlation.Statistical.Standard) {
			t.Errorf("correlation %g in parts, %g as a whole", got.Correlation.Value, pair.Correlation.Value)
		}
		if d := float64(got.Fast.Value - pair.Fast.Value); math.Abs(d) > float64(pair.Fast.Statistical.Standard) {
			t.Errorf("fast correlation %g in parts, %g as a whole", got.Fast.Value, pair.Fast.Value)
		}
	}
	if len(whole.Checks) != len(cut.Checks) {
		t.Fatalf("%d checks in parts, %d as a whole", len(cut.Checks), len(whole.Checks))
	}
	for i, c := range whole.Checks {
		if o := cut.Checks[i]; o.Code != c.Code || o.Level != c.Level || o.Judged != c.Judged {
			t.Errorf("check %s %s is %s in parts (%s), %s as a whole", c.Code, c.Axis, o.Level, o.Text, c.Level)
		}
	}
}

// The result does not depend on the number of processors, nor the estimates on the stretches in which samples come.
func TestPartsDeterministic(t *testing.T) {
	s := usual()
	s.samples, s.axes = 32*2048*2+777, []string{"x", "y", "z"}
	rec := s.record(t, 3)
	run := func(processors int, next func(int) int) []byte {
		defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(processors))
		empty, g := inWindows(t, rec, 32*2048, next)
		r, err := Calibrate(context.Background(), empty, s.set(t), Options{Gathered: g})
		if err != nil {
			t.Fatal(err)
		}
		for i := range r.Checks { // sums over blocks that a stretch ends in are rounded otherwise
			r.Checks[i].Value, r.Checks[i].Text = 0, ""
		}
		for i := range r.Axes {
			r.Axes[i].Trace = Trace{}
		}
		text, err := json.Marshal(r)
		if err != nil {
			t.Fatal(err)
		}
		return text
	}
	want := run(1, func(int) int { return 32 * 2048 })
	if !bytes.Equal(run(8, func(int) int { return 32 * 2048 }), want) {
		t.Error("the result depends on the number of processors")
	}
	if !bytes.Equal(run(8, func(at int) int { return 1 + (at*7919)%5000 }), want) {
		t.Error("the result depends on the stretches in which the samples come")
	}
}

// A line is taken out of the mean spectrum: it is found where it is, with its amplitude, and variance and
// displacements are those without it.
func TestPartsLines(t *testing.T) {
	s := usual()
	s.samples = 32 * 4096 * 2
	clean := s.calibrateInParts(t, 11, 4096)
	const amplitude, hz = 3e-9, 1234.5
	rec := s.record(t, 11)
	for i := range rec.Axes[0].Values {
		rec.Axes[0].Values[i] += amplitude * math.Sin(2*math.Pi*hz*float64(i)/s.rate+0.4)
	}
	empty, g := inParts(t, rec, 4096)
	r, err := Calibrate(context.Background(), empty, s.set(t), Options{Gathered: g})
	if err != nil {
		t.Fatal(err)
	}
	found := false
	for _, e := range r.Axes[0].Spectrum.Excluded {
		found = found || float64(e.Range[0]) < hz && hz < float64(e.Range[1])
	}
	if !found || len(r.Axes[0].Spectrum.Excluded) != 1 || len(clean.Axes[0].Spectrum.Excluded) != 0 {
		t.Fatalf("excluded are %v with a line at %g Hz, %v without", r.Axes[0].Spectrum.Excluded, hz, clean.Axes[0].Spectrum.Excluded)
	}
	for i, e := range r.Axes[0].Estimates {
		want := clean.Axes[0].Estimates[i].Stiffness
		// the line has 3 % of the variance, or seven standard uncertainties
		if d := float64(e.Stiffness.Value - want.Value); math.Abs(d) > 0.3*float64(want.Statistical.Standard) {
			t.Errorf("%s: %g with the line, %g without: %.2f standard uncertainties", e.Leg, e.Stiffness.Value, want.Value, d/float64(want.Statistical.Standard))
		}
	}
}

// What is wrong with a recording is seen in parts too.
func TestPartsHealth(t *testing.T) {
	for code, spoil := range map[string]func(x []float64, i int) float64{
		"jump": func(x []float64, i int) float64 {
			if i > len(x)/3 {
				return x[i] + 20e-9
			}
			return x[i]
		},
		"slow-drift": func(x []float64, i int) float64 { return x[i] + 40e-9*float64(i)/float64(len(x)) },
		"rail":       func(x []float64, i int) float64 { return math.Min(x[i], 3.15e-7) },
		"frozen-samples": func(x []float64, i int) float64 {
			if i > len(x)/2 && i < len(x)*2/3 {
				return x[len(x)/2]
			}
			return x[i]
		},
		"tone": func(x []float64, i int) float64 { return x[i] + 4e-9*math.Sin(0.9*float64(i)) },
	} {
		s := usual()
		s.samples = 32 * 4096 * 2
		rec := s.record(t, 5)
		x := slices.Clone(rec.Axes[0].Values)
		for i := range x {
			rec.Axes[0].Values[i] = spoil(x, i)
		}
		empty, g := inParts(t, rec, 4096)
		r, err := Calibrate(context.Background(), empty, s.set(t), Options{Gathered: g})
		if err != nil {
			t.Fatalf("%s: %v", code, err)
		}
		if !slices.ContainsFunc(r.Checks, func(c Check) bool { return c.Code == code && c.Level != "ok" }) {
			t.Errorf("%s is not seen in parts", code)
		}
	}
}

// Few missing samples are bridged; a part with many is given up, and counted.
func TestPartsMissing(t *testing.T) {
	s := usual()
	s.samples = 32 * 4096 * 2
	rec := s.record(t, 9)
	x := rec.Axes[0].Values
	for _, i := range []int{100, 5000, 9000, 9001} {
		x[i] = math.NaN()
	}
	for i := 200_000; i < 200_500; i++ {
		x[i] = math.NaN()
	}
	rec.Axes[0].Missing, rec.Missing = 504, 504
	empty, g := inParts(t, rec, 4096)
	r, err := Calibrate(context.Background(), empty, s.set(t), Options{Gathered: g})
	if err != nil {
		t.Fatal(err)
	}
	if p := r.Recording.Parts; p.Count != 63 || p.GivenUp != 1 || p.Bridged != 4 || p.LeftOut != 4096 {
		t.Errorf("parts %+v, want 63 used, one given up, 4 samples bridged", p)
	}
	if k := r.Axes[0].Adopted.Stiffness; math.Abs(float64(k.Value)-s.kappa) > 4*float64(k.Combined.Standard) {
		t.Errorf("stiffness %g +- %g, want %g", k.Value, k.Combined.Standard, s.kappa)
	}
	// a gap between stretches that is longer than any bridge begins a new part
	g = NewGatherer(250e6)
	half := len(x) / 2
	for i, gap := range []int{0, longestBridge + 1} {
		if err := g.Part(cutRecording(rec, stretch{from: i * half, to: (i + 1) * half, why: []string{""}}), gap); err != nil {
			t.Fatal(err)
		}
	}
	if g.seen != len(x)+longestBridge+1 || g.axes[0].health.Samples() != g.seen || g.axes[0].health.Missing() != 504+longestBridge+1 {
		t.Errorf("%d samples seen, %d by the checks, %d missing", g.seen, g.axes[0].health.Samples(), g.axes[0].health.Missing())
	}
}

// In volts and pixels the sums are turned into metres at the end; the same recording in
// metres gives the same stiffness to rounding.
func TestPartsScale(t *testing.T) {
	s := usual()
	s.samples, s.axes = 32*1024*2, []string{"x", "y"}
	want := s.calibrateInParts(t, 21, 1024)
	rec := s.record(t, 21)
	const pixel = 65e-9
	for i := range rec.Axes {
		rec.Axes[i].Unit, rec.Axes[i].ToMetre = "px", math.NaN()
		for k := range rec.Axes[i].Values {
			rec.Axes[i].Values[k] /= pixel
		}
	}
	empty, g := inParts(t, rec, 1024)
	r, err := Calibrate(context.Background(), empty, s.with("recording.pixel", "65 nm").set(t), Options{Gathered: g})
	if err != nil {
		t.Fatal(err)
	}
	for a := range r.Axes {
		for i, e := range r.Axes[a].Estimates {
			if k := want.Axes[a].Estimates[i].Stiffness; math.Abs(float64(e.Stiffness.Value/k.Value)-1) > 1e-9 {
				t.Errorf("%s: %.12g from pixels, %.12g from metres", e.Leg, e.Stiffness.Value, k.Value)
			}
		}
	}
	if a, b := r.TrapAxes.Pairs[0].Correlation.Value, want.TrapAxes.Pairs[0].Correlation.Value; math.Abs(float64(a-b)) > 1e-9 {
		t.Errorf("correlation %.12g from pixels, %.12g from metres", a, b)
	}
}

// What needs the samples themselves is refused.
func TestPartsRefuse(t *testing.T) {
	s := usual()
	s.samples = 32 * 1024
	empty, g := inParts(t, s.record(t, 1), 1024)
	var setting *SettingError
	if _, err := Calibrate(context.Background(), empty, s.set(t), Options{Gathered: g, Use: UseGood}); !errors.As(err, &setting) || setting.Key != "use" {
		t.Errorf("--use good: %v", err)
	}
	for _, role := range []string{RoleFree, RoleBackground, RoleDriven} {
		if _, err := Calibrate(context.Background(), empty, s.with("role", role).set(t), Options{Gathered: g}); !errors.As(err, &setting) || setting.Key != "role" {
			t.Errorf("role %s: %v", role, err)
		}
	}
}
