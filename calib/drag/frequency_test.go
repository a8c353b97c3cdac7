package drag

import (
	"encoding/csv"
	"math"
	"math/cmplx"
	"os"
	"strconv"
	"strings"
	"testing"
)

// example is R = 0.5 um in water at 25 C (IAPWS SR6-08), at h = R/s, with the static
// factor of Faxen's first order.
func example(s float64) Frequency {
	d := Frequency{Radius: 0.5e-6, Height: math.Inf(1), Viscosity: 0.0008899968, Density: 997.047013, StaticFactor: 1}
	if s > 0 {
		d.Height, d.StaticFactor = d.Radius/s, 1/(1-9.0/16*s)
	}
	return d
}

// TestFrequencyPublished holds the factors against testdata/frequency.csv.
func TestFrequencyPublished(t *testing.T) {
	file, err := os.Open("testdata/frequency.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	records, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(records) != 19 {
		t.Fatalf("frequency.csv has %d rows, want 19", len(records))
	}
	for _, record := range records[1:] {
		var number [6]float64
		for i := 1; i <= 5; i++ {
			if record[i] != "" {
				if number[i], err = strconv.ParseFloat(record[i], 64); err != nil {
					t.Fatal(err)
				}
			}
		}
		var got complex128
		switch record[0] {
		case "bulk", "published":
			got = example(number[2]).Factor(number[1])
		case "reaction":
			got = reaction(false, number[1])
		}
		want := complex(number[3], number[4])
		if gap := cmplx.Abs(got-want) / cmplx.Abs(want); !(gap <= number[5]) {
			t.Errorf("%v: got %.10g, want %.10g: gap %.1e", record[:3], got, want, gap)
		}
	}
}

// TestHydrodynamicSpectrum is an absolute check: the one-sided spectrum in bulk of a
// bead of 1050 kg/m3 with fc = 500 Hz, (D/pi^2) Re g/[(fc + f Im g - f^2/f_m0)^2 + (f Re g)^2],
// at 1 and 100 kHz (Berg-Sorensen and Flyvbjerg 2004, recomputed), in m2/Hz.
func TestHydrodynamicSpectrum(t *testing.T) {
	d := example(0)
	gamma := Stokes(d.Viscosity, d.Radius)
	mass := 4.0 / 3 * math.Pi * math.Pow(d.Radius, 3) * 1050
	fm0 := gamma / (2 * math.Pi * mass)
	diffusion := 1.380649e-23 * 298.15 / gamma
	for f, want := range map[float64]float64{1e3: 3.997191635678159e-20, 1e5: 3.571091624304084e-24} {
		g := d.Factor(f)
		stiff := 500 + f*imag(g) - f*f/fm0
		got := diffusion / (math.Pi * math.Pi) * real(g) / (stiff*stiff + f*f*real(g)*real(g))
		if math.Abs(got/want-1) > 1e-8 {
			t.Errorf("spectrum at %g Hz = %.9g, want %.9g m2/Hz", f, got, want)
		}
	}
}

// TestFrequencyLimits checks what must hold at the ends: the static factor at f = 0
// for every shape, conjugates for -f, bulk far from the wall.
func TestFrequencyLimits(t *testing.T) {
	for _, d := range frequencies() {
		if got := d.Factor(0); cmplx.Abs(got/complex(d.StaticFactor, 0)-1) > 1e-15 {
			t.Errorf("%+v: factor at 0 Hz = %v, want %g", d, got, d.StaticFactor)
		}
		if got, want := d.Factor(-1e4), cmplx.Conj(d.Factor(1e4)); got != want {
			t.Errorf("%+v: factor at -10 kHz = %v, want %v", d, got, want)
		}
		if u := d.ModelU(0); u > 1e-15 {
			t.Errorf("%+v: model uncertainty at 0 Hz = %g", d, u)
		}
		if u := d.ModelU(1e4); !(u > 0) {
			t.Errorf("%+v: model uncertainty at 10 kHz = %g", d, u)
		}
		far := d
		far.Height, far.StaticFactor = math.Inf(1), 1
		if got, want := far.Factor(1e4), bulkFactor(far.alpha(1e4)); got != want || far.ModelU(1e4) != 0 || far.Approximate() {
			t.Errorf("%+v far from the wall: %v, want bulk %v", d, got, want)
		}
	}
}

func frequencies() []Frequency {
	var out []Frequency
	for _, h := range []float64{1.5, 2, 5, 20} {
		for _, perpendicularly := range []bool{false, true} {
			static, _ := Parallel(h)
			shapes := []Shape{Recommended, Published, PointForce, BulkShape}
			if perpendicularly {
				static, _ = Perpendicular(h)
				shapes = []Shape{Recommended, PointForce, BulkShape}
			}
			for _, shape := range shapes {
				d := example(1 / h)
				d.StaticFactor, d.Perpendicular, d.Shape = static, perpendicularly, shape
				out = append(out, d)
			}
		}
	}
	return out
}

