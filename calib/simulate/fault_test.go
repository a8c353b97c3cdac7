package simulate

import (
	"math"
	"testing"
)

func spoiled(f Faults) Truth {
	return with(twoAxes, func(t *Truth) { t.Faults = f })
}

func TestRailAndRounding(t *testing.T) {
	clean := Record(twoAxes, 6)
	dirty := Record(spoiled(Faults{Rail: 2e-8, Rounding: 8e-9}), 6)
	clipped := 0
	for axis, mean := range []float64{0, 1e-6} {
		for i, v := range clean[axis] {
			want := math.Min(math.Max(v, mean-2e-8), mean+2e-8)
			if want != v {
				clipped++
			}
			if got := dirty[axis][i]; !(math.Abs(got-want) <= 4.0001e-9) { // half a step, and rounding
				t.Fatalf("axis %d, sample %d: %v, want %v within half a step", axis, i, got, want)
			}
			if steps := dirty[axis][i] / 8e-9; !(math.Abs(steps-math.Round(steps)) <= 1e-9) {
				t.Fatalf("axis %d, sample %d: %v is no multiple of the step", axis, i, dirty[axis][i])
			}
		}
	}
	// 2e-8 m is 2 sd on x (4.6 %) and 1.4 sd on y (16 %).
	if clipped < 5000 || clipped > 12000 {
		t.Errorf("%d of 80000 samples clipped, want some 8000", clipped)
	}
}

func TestJitter(t *testing.T) {
	r := Make(spoiled(Faults{Jitter: 1e-4}), 6)
	clean := Make(twoAxes, 6)
	sum := 0.0
	for i := range r.Time {
		d := r.Time[i] - clean.Time[i]
		sum += d * d
		if r.Positions[0][i] != clean.Positions[0][i] {
			t.Fatal("jitter of the stamps changed the positions")
		}
	}
	n := float64(len(r.Time))
	if got := sum / n; !(math.Abs(got/1e-8-1) <= limit*math.Sqrt(2/n)) {
		t.Errorf("variance of the stamps %v s², want 1e-8", got)
	}
}

// Shares are binomial; what stays is what the clean record has at that time.
func TestLosses(t *testing.T) {
	clean := Make(twoAxes, 6)
	for _, row := range []struct {
		name  string
		f     Faults
		count func(r Recording) int
	}{
		{"dropped", Faults{Dropped: 0.02}, func(r Recording) int { return len(clean.Time) - len(r.Time) }},
		{"repeated", Faults{Repeated: 0.02}, func(r Recording) int { return len(r.Time) - len(clean.Time) }},
		{"blank", Faults{Blank: 0.02}, func(r Recording) int {
			n := 0
			for i, v := range r.Positions[0] {
				if math.IsNaN(v) != math.IsNaN(r.Positions[1][i]) {
					t.Fatal("blank on one axis only")
				}
				if math.IsNaN(v) {
					n++
				}
			}
			return n
		}},
	} {
		r := Make(spoiled(row.f), 6)
		n := float64(len(clean.Time))
		if got := float64(row.count(r)); !(math.Abs(got-0.02*n) <= limit*math.Sqrt(n*0.02*0.98)) {
			t.Errorf("%s: %v samples, want %v", row.name, got, 0.02*n)
		}
		for i, time := range r.Time {
			at := int(math.Round(time * 1000))
			if v := r.Positions[1][i]; !math.IsNaN(v) && v != clean.Positions[1][at] {
				t.Fatalf("%s: at %v s: %v, want %v", row.name, time, v, clean.Positions[1][at])
			}
		}
	}
}

// The first sample always stays, so that a record has a beginning.
func TestFirstSampleStays(t *testing.T) {
	truth := spoiled(Faults{Blank: 0.9, Dropped: 0.9})
	truth.Samples = 3
	for seed := range uint64(20) {
		if r := Make(truth, seed); len(r.Time) == 0 || r.Time[0] != 0 || math.IsNaN(r.Positions[0][0]) {
			t.Fatalf("seed %d: %+v", seed, r)
		}
	}
}

