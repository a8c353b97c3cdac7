package health

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"beadwell/calib/simulate"
)

// trial is a spoiled way of recording and the check that has to notice.
type trial struct {
	name   string
	regime regime
	spoil  func(t *simulate.Truth)
	hide   bool // lost samples leave no gap: the record closes up
	code   string
	least  Level
}

func eachAxis(f func(a *simulate.Axis)) func(*simulate.Truth) {
	return func(t *simulate.Truth) {
		for i := range t.Axes {
			f(&t.Axes[i])
		}
	}
}

func event(kind simulate.EventKind, when float64, change func(e *simulate.Event)) func(*simulate.Truth) {
	return func(t *simulate.Truth) {
		e := simulate.Event{Kind: kind, Time: when * float64(t.Samples) / t.Rate}
		if change != nil {
			change(&e)
		}
		t.Events = append(t.Events, e)
	}
}

var (
	detector = regime{ratio: 0.01, periods: 1000}                           // 100000 samples
	camera   = regime{ratio: 0.2, periods: 2000, exposure: 0.8, noise: 0.3} // 10000 frames
	brief    = regime{ratio: 0.05, periods: 200, noise: 0.1}                // 4000 samples
)

// trials are the faults of which nine in ten must be found, in records long enough
// that an ideal test can tell.
func trials() []trial {
	var all []trial
	for _, r := range []struct {
		name string
		regime
	}{{"detector", detector}, {"camera", camera}, {"brief", brief}} {
		add := func(name, code string, least Level, spoil func(*simulate.Truth)) {
			all = append(all, trial{name: r.name + ", " + name, regime: r.regime, code: code, least: least, spoil: spoil})
		}
		add("drift of one rms", "slow-drift", Doubtful, eachAxis(func(a *simulate.Axis) { a.Drift = rms }))
		add("held from half", "held-bead", Bad, event(simulate.Stuck, 0.5, nil))
		add("held from 0.2", "held-bead", Bad, event(simulate.Stuck, 0.2, nil))
		add("held from 0.8", "held-bead", Bad, event(simulate.Stuck, 0.8, nil))
		add("second bead at 0.4", "jump", Bad, event(simulate.SecondBead, 0.4, func(e *simulate.Event) {
			e.Offset, e.Stiffness, e.Drag = []float64{1.5 * rms, -1.2 * rms, 1 * rms}, 1.4, 1.6
		}))
		add("second bead of 5 rms", "jump", Bad, event(simulate.SecondBead, 0.6, func(e *simulate.Event) {
			e.Offset, e.Stiffness, e.Drag = []float64{5 * rms, -1.2 * rms, 1 * rms}, 1.4, 1.6
		}))
		add("clipped at 2.5 rms", "rail", Bad, func(t *simulate.Truth) { t.Faults.Rail = 2.5 * rms })
		add("escape at 0.4", "lost-bead", Bad, event(simulate.Escape, 0.4, nil))
		add("escape at 0.7", "lost-bead", Bad, event(simulate.Escape, 0.7, nil))
		add("2 % lost with gaps", "dropped-samples", Doubtful, func(t *simulate.Truth) { t.Faults.Blank = 0.02 })
		add("2 % repeated", "frozen-samples", Doubtful, func(t *simulate.Truth) { t.Faults.Repeated = 0.02 })
		if r.name == "brief" {
			continue // the largest of its 2000 bins passes a line of 0.3 rms by chance too often: ln(2000/2e-4) = 16 against 18
		}
		add("line of 0.3 rms", "tone", Doubtful, eachAxis(func(a *simulate.Axis) {
			a.Lines = []simulate.Line{{Frequency: 50, Amplitude: 0.3 * rms}}
		}))
	}
	all = append(all,
		trial{"2 % lost without a trace", regime{ratio: 0.01, periods: 3500}, func(t *simulate.Truth) { t.Faults.Dropped = 0.02 }, true, "rough-steps", Doubtful},
		trial{"2 % lost without a trace, three axes", regime{ratio: 0.01, periods: 750}, func(t *simulate.Truth) { t.Faults.Dropped = 0.02 }, false, "rough-steps", Doubtful},
		trial{"second bead changes the variance alone", detector, event(simulate.SecondBead, 0.5, func(e *simulate.Event) { e.Stiffness, e.Drag = 1.7, 1.6 }), false, "unsteady-motion", Bad},
		trial{"rounding to 0.7 rms", camera, func(t *simulate.Truth) { t.Faults.Rounding = 0.7 * rms }, false, "coarse-steps", Doubtful},
		trial{"quartic trap", detector, eachAxis(func(a *simulate.Axis) { a.Quartic = 0.1 }), false, "not-gaussian", Doubtful},
		trial{"a tenth leaks", detector, func(t *simulate.Truth) { t.Leaks = []simulate.Leak{{From: 0, Into: 1, Share: 0.25}} }, false, "axes-mixed", Doubtful},
		trial{"held all the time", camera, eachAxis(func(a *simulate.Axis) {
			*a = simulate.Axis{Name: a.Name, Fixed: true, Noise: 0.3 * rms, Drift: 0.5 * rms}
		}), false, "slow-sampling", Bad},
		trial{"nine periods", regime{ratio: 0.02, periods: 9}, nil, false, "short-record", Doubtful},
	)
	return all
}

