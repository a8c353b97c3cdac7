package calib

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"

	"beadwell/calib/simulate"
	"beadwell/calib/track"
)

// spoilt is a recording in which events happen to the bead; it starts at 100 s.
func (s scene) spoilt(t *testing.T, seed uint64, events ...simulate.Event) *track.Recording {
	t.Helper()
	s.events = events
	rec := s.record(t, seed)
	rec.Start, rec.JitterRMS = 100, 0
	return rec
}

func (r *Result) finding(code string) *Finding {
	for i := range r.Findings {
		if r.Findings[i].Code == code {
			return &r.Findings[i]
		}
	}
	return nil
}

// An escape spoils the recording; with Use the part before it is calibrated, the truth is
// in its interval, and the result says which part was used.
func TestUseGood(t *testing.T) {
	s := usual()
	seconds := float64(s.samples) / s.rate
	rec := s.spoilt(t, 1, simulate.Event{Kind: simulate.Escape, Time: 0.6 * seconds})
	all, err := Calibrate(context.Background(), rec, s.set(t), Options{})
	var data *DataError
	switch {
	case errors.As(err, &data):
		if !strings.Contains(data.Remedy, "from 100 s to ") || !strings.HasSuffix(data.Remedy, ": --use good") {
			t.Errorf("the error does not offer the good part: %v", err)
		}
	case err != nil:
		t.Fatal(err)
	default:
		lost := all.finding("lost-bead")
		if all.Verdict.Status != Unfit || lost == nil || !strings.Contains(lost.Remedy, " Or calibrate the good part alone, from 100 s to ") || all.Recording.UsedFrom != nil {
			t.Fatalf("status %s, finding %+v: the good part is not offered", all.Verdict.Status, lost)
		}
	}
	r, err := Calibrate(context.Background(), rec, s.set(t), Options{Use: UseGood})
	if err != nil {
		t.Fatal(err)
	}
	f := r.finding(CodeGoodPart)
	if r.Verdict.Status != Consistent || f == nil || f.Severity != Note || r.Choices == nil || r.Choices.Use != UseGood {
		t.Fatalf("status %s (%s), finding %+v", r.Verdict.Status, r.Verdict.Reason, f)
	}
	from, to := float64(*r.Recording.UsedFrom), float64(*r.Recording.UsedTo)
	// the escape is placed to within some relaxation times and blocks, of which 0.1 of the record is more than enough
	if from != 100 || to > 100+0.6*seconds || to < 100+0.5*seconds || *f.Range != [2]Float{Float(from), Float(to)} {
		t.Errorf("used %g s to %g s, finding %v; the escape is at %g s", from, to, *f.Range, 100+0.6*seconds)
	}
	if got := float64(r.Recording.Samples) / s.rate; math.Abs(got-(to-from)) > 1e-9 || float64(r.Recording.Duration) != got {
		t.Errorf("%d samples and %g s, the part is %g s long", r.Recording.Samples, float64(r.Recording.Duration), to-from)
	}
	for _, a := range r.Axes {
		// five standard uncertainties: missed once in two million
		if u := a.Adopted.Stiffness.Combined; math.Abs(float64(a.Adopted.Stiffness.Value)-s.kappa) > 5*float64(u.Standard) {
			t.Errorf("axis %s: stiffness %v +- %v, want %g", a.Name, a.Adopted.Stiffness.Value, u.Standard, s.kappa)
		}
		span := float64(a.Trace.Step) * float64(len(a.Trace.Low))
		if a.Trace.Start != 100 || math.Abs(span-seconds) > 1e-6 {
			t.Errorf("axis %s: the trace starts at %v s and is %g s long, want all of the recording", a.Name, a.Trace.Start, span)
		}
	}
	if rec.Samples != s.samples || rec.Start != 100 || len(rec.Axes[0].Values) != s.samples {
		t.Error("the recording was changed")
	}
}

