package track

import (
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
)

// stampsAt returns n stamps at a rate, written with a number of decimals.
func stampsAt(n int, rate, start float64, decimals int) []float64 {
	t := make([]float64, n)
	for i := range t {
		t[i], _ = strconv.ParseFloat(strconv.FormatFloat(start+float64(i)/rate, 'f', decimals, 64), 64)
	}
	return t
}

func TestGridOfRoundedStamps(t *testing.T) {
	for _, c := range []struct {
		rate, start float64
		n, decimals int
	}{
		{1000, 0, 5000, 3},     // exact in the digits given
		{1500, 0, 5000, 3},     // 0.667 ms in steps of 1 ms: stamps repeat
		{800, 12.5, 5000, 3},   // 1.25 ms
		{3000, 1e5, 20000, 5},  // far from zero
		{44100, 0, 200000, 6},  // period with no finite decimals
		{123.456, 0, 20000, 4}, // odd rate
	} {
		q := math.Pow(10, -float64(c.decimals))
		g, fault := fitGrid(stampsAt(c.n, c.rate, c.start, c.decimals), resolution{step: q}, c.rate)
		if fault != nil {
			t.Errorf("%v Hz with %d decimals: %s", c.rate, c.decimals, fault.what)
			continue
		}
		// Rounding errors of q/sqrt(12) give the slope a standard error of
		// q/dt/sqrt(n^3) relative to dt; they are not quite independent: allow ten.
		tolerance := 10*q*c.rate/math.Pow(float64(c.n), 1.5) + 1e-12
		if math.Abs(g.interval*c.rate-1) > tolerance || g.samples != c.n || g.place != nil {
			t.Errorf("%v Hz with %d decimals: %.12g Hz, %d samples, want %d (relative tolerance %.2g)", c.rate, c.decimals, 1/g.interval, g.samples, c.n, tolerance)
		}
	}
}

func TestGridOfSinglePrecision(t *testing.T) {
	for _, start := range []float64{0, 300, 5000} {
		for _, digits := range []int{0, 9} { // 0: the binary number itself
			stamps := make([]float64, 20000)
			for i := range stamps {
				stamps[i] = float64(float32(start + float64(i)/2000))
				if digits > 0 {
					stamps[i], _ = strconv.ParseFloat(strconv.FormatFloat(stamps[i], 'g', digits, 64), 64)
				}
			}
			written := resolution{}
			if digits > 0 {
				written.step = 1e-5 // nine digits of 5000.00049
			}
			g, fault := fitGrid(stamps, written, 0)
			if fault != nil {
				t.Fatalf("start %v: %s", start, fault.what)
			}
			// Half a unit in the last place of 5010 s is 0.24 ms; over 20000 samples
			// the slope averages that down to 10*0.24e-3*2000/20000^1.5 = 2e-6.
			if math.Abs(g.interval*2000-1) > 2e-6 || g.samples != len(stamps) {
				t.Errorf("start %v: %.9g Hz, %d samples, want 2000 Hz, %d", start, 1/g.interval, g.samples, len(stamps))
			}
		}
	}
}

// Rows lost at random come back as gaps at their places, whatever their number
// up to a half, with jitter and rounding on top.
func TestGridFindsGaps(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 12))
	for trial := range 60 {
		rate := math.Pow(10, 1+4*rng.Float64())
		loss := 0.5 * rng.Float64()
		var stamps []float64
		var want []int
		start := rng.Float64() * 100
		for i := range 4000 {
			if i > 0 && rng.Float64() < loss {
				continue
			}
			stamps = append(stamps, start+(float64(i)+0.03*rng.NormFloat64())/rate)
			want = append(want, i)
		}
		g, fault := fitGrid(stamps, resolution{}, 0)
		if fault != nil {
			t.Fatalf("trial %d, %.0f %% lost: row %d: %s", trial, 100*loss, fault.row, fault.what)
		}
		if g.place == nil || g.samples != want[len(want)-1]+1 {
			t.Fatalf("trial %d: %d samples, want %d", trial, g.samples, want[len(want)-1]+1)
		}
		for i, k := range g.place {
			if k != want[i] {
				t.Fatalf("trial %d: row %d at point %d, want %d", trial, i, k, want[i])
			}
		}
		// 3 % of jitter is recovered; its estimate scatters by 1/sqrt(2n) < 2 %.
		if have := g.rms / g.interval; math.Abs(have-0.03) > 0.003 {
			t.Errorf("trial %d: jitter %.3f of a step, want 0.03", trial, have)
		}
	}
}