// run simulates, fits and checks.
func (tr trial) run(axes int, seed uint64) (Input, []Check) {
	truth := tr.regime.truth(axes)
	if tr.spoil != nil {
		tr.spoil(&truth)
	}
	for i := range truth.Events {
		if len(truth.Events[i].Offset) > axes {
			truth.Events[i].Offset = truth.Events[i].Offset[:axes]
		}
	}
	positions := simulate.Record(truth, seed)
	in := fitted(positions, truth.Rate, truth.Exposure)
	return in, Run(in)
}

// alarmed tells whether a check of the code on any axis has at least the level.
func alarmed(checks []Check, code string, least Level) bool {
	for _, c := range checks {
		if c.Code == code && c.Level >= least {
			return true
		}
	}
	return false
}

// TestDetection counts how often each fault is found. With a true rate of 99 % the
// chance of fewer than 9 in 10 is 4e-3, with 50 % that of 9 or more is 1 %; the seeds are fixed.
func TestDetection(t *testing.T) {
	const repeats = 10
	for _, tr := range trials() {
		t.Run(tr.name, func(t *testing.T) {
			t.Parallel()
			axes := 1
			switch {
			case tr.code == "axes-mixed":
				axes = 2
			case strings.HasSuffix(tr.name, "three axes"):
				axes = 3
			}
			found := 0
			for seed := range uint64(repeats) {
				if _, checks := tr.run(axes, seed+1); alarmed(checks, tr.code, tr.least) {
					found++
				}
			}
			if found < repeats-1 {
				t.Errorf("%s found in %d of %d, want at least %d", tr.code, found, repeats, repeats-1)
			}
		})
	}
}

// TestFalseAlarms counts alarms on clean recordings of three axes. 210 recordings at
// a true rate of 1 % give more than 6 with a probability of 6e-3.
func TestFalseAlarms(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 14))
	regimes := []regime{
		{0.01, 30, 0, 0.5}, {0.01, 100, 1, 0}, {0.1, 30, 1, 0}, {0.1, 300, 0.3, 0.1}, {0.3, 300, 0, 0.2}, {1, 5000, 1, 0}, {0.5, 100, 1, 0.2},
	}
	const repeats = 30
	alarms := 0
	for _, r := range regimes {
		for range repeats {
			truth := r.truth(3)
			in := fitted(simulate.Record(truth, random.Uint64()), truth.Rate, truth.Exposure)
			alarm := false
			for _, c := range Run(in) {
				if c.Level != OK {
					alarm = true
					t.Logf("%+v: %s %s: %s", r, c.Code, c.Axis, c.Text)
				}
			}
			if alarm {
				alarms++
			}
		}
	}
	if alarms > 6 {
		t.Errorf("%d of %d clean recordings raised an alarm, want at most 6", alarms, repeats*len(regimes))
	}
}

// TestCodes keeps codes unique and explained, and the order of Run that of Codes.
func TestCodes(t *testing.T) {
	place := map[string]int{}
	for i, e := range Codes() {
		if _, twice := place[e.Code]; twice {
			t.Errorf("code %q twice", e.Code)
		}
		place[e.Code] = i
		if e.Title == "" || e.Long == "" || e.unit == "" || e.reason == "" {
			t.Errorf("code %q is not explained", e.Code)
		}
	}
	_, checks := trial{regime: regime{ratio: 0.1, periods: 100}}.run(2, 1)
	used := map[string]bool{}
	last, axis := -1, ""
	for _, c := range checks {
		i, ok := place[c.Code]
		if !ok {
			t.Errorf("check %q has no explanation", c.Code)
		}
		if c.Axis == axis && i <= last {
			t.Errorf("check %q of axis %q comes after %q", c.Code, c.Axis, Codes()[last].Code)
		}
		last, axis = i, c.Axis
		used[c.Code] = true
		if c.Text == "" || c.Reason == "" || c.Name == "" {
			t.Errorf("check %q has no text", c.Code)
		}
		if c.Level == OK != (c.Remedy == "") {
			t.Errorf("check %q: level %v with remedy %q", c.Code, c.Level, c.Remedy)
		}
		if c.Judged && math.IsNaN(c.Value) {
			t.Errorf("check %q has no value", c.Code)
		}
	}
	if len(used) != len(place) {
		t.Errorf("%d codes are used, %d explained", len(used), len(place))
	}
}
