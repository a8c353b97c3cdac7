package calib

import (
	"context"
	"math"
	"slices"
	"strings"
	"testing"

	"beadwell/calib/simulate"
	"beadwell/calib/track"
)

// driven makes a recording of the scene with a stage that moves along its first axis.
func (s scene) driven(t *testing.T, seed uint64, stage simulate.Stage, column bool) *track.Recording {
	t.Helper()
	still := s
	still.events = nil
	rec := still.record(t, seed)
	truth := simulate.Truth{Samples: s.samples, Rate: s.rate, Exposure: s.exposure, Stage: &stage, Events: s.events}
	truth.Axes = s.trapped(t)
	made := simulate.Make(truth, seed)
	for i := range rec.Axes {
		rec.Axes[i].Values = made.Positions[i]
	}
	if column {
		nm := make([]float64, len(made.Stage))
		for i, v := range made.Stage {
			nm[i] = v * 1e9
		}
		rec.Extra = []track.Column{{Header: "stage", Values: nm}}
		rec.ReadAs.Columns = append(rec.ReadAs.Columns, track.ColumnUse{Header: "stage", Role: "kept", Unit: "nm"})
	}
	return rec
}

func (s scene) driving(waveform, amplitude, frequency string) scene {
	s = s.with("role", "driven").with("drive.waveform", waveform)
	if amplitude != "" {
		s = s.with("drive.amplitude", amplitude)
	}
	return s.with("drive.frequency", frequency)
}

var hum = simulate.Stage{Phase: 0.7, Parts: []simulate.Drive{{Waveform: simulate.Sine, Amplitude: 150e-9, Frequency: 28.37}}}

// A sine of known amplitude, 56.74 periods: stiffness, drag and length scale come out right, whether the
// stage has a column or only settings, and a wrong viscosity or length scale does not matter.
func TestDrivenSine(t *testing.T) {
	for name, c := range map[string]struct {
		column bool
		set    func(scene) scene
		volts  float64
	}{
		"settings":        {false, func(s scene) scene { return s }, 0},
		"column":          {true, func(s scene) scene { return s }, 0},
		"camera exposure": {true, func(s scene) scene { s.exposure = 0.8e-4; return s.with("recording.exposure", "0.08 ms") }, 0},
		"wrong viscosity": {false, func(s scene) scene { return s.with("medium.fluid", "").with("medium.viscosity", "1.2 mPa s") }, 0},
		"volts":           {false, func(s scene) scene { return s }, 1.31e-6},
	} {
		s := c.set(usual().driving("sine", "150(1) nm", "28.37 Hz"))
		s.samples = 100000
		rec := s.driven(t, 21, hum, c.column)
		if c.volts > 0 {
			rec = inVolts(rec, c.volts)
		}
		r := calibrated(t, rec, s)
		a := r.Axes[0]
		within := func(what string, q Quantity, want float64) {
			t.Helper()
			u := q.Combined
			if u == nil {
				u = q.Statistical
			}
			// a fixed seed: four standard uncertainties; and no uncertainty above 6 %: the line of 10 s has a power
			// of 3.5e-17 m2 in a spectrum of 1.9e-19 m2/Hz, which makes 2 sqrt(1.9e-19/(2 x 3.5e-17 x 10)) = 3.3 %
			if d := float64(q.Value) - want; !q.Known() || math.Abs(d) > 4*float64(u.Standard) || float64(u.Standard) > 0.06*want {
				t.Errorf("%s: %s = %.5g(%.2g), want %.5g", name, what, float64(q.Value), float64(u.Standard), want)
			}
		}
		within("stiffness", a.leg(LegDriven), s.kappa)
		// 2.79192228e-5 N/m / (2 pi 500 Hz), the drag that the scene is made with
		within("drag", a.Driven.Drag, 8.88696464e-9)
		if c.volts > 0 {
			within("sensitivity", a.Sensitivity.Used, c.volts)
			within("adopted", a.Adopted.Stiffness, s.kappa)
			if a.leg(LegEquipartition).Known() {
				t.Errorf("%s: the variance counts as an independent estimate", name)
			}
		} else {
			within("length scale", a.Driven.LengthScale, 1)
		}
		if c.column {
			within("phase", a.Driven.Lead, float64(a.Driven.LeadExpect))
		}
		if name == "wrong viscosity" {
			if r.Verdict.Status != Inconsistent {
				t.Errorf("a viscosity of 1.2 for 0.89 mPa s passes: %+v", r.Verdict)
			}
		} else if r.Verdict.Status != Consistent {
			t.Errorf("%s: verdict %+v", name, r.Verdict)
		}
	}
}

