package figure

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"
	"time"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure/specimen"
)

// hostile are the numbers that break plots.
var hostile = []float64{0, math.Copysign(0, -1), -1, 1, math.NaN(), math.Inf(1), math.Inf(-1), 1e308, -1e308, 5e-324, -5e-324, 1e-300, 1e15, math.Nextafter(1, 2)}

// spoil replaces each number below v by a hostile one with the given chance.
func spoil(v reflect.Value, random *rand.Rand, chance float64) {
	switch v.Kind() {
	case reflect.Float64:
		if random.Float64() < chance {
			v.SetFloat(hostile[random.IntN(len(hostile))])
		}
	case reflect.Pointer:
		if !v.IsNil() {
			spoil(v.Elem(), random, chance)
		}
	case reflect.Struct:
		for i := range v.NumField() {
			spoil(v.Field(i), random, chance)
		}
	case reflect.Slice, reflect.Array:
		for i := range v.Len() {
			spoil(v.Index(i), random, chance)
		}
	}
}

// TestNoNumberBreaksAFigure draws results with hostile numbers in any place.
// Every figure must come out, well-formed, in time.
func TestNoNumberBreaksAFigure(t *testing.T) {
	stored, err := json.Marshal(specimen.Result())
	if err != nil {
		t.Fatal(err)
	}
	random := rand.New(rand.NewPCG(1, 2))
	for round := range 40 {
		var r calib.Result
		if err := json.Unmarshal(stored, &r); err != nil {
			t.Fatal(err)
		}
		r.Axes = r.Axes[:1]
		spoil(reflect.ValueOf(&r), random, []float64{0.002, 0.05, 0.5, 1}[round%4])
		start := time.Now()
		for n, f := range All(&r) {
			svg, err := Render(f, SVG, Automatic)
			if err != nil {
				t.Fatalf("round %d: %v", round, err)
			}
			wellFormed(t, svg)
			if _, err := Data(f); err != nil {
				t.Errorf("round %d: %v", round, err)
			}
			if n == round/4%5 { // each figure at each chance twice, for a PNG takes long
				for _, format := range []Format{PNG, PDF} {
					if _, err := Render(f, format, Light); err != nil {
						t.Errorf("round %d: %v", round, err)
					}
				}
			}
		}
		// A set takes under a second; a plot that hangs takes for ever.
		if took := time.Since(start); took > 30*time.Second {
			t.Errorf("round %d took %v", round, took)
		}
	}
}

func TestEmptyResultsGetAReason(t *testing.T) {
	for name, r := range map[string]*calib.Result{
		"nothing": {}, "an axis of nothing": {Axes: []calib.Axis{{Name: "x"}}},
	} {
		for _, f := range All(r) {
			if f.Reason == "" || !strings.Contains(f.Description, f.Reason) {
				t.Errorf("%s: %s has reason %q and description %q", name, f.Name, f.Reason, f.Description)
			}
			for _, format := range []Format{SVG, PNG, PDF} {
				out, err := Render(f, format, Light)
				if err != nil {
					t.Errorf("%s: %v", name, err)
				}
				if format == SVG && !strings.Contains(string(out), "not drawn") {
					t.Errorf("%s: %s does not say that it was not drawn", name, f.Name)
				}
			}
		}
	}
	a := calib.Axis{Name: "x"}
	a.Equipartition.Potential.Reason = "fewer than 100 independent samples"
	if f := position(&calib.Result{}, &a); f.Reason != a.Equipartition.Potential.Reason {
		t.Errorf("reason %q, want the one of the result", f.Reason)
	}
}

func TestSinglePointsAndConstants(t *testing.T) {
	a := calib.Axis{Name: "x",
		Spectrum:     calib.Spectrum{Points: []calib.SpectrumPoint{{Frequency: 1, Power: 1, Standard: 1, Model: 1, Residual: 0, Bins: 1, Used: true}}},
		Displacement: calib.MeanSquareDisplacement{Points: []calib.MSDPoint{{Lag: 1, MSD: 1, Standard: 0, Used: true}}},
		Trace:        calib.Trace{Step: 1, Low: []calib.Float{3}, High: []calib.Float{3}},
	}
	a.Equipartition.Potential = calib.Potential{BinWidth: 0, Bins: []calib.HistogramBin{{Centre: 0, Count: 1, Density: 1}}}
	a.Estimates = []calib.Estimate{{Leg: calib.LegSpectrum, Route: calib.RouteDrag, Stiffness: calib.Exact(1, "N/m")}}
	for _, f := range All(&calib.Result{Axes: []calib.Axis{a}}) {
		if f.Reason != "" {
			t.Errorf("%s is empty: %s", f.Name, f.Reason)
		}
		for _, format := range []Format{SVG, PNG, PDF} {
			if _, err := Render(f, format, Light); err != nil {
				t.Error(err)
			}
		}
	}
}

func TestHostileNames(t *testing.T) {
	const name = "</text><script>x\x00\x1b[31m\u202e\xff&\"'\ufffe\ud7ff"
	r := specimen.Result()
	r.Input.Name = name
	r.Axes[0].Name = name
	r.Findings[0].Code, r.Findings[0].Axis = name, name
	r.Axes[0].Estimates[0].Leg = name
	for _, f := range All(r) {
		svg, err := Render(f, SVG, Automatic)
		if err != nil {
			t.Fatal(err)
		}
		if elements := wellFormed(t, svg); elements["script"] != 0 {
			t.Errorf("%s: a name became an element", f.Name)
		}
		for _, bad := range []string{"\x00", "\x1b", "\u202e", "\xff"} {
			if strings.Contains(string(svg), bad) {
				t.Errorf("%s holds %q", f.Name, bad)
			}
		}
	}
}
