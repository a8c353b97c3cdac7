package main

import (
	"context"
	"math"
	"path/filepath"
	"runtime"
	"strings"
	"testing"

	"beadwell/calib"
)

// quick is a small camera cell: 300 samples.
var quick = Cell{Ratio: 0.1, Periods: 30, Exposure: 0.5, Noise: 0.1}

func blank(t *testing.T, c Cell) *Outcome {
	t.Helper()
	o, err := newOutcome(c)
	if err != nil {
		t.Fatal(err)
	}
	return o
}

// The outcome of a cell does not depend on the number of processors or on whether it was run
// in parts, and survives the file of results.
func TestStudyIsRepeatable(t *testing.T) {
	ctx := context.Background()
	first := blank(t, quick)
	first.study(ctx, 24)
	if first.Failed > 0 {
		t.Fatalf("%d recordings failed: %s", first.Failed, first.Error)
	}
	old := runtime.GOMAXPROCS(1)
	again := blank(t, quick)
	again.study(ctx, 10)
	again.study(ctx, 24)
	runtime.GOMAXPROCS(old)
	name := filepath.Join(t.TempDir(), "results.json")
	if err := save(name, map[string]*Outcome{quick.String(): again}); err != nil {
		t.Fatal(err)
	}
	known, err := load[Outcome](name)
	if err != nil {
		t.Fatal(err)
	}
	var pages [2]strings.Builder
	writeTables(&pages[0], []*Outcome{first})
	writeTables(&pages[1], []*Outcome{known[quick.String()]})
	if pages[0].String() != pages[1].String() {
		t.Errorf("two runs of a cell give two pages:\n%s\n%s", pages[0].String(), pages[1].String())
	}
}

// Cramer-Rao bounds of N ideal samples: sd ln fc = sqrt((1-c^2)/N)/(c|ln c|) and
// Var ln V = (2/N)(1+c^2)/(1-c^2) (from the Fisher information of an AR(1) process;
// Brockwell and Davis, Time Series, 1991, 8.8). The sum over frequencies replaces an
// integral, which costs terms of the order of 1/(pi T fc).
func TestBounds(t *testing.T) {
	c := Cell{Ratio: 0.05, Periods: 3000}
	b, n := blank(t, c).Bounds, float64(c.samples())
	z := math.Exp(-2 * math.Pi * c.Ratio)
	for name, pair := range map[string][2]float64{
		"drag":      {b.Drag, math.Sqrt((1-z*z)/n) / (z * 2 * math.Pi * c.Ratio)},
		"amplitude": {b.Amplitude, math.Sqrt(2 / n * (1 + z*z) / (1 - z*z))},
	} {
		if math.Abs(pair[0]/pair[1]-1) > 1e-3 {
			t.Errorf("bound by %s = %.6f, want %.6f", name, pair[0], pair[1])
		}
	}
}

// The naive analysis is right where a naive analysis is right (fast, noiseless, long) and
// covers as little as it deserves: its variance has the error of independent samples.
func TestNaive(t *testing.T) {
	o := blank(t, Cell{Ratio: 0.02, Periods: 200})
	o.study(context.Background(), 24)
	for _, name := range []string{naiveLorentzian, naiveRaw, naiveDisplacements} {
		// 200 periods leave 4 % of scatter each, 1 % for the mean of 24
		if tally := o.tally(name); tally.Count != 24 || math.Abs(tally.Mean()) > 0.06 {
			t.Errorf("%s: %d estimates with a mean error of %.3f", name, tally.Count, tally.Mean())
		}
	}
	if k := o.tally(naiveRaw).In95; k > 18 {
		t.Errorf("the naive variance covers %d of 24", k)
	}
	if k := o.tally(calib.LegEquipartition).In95; k < 19 {
		t.Errorf("equipartition covers %d of 24", k)
	}
}

// With inputs drawn, a long record is bounded by the inputs alone: 2 % of the diameter (in Stokes
// drag and in the wall factor 1/(1 - (9/16)(R/h)), where R/h is a tenth), 0.5 K (the viscosity of
// water falls from 0.9107 to 0.8701 mPa s between 24 and 26 C; CRC Handbook) and the height; 1 % of the pixel
// twice in the amplitude. The best weights of two estimates
// with variances g, a and covariance m leave (g a - m^2)/(g + a - 2 m).
func TestBoundsOfDrawnInputs(t *testing.T) {
	b := blank(t, Cell{Ratio: 0.05, Periods: 1e6, Drawn: true}).Bounds
	wall := 0.05625 / (1 - 0.05625)
	g := math.Sqrt(math.Pow(0.02*(1+wall), 2) + math.Pow(0.5*math.Log(0.9107/0.8701)/2, 2) + math.Pow(0.1*wall, 2) + math.Pow(0.0017, 2))
	a := math.Hypot(0.02, 0.5/298)
	m := -0.5 * math.Log(0.9107/0.8701) / 2 * 0.5 / 298
	for name, pair := range map[string][2]float64{
		"drag": {b.Drag, g}, "amplitude": {b.Amplitude, a}, "both": {b.Both, math.Sqrt((g*g*a*a - m*m) / (g*g + a*a - 2*m))},
	} {
		if math.Abs(pair[0]/pair[1]-1) > 0.01 { // the statistical part is 0.07 %; Faxen's next term is 0.1 %
			t.Errorf("bound by %s = %.5f, want %.5f", name, pair[0], pair[1])
		}
	}
}
