package main

import (
	"context"
	"math"
	"math/cmplx"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
	"testing"
)

// cellsNamed picks cells by their names, in the order of the study.
func cellsNamed(t *testing.T, names ...string) []trialCell {
	t.Helper()
	var list []trialCell
	for _, c := range detectionCells() {
		if slices.Contains(names, c.Name) {
			list = append(list, c)
		}
	}
	if len(list) != len(names) {
		t.Fatalf("%d of %d cells found: %v", len(list), len(names), names)
	}
	return list
}

// The study in small, with fixed seeds. Each cell has a probability of at least 0.98 by theory to find the fault, and the true
// cause is outside of the tie with one of at most 3 % (chi-square of one degree of freedom above 2 ln 10). Of 4
// recordings of a cell at most one may fail in either: two do with a probability of 6 x 0.03^2 = 0.5 %. In the cells that
// theory separates with a probability of 0.9 and more, the true cause alone makes the tie in at least half of them: fewer
// than 2 of 4 have a probability of 0.4 %.
func TestWrongStatementsAreFound(t *testing.T) {
	const runs = 4
	for _, c := range cellsNamed(t,
		"length scale 6 % too small: "+detectorExact,
		"length scale of x 6 % off: "+cameraTwo,
		"temperature 8 K too low: "+cameraOne,
		"trap heated by 8 K, not stated: "+detectorFree,
		"bead diameter 10 % too small: "+cameraNear,
		"height stated twice as large: "+cameraNear,
		"exposure stated 0, full frame: "+cameraOne,
		"rate stated twice too high: "+cameraOne,
		"noise of 0.3 rms stated as 0.1: "+detectorOne,
		"amplitude of the stage 6 % too large: "+cameraDrive,
	) {
		d := detect(context.Background(), c, runs)
		if d.Failed > 0 || d.Ideal.Power < 0.98 {
			t.Errorf("%s: %d refused (%s), power %.3f", c.Name, d.Failed, d.Error, d.Ideal.Power)
		}
		if d.Diagnosed < runs-1 || d.Top < runs-1 || d.Excluded > 1 {
			t.Errorf("%v", d)
		}
		if d.Ideal.Alone >= 0.9 && d.Alone < runs/2 {
			t.Errorf("theory separates with %.2f: %v", d.Ideal.Alone, d)
		}
	}
}

// Recordings that are spoiled by far more than chance does: of 3 at most one may pass unnoticed (two do with a
// probability of 3 x 0.1^2 = 3 % at the promised rate of 90 %, and the seeds are fixed).
func TestSpoiledRecordingsAreFound(t *testing.T) {
	const runs = 3
	for _, c := range detectionCells() {
		if c.group != recordingGroup || c.setup.name != cameraTwo && c.setup.name != longDetector {
			continue
		}
		d := detect(context.Background(), c, runs)
		if d.Ideal.Known && d.Ideal.Power < 0.99 {
			continue
		}
		if d.Failed > 0 || d.Checks[c.fault.code] < runs-1 {
			t.Errorf("%s has to raise %s: %v %s", c.Name, c.fault.code, d, d.Error)
		}
	}
}

// Clean recordings: at the promised 5 % a recording, 40 raise more than 6 alarms with a probability of 0.3 %.
func TestCleanRecordingsPass(t *testing.T) {
	n, alarms := 0, 0
	for _, c := range cellsNamed(t,
		"clean: "+Cell{Ratio: 0.02, Periods: 300, Noise: 0.1}.String(),
		"clean: "+Cell{Ratio: 0.15, Periods: 30, Exposure: 1, Noise: 0.1}.String(),
		"clean: "+Cell{Ratio: 0.4, Periods: 300, Exposure: 1, Noise: 0.5}.String(),
		"clean: "+Cell{Ratio: 1, Periods: 30, Noise: 0.5}.String(),
	) {
		d := detect(context.Background(), c, 10)
		n += d.Runs - d.Failed
		alarms += d.Any
	}
	if n < 39 || alarms > 6 {
		t.Errorf("%d of %d clean recordings raise an alarm", alarms, n)
	}
}

// Theory against closed forms. One axis with exact inputs and a known noise: the noncentrality of a scale that is
// wrong by p is (2 p)^2/Var(ln D); with the noise fitted its variance is larger. Two causes that move one number alike
// have no distance. The chance of a deviate about 3 beyond 2.807 is Phi(0.193) = 0.5765.
func TestIdeal(t *testing.T) {
	c := cellsNamed(t, "length scale 6 % too small: "+detectorExact)[0]
	c.setup.scene.unknownNoise = false
	got := c.ideal()
	b, err := Cell{Ratio: 0.03, Periods: 2000, Noise: 0.02}.bounds()
	if err != nil {
		t.Fatal(err)
	}
	// at most by Cauchy and Schwarz: sd(ln D) <= sd(ln fc) + sd(ln V); at least their difference
	p := 2 * math.Log(0.94)
	most, least := p*p/math.Pow(b.Drag-b.Amplitude, 2), p*p/math.Pow(b.Drag+b.Amplitude, 2)
	if got.Noncentrality < least || got.Noncentrality > most {
		t.Errorf("noncentrality %.1f, want between %.1f and %.1f", got.Noncentrality, least, most)
	}
	if got.Distance > 0.01 || got.Alone > 0.001 {
		t.Errorf("a scale and a diameter have the distance %.3f and %.3f to be told apart, want none", got.Distance, got.Alone)
	}
	if p := excess(9, 2.807); math.Abs(p-0.5765) > 1e-4 {
		t.Errorf("excess(9, 2.807) = %.4f, want 0.5765", p)
	}
}

