package calib

import (
	"math"
	"slices"
	"testing"

	"beadwell/calib/simulate"
	"beadwell/calib/track"
)

// pairScene records two axes of a trap with a stiffness ratio, turned and mixed as the truth says.
func pairScene(t *testing.T, ratio, rotation float64, leaks []simulate.Leak, seed uint64, samples int) (*track.Recording, scene) {
	t.Helper()
	s := usual().with("recording.noise", "")
	s.axes, s.samples = []string{"x", "y"}, samples
	rec := s.record(t, seed)
	kT := 1.380649e-23 * s.kelvin
	axis := func(kappa float64) simulate.Axis {
		return simulate.Axis{Corner: kappa / (2 * math.Pi * usualDrag), Variance: kT / kappa, Noise: 3e-9}
	}
	truth := simulate.Truth{Samples: s.samples, Rate: s.rate, Axes: []simulate.Axis{axis(s.kappa), axis(s.kappa * ratio)}, Rotation: rotation, Leaks: leaks}
	for i, x := range simulate.Record(truth, seed) {
		rec.Axes[i].Values = x
	}
	return rec, s
}

func tilted(r *Result) bool {
	return slices.ContainsFunc(r.Findings, func(f Finding) bool { return f.Code == CodeTilted })
}

// A trap turned by 20 degrees: the principal axes, their stiffness and the angle come out, and the user is told.
func TestTiltedTrap(t *testing.T) {
	const ratio, angle = 0.6, 20 * math.Pi / 180
	rec, s := pairScene(t, ratio, angle, nil, 8, 60000)
	r := calibrated(t, rec, s)
	a := r.TrapAxes
	for i, p := range a.Principal {
		want := s.kappa
		if i == 1 {
			want *= ratio
		}
		if d := float64(p.Stiffness.Value) - want; math.Abs(d) > 4*float64(p.Stiffness.Statistical.Standard) || p.Nearest != rec.Axes[i].Name {
			t.Errorf("stiffness near %s: %+v, want %g", p.Nearest, p.Stiffness, want)
		}
		// sd sqrt(v1 v2/n)/(v1-v2) with n = 60000 pi fc/fs: 0.023 rad
		if d := float64(p.Angle.Value) - angle; math.Abs(d) > 4*float64(p.Angle.Statistical.Standard) || float64(p.Angle.Statistical.Standard) > 0.03 {
			t.Errorf("angle near %s: %+v, want %g", p.Nearest, p.Angle, angle)
		}
	}
	if !tilted(r) {
		t.Error("a tilt that changes the stiffness by several per cent is not told")
	}
	if f := a.Pairs[0].Fast; math.Abs(float64(f.Value)) > 4*float64(f.Statistical.Standard)+0.06 { // S1 and S2 still differ by 10 % at twice the corner
		t.Errorf("a tilt shows as cross-talk: %+v", f)
	}
}

// Cross-talk of the detector shows at high frequency.
func TestCrossTalk(t *testing.T) {
	rec, s := pairScene(t, 0.8, 0, []simulate.Leak{{From: 0, Into: 1, Share: 0.2}}, 8, 40000)
	r := calibrated(t, rec, s)
	f := r.TrapAxes.Pairs[0].Fast
	// 0.2 of x in y: 0.2/sqrt(1.04) where both diffuse alike, a little less beside the noise
	if math.Abs(float64(f.Value)-0.19) > 4*float64(f.Statistical.Standard)+0.01 {
		t.Errorf("fast correlation %+v, want 0.19", f)
	}
}

// Axes that are those of the trap are not called tilted, and the correlation is as scattered as it says: over 60 seeded records the
// mean square of z is 1 within four times sqrt(2/60).
func TestStraightTrap(t *testing.T) {
	const records = 60
	sum := 0.0
	for seed := range uint64(records) {
		rec, s := pairScene(t, 0.8, 0, nil, 300+seed, 4096)
		r := calibrated(t, rec, s)
		if tilted(r) {
			t.Errorf("seed %d: straight axes are called tilted: %s", seed, r.TrapAxes.Text)
		}
		c := r.TrapAxes.Pairs[0].Correlation
		z := float64(c.Value) / float64(c.Statistical.Standard)
		sum += z * z / records
	}
	if math.Abs(sum-1) > 4*math.Sqrt(2.0/records) {
		t.Errorf("mean square of z = %.2f, want 1", sum)
	}
}
