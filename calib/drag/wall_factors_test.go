package drag

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

// publishedRow is one row of testdata/wall_factors.csv.
type publishedRow struct {
	kind                          string
	ratio, depth, want, tolerance float64
	source                        string
}

func publishedRows(t *testing.T) []publishedRow {
	t.Helper()
	file, err := os.Open("testdata/wall_factors.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	records, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []publishedRow
	for _, record := range records[1:] {
		number := func(i int) float64 {
			value, err := strconv.ParseFloat(record[i], 64)
			if err != nil {
				t.Fatal(err)
			}
			return value
		}
		row := publishedRow{kind: record[0], ratio: number(1), want: number(3), tolerance: number(4), source: record[5]}
		if record[2] != "" {
			row.depth = number(2)
		}
		rows = append(rows, row)
	}
	if len(rows) != 108 {
		t.Fatalf("wall_factors.csv has %d rows, want 108", len(rows))
	}
	return rows
}

// TestPublished holds the wall factors against the literature. Each row carries its
// own tolerance: the digits in print, the stated error of an approximation, or the
// slip left on the sphere in an independent computation.
func TestPublished(t *testing.T) {
	for _, row := range publishedRows(t) {
		var got float64
		var err error
		switch row.kind {
		case "parallel":
			got, err = Parallel(row.ratio)
		case "perpendicular":
			got, err = Perpendicular(row.ratio)
		case "faxen":
			got, _, err = Faxen(row.ratio)
		case "two walls parallel":
			if row.depth < 3.9 {
				continue // outside the table; the generator's own test has these rows
			}
			got = twoWalls(false, row.ratio, row.depth)
		case "two walls perpendicular":
			got = twoWalls(true, row.ratio, row.depth)
		default:
			t.Fatalf("unknown case %q", row.kind)
		}
		if err != nil {
			t.Fatal(err)
		}
		if gap := got/row.want - 1; !(math.Abs(gap) <= row.tolerance) {
			t.Errorf("%s h/R = %g H/R = %g: got %.9g, want %.9g within %.1e (%s): gap %.2e",
				row.kind, row.ratio, row.depth, got, row.want, row.tolerance, row.source, gap)
		}
	}
}

// TestContact checks convergence where the sums are longest: the sums against their
// asymptotes at contact, whose next terms are of order gap*log(gap) and whose
// constants hold six digits.
func TestContact(t *testing.T) {
	for _, gap := range []float64{1e-3, 1e-4, 2e-5} {
		got := parallelSeries(1 + gap)
		// Chaoui and Feuillebois 2003 (from memory): next term (64/375) gap ln(1/gap).
		want := -8.0/15*math.Log(gap) + 0.954293 - 64.0/375*gap*math.Log(gap)
		if math.Abs(got-want) > 2*gap+1e-5 {
			t.Errorf("parallelSeries(1 + %g) = %.8g, want %.8g", gap, got, want)
		}
		got = perpendicularSeries(1 + gap)
		// Cox and Brenner 1967: next term (1/21) gap ln(1/gap).
		want = 1/gap - math.Log(gap)/5 + 0.97128 - gap*math.Log(gap)/21
		if math.Abs(got-want) > 2*gap+1e-4 {
			t.Errorf("perpendicularSeries(1 + %g) = %.8g, want %.8g", gap, got, want)
		}
	}
}

// TestSeams checks that the forms meet where one takes over from the other: within
// the errors that their comments state.
func TestSeams(t *testing.T) {
	for _, seam := range []struct {
		name      string
		a, b      float64
		tolerance float64
	}{
		{"parallel far", parallelSeries(farRatio), faxen(farRatio), 4e-9},
		{"perpendicular far", perpendicularSeries(veryFarRatio), perpendicular(veryFarRatio + 1e-9), 1e-12},
		{"parallel contact", parallelSeries(contactRatio), parallel(contactRatio - 1e-15), 1e-5},
		{"perpendicular contact", perpendicularSeries(contactRatio), perpendicular(contactRatio - 1e-15), 1e-9},
		{"parallel slope far", centralSlope(parallelSeries, farRatio), parallelSlope(farRatio + 1e-9), 2e-6},
		{"perpendicular slope far", centralSlope(perpendicularSeries, veryFarRatio), perpendicularSlope(veryFarRatio + 1e-9), 2e-6},
		{"parallel slope contact", centralSlope(parallelSeries, contactRatio), parallelSlope(contactRatio - 1e-15), 1e-4},
		{"perpendicular slope contact", centralSlope(perpendicularSeries, contactRatio), perpendicularSlope(contactRatio - 1e-15), 1e-5},
	} {
		if gap := seam.a/seam.b - 1; math.Abs(gap) > seam.tolerance {
			t.Errorf("%s: %.12g and %.12g differ by %.2g, want %.2g", seam.name, seam.a, seam.b, gap, seam.tolerance)
		}
	}
}

// TestMonotone checks that both factors fall from contact to 1 at infinity, that
// perpendicular is the larger, and that the slope integrates to the factor.
func TestMonotone(t *testing.T) {
	lastParallel, lastPerpendicular := math.Inf(1), math.Inf(1)
	for ratio := 1 + 1e-7; ratio < 1e6; ratio = 1 + (ratio-1)*1.1 {
		a, errA := Parallel(ratio)
		b, errB := Perpendicular(ratio)
		if errA != nil || errB != nil {
			t.Fatal(errA, errB)
		}
		if a >= lastParallel || b >= lastPerpendicular || a <= 1 || b <= a {
			t.Fatalf("h/R = %.9g: parallel %.9g after %.9g, perpendicular %.9g after %.9g", ratio, a, lastParallel, b, lastPerpendicular)
		}
		lastParallel, lastPerpendicular = a, b
	}
	for _, f := range []struct {
		factor, slope func(float64) (float64, error)
	}{{Parallel, ParallelSlope}, {Perpendicular, PerpendicularSlope}} {
		for _, ratio := range []float64{1.0005, 1.01, 1.3, 3, 15, 50, 5000} {
			// Simpson's rule over a step of a tenth of the gap: error far below 1e-5.
			next := ratio + 0.1*(ratio-1)
			low, _ := f.factor(ratio)
			high, _ := f.factor(next)
			s := func(r float64) float64 { v, _ := f.slope(r); return v / r }
			integral := (next - ratio) / 6 * (s(ratio) + 4*s((ratio+next)/2) + s(next))
			if want := math.Log(high / low); math.Abs(integral/want-1) > 1e-5 {
				t.Errorf("slope from %g to %g integrates to %.8g, want %.8g", ratio, next, integral, want)
			}
		}
	}
}

func TestRatioRefused(t *testing.T) {
	for _, ratio := range []float64{1, 0.5, 0, -3, math.NaN(), math.Inf(-1)} {
		_, err1 := Parallel(ratio)
		_, err2 := Perpendicular(ratio)
		_, err3 := ParallelSlope(ratio)
		_, err4 := PerpendicularSlope(ratio)
		_, _, err5 := Faxen(ratio)
		for i, err := range []error{err1, err2, err3, err4, err5} {
			if err == nil {
				t.Errorf("ratio %g: function %d has no error", ratio, i)
			}
		}
	}
	for _, f := range []func(float64) (float64, error){Parallel, Perpendicular} {
		if value, err := f(math.Inf(1)); value != 1 || err != nil {
			t.Errorf("factor at infinity = %g, %v; want 1", value, err)
		}
	}
}

// TestAbsolute is a whole case in SI units: R = 0.5 um, h = 5 um, water at 25 C
// (viscosity of IAPWS SR6-08): 8.886965e-9 N s/m.
func TestAbsolute(t *testing.T) {
	factor, err := Parallel(5e-6 / 0.5e-6)
	if err != nil {
		t.Fatal(err)
	}
	if got := Stokes(889.996774e-6, 0.5e-6) * factor; math.Abs(got/8.88696464e-9-1) > 1e-6 {
		t.Errorf("drag = %.9g N s/m, want 8.88696464e-9", got)
	}
}

// TestFaxenError checks the error against the published comparison (Goldman, Cox and
// Brenner 1967): the digits given there.
func TestFaxenError(t *testing.T) {
	for _, row := range []struct{ ratio, want, tolerance float64 }{
		{1.1, 0.0424, 5e-5}, {1.2, 0.0373, 5e-5}, {1.5, 0.0123, 5e-5}, {2, 0.0024, 5e-5}, {3, 0.00023, 5e-6},
	} {
		if _, got, err := Faxen(row.ratio); err != nil || math.Abs(got-row.want) > row.tolerance {
			t.Errorf("error of Faxen at h/R = %g is %g (%v), want %g", row.ratio, got, err, row.want)
		}
	}
}

func BenchmarkParallel(b *testing.B) {
	for b.Loop() {
		if _, err := Parallel(1.01); err != nil {
			b.Fatal(err)
		}
	}
}
