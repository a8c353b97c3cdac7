package calib

import (
	"context"
	"math"
	"testing"

	"beadwell/calib/track"
)

// inVolts turns a recording into one of a detector with a sensitivity [m/V].
func inVolts(rec *track.Recording, perVolt float64) *track.Recording {
	for i := range rec.Axes {
		a := &rec.Axes[i]
		a.Unit, a.ToMetre = "V", math.NaN()
		for j := range a.Values {
			a.Values[j] /= perVolt
		}
	}
	return rec
}

func calibrated(t *testing.T, rec *track.Recording, s scene) *Result {
	t.Helper()
	r, err := Calibrate(context.Background(), rec, s.set(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// Without a sensitivity the spectrum and the computed drag give it, the drag leg is
// adopted, and nothing is left to check it against.
func TestVoltsWithoutSensitivity(t *testing.T) {
	const perVolt = 1.31e-6
	for name, noise := range map[string]string{"noise fitted": "", "noise stated": "4(1) nm"} {
		s := usual().with("recording.noise", noise)
		s.noise = 4e-9
		a := calibrated(t, inVolts(s.record(t, 5), perVolt), s).Axes[0]
		used := a.Sensitivity.Used
		u := float64(used.Statistical.Standard)
		// sd of ln D: 0.7 % for 2 s at fc = 500 Hz, half of it for the sensitivity
		if d := float64(used.Value) - perVolt; math.Abs(d) > 4*u || u > 0.02*perVolt || u < 0.002*perVolt {
			t.Errorf("%s: sensitivity %.5g(%.2g) m/V, want %.5g", name, float64(used.Value), u, perVolt)
		}
		k := a.Adopted.Stiffness
		if d := float64(k.Value) - s.kappa; math.Abs(d) > 4*float64(k.Statistical.Standard) {
			t.Errorf("%s: stiffness %v, want %g", name, k, s.kappa)
		}
		if got := a.leg(LegSpectrum); got.Value != k.Value {
			t.Errorf("%s: adopted %v, want the drag leg %v", name, k.Value, got.Value)
		}
		for _, leg := range []string{LegEquipartition, LegDisplacement, LegSpectrumAmplitude} {
			if q := a.leg(leg); q.Known() || q.Reason != selfScaled {
				t.Errorf("%s: %s = %v (%q), want it withheld", name, leg, q.Value, q.Reason)
			}
		}
		if a.CrossCheck.Routes.PValue.Known() || a.DragRatio.Known() {
			t.Errorf("%s: the cross-check was made of one leg: %+v", name, a.CrossCheck.Routes)
		}
		// the fit in metres repeats the sensitivity: D is kT/gamma. The search for it stops at 1e-9.
		if d := float64(a.Spectrum.Diffusion.Value)/(2*math.Pi*float64(a.Spectrum.Corner.Value)*float64(a.Spectrum.Variance.Value)) - 1; math.Abs(d) > 1e-5 {
			t.Errorf("%s: D of the fit is off kT/gamma by %.2g", name, d)
		}
	}
}

// A stated sensitivity is used and compared with the one from the drag.
func TestVoltsWithSensitivity(t *testing.T) {
	const perVolt = 1.31e-6
	s := usual().with("recording.sensitivity", "1.31(2) um/V")
	r := calibrated(t, inVolts(s.record(t, 5), perVolt), s)
	a := r.Axes[0]
	if a.Sensitivity.Origin != SensitivityStated || math.Abs(float64(a.Sensitivity.Used.Value)/perVolt-1) > 1e-12 {
		t.Errorf("sensitivity %+v, want the stated one", a.Sensitivity)
	}
	free := usual()
	b := calibrated(t, inVolts(free.record(t, 5), perVolt), free).Axes[0]
	// the same estimate by two ways: the fit is equivariant to the unit up to the settling of its search, 1e-5 standard uncertainties
	if d := float64(a.Sensitivity.FromDrag.Value/b.Sensitivity.Used.Value) - 1; math.Abs(d) > 1e-6 {
		t.Errorf("sensitivity from the drag depends on the stated one by %.2g", d)
	}
	if !a.CrossCheck.Routes.PValue.Known() || r.Verdict.Status != Consistent {
		t.Errorf("verdict %+v, routes %+v", r.Verdict, a.CrossCheck.Routes)
	}
	wrong := usual().with("recording.sensitivity", "1.45(1) um/V") // 10.7 % too large
	if r := calibrated(t, inVolts(wrong.record(t, 5), perVolt), wrong); r.Verdict.Status != Inconsistent {
		t.Errorf("a wrong sensitivity passes: %+v", r.Verdict)
	}
}

// Of recordings in volts the sensitivity has no bias and its intervals hold it: over 120
// records, z has a mean within 4/sqrt(120) and the 95 % interval misses at most 14 (p = 0.003 for 6 expected).
func TestVoltsCoverage(t *testing.T) {
	const perVolt, records = 0.8e-6, 120
	s := usual().with("recording.noise", "")
	s.samples = 4096
	mean, misses := 0.0, 0
	for seed := range uint64(records) {
		q := calibrated(t, inVolts(s.record(t, 1000+seed), perVolt), s).Axes[0].Sensitivity.Used
		mean += (float64(q.Value) - perVolt) / float64(q.Statistical.Standard) / records
		if i := q.Statistical.Interval95; perVolt < i[0] || perVolt > i[1] {
			misses++
		}
	}
	if math.Abs(mean) > 4/math.Sqrt(records) || misses > 14 {
		t.Errorf("mean of z = %.2f, %d of %d intervals miss", mean, misses, records)
	}
}