// The power of the line against values worked out from the formula (Tolic-Norrelykke et al., Rev. Sci. Instrum. 77 (2006) 103101):
// 150 nm, 400 Hz, 28 Hz and two more, recomputed to seven digits.
func TestExpectedPower(t *testing.T) {
	for _, c := range []struct{ a, fc, f, want float64 }{
		{150e-9, 400, 28, 5.485620e-17}, {100e-9, 500, 37, 2.723088e-17}, {200e-9, 1000, 32, 2.045905e-17},
	} {
		if got := expectedPower(c.a, c.fc/c.f); math.Abs(got/c.want-1) > 3e-7 {
			t.Errorf("expectedPower(%g, %g/%g) = %.7g, want %.7g", c.a, c.fc, c.f, got, c.want)
		}
	}
}

// A triangle: the straight line of displacement against speed gives drag over stiffness, both directions, and with
// the corner frequency a stiffness without viscosity.
func TestDrivenTriangle(t *testing.T) {
	stage := simulate.Stage{Phase: 1.1, Parts: []simulate.Drive{{Waveform: simulate.Triangle, Amplitude: 5e-6, Frequency: 4}}}
	several := simulate.Stage{Parts: []simulate.Drive{
		{Waveform: simulate.Triangle, Amplitude: 5e-6, Frequency: 4, Duration: 1}, {Waveform: simulate.Triangle, Amplitude: 5e-6, Frequency: 8}}}
	for name, c := range map[string]struct {
		stage  simulate.Stage
		column bool
		volts  float64
	}{"settings": {stage, false, 0}, "column": {stage, true, 0}, "two speeds": {several, true, 0}, "volts": {stage, false, 1.31e-6}} {
		s := usual().driving("triangle", "5.00(5) um", "4 Hz")
		if name == "two speeds" {
			s = s.with("drive.frequency", "").with("drive.amplitude", "")
		}
		rec := s.driven(t, 31, c.stage, c.column)
		if c.volts > 0 {
			rec = inVolts(rec, c.volts)
		}
		r := calibrated(t, rec, s)
		a := r.Axes[0]
		if r.Verdict.Status != Consistent || !a.Driven.Test.PValueCombined.Known() {
			t.Errorf("%s: verdict %+v", name, r.Verdict)
		}
		for what, q := range map[string]Quantity{LegDriven: a.leg(LegDriven), LegFlow: a.leg(LegFlow), "adopted": a.Adopted.Stiffness} {
			if what == LegFlow && c.volts > 0 {
				continue
			}
			if d := float64(q.Value) - s.kappa; !q.Known() || math.Abs(d) > 4*float64(q.Combined.Standard) || float64(q.Combined.Standard) > 0.08*s.kappa {
				t.Errorf("%s: %s = %+v, want %g", name, what, q, s.kappa)
			}
		}
		if c.volts > 0 {
			q := a.Sensitivity.Used
			if d := float64(q.Value) - c.volts; math.Abs(d) > 4*float64(q.Combined.Standard) {
				t.Errorf("%s: sensitivity %+v, want %g", name, q, c.volts)
			}
		}
		f := a.Driven.Flow
		if p := float64(f.Goodness.PValue); !(p > 1e-3) || len(f.Points) < 12 {
			t.Errorf("%s: straight line through %d strokes: p = %g", name, len(f.Points), p)
		}
	}
}

