package health

import (
	"strings"
	"testing"

	"beadwell/calib/simulate"
)

// TestGoodStretch takes intervals off a record of 1000 samples at 100 Hz.
func TestGoodStretch(t *testing.T) {
	in := Input{Axes: []Axis{{X: make([]float64, 1000)}}, Rate: 100}
	bad := func(code string, ranges ...[2]float64) Check { return Check{Code: code, Level: Bad, Ranges: ranges} }
	for name, row := range map[string]struct {
		checks   []Check
		from, to int
		ok       bool
	}{
		"nothing bad":    {[]Check{{Code: "jump", Level: Doubtful, Ranges: [][2]float64{{1, 2}}}}, 0, 0, false},
		"end":            {[]Check{bad("lost-bead", [2]float64{4, 10})}, 0, 400, true},
		"beginning":      {[]Check{bad("held-bead", [2]float64{0, 3})}, 300, 1000, true},
		"middle":         {[]Check{bad("held-bead", [2]float64{3, 4})}, 400, 1000, true},
		"two, unordered": {[]Check{bad("held-bead", [2]float64{7, 8}), bad("jump", [2]float64{0.5, 1})}, 100, 700, true},
		"nested":         {[]Check{bad("held-bead", [2]float64{2, 9}), bad("jump", [2]float64{3, 4})}, 0, 200, true},
		"too little":     {[]Check{bad("lost-bead", [2]float64{0.9, 10})}, 0, 0, false},
		"no place":       {[]Check{bad("rail", [2]float64{1, 2})}, 0, 0, false},
		"everywhere":     {[]Check{bad("lost-bead", [2]float64{0, 10})}, 0, 0, false},
	} {
		from, to, ok := GoodStretch(in, row.checks)
		if from != row.from || to != row.to || ok != row.ok {
			t.Errorf("%s: %d %d %v, want %d %d %v", name, from, to, ok, row.from, row.to, row.ok)
		}
	}
	if _, _, ok := GoodStretch(Input{}, nil); ok {
		t.Error("a good stretch without axes")
	}
}

// TestStretchOfEvents: what is offered lies on the good side of the event, and takes
// in most of it.
func TestStretchOfEvents(t *testing.T) {
	for _, row := range []struct {
		kind simulate.EventKind
		when float64
	}{{simulate.Escape, 0.4}, {simulate.Stuck, 0.5}, {simulate.SecondBead, 0.6}} {
		tr := trial{regime: detector, spoil: event(row.kind, row.when, func(e *simulate.Event) {
			if row.kind == simulate.SecondBead {
				e.Offset = []float64{2 * rms}
			}
		})}
		for seed := range uint64(3) {
			in, checks := tr.run(1, seed+1)
			from, to, ok := GoodStretch(in, checks)
			n := float64(len(in.Axes[0].X))
			// the scan for a spell resolves 1/128 of the record
			if !ok || from > int(0.02*n) || float64(to) < (row.when-0.03)*n || float64(to) > (row.when+0.01)*n {
				t.Errorf("%s at %v: %d to %d of %v, %v", row.kind, row.when, from, to, n, ok)
			}
		}
	}
}

// Texts tell times on the clock of the recording, ranges count from its first sample.
func TestTextsOnTheClock(t *testing.T) {
	tr := trial{regime: detector, spoil: event(simulate.Escape, 0.4, func(*simulate.Event) {})}
	in, plain := tr.run(1, 1)
	in.Start = 5000
	moved := Run(in)
	found := false
	for i, c := range moved {
		if c.Level != Bad || c.Code != "lost-bead" {
			continue
		}
		found = true
		if len(c.Ranges) != 1 || c.Ranges[0] != plain[i].Ranges[0] {
			t.Errorf("ranges %v, want %v", c.Ranges, plain[i].Ranges)
		}
		if want := "at about " + moment(5000+c.Ranges[0][0], in.duration()); !strings.Contains(c.Text, want) {
			t.Errorf("text %q, want %q in it", c.Text, want)
		}
	}
	if !found {
		t.Error("the escape was not found")
	}
}

// duration is the length of the record [s].
func (in Input) duration() float64 { return float64(len(in.Axes[0].X)) / in.Rate }
