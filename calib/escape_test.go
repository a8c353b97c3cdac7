package calib

import (
	"context"
	"errors"
	"math"
	"testing"

	"beadwell/calib/simulate"
)

// escaping is a driven recording from which the bead is lost; the scene is that of the settings, the true drag 8.88696464e-9 N s/m.
func (s scene) escaping(at float64) scene {
	s.events = []simulate.Event{{Kind: simulate.Escape, Time: at}}
	return s
}

// A bead that is lost: when, the largest force before by stiffness and by drag, and the drag at the loss are right, and
// the part before is calibrated.
func TestDrivenEscape(t *testing.T) {
	const gamma = 8.88696464e-9
	steady := simulate.Stage{Parts: []simulate.Drive{{Waveform: simulate.Triangle, Amplitude: 5e-6, Frequency: 5}}}
	rising := simulate.Stage{Parts: []simulate.Drive{
		{Waveform: simulate.Triangle, Amplitude: 2e-6, Frequency: 5, Duration: 1}, {Waveform: simulate.Triangle, Amplitude: 8e-6, Frequency: 5, Duration: 0.6},
		{Waveform: simulate.Triangle, Amplitude: 40e-6, Frequency: 5}}}
	for name, c := range map[string]struct {
		stage          simulate.Stage
		column         bool
		set            scene
		force, at, end float64 // N, s, drag at the loss
	}{
		"settings": {steady, false, usual().driving("triangle", "5.00(5) um", "5 Hz"), gamma * 100e-6, 1.53, gamma * 100e-6},
		"column":   {steady, true, usual().driving("triangle", "5.00(5) um", "5 Hz"), gamma * 100e-6, 1.53, gamma * 100e-6},
		"rising":   {rising, true, usual().with("role", "driven").with("drive.waveform", "triangle"), gamma * 160e-6, 1.63, gamma * 800e-6},
		"sine": {hum, true, usual().driving("sine", "150(1) nm", "28.37 Hz"), 2.79192228e-5 * 150e-9 / math.Hypot(1, 500/28.37), 1.5,
			math.NaN()},
	} {
		s := c.set.escaping(c.at)
		r, err := Calibrate(context.Background(), s.driven(t, 41, c.stage, c.column), s.set(t), Options{})
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		e := r.Axes[0].Driven.Escape
		if e == nil {
			t.Errorf("%s: no loss was found", name)
			continue
		}
		// the bead goes with the liquid for half of the amplitude, a quarter of a stroke of 0.1 s or, around a reversal, the next
		if late := float64(e.Time) - c.at; late < 0 || late > 0.1 {
			t.Errorf("%s: lost at %.4f s, the truth is %.4f s", name, float64(e.Time), c.at)
		}
		for what, q := range map[string]Quantity{"force": e.Force, "drag": e.Drag} {
			if what == "drag" && name == "sine" {
				continue
			}
			u := 0.005 * c.force // the drag is exact where no uncertainty is stated; speeds of a column to 0.5 %
			if q.Combined != nil {
				u = math.Max(u, float64(q.Combined.Standard))
			}
			if math.Abs(float64(q.Value)-c.force) > 4*u || u > 0.1*c.force {
				t.Errorf("%s: largest force by %s %v, want %.4g N", name, what, q, c.force)
			}
		}
		if name == "sine" == e.AtLoss.Known() || e.AtLoss.Known() && math.Abs(float64(e.AtLoss.Value)/c.end-1) > 0.01 {
			t.Errorf("%s: drag at the loss %v, want %.4g N", name, e.AtLoss, c.end)
		}
		if k := r.Axes[0].Adopted.Stiffness; math.Abs(float64(k.Value)-s.kappa) > 4*float64(k.Combined.Standard) {
			t.Errorf("%s: stiffness %v", name, k)
		}
		if r.Recording.UsedTo == nil || float64(*r.Recording.UsedTo) > c.at || float64(*r.Recording.UsedTo) < c.at-0.45 {
			t.Errorf("%s: used to %v", name, r.Recording.UsedTo)
		}
		found := false
		for _, f := range r.Findings {
			found = found || f.Code == CodeLost && f.Severity == Doubtful
		}
		if !found {
			t.Errorf("%s: no finding: %+v", name, r.Findings)
		}
	}
}