// Where estimates disagree, each way out that is named gives a stiffness, in metres and in volts, and none that is refused is
// named. The viscosity is 1.3 times what it was.
func TestAdoptAsTold(t *testing.T) {
	sine := usual().driving("sine", "150(1) nm", "28.37 Hz").with("medium.fluid", "").with("medium.viscosity", "1.16 mPa s")
	sine.samples, sine.axes = 100000, []string{"x", "y"}
	still := usual().with("medium.fluid", "").with("medium.viscosity", "1.16 mPa s")
	driven := func() *track.Recording { return sine.driven(t, 21, hum, false) }
	for name, c := range map[string]struct {
		s    scene
		rec  *track.Recording
		want []string // routes, on the first axis
	}{
		"still":           {still, still.record(t, 5), []string{RouteDrag, RouteAmplitude}},
		"driven":          {sine, driven(), []string{RouteDrag, RouteAmplitude, RouteDriven}},
		"driven in volts": {sine, inVolts(driven(), 1.31e-6), []string{RouteDrag, RouteDriven}},
	} {
		r := calibrated(t, c.rec, c.s)
		if r.Verdict.Status != Inconsistent {
			t.Errorf("%s: %+v", name, r.Verdict)
		}
		for i, a := range r.Axes {
			named := 0
			for _, route := range []string{RouteDrag, RouteAmplitude, RouteDriven} {
				if !strings.Contains(a.Adopted.Withheld, "--adopt "+route) {
					continue
				}
				named++
				again, err := Calibrate(context.Background(), c.rec, c.s.set(t), Options{Adopt: route})
				if err != nil || !again.Axes[i].Adopted.Stiffness.Known() {
					t.Errorf("%s, %s: %q, but --adopt %s gives %v", name, a.Name, a.Adopted.Withheld, route, err)
				}
				if i == 0 && !slices.Contains(c.want, route) {
					t.Errorf("%s, %s: %q", name, a.Name, a.Adopted.Withheld)
				}
			}
			if i == 0 && named != len(c.want) || named == 0 {
				t.Errorf("%s, %s: %q names %d routes", name, a.Name, a.Adopted.Withheld, named)
			}
		}
	}
}

// Strokes that grow, or are no whole number of periods, have a slope of their own: it is no drift. A real one is
// found with its size: 40 nm within three standard deviations of the mean of thermal motion, 2 nm.
func TestDrivenDrift(t *testing.T) {
	growing := simulate.Stage{}
	for _, speed := range []float64{20e-6, 60e-6, 100e-6, 140e-6} { // at 140 um/s the bead stands off by 45 nm
		growing.Parts = append(growing.Parts, simulate.Drive{Waveform: simulate.Triangle, Amplitude: speed / 4 / 3.3, Frequency: 3.3, Duration: 0.5})
	}
	slow := simulate.Stage{Phase: 0.4, Parts: []simulate.Drive{{Waveform: simulate.Sine, Amplitude: 3e-6, Frequency: 1.63}}}
	for name, s := range map[string]scene{
		"growing": usual().driving("triangle", "", "").with("drive.frequency", ""),
		"sine":    usual().driving("sine", "3.00(1) um", "1.63 Hz"),
	} {
		for _, drift := range []float64{0, 40e-9} {
			stage := growing
			if name == "sine" {
				stage = slow
			}
			rec := s.driven(t, 77, stage, name == "growing")
			for i := range rec.Axes[0].Values {
				rec.Axes[0].Values[i] += drift * float64(i) / float64(s.samples-1)
			}
			for _, c := range calibrated(t, rec, s).Checks {
				if c.Code != "slow-drift" {
					continue
				}
				if found := c.Level != "ok"; found != (drift > 0) {
					t.Errorf("%s, drift of %g m: %+v", name, drift, c)
				}
				if rms := 12.142480e-9; math.Abs(float64(c.Value)*rms-drift) > 6e-9 {
					t.Errorf("%s, drift of %g m: %+v", name, drift, c)
				}
			}
		}
	}
}

// What is missing or wrong is named.
func TestDrivenRefusals(t *testing.T) {
	base := usual().with("role", "driven")
	for name, c := range map[string]struct {
		s   scene
		key string
	}{
		"no frequency":  {base.with("drive.amplitude", "150 nm"), "drive.frequency"},
		"no amplitude":  {base.with("drive.frequency", "28 Hz"), "drive.amplitude"},
		"above Nyquist": {base.with("drive.frequency", "28 kHz").with("drive.amplitude", "150 nm"), "drive.frequency"},
	} {
		_, err := Calibrate(context.Background(), c.s.record(t, 1), c.s.set(t), Options{})
		if e, ok := err.(*SettingError); !ok || e.Key != c.key {
			t.Errorf("%s: error %v, want one of %s", name, err, c.key)
		}
	}
	still := base.with("drive.frequency", "28 Hz").with("drive.amplitude", "150 nm")
	if _, err := Calibrate(context.Background(), still.record(t, 1), still.set(t), Options{}); err == nil {
		t.Error("a stage at rest passes for a moving one")
	} else if _, ok := err.(*DataError); !ok {
		t.Errorf("a stage at rest: %T %v", err, err)
	}
}