// The used part is calibrated as a file that holds nothing else would be.
func TestUseGoodIsTheCutRecording(t *testing.T) {
	s := usual()
	rec := s.spoilt(t, 2, simulate.Event{Kind: simulate.Escape, Time: 0.7 * float64(s.samples) / s.rate})
	r, err := Calibrate(context.Background(), rec, s.set(t), Options{Use: UseGood})
	if err != nil {
		t.Fatal(err)
	}
	n := r.Recording.Samples
	alone := *rec
	alone.Samples, alone.Axes = n, append([]track.Axis(nil), rec.Axes...)
	for i := range alone.Axes {
		alone.Axes[i].Values = rec.Axes[i].Values[:n]
	}
	want, err := Calibrate(context.Background(), &alone, s.set(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	for i := range r.Axes {
		if got, want := r.Axes[i].Adopted.Stiffness.Value, want.Axes[i].Adopted.Stiffness.Value; got != want {
			t.Errorf("axis %s: %v, of the part alone %v", r.Axes[i].Name, got, want)
		}
	}
}

// A good recording is used whole, to the same numbers, and says so.
func TestUseGoodOfGood(t *testing.T) {
	rec, set := usual().record(t, 3), usual().set(t)
	want, err := Calibrate(context.Background(), rec, set, Options{})
	if err != nil {
		t.Fatal(err)
	}
	got, err := Calibrate(context.Background(), rec, set, Options{Use: UseGood})
	if err != nil {
		t.Fatal(err)
	}
	if got.finding(CodeNothingCut) == nil || got.Recording.UsedFrom != nil || want.finding(CodeNothingCut) != nil {
		t.Error("nothing to cut, and the result does not say so")
	}
	if got.Axes[0].Adopted.Stiffness.Value != want.Axes[0].Adopted.Stiffness.Value {
		t.Error("the stiffness depends on a choice that changed nothing")
	}
	var wrong *SettingError
	if _, err := Calibrate(context.Background(), rec, set, Options{Use: "best"}); !errors.As(err, &wrong) || wrong.Key != "use" {
		t.Errorf("Use: best gives %v", err)
	}
	free := usual().with("role", RoleFree).set(t)
	if _, err := Calibrate(context.Background(), rec, free, Options{Use: UseGood}); !errors.As(err, &wrong) || wrong.Key != "use" {
		t.Errorf("Use of a free bead gives %v", err)
	}
}

// A cut counts what is missing in it, keeps the clock, and takes the other columns along.
func TestCutRecording(t *testing.T) {
	nan := math.NaN()
	rec := &track.Recording{Rate: 10, Start: 5, Samples: 6, Missing: 2,
		Axes:  []track.Axis{{Name: "x", Values: []float64{0, nan, 2, nan, 4, nan}, Missing: 3}, {Name: "y", Values: []float64{nan, nan, nan, nan, 4, 5}, Missing: 4}},
		Extra: []track.Column{{Header: "stage", Values: []float64{0, 1, 2, 3, 4, 5}}}}
	got := cutRecording(rec, stretch{from: 2, to: 5})
	if got.Samples != 3 || got.Start != 5.2 || got.Missing != 1 || got.Axes[0].Missing != 1 || got.Axes[1].Missing != 2 || len(got.Extra[0].Values) != 3 || got.Extra[0].Values[0] != 2 {
		t.Errorf("cut to %+v", got)
	}
	if len(rec.Axes[0].Values) != 6 || rec.Missing != 2 {
		t.Errorf("the recording was changed: %+v", rec)
	}
}

// A second bead moves the mean and changes the variance, and the first cut uncovers what
// is left of it: the part is cut until it is good.
func TestUseGoodCutsAgain(t *testing.T) {
	s := usual()
	seconds := float64(s.samples) / s.rate
	for _, event := range []simulate.Event{
		{Kind: simulate.SecondBead, Time: 0.6 * seconds, Offset: []float64{2.5e-7}, Stiffness: 1.2, Drag: 1.4},
		{Kind: simulate.Stuck, Time: 0.6 * seconds},
	} {
		for seed := range uint64(3) {
			rec := s.spoilt(t, seed+1, event)
			r, err := Calibrate(context.Background(), rec, s.set(t), Options{Use: UseGood})
			if err != nil {
				t.Fatal(err)
			}
			if r.Verdict.Status != Consistent || r.finding(CodeGoodPart) == nil {
				t.Errorf("%s, seed %d: %s: %s", event.Kind, seed+1, r.Verdict.Status, r.Verdict.Reason)
				continue
			}
			// the scan for a spell resolves 1/128 of the record; a fiftieth allows for two
			if to := float64(*r.Recording.UsedTo) - 100; to > 0.62*seconds || to < 0.55*seconds {
				t.Errorf("%s, seed %d: used to %g s, the event is at %g s", event.Kind, seed+1, to, 0.6*seconds)
			}
		}
	}
}

// An early jump leaves the part behind it, whose times are on the clock of the recording.
func TestUseGoodBehindAJump(t *testing.T) {
	s := usual()
	seconds := float64(s.samples) / s.rate
	rec := s.spoilt(t, 1, simulate.Event{Kind: simulate.Jump, Time: 0.05 * seconds, Offset: []float64{3e-7}})
	r, err := Calibrate(context.Background(), rec, s.set(t), Options{Use: UseGood})
	if err != nil {
		t.Fatal(err)
	}
	if r.Verdict.Status != Consistent {
		t.Fatalf("%s: %s", r.Verdict.Status, r.Verdict.Reason)
	}
	from, to := float64(*r.Recording.UsedFrom)-100, float64(*r.Recording.UsedTo)-100
	if math.Abs(from-0.05*seconds) > 0.01*seconds || math.Abs(to-seconds) > 1e-9 {
		t.Errorf("used %g s to %g s of %g s, the jump is at %g s; %s", from, to, seconds, 0.05*seconds, r.finding(CodeGoodPart).Text)
	}
	if got := float64(r.Recording.Start) - 100; math.Abs(got-from) > 1e-9 {
		t.Errorf("the first sample used is at %g s, want %g s", got, from)
	}
}

// In volts the trace of all is in metres too, also where the sensitivity comes from the used part.
func TestUseGoodInVolts(t *testing.T) {
	s := usual()
	rec := s.spoilt(t, 1, simulate.Event{Kind: simulate.Stuck, Time: 0.7 * float64(s.samples) / s.rate})
	metres, err := Calibrate(context.Background(), rec, s.set(t), Options{Use: UseGood})
	if err != nil {
		t.Fatal(err)
	}
	const perVolt = 1.3e-6 // m
	a := &rec.Axes[0]
	a.Unit, a.ToMetre = "V", math.NaN()
	volts := make([]float64, len(a.Values))
	for i, v := range a.Values {
		volts[i] = v / perVolt
	}
	a.Values = volts
	for _, stated := range []string{"1.3 um/V", ""} {
		with := s
		if stated != "" {
			with = s.with("recording.sensitivity", stated)
		}
		r, err := Calibrate(context.Background(), rec, with.set(t), Options{Use: UseGood})
		if err != nil {
			t.Fatal(err)
		}
		// a sensitivity from the drag is good to the 2 % that D of this record is; 10 % is far beyond
		got, want := float64(r.Axes[0].Trace.High[0]), float64(metres.Axes[0].Trace.High[0])
		if math.Abs(got/want-1) > 0.1 || len(r.Axes[0].Trace.High) != traceSteps || r.Recording.UsedTo == nil {
			t.Errorf("sensitivity %q: the trace begins at %g m, want %g m", stated, got, want)
		}
	}
}

// Parts of parts, and the least part that is used: a tenth of the whole.
func TestStretch(t *testing.T) {
	got := stretch{from: 100, to: 900, why: []string{"a"}}.part(stretch{from: 50, to: 250, why: []string{"b"}})
	if got.from != 150 || got.to != 350 || len(got.why) != 2 {
		t.Errorf("part = %+v, want 150 to 350", got)
	}
	if got.enough(2001) || !got.enough(2000) {
		t.Error("200 samples are a tenth of 2000, and less of 2001")
	}
}
