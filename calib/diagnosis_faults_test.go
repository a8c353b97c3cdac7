package calib

import (
	"context"
	"math"
	"strings"
	"testing"
)

// tied returns the causes of the tie by code and axis.
func tied(d *Diagnosis) map[string]Cause {
	out := map[string]Cause{}
	for _, c := range d.Causes {
		if c.Tied {
			out[strings.TrimSpace(c.Code+" "+c.Axis)] = c
		}
	}
	return out
}

// A true cause falls out of the tie when its likelihood is ten times below that of the best,
// which happens to it by chance with a probability of at most 3 % (chi-square of
// one degree of freedom above 2 ln 10). Of the 18 recordings at most two may, and not both of one fault.
func TestDiagnosisFindsTheCause(t *testing.T) {
	const seeds = 2
	missed := 0
	for _, f := range faults {
		before := missed
		for seed := uint64(1); seed <= seeds; seed++ {
			r := f.diagnose(t, seed)
			if r.Diagnosis == nil {
				t.Errorf("%s, seed %d: no diagnosis; %s, %s", f.name, seed, r.Verdict.Status, r.Verdict.Reason)
				continue
			}
			found := tied(r.Diagnosis)
			key := f.code
			if f.code == CauseScaleOne {
				key += " x"
			}
			c, ok := found[key]
			if !ok {
				missed++
				t.Logf("%s, seed %d: %s is not in the tie; %s", f.name, seed, f.code, r.Diagnosis.Text)
				continue
			}
			if f.alone && len(found) > 1 {
				t.Errorf("%s, seed %d: %d causes are tied, want the true one alone; %s", f.name, seed, len(found), r.Diagnosis.Text)
			}
			// four standard uncertainties: one in 16000 normal deviates is beyond
			if u := c.Needed.Combined; u != nil && math.Abs(float64(c.Needed.Value)-f.needed) > 4*float64(u.Standard) || u == nil && float64(c.Needed.Value) != f.needed {
				t.Errorf("%s, seed %d: needed %+v, want %g", f.name, seed, c.Needed, f.needed)
			}
		}
		if missed-before == seeds {
			t.Errorf("%s: %s is never in the tie", f.name, f.code)
		}
	}
	if missed > 2 {
		t.Errorf("the true cause was missing from the tie in %d of %d recordings", missed, seeds*len(faults))
	}
}

// One axis has one number to explain: scale, diameter and viscosity always explain it.
func TestOneAxisCannotTellScaleFromDrag(t *testing.T) {
	r := faults[0].diagnose(t, 4)
	found := tied(r.Diagnosis)
	last := 0.0
	for _, code := range []string{CauseScale, CauseDiameter, CauseViscosity} {
		c, ok := found[code]
		if !ok {
			t.Errorf("%s is not in the tie: %s", code, r.Diagnosis.Text)
		}
		if c.Measurement == "" || c.Text == "" || !c.Change.Known() {
			t.Errorf("%s lacks a text: %+v", code, c)
		}
	}
	for _, c := range r.Diagnosis.Causes[:len(found)] {
		if size := math.Abs(float64(c.Change)); size < last {
			t.Errorf("%s needs %.1f standard uncertainties and stands behind one of %.1f", c.Code, size, last)
		} else {
			last = size
		}
	}
	if c := found[CauseTemperature]; !strings.Contains(c.Caution, "eyewear") {
		t.Errorf("temperature is measured with the laser on, and has no caution: %+v", c)
	}
}

// A noise that was measured with the wrong scale is wrong with it; one that is known in true lengths is not, and then another
// one in the lengths of the recording. The length scale is found in either case, and at its value.
func TestScaleWithNoise(t *testing.T) {
	for name, noise := range map[string]float64{"with the wrong scale": 10e-9 * 100 / 94, "in true lengths": 10e-9} {
		s := ordinary()
		s.noise, s.seconds, s.pixel = 10e-9, 40, 94e-9
		stated := s
		stated.noise, stated.pixel = noise, 100e-9
		for seed := range uint64(3) {
			r, err := Calibrate(context.Background(), s.recording(t, seed), stated.settings(t), Options{})
			if err != nil {
				t.Fatal(err)
			}
			if r.Diagnosis == nil {
				t.Fatalf("noise %s, seed %d: %s", name, seed, r.Verdict.Reason)
			}
			c, ok := tied(r.Diagnosis)[CauseScale]
			if !ok || c.PValue < 0.01 || math.Abs(float64(c.Needed.Value)-94e-9) > 4*float64(c.Needed.Combined.Standard) {
				t.Errorf("noise %s, seed %d: %s", name, seed, r.Diagnosis.Text)
			}
		}
	}
}