func TestGridRefuses(t *testing.T) {
	even := func(n int) []float64 { return stampsAt(n, 1000, 0, 3) }
	edit := func(t []float64, change func(t []float64)) []float64 { change(t); return t }
	rng := rand.New(rand.NewPCG(1, 1))
	for _, c := range []struct {
		name   string
		stamps []float64
		row    int
		words  string
	}{
		{"backwards", edit(even(100), func(t []float64) { t[40] = 0.001 }), 40, "backwards"},
		{"twice", edit(even(100), func(t []float64) { t[40] = t[39] }), 40, "twice"},
		{"one repeated, then shifted", append(even(50), even(100)[49:]...), 50, "twice"},
		{"missing", edit(even(100), func(t []float64) { t[7] = math.NaN() }), 7, "missing"},
		{"long gap", edit(even(100), func(t []float64) { t[99] = 5 }), 99, "gap"},
		{"jitter", edit(even(3000), func(t []float64) {
			for i := range t {
				t[i] += 0.15e-3 * rng.NormFloat64()
			}
		}), -1, "uneven"},
		{"half a step", edit(even(100), func(t []float64) {
			for i := 50; i < 100; i++ {
				t[i] += 0.5e-3
			}
		}), -1, "uneven"},
		{"constant", make([]float64, 10), 1, "twice"},
	} {
		_, fault := fitGrid(c.stamps, resolution{step: 1e-3}, 0)
		if c.name == "jitter" || c.name == "half a step" {
			_, fault = fitGrid(c.stamps, resolution{step: 1e-6}, 0)
		}
		if fault == nil {
			t.Errorf("%s: accepted", c.name)
			continue
		}
		if c.row >= 0 && fault.row != c.row || !strings.Contains(fault.what, c.words) || fault.remedy == "" {
			t.Errorf("%s: row %d: %s; want row %d and %q", c.name, fault.row, fault.what, c.row, c.words)
		}
	}
}

// Every tenth row lost at 1 kHz and a rate of 900 Hz look the same in stamps of
// whole milliseconds: only the expected rate tells them apart.
func TestRoundingOrLoss(t *testing.T) {
	stamps := stampsAt(900, 900, 0, 3)
	if _, fault := fitGrid(stamps, resolution{step: 1e-3}, 0); fault == nil || !strings.Contains(fault.what, "lost rows") {
		t.Errorf("without a rate: %v, want a refusal", fault)
	}
	for rate, samples := range map[float64]int{900: 900, 1000: 1000} {
		g, fault := fitGrid(stamps, resolution{step: 1e-3}, rate)
		if fault != nil || g.samples != samples || math.Abs(g.interval*rate-1) > 1e-4 {
			t.Errorf("expecting %v Hz: %d samples at %v Hz, %v; want %d", rate, g.samples, 1/g.interval, fault, samples)
		}
	}
	// Repeated stamps cannot be lost rows.
	if _, fault := fitGrid(stampsAt(900, 1500, 0, 3), resolution{step: 1e-3}, 0); fault != nil {
		t.Errorf("1500 Hz in whole milliseconds: %s", fault.what)
	}
}

func TestFramesGrid(t *testing.T) {
	g, fault := fitFrames([]float64{5, 6, 9, 10})
	if fault != nil || g.samples != 6 || g.longest != 2 {
		t.Errorf("frames 5 6 9 10: %+v, %v; want 6 samples, a gap of 2", g, fault)
	}
	for _, bad := range [][]float64{{1, 1}, {2, 1}, {1, 1.5}, {1, 2, 9}} {
		if _, fault := fitFrames(bad); fault == nil {
			t.Errorf("frames %v accepted", bad)
		}
	}
}
