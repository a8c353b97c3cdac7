package calib

import (
	"context"
	"testing"

	"beadwell/calib/health"
	"beadwell/calib/simulate"
)

// A bead that escapes: the first finding says so, nothing is said of lines and withheld estimates, and no wrong statement
// is blamed for what the escape did.
func TestEventComesFirst(t *testing.T) {
	s := ordinary()
	rec := s.recording(t, 2)
	truth := s.simulated(t)
	truth.Events = []simulate.Event{{Kind: simulate.Escape, Time: 8}}
	for i, v := range simulate.Record(truth, 2)[0] {
		rec.Axes[0].Values[i] = v / s.pixel
	}
	r, err := Calibrate(context.Background(), rec, s.settings(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if r.Verdict.Status != Unfit || r.Diagnosis != nil {
		t.Errorf("verdict %s, diagnosis %+v", r.Verdict.Status, r.Diagnosis)
	}
	if f := r.Findings[0]; f.Severity != Bad || !health.Placed(f.Code) {
		t.Errorf("the first finding is %s %s", f.Severity, f.Code)
	}
	for i, f := range r.Findings {
		if ofTheFit[f.Code] {
			t.Errorf("finding %s of a fit to what is not one process", f.Code)
		}
		if i > 0 && urgency[f.Severity] < urgency[r.Findings[i-1].Severity] {
			t.Errorf("%s %s stands behind %s", f.Severity, f.Code, r.Findings[i-1].Severity)
		}
	}
}

// A bead that escapes early: nothing can be fitted to the whole, and yet the result says when it left, in place of an
// error that speaks of units.
func TestEventWithoutAFit(t *testing.T) {
	unfitted := 0
	for _, seed := range []uint64{9, 10, 11} { // of the tenth the likelihood has no maximum
		s := usual().with("recording.noise", "0.5 nm")
		s.rate, s.samples = 25e3, 100000
		s.events = []simulate.Event{{Kind: simulate.Escape, Time: 2.2}}
		r, err := Calibrate(context.Background(), s.record(t, seed), s.set(t), Options{})
		if err != nil {
			t.Fatalf("recording %d: %v", seed, err)
		}
		c, bad := r.event()
		if !bad || c.Code != "lost-bead" || r.Verdict.Status != Unfit || r.Axes[0].Adopted.Stiffness.Known() {
			t.Errorf("recording %d: %s, %s %+v", seed, r.Verdict.Status, c.Code, r.Axes[0].Adopted.Stiffness)
		}
		if !r.Axes[0].MeasuredDrag.Known() {
			unfitted++
		}
	}
	if unfitted == 0 {
		t.Error("all recordings could be fitted: the test tests nothing")
	}
}