// With --use good the force of the escape is there too.
func TestDrivenEscapeOfTheGoodPart(t *testing.T) {
	steady := simulate.Stage{Parts: []simulate.Drive{{Waveform: simulate.Triangle, Amplitude: 5e-6, Frequency: 5}}}
	s := usual().driving("triangle", "5.00(5) um", "5 Hz").escaping(1.53)
	whole, err := Calibrate(context.Background(), s.driven(t, 41, steady, false), s.set(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	good, err := Calibrate(context.Background(), s.driven(t, 41, steady, false), s.set(t), Options{Use: UseGood})
	if err != nil {
		t.Fatal(err)
	}
	a, b := whole.Axes[0].Driven.Escape, good.Axes[0].Driven.Escape
	if b == nil || b.Force.Value != a.Force.Value || *good.Recording.UsedTo != *whole.Recording.UsedTo {
		t.Errorf("the escape of the good part is %+v, that of the whole %+v", b, a)
	}
}

// What was recorded while the bead was on its way out of the trap is left out too: a free bead shows the full amplitude of the
// stage, and would pass for the motion of which the bead was held back before.
func TestDrivenEscapeLeavesOutTheWay(t *testing.T) {
	const at = 1.5
	fast := simulate.Stage{Parts: []simulate.Drive{{Waveform: simulate.Sine, Amplitude: 150e-9, Frequency: 283.7}}}
	s := usual().driving("sine", "150(1) nm", "283.7 Hz").escaping(at)
	s.samples = 40000
	late := 0
	for seed := range uint64(10) {
		r, err := Calibrate(context.Background(), s.driven(t, seed, fast, false), s.set(t), Options{})
		if err != nil {
			t.Fatal(err)
		}
		c, bad := r.worst()
		if r.Recording.UsedTo == nil || float64(*r.Recording.UsedTo) > at || bad {
			late++
			t.Logf("recording %d: used to %v, %s", seed, r.Recording.UsedTo, c.Text)
		}
		if bad && c.Code != "lost-bead" {
			t.Errorf("recording %d: %s", seed, c.Text)
		}
	}
	if late > 1 { // six times the mean time is seldom not enough
		t.Errorf("a part of the way out is used in %d of 10 recordings", late)
	}
}

// A bead that is held is not lost: not in a stage whose speed rises twentyfold, nor by a spike, nor by a jump.
func TestNoEscape(t *testing.T) {
	rising := simulate.Stage{Parts: []simulate.Drive{
		{Waveform: simulate.Triangle, Amplitude: 1e-6, Frequency: 5, Duration: 1}, {Waveform: simulate.Triangle, Amplitude: 20e-6, Frequency: 5}}}
	s := usual().with("role", "driven").with("drive.waveform", "triangle")
	for name, spoil := range map[string]func(x []float64){
		"rising": func([]float64) {},
		"spike":  func(x []float64) { x[12000] += 60e-6 },
		"jump": func(x []float64) {
			for i := 15000; i < len(x); i++ {
				x[i] += 100e-9
			}
		},
	} {
		rec := s.driven(t, 51, rising, true)
		spoil(rec.Axes[0].Values)
		if lost, ok := findLoss(rec, s.set(t)); ok {
			t.Errorf("%s: lost at sample %d", name, lost.first)
		}
	}
}

// A bead that is lost at once leaves nothing to calibrate, and the error says so.
func TestEarlyEscape(t *testing.T) {
	s := usual().driving("triangle", "5 um", "5 Hz").escaping(0.15)
	steady := simulate.Stage{Parts: []simulate.Drive{{Waveform: simulate.Triangle, Amplitude: 5e-6, Frequency: 5}}}
	_, err := Calibrate(context.Background(), s.driven(t, 41, steady, true), s.set(t), Options{})
	var data *DataError
	if !errors.As(err, &data) {
		t.Fatalf("error %v", err)
	}
}
