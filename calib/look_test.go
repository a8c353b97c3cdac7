package calib

import (
	"math"
	"slices"
	"testing"

	"beadwell/calib/simulate"
)

// A look finds the escape that spoils a recording, on the clock of the recording, and the
// range of the positions without what is missing.
func TestLookAt(t *testing.T) {
	s := usual()
	seconds := float64(s.samples) / s.rate
	rec := s.spoilt(t, 1, simulate.Event{Kind: simulate.Escape, Time: 0.5 * seconds})
	rec.Axes[0].Values[7], rec.Axes[0].Missing = math.NaN(), 1
	l := LookAt(rec, s.with("recording.exposure", "20 us").set(t))
	at := slices.IndexFunc(l.Checks, func(c Check) bool { return c.Code == "lost-bead" })
	if at < 0 || l.Checks[at].Level != Bad || len(l.Checks[at].Ranges) != 1 {
		t.Fatalf("checks %+v", l.Checks)
	}
	// found within a tenth of the record
	if from := float64(l.Checks[at].Ranges[0][0]); from < 100+0.4*seconds || from > 100+0.51*seconds {
		t.Errorf("escape from %g s on, want about %g s", from, 100+0.5*seconds)
	}
	low, high := math.Inf(1), math.Inf(-1)
	for i, v := range rec.Axes[0].Values {
		if i != 7 {
			low, high = min(low, v), max(high, v)
		}
	}
	a := l.Axes[0]
	if float64(a.Low) != low || float64(a.High) != high || a.Missing != 1 || a.InUnit != "m" {
		t.Errorf("axis %+v, want %g to %g", a, low, high)
	}
	if l.Recording.Exposure != 20e-6 || l.Recording.Start != 100 || len(l.Settings) == 0 {
		t.Errorf("recording %+v, %d settings", l.Recording, len(l.Settings))
	}
	if l := LookAt(rec, s.with("recording.exposure", "").set(t)); l.Recording.Exposure.Known() {
		t.Errorf("an exposure of %v s that nobody stated", l.Recording.Exposure)
	}
}
