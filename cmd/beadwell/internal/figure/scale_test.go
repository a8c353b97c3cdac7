package figure

import (
	"math"
	"strconv"
	"strings"
	"testing"
)

// valueOf reads a tick label back.
func valueOf(t *testing.T, label string) float64 {
	t.Helper()
	mantissa, exponent := 1.0, 0
	before, power, raised := strings.Cut(label, "10^{")
	if raised {
		n, err := strconv.Atoi(strings.TrimSuffix(power, "}"))
		if err != nil {
			t.Fatalf("label %q: %v", label, err)
		}
		exponent = n
		before = strings.TrimSuffix(before, "×")
	}
	if before != "" {
		v, err := strconv.ParseFloat(before, 64)
		if err != nil {
			t.Fatalf("label %q: %v", label, err)
		}
		mantissa = v
	}
	return mantissa * math.Pow(10, float64(exponent))
}

func TestTickLabelsSayTheirValue(t *testing.T) {
	for _, s := range []scale{
		{low: -3.2, high: 17}, {low: 0, high: 0.0417}, {low: 51.95, high: 52.07}, {low: -4e6, high: 9e7}, {low: 1e-13, high: 5e-13},
		{low: -1e100, high: 1e100}, {low: 0.99999, high: 1.00001}, {low: 123456.1, high: 123456.9},
		{log: true, low: 0.3, high: 7e4}, {log: true, low: 61, high: 190}, {log: true, low: 1e-20, high: 1e-3}, {log: true, low: 2.1, high: 8.7},
		{log: true, low: 1e-99, high: 1e99}, {log: true, low: 3e-5, high: 9e-5},
	} {
		labelled := 0
		for _, k := range s.ticks(5) {
			if k.value < s.low || k.value > s.high {
				t.Errorf("tick %g outside %g to %g", k.value, s.low, s.high)
			}
			if k.label == "" {
				continue
			}
			labelled++
			// A label is exact but for the rounding of the step that made it.
			if got := valueOf(t, k.label); math.Abs(got-k.value) > 1e-9*(s.high-s.low)+1e-9*math.Abs(k.value)*float64(btoi(s.log)) {
				t.Errorf("%g to %g: label %q stands at %g", s.low, s.high, k.label, k.value)
			}
		}
		if labelled < 2 || labelled > 11 {
			t.Errorf("%g to %g (log %t): %d labels, want 2 to 11", s.low, s.high, s.log, labelled)
		}
	}
}

func btoi(b bool) int {
	if b {
		return 1
	}
	return 0
}

func TestPlacesOnAxes(t *testing.T) {
	linear := scale{factor: 1e9, low: -10, high: 30}
	logarithmic := scale{factor: 1, log: true, low: 1, high: 1e4}
	for _, c := range []struct {
		got, want float64
	}{
		{linear.normalised(0), 0.25}, {linear.normalised(30e-9), 1}, {logarithmic.normalised(100), 0.5}, {logarithmic.normalised(1e4), 1},
	} {
		if math.Abs(c.got-c.want) > 1e-12 { // rounding
			t.Errorf("place %g, want %g", c.got, c.want)
		}
	}
	for _, v := range []float64{0, -1, math.NaN()} {
		if got := logarithmic.normalised(v); !math.IsNaN(got) {
			t.Errorf("normalised(%g) on a logarithmic axis = %g, want NaN", v, got)
		}
		if got := bound(logarithmic, v); got != 0 {
			t.Errorf("bound(%g) on a logarithmic axis = %g, want 0", v, got)
		}
	}
}

func TestRangesAreNeverDegenerate(t *testing.T) {
	values := []float64{0, 1, -1, 1e-300, 5e-324, 1e308, -1e308, 1e-12, 1 + 1e-15}
	for _, a := range values {
		for _, b := range values {
			e := newExtent()
			e.show(a, b)
			s := scale{factor: 1}.over(e)
			if !(s.high > s.low) || !finite(s.low, s.high) || len(s.ticks(5)) < 1 {
				t.Errorf("linear axis over %g, %g: %g to %g with %d ticks", a, b, s.low, s.high, len(s.ticks(5)))
			}
			e = newExtent()
			if e.showPositive(a, b); e.empty() {
				continue
			}
			s = scale{factor: 1, log: true}.over(e)
			if !(s.high > s.low) || !(s.low > 0) || !finite(s.high) || len(s.ticks(5)) < 1 {
				t.Errorf("log axis over %g, %g: %g to %g with %d ticks", a, b, s.low, s.high, len(s.ticks(5)))
			}
		}
	}
}

func TestNiceStep(t *testing.T) {
	for raw, want := range map[float64]float64{1: 1, 1.1: 2, 2: 2, 2.01: 5, 5.5: 10, 0.03: 0.05, 700: 1000} {
		if got := niceStep(raw); math.Abs(got/want-1) > 1e-12 { // rounding of a power of ten
			t.Errorf("niceStep(%g) = %g, want %g", raw, got, want)
		}
	}
}

func TestPiecesOfALabel(t *testing.T) {
	for label, want := range map[string][]piece{
		"10^{-3}":      {{"10", false}, {"−3", true}},
		"nm^{2}/Hz":    {{"nm", false}, {"2", true}, {"/Hz", false}},
		"-20":          {{"−20", false}},
		"[-39, 4] nm":  {{"[−39, 4] nm", false}},
		"one-sided 3":  {{"one-sided 3", false}},
		"2026-01-02":   {{"2026-01-02", false}},
		"2×10^{-5} nm": {{"2×10", false}, {"−5", true}, {" nm", false}},
		"broken^{2":    {{"broken", false}, {"2", true}},
		"":             nil,
	} {
		got := pieces(label)
		if len(got) != len(want) {
			t.Errorf("pieces(%q) = %v, want %v", label, got, want)
			continue
		}
		for i := range got {
			if got[i] != want[i] {
				t.Errorf("pieces(%q) = %v, want %v", label, got, want)
			}
		}
	}
}

func TestTypeset(t *testing.T) {
	for in, want := range map[string]string{
		"52.3(11) pN/um": "52.3(11) pN/µm", "178.1(25) us": "178.1(25) µs", "155.8(17) nm2": "155.8(17) nm²", "-0.02(5)": "−0.02(5)", "1.0 um": "1.0 µm", "896.1(97) Hz": "896.1(97) Hz",
	} {
		if got := typeset(in); got != want {
			t.Errorf("typeset(%q) = %q, want %q", in, got, want)
		}
	}
}