// TestAddedMass checks the high-frequency limit of PointForce: bulk times 1 + (3/16) s^3
// (parallel) and 1 + (3/8) s^3 (perpendicular), the added mass of a sphere near a
// plane to lowest order (Lamb, Hydrodynamics, Sect. 99), for the static factor of first
// order. Terms of order delta/h (here 3e-5) and s^6 are left.
func TestAddedMass(t *testing.T) {
	const s = 0.1
	for perpendicularly, coefficient := range map[bool]float64{false: 3.0 / 16, true: 3.0 / 8} {
		d := example(s)
		d.Perpendicular, d.Shape = perpendicularly, PointForce
		if perpendicularly {
			d.StaticFactor = 1 / (1 - 9.0/8*s)
		}
		f := 1e12
		got := d.Factor(f)/bulkFactor(d.alpha(f)) - 1
		if want := coefficient * s * s * s; math.Abs(real(got)/want-1) > 0.01 || math.Abs(imag(got)) > 0.01*want {
			t.Errorf("perpendicular %v: high-frequency excess %.4g, want %.4g", perpendicularly, got, want)
		}
	}
}

// TestSquareRootCancels checks that the term of order sqrt(f) in the mobility 1/g, 1 in
// bulk, cancels near a wall (Felderhof 2005): 16/9 and 8/9 in the reaction do it, for the
// static factor of first order; (9/16) s (2 + ...) alpha of finite size is left.
func TestSquareRootCancels(t *testing.T) {
	const s = 0.01
	for _, perpendicularly := range []bool{false, true} {
		d := example(s)
		d.Perpendicular, d.Shape = perpendicularly, PointForce
		if perpendicularly {
			d.StaticFactor = 1 / (1 - 9.0/8*s)
		}
		f := d.Nu() * 1e-10 // alpha = 1e-5 (1-i), h/delta = 1e-3
		slope := (1/d.Factor(f) - 1/complex(d.StaticFactor, 0)) / d.alpha(f)
		if cmplx.Abs(slope) > 0.03 {
			t.Errorf("perpendicular %v: mobility goes with %.4g alpha, want 0 within 0.03", perpendicularly, slope)
		}
	}
}

// TestReactionSeams checks that the expansions meet the table: within the error they
// state, and within 2e-5 from panel to panel.
func TestReactionSeams(t *testing.T) {
	for _, perpendicularly := range []bool{false, true} {
		for panel := 0; panel <= 6; panel++ {
			y := reactionLow * math.Pow(reactionHigh/reactionLow, float64(panel)/6)
			tolerance := 2e-5
			switch panel {
			case 0:
				tolerance = 1e-6
			case 6:
				tolerance = 5e-4
			}
			below, above := reaction(perpendicularly, y*(1-1e-9)), reaction(perpendicularly, y*(1+1e-9))
			if gap := cmplx.Abs(below/above - 1); gap > tolerance {
				t.Errorf("perpendicular %v: reaction jumps by %.1e at h/delta = %g", perpendicularly, gap, y)
			}
		}
	}
}

func TestFrequencyRefuses(t *testing.T) {
	good := example(0.5)
	if err := good.Check(); err != nil {
		t.Fatal(err)
	}
	for want, change := range map[string]func(*Frequency){
		"radius 0 m":           func(d *Frequency) { d.Radius = 0 },
		"viscosity NaN Pa s":   func(d *Frequency) { d.Viscosity = math.NaN() },
		"density -1 kg/m3":     func(d *Frequency) { d.Density = -1 },
		"height 5e-07 m":       func(d *Frequency) { d.Height = d.Radius },
		"static wall factor 0": func(d *Frequency) { d.StaticFactor = 0 },
		"shape 7":              func(d *Frequency) { d.Shape = 7 },
		"parallel to the wall": func(d *Frequency) { d.Perpendicular, d.Shape = true, Published },
	} {
		d := good
		change(&d)
		if err := d.Check(); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("Check = %v, want an error with %q", err, want)
		}
	}
}

func BenchmarkFactor(b *testing.B) {
	d := example(0.5)
	d.Shape = PointForce
	for b.Loop() {
		d.Factor(1e4)
	}
}

// TestRecommended pins which form the zero Shape stands for, near a wall.
func TestRecommended(t *testing.T) {
	for perpendicularly, want := range map[bool]Shape{false: Published, true: PointForce} {
		d := example(0.5)
		d.Perpendicular = perpendicularly
		named := d
		named.Shape = want
		if got := d.Factor(1e4); got != named.Factor(1e4) || d.Approximate() {
			t.Errorf("perpendicular %v: recommended factor %v, want that of shape %d", perpendicularly, got, want)
		}
	}
	for ratio, want := range map[float64]Shape{1.1: PointForce, 1.99: PointForce, 2: Published, 5: Published} {
		d := example(0.5)
		d.Height = ratio * d.Radius
		named := d
		named.Shape = want
		if got := d.Factor(1e4); got != named.Factor(1e4) {
			t.Errorf("parallel at h/R = %g: recommended factor %v, want that of shape %d", ratio, got, want)
		}
	}
	d := example(0.5)
	d.Shape = BulkShape
	if !d.Approximate() {
		t.Error("the shape of bulk near a wall is not reported as approximate")
	}
}