// The spectrum of a random walk less its straight line, by the sum over its steps; the closed form leaves out terms of k/n.
func TestWalkPower(t *testing.T) {
	const n = 2000
	for _, k := range []int{1, 2, 5, 20} {
		w := 2 * math.Pi * float64(k) / n
		turn := func(j int) complex128 { return cmplx.Exp(complex(0, -w*float64(j))) }
		var ramp complex128
		squares := 0.0
		for j := range n {
			x := float64(j) - (n-1)/2.0
			ramp += complex(x, 0) * turn(j)
			squares += x * x
		}
		sum := 0.0
		for j := range n {
			g, slope := (turn(j)-1)/(1-turn(1)), float64(j)*float64(n-j)/2/squares
			sum += math.Pow(cmplx.Abs(g-complex(slope, 0)*ramp), 2)
		}
		if got := walkPower(k, n); math.Abs(got/sum-1) > 0.01 {
			t.Errorf("k = %d: %.5g, want %.5g", k, got, sum)
		}
	}
}

// The information on lost samples against that in the kurtosis of the steps, which is excess^2/48 a sample: an ideal test has that
// much at least, but for the little that neighbouring steps share, and a third more at most where the mixture is as mild as here.
func TestLossInformation(t *testing.T) {
	for _, ratio := range []float64{0.003, 0.01, 0.03} {
		s := usual(Cell{Ratio: ratio, Periods: 1000}, "x")
		c := math.Exp(-2 * math.Pi * ratio)
		excess := 3 * ((1-lostShare+lostShare*(1+c)*(1+c))/math.Pow(1+lostShare*c, 2) - 1)
		if got, least := lossInformation(s, lostShare), excess*excess/48; got < least || got > 1.35*least {
			t.Errorf("fc/fs %g: %.4g a sample, want %.4g to a third more", ratio, got, least)
		}
		if got := lossInformation(s, 0); math.Abs(got) > 1e-12 {
			t.Errorf("fc/fs %g: nothing lost, and %.3g a sample", ratio, got)
		}
	}
}

// Theory of the checks against what is found: where it gives a power near one the check finds the fault; the figure that stands for the
// detector of 67000 samples is that of a test between 40 and 60 %.
func TestCheckedPower(t *testing.T) {
	for name, want := range map[string][2]float64{
		"drift of one rms, straight: " + cameraTwo:             {0.999, 1},
		"wander of one rms: " + cameraOne:                      {0.999, 1},
		"line of 50 Hz, 0.3 rms: " + detectorOne:               {0.999, 1},
		"2 % of frames lost without a trace: " + detectorOne:   {0.4, 0.6},
		"2 % of frames lost without a trace: " + longDetector:  {0.999, 1},
		"inertia of the liquid ignored: " + fastBead:           {0.999, 1},
		"slow drift of one rms, a random walk: " + detectorOne: {0.999, 1},
	} {
		c := cellsNamed(t, name)[0]
		got := c.checked()
		if c.group == statementGroup {
			got = c.ideal()
		}
		if !got.Known || got.Power < want[0] || got.Power > want[1] {
			t.Errorf("%s: power %.4f, known %t, want %v", name, got.Power, got.Known, want)
		}
	}
}

// The page holds what the file of results does, and a cell does not depend on the number of processors.
func TestDetectionIsRepeatable(t *testing.T) {
	c := cellsNamed(t, "clean: "+Cell{Ratio: 0.15, Periods: 30, Exposure: 1, Noise: 0.1}.String())[0]
	first := detect(context.Background(), c, 6)
	old := runtime.GOMAXPROCS(1)
	again := detect(context.Background(), c, 6)
	runtime.GOMAXPROCS(old)
	name := filepath.Join(t.TempDir(), "results.json")
	if err := save(name, map[string]*Detection{c.Name: again}); err != nil {
		t.Fatal(err)
	}
	known, err := load[Detection](name)
	if err != nil {
		t.Fatal(err)
	}
	var pages [2]strings.Builder
	writeDetection(&pages[0], []trialCell{c}, map[string]*Detection{c.Name: first})
	writeDetection(&pages[1], []trialCell{c}, known)
	if pages[0].String() != pages[1].String() || !strings.Contains(pages[0].String(), "6 recordings in 1 regimes") {
		t.Errorf("two runs of a cell give two pages:\n%s\n%s", pages[0].String(), pages[1].String())
	}
}
