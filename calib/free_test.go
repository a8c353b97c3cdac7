package calib

import (
	"context"
	"math"
	"slices"
	"testing"

	"beadwell/calib/simulate"
	"beadwell/calib/track"
)

// drag of the usual bead: 2.79192228e-5 N/m over 2 pi 500 Hz, and kT at 298.15 K over it.
const (
	usualDrag      = 8.88696464e-9
	usualDiffusion = 4.63195834e-13
)

// like makes a recording of the scene with another motion along its axes.
func (s scene) like(t *testing.T, axis simulate.Axis, seed uint64) *track.Recording {
	t.Helper()
	rec := s.record(t, seed)
	truth := simulate.Truth{Samples: s.samples, Rate: s.rate, Exposure: s.exposure}
	for range rec.Axes {
		truth.Axes = append(truth.Axes, axis)
	}
	for i, x := range simulate.Record(truth, seed) {
		rec.Axes[i].Values = x
	}
	return rec
}

// A free bead: the diffusion coefficient, the drag and the verdict; a heating laser is off; volts give a sensitivity.
func TestFreeBead(t *testing.T) {
	s := usual().with("role", "free").with("recording.noise", "").with("recording.exposure", "0.4 ms")
	s.rate, s.exposure, s.noise = 2000, 0.4e-3, 8e-9
	axis := simulate.Axis{Diffusion: usualDiffusion, Noise: s.noise, Drift: 1e-6}
	r := calibrated(t, s.like(t, axis, 9), s)
	f := r.Axes[0].Free
	// 20000 displacements: sd of ln D about sqrt(2/n) times 1.5 for the fitted noise, 1.5 %; four of them
	within := func(what string, q Quantity, want, most float64) {
		t.Helper()
		if d := float64(q.Value) - want; !q.Known() || math.Abs(d) > 4*float64(q.Statistical.Standard) || float64(q.Statistical.Standard) > most*want {
			t.Errorf("%s = %+v, want %g", what, q, want)
		}
	}
	within("D", f.Diffusion, usualDiffusion, 0.02)
	within("drag", r.Axes[0].MeasuredDrag, usualDrag, 0.02)
	within("noise", f.Noise, s.noise, 0.05)
	if r.Verdict.Status != Consistent || r.Axes[0].Adopted.Stiffness.Known() || r.Role != RoleFree {
		t.Errorf("verdict %+v, role %q", r.Verdict, r.Role)
	}
	hot := s.with("laser.heating", "40 K/W").with("laser.power", "0.1 W")
	if got := calibrated(t, s.like(t, axis, 9), hot); got.Axes[0].Free.Expected.Value != f.Expected.Value {
		t.Error("a laser that is off heats the water")
	}
	larger := s.with("bead.diameter", "1.2 um")
	if got := calibrated(t, s.like(t, axis, 9), larger); got.Verdict.Status != Inconsistent || len(got.Findings) == 0 || got.Findings[0].Code != CodeFreeDrag {
		t.Errorf("a bead of 1.2 um passes for one of 1 um: %+v", got.Verdict)
	}
	volts := calibrated(t, inVolts(s.like(t, axis, 9), 1.31e-6), s)
	within("sensitivity", volts.Axes[0].Sensitivity.Used, 1.31e-6, 0.01)
}