// Over seeded records the driven estimates have no bias and their intervals hold the truth: the mean of z
// in the logarithm lies within 4/sqrt(n) of zero, and of n intervals at 95 % at
// most as many miss as chance exceeds with a probability of 0.1 %: 7 of 40.
func TestDrivenCoverage(t *testing.T) {
	const records, mostMisses = 40, 7
	triangle := simulate.Stage{Phase: 1.1, Parts: []simulate.Drive{{Waveform: simulate.Triangle, Amplitude: 5e-6, Frequency: 10}}}
	for name, c := range map[string]struct {
		stage simulate.Stage
		set   scene
	}{
		"sine":     {hum, usual().driving("sine", "150 nm", "28.37 Hz")},
		"triangle": {triangle, usual().driving("triangle", "5 um", "10 Hz")},
	} {
		c.set.samples = 8192
		truths := map[string]float64{LegDriven: c.set.kappa, "drag": 8.88696464e-9, "scale": 1}
		if name == "triangle" {
			truths[LegFlow] = c.set.kappa
		}
		mean, misses := map[string]float64{}, map[string]int{}
		for seed := range uint64(records) {
			a := calibrated(t, c.set.driven(t, 4000+seed, c.stage, false), c.set).Axes[0]
			for what, want := range truths {
				q := a.leg(what)
				switch what {
				case "drag":
					q = a.Driven.Drag
				case "scale":
					q = a.Driven.LengthScale
				}
				mean[what] += math.Log(float64(q.Value)/want) * float64(q.Value) / float64(q.Statistical.Standard) / records
				if i := q.Statistical.Interval95; want < float64(i[0]) || want > float64(i[1]) {
					misses[what]++
				}
			}
		}
		for what := range truths {
			if math.Abs(mean[what]) > 4/math.Sqrt(records) || misses[what] > mostMisses {
				t.Errorf("%s: %s: mean of z = %.2f, %d of %d intervals miss", name, what, mean[what], misses[what], records)
			}
			t.Logf("%s: %s: mean of z = %.2f, %d of %d intervals miss", name, what, mean[what], misses[what], records)
		}
	}
}

// The estimates of a moving stage can be adopted by name, with a budget that adds up; where there are none, an error says so.
func TestAdoptDriven(t *testing.T) {
	triangle := simulate.Stage{Phase: 1.1, Parts: []simulate.Drive{{Waveform: simulate.Triangle, Amplitude: 5e-6, Frequency: 10}}}
	s := usual().driving("triangle", "5.00(5) um", "10 Hz").with("bead.diameter", "1.00(2) um")
	rec := s.driven(t, 61, triangle, false)
	for adopt, leg := range map[string]string{RouteDriven: LegDriven, RouteFlow: LegFlow} {
		r, err := Calibrate(context.Background(), rec, s.set(t), Options{Adopt: adopt})
		if err != nil {
			t.Fatal(err)
		}
		a := r.Axes[0]
		want := a.leg(leg)
		if math.Abs(float64(a.Adopted.Stiffness.Value/want.Value)-1) > 1e-12 || math.Abs(float64(a.Adopted.Stiffness.Combined.Standard/want.Combined.Standard)-1) > 1e-9 {
			t.Errorf("--adopt %s: %v, the estimate is %v", adopt, a.Adopted.Stiffness, want)
		}
		sum := 0.0
		for _, l := range a.Adopted.Budget {
			sum += float64(l.Share)
		}
		if math.Abs(sum-1) > 1e-9 || a.Adopted.Expanded == nil {
			t.Errorf("--adopt %s: the shares of the budget add up to %g", adopt, sum)
		}
	}
	sine := usual().driving("sine", "150(1) nm", "28.37 Hz")
	sine.samples = 100000
	for name, c := range map[string]struct {
		s     scene
		adopt string
	}{"still": {usual(), RouteDriven}, "sine": {sine, RouteFlow}} {
		rec := c.s.record(t, 1)
		if name == "sine" {
			rec = c.s.driven(t, 21, hum, false)
		}
		_, err := Calibrate(context.Background(), rec, c.s.set(t), Options{Adopt: c.adopt})
		if e, ok := err.(*SettingError); !ok || e.Key != "adopt" {
			t.Errorf("%s: error %v", name, err)
		}
	}
}