// Truths that cannot be simulated are refused before anything is drawn.
func TestValidateFurtherKinds(t *testing.T) {
	sine := []Drive{{Waveform: Sine, Amplitude: 1e-7, Frequency: 28}}
	for name, spoil := range map[string]func(*Truth){
		"rail":               func(t *Truth) { t.Faults.Rail = -1 },
		"jitter":             func(t *Truth) { t.Faults.Jitter = math.NaN() },
		"dropped":            func(t *Truth) { t.Faults.Dropped = 1 },
		"repeated":           func(t *Truth) { t.Faults.Repeated = -0.1 },
		"rotation":           func(t *Truth) { t.Rotation = math.NaN() },
		"rotation of one":    func(t *Truth) { t.Rotation, t.Axes = 1, t.Axes[:1] },
		"leak index":         func(t *Truth) { t.Leaks = []Leak{{From: 0, Into: 2}} },
		"leak into itself":   func(t *Truth) { t.Leaks = []Leak{{From: 1, Into: 1}} },
		"leak share":         func(t *Truth) { t.Leaks = []Leak{{From: 0, Into: 1, Share: math.Inf(1)}} },
		"event kind":         func(t *Truth) { t.Events = []Event{{Kind: "sneeze"}} },
		"event time":         func(t *Truth) { t.Events = []Event{{Kind: Jump, Time: -1}} },
		"event order":        func(t *Truth) { t.Events = []Event{{Kind: Jump, Time: 2}, {Kind: Jump, Time: 1}} },
		"event offsets":      func(t *Truth) { t.Events = []Event{{Kind: Jump, Offset: []float64{1e-7}}} },
		"event factor":       func(t *Truth) { t.Events = []Event{{Kind: SecondBead, Stiffness: -1}} },
		"event offset":       func(t *Truth) { t.Events = []Event{{Kind: Jump, Offset: []float64{1e-7, math.NaN()}}} },
		"event of free bead": func(t *Truth) { t.Axes[0] = Axis{Diffusion: 1e-13}; t.Events = []Event{{Kind: Jump}} },
		"quartic":            func(t *Truth) { t.Axes[0].Quartic = -0.1 },
		"quartic fixed":      func(t *Truth) { t.Axes[0] = Axis{Fixed: true, Quartic: 0.01} },
		"fixed and trapped":  func(t *Truth) { t.Axes[0].Fixed = true },
		"wall factor":        func(t *Truth) { t.Axes[0].WallFactor = 0.9 },
		"bead density":       func(t *Truth) { h := polystyrene; h.BeadDensity = 0; t.Hydrodynamics = &h },
		"height":             func(t *Truth) { h := polystyrene; h.Height = 4e-7; t.Hydrodynamics = &h },
		"wall shape":         func(t *Truth) { h := polystyrene; h.Shape = "round"; t.Hydrodynamics = &h },
		"factor, no height":  func(t *Truth) { t.Axes[0].WallFactor = 1.1; t.Hydrodynamics = &polystyrene },
		"hydrodynamic free":  func(t *Truth) { t.Axes[1] = Axis{Diffusion: 1e-13}; t.Hydrodynamics = &polystyrene },
		"alpha":              func(t *Truth) { t.Photodiode = &Photodiode{Alpha: 1.1, F3dB: 8000} },
		"f3dB":               func(t *Truth) { t.Photodiode = &Photodiode{Alpha: 0.3} },
		"stage axis":         func(t *Truth) { t.Stage = &Stage{Axis: 3, Parts: sine} },
		"stage parts":        func(t *Truth) { t.Stage = &Stage{} },
		"stage phase":        func(t *Truth) { t.Stage = &Stage{Phase: math.NaN(), Parts: sine} },
		"stage waveform":     func(t *Truth) { t.Stage = &Stage{Parts: []Drive{{Waveform: "square", Amplitude: 1, Frequency: 1}}} },
		"stage amplitude":    func(t *Truth) { t.Stage = &Stage{Parts: []Drive{{Waveform: Sine, Frequency: 1}}} },
		"stage duration":     func(t *Truth) { t.Stage = &Stage{Parts: append(sine, sine...)} },
		"stage and leak":     func(t *Truth) { t.Stage = &Stage{Parts: sine}; t.Leaks = []Leak{{From: 0, Into: 1}} },
		"stage, free bead":   func(t *Truth) { t.Stage = &Stage{Parts: sine}; t.Axes[0] = Axis{Diffusion: 1} },
		"triangle and diode": func(t *Truth) {
			t.Photodiode = &Photodiode{Alpha: 0.3, F3dB: 8000}
			t.Stage = &Stage{Parts: []Drive{{Waveform: Triangle, Amplitude: 1, Frequency: 1}}}
		},
	} {
		truth := with(twoAxes, spoil)
		if truth.Validate() == nil {
			t.Errorf("%s: Validate() = nil, want an error", name)
		}
	}
}