// A background gives the noise and the lines; a trapped recording takes both from it, in metres and in volts.
func TestBackground(t *testing.T) {
	s := usual().with("recording.noise", "")
	s.noise = 5e-9
	empty := simulate.Axis{Fixed: true, Noise: s.noise, Lines: []simulate.Line{{Frequency: 50, Amplitude: 3e-9}}}
	alone := s.with("role", "background").with("bead.diameter", "")
	r := calibrated(t, s.like(t, empty, 3), alone)
	b := r.Axes[0].Background
	// 20000 samples, three quarters of the band: 1/sqrt(7500) = 1.2 % of the variance, half of it for the noise
	if d := float64(b.Noise.Value) - s.noise; math.Abs(d) > 4*float64(b.Noise.Statistical.Standard) || float64(b.Noise.Statistical.Standard) > 0.007*s.noise {
		t.Errorf("noise %+v, want %g", b.Noise, s.noise)
	}
	if len(b.Lines) != 1 || math.Abs(float64(b.Lines[0].Frequency)-50) > 0.1 || math.Abs(float64(b.Lines[0].Amplitude)-3e-9) > 3e-10 {
		t.Errorf("lines %+v, want 3 nm at 50 Hz", b.Lines)
	}
	if a := r.Axes[0]; float64(slices.Max(a.Trace.High)) < 3*s.noise || float64(slices.Min(a.Trace.Low)) > -3*s.noise { // the largest of 20000
		t.Errorf("trace from %v to %v m", slices.Min(a.Trace.Low), slices.Max(a.Trace.High))
	}
	inV := calibrated(t, inVolts(s.like(t, empty, 3), 1.31e-6), alone).Axes[0].Trace
	if high := float64(slices.Max(inV.High)) * 1.31e-6; inV.Unit != "V" || r.Axes[0].Trace.Unit != "" || math.Abs(high/float64(slices.Max(r.Axes[0].Trace.High))-1) > 1e-9 {
		t.Errorf("trace in %q reaches to %v m", inV.Unit, high)
	}
	for name, perVolt := range map[string]float64{"metres": 0, "volts": 1.31e-6} {
		rec, other := s.record(t, 4), s.like(t, empty, 3)
		other.Name = "empty"
		if perVolt > 0 {
			rec, other = inVolts(rec, perVolt), inVolts(other, perVolt)
		}
		got, err := Calibrate(context.Background(), rec, s.set(t), Options{Background: other})
		if err != nil {
			t.Fatal(err)
		}
		a := got.Axes[0]
		if a.Spectrum.NoiseOrigin != "background and fitted" || a.Background.Name != "empty" {
			t.Errorf("%s: noise from %q, background %q", name, a.Spectrum.NoiseOrigin, a.Background.Name)
		}
		// the sensitivity of volts is known to 1 %, so the noise in metres is too
		if d := float64(a.Spectrum.Noise.Value)/s.noise - 1; math.Abs(d) > 0.04 {
			t.Errorf("%s: noise off by %.3f", name, d)
		}
		if len(a.Spectrum.Excluded) == 0 || float64(a.Spectrum.Excluded[0].Range[0]) > 50 || float64(a.Spectrum.Excluded[0].Range[1]) < 50 {
			t.Errorf("%s: the line at 50 Hz is not left out: %+v", name, a.Spectrum.Excluded)
		}
		k := a.Adopted.Stiffness
		if d := float64(k.Value) - s.kappa; math.Abs(d) > 4*float64(k.Combined.Standard) {
			t.Errorf("%s: stiffness %+v, want %g", name, k, s.kappa)
		}
	}
	slow := s.like(t, empty, 3)
	slow.Rate /= 2
	if _, err := Calibrate(context.Background(), s.record(t, 4), s.set(t), Options{Background: slow}); err == nil {
		t.Error("a background at another rate passes")
	}
}

// A background that drifts is said to, and the uncertainty of its noise covers the excess; white ones are not: 60 seeded
// records, none beyond four standard uncertainties (p = 6e-5 each).
func TestBackgroundDrift(t *testing.T) {
	s := usual()
	s.samples = 4096
	for seed := range uint64(60) {
		b, err := measureNoise(s.like(t, simulate.Axis{Fixed: true, Noise: 5e-9}, seed).Axes[0].Values, s.rate)
		if err != nil || b.drifts {
			t.Errorf("seed %d: a white background drifts by %.3f (%v)", seed, b.excess, err)
		}
	}
	slow := s.like(t, simulate.Axis{Corner: 20, Variance: 9e-18, Noise: 5e-9}, 1).Axes[0].Values
	b, err := measureNoise(slow, s.rate)
	// 9 nm2 more than 25 nm2
	if err != nil || !b.drifts || math.Abs(b.excess-9.0/25) > 0.25 || b.u < 0.3*b.excess*b.variance {
		t.Errorf("excess %.3f, u %.3g of %.3g (%v)", b.excess, b.u, b.variance, err)
	}
}