// A signal that is clipped hard makes the routes disagree, and no statement is at fault.
func TestFaultOfTheRecordingComesFirst(t *testing.T) {
	s := ordinary()
	rec := s.recording(t, 3)
	x := rec.Axes[0].Values
	limit := 1.2 * math.Sqrt(s.simulated(t).Axes[0].Variance) / s.pixel
	for i, v := range x {
		x[i] = math.Max(-limit, math.Min(limit, v))
	}
	r, err := Calibrate(context.Background(), rec, s.settings(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if r.Diagnosis == nil || !strings.HasSuffix(r.Diagnosis.Text, "has a fault (clipping on x), which may be the cause: mend that first.") {
		t.Errorf("%s, %+v", r.Verdict.Reason, r.Diagnosis)
	}
}

// Where the routes agree there is nothing to explain.
func TestNothingIsInvented(t *testing.T) {
	for seed := uint64(1); seed <= 6; seed++ {
		r := fault{name: "none"}.diagnose(t, seed)
		if r.Verdict.Status != Consistent || r.Diagnosis != nil {
			t.Errorf("seed %d: %s with diagnosis %+v", seed, r.Verdict.Status, r.Diagnosis)
		}
	}
}

// Two faults at once, x too long and z too short, have no single cause.
func TestNoSingleCause(t *testing.T) {
	s := ordinary()
	s.axes, s.uneven = "xyz", 0.85
	rec := s.recording(t, 5)
	for j := range rec.Axes[2].Values {
		rec.Axes[2].Values[j] *= 0.8
	}
	r, err := Calibrate(context.Background(), rec, s.settings(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if !strings.HasPrefix(r.Diagnosis.Text, "No single cause explains") {
		t.Errorf("text is %q", r.Diagnosis.Text)
	}
	for _, c := range r.Diagnosis.Causes {
		if c.PValue > familyLevel {
			t.Errorf("%s %s is said to reconcile, p = %g", c.Code, c.Axis, float64(c.PValue))
		}
		if c.Needed.Known() || c.Needed.Reason == "" {
			t.Errorf("%s %s reconciles nothing and has the needed value %+v", c.Code, c.Axis, c.Needed)
		}
	}
}

// worked runs the analysis of the first axis.
func worked(t testing.TB, s stage, seed uint64) *work {
	t.Helper()
	w, err := newWork(s.recording(t, seed), 0, s.settings(t), Options{})
	if err == nil {
		err = w.run(context.Background())
	}
	if err != nil {
		t.Fatal(err)
	}
	return w
}

// A wander of known rms is found and measured; its amplitude is that of few low frequencies,
// so a factor of two is all that can be asked. Without one the likelihood gains as
// much as one free parameter does: above 5 in 0.2 % of records.
func TestDriftIsSeenInTheSpectrum(t *testing.T) {
	s := ordinary()
	s.drift = 0.6
	w := worked(t, s, 3)
	e, rms, ok := w.withDrift()
	want := 0.6 * math.Sqrt(w.fit.Variance)
	if gain := e.likelihood - w.fit.Maximum.Value; !ok || gain < 20 || rms > 2*want || rms < want/2 {
		t.Errorf("drift of %.3g m rms: found %.3g m, log-likelihood gained %.1f, %t", want, rms, gain, ok)
	}
	clean := worked(t, ordinary(), 3)
	if e, _, ok := clean.withDrift(); ok && e.likelihood-clean.fit.Maximum.Value > 5 {
		t.Errorf("no drift: log-likelihood gained %.1f", e.likelihood-clean.fit.Maximum.Value)
	}
}

// A recording in which the inertia of the liquid matters, fitted with constant drag
// because the settings say so.
func TestInertiaIsSeen(t *testing.T) {
	s := ordinary()
	s.diameter, s.height, s.rate, s.exposure, s.noise, s.seconds, s.inertia = 2e-6, 50e-6, 60e3, 0, 0, 10, true
	rec := s.recording(t, 2)
	r, err := Calibrate(context.Background(), rec, s.settings(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if r.Diagnosis == nil {
		t.Fatalf("the routes agree all the same: %s", r.Axes[0].CrossCheck.Text)
	}
	if _, ok := tied(r.Diagnosis)[CauseInertia]; !ok {
		t.Errorf("inertia is not in the tie: %s", r.Diagnosis.Text)
	}
}

// On one axis the weighing is the fit that knows the drag: the same variance of the inputs, and
// nearly the same likelihood, which is normal for a record of 6000 correlation times (their
// skewness is below 0.02, and the difference from the computed drag below two standard uncertainties).
func TestWeighingIsThePooledFit(t *testing.T) {
	w := worked(t, ordinary(), 3)
	b := newBench([]*work{w}, nil)
	sum := 0.0
	for _, row := range b.shared(nil) {
		sum += row[0] * row[0]
	}
	if want := w.pooled.u; math.Abs(math.Sqrt(sum)/want-1) > 1e-9 {
		t.Errorf("inputs have a standard uncertainty of %.6g in ln D, want %.6g", math.Sqrt(sum), want)
	}
	e := b.asRead[0]
	shifted := func(*work, reading) float64 { return 0.1 }
	e.readings = []float64{e.readings[0] + 0.1} // some standard uncertainties away, where the two differ most
	got, _ := b.weigh([]evidence{e}, shifted, nil)
	if want := w.pooled.maximum.Value; math.Abs(got.value-want) > 0.05 {
		t.Errorf("weighed log-likelihood %.4f, want %.4f of the pooled fit", got.value, want)
	}
	got, _ = b.weigh(b.asRead, shifted, nil)
	r := b.asRead[0].readings[0] - 0.1
	if want := b.asRead[0].likelihood - r*r/(e.covariance[0][0]+sum)/2; math.Abs(got.value-want) > 1e-6 {
		t.Errorf("weighed log-likelihood %.6f, want %.6f", got.value, want)
	}
}
