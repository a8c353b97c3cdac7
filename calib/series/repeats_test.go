package series

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"
)

// Thirteen trials of BCG vaccine, Colditz et al., JAMA 271 (1994) 698: cases and others in the
// treated and in the control group (from memory). The log risk ratios are a published
// fixture of random effects: Q = 152.233, DerSimonian-Laird variance 0.3088, mean -0.7141(1787);
// Paule-Mandel variance 0.3180 (Viechtbauer, J. Stat. Softw. 36 (2010) 3; from memory).
func trials() []Measured {
	counts := [][4]float64{{4, 119, 11, 128}, {6, 300, 29, 274}, {3, 228, 11, 209}, {62, 13536, 248, 12619}, {33, 5036, 47, 5761},
		{180, 1361, 372, 1079}, {8, 2537, 10, 619}, {505, 87886, 499, 87892}, {29, 7470, 45, 7232}, {17, 1699, 65, 1600},
		{186, 50448, 141, 27197}, {5, 2493, 3, 2338}, {27, 16886, 29, 17825}}
	var m []Measured
	for _, c := range counts {
		a, n, b, k := c[0], c[0]+c[1], c[2], c[2]+c[3]
		m = append(m, Measured{Value: math.Log(a / n / (b / k)), Uncertainty: math.Sqrt(1/a - 1/n + 1/b - 1/k)})
	}
	return m
}

func TestRepeatsPublished(t *testing.T) {
	fit, err := Repeats(trials(), 0)
	if err != nil {
		t.Fatal(err)
	}
	moment := fit.BetweenMoment * fit.BetweenMoment
	mean, u := weightedMean(trials(), moment)
	for _, c := range []struct {
		name                 string
		got, want, tolerance float64 // half of the last printed digit
	}{
		{"Q", fit.Goodness.ChiSquare, 152.2330, 5e-5},
		{"DerSimonian-Laird variance", moment, 0.3088, 5e-5},
		{"its mean", mean, -0.7141, 5e-5},
		{"its uncertainty", u, 0.1787, 5e-5},
		{"Paule-Mandel variance", fit.Between * fit.Between, 0.3180, 5e-4},
	} {
		if math.Abs(c.got-c.want) > c.tolerance {
			t.Errorf("%s = %.6g, want %.6g", c.name, c.got, c.want)
		}
	}
}

// Two values with u = 1 at -d and d: mean 0, chi-square 2d^2, Birge d sqrt 2, and a
// variance between of 2d^2 - 1, by hand.
func TestRepeatsByHand(t *testing.T) {
	fit, err := Repeats([]Measured{{-3, 1}, {3, 1}}, 0.1)
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name      string
		got, want float64
	}{{"mean", fit.Fixed.Value, 0}, {"u", fit.Fixed.Statistical, math.Sqrt(0.5)}, {"chi-square", fit.Goodness.ChiSquare, 18},
		{"Birge", fit.Goodness.Birge, math.Sqrt(18)}, {"between", fit.Between, math.Sqrt(17)}, {"by moments", fit.BetweenMoment, math.Sqrt(17)},
		{"u of random", fit.Random.Statistical, 3}, {"p", fit.Goodness.PValue, math.Erfc(3)}} {
		if math.Abs(c.got-c.want) > 1e-12 { // rounding
			t.Errorf("%s = %.15g, want %.15g", c.name, c.got, c.want)
		}
	}
	alike, err := Repeats([]Measured{{5, 1}, {5, 2}, {5, 1}}, 0.1)
	if err != nil || alike.Between != 0 || alike.Fixed.Value != 5 || alike.Fixed.Shared != 0.5 {
		t.Errorf("equal values: %+v, %v", alike, err)
	}
}

// 95 % coverage of Random with and without a variance between recordings: at least 93.6 %
// (4 standard errors of 4000 series below 95 %); it may be wider when there is none. The
// p-value of clean repeats is below 0.05 in 5 % within 1.4 %.
func TestRepeatsCoverage(t *testing.T) {
	const series = 4000
	for _, between := range []float64{0, 1, 3} {
		r := rand.New(rand.NewPCG(9, 9))
		hits, low := 0, 0
		for range series {
			var m []Measured
			for i := range 6 {
				u := 0.5 + 0.2*float64(i)
				m = append(m, Measured{Value: 10 + math.Hypot(u, between)*r.NormFloat64(), Uncertainty: u})
			}
			fit, err := Repeats(m, 0)
			if err != nil {
				t.Fatal(err)
			}
			if fit.Random.Low <= 10 && 10 <= fit.Random.High {
				hits++
			}
			if fit.Goodness.PValue < 0.05 {
				low++
			}
		}
		if share := float64(hits) / series; share < 0.936 {
			t.Errorf("between %g: coverage %.4f", between, share)
		}
		if share := float64(low) / series; between == 0 && math.Abs(share-0.05) > 0.014 {
			t.Errorf("p below 0.05 in %.4f of clean repeats", share)
		}
	}
}

func TestRepeatsRefuses(t *testing.T) {
	var place *PointError
	if _, err := Repeats([]Measured{{1, 1}, {2, 0}}, 0); !errors.As(err, &place) || place.Index != 1 {
		t.Errorf("uncertainty 0: %v", err)
	}
	if _, err := Repeats([]Measured{{1, 1}}, 0); !errors.Is(err, ErrTooFew) {
		t.Errorf("one value: %v", err)
	}
}

func TestRatio(t *testing.T) {
	got, err := Ratio(Pair{First: Measured{6, 0.6}, Second: Measured{2, 0.2}, Correlation: 0.5})
	// relative: sqrt(0.1^2 + 0.1^2 - 2 x 0.5 x 0.1 x 0.1) = 0.1
	if err != nil || got.Value != 3 || math.Abs(got.Uncertainty-0.3) > 1e-15 {
		t.Errorf("Ratio = %+v, %v, want 3, 0.3", got, err)
	}
	for _, bad := range []Pair{{First: Measured{0, 1}, Second: Measured{1, 1}}, {First: Measured{1, 1}, Second: Measured{1, 1}, Correlation: 2}, {First: Measured{1, math.NaN()}, Second: Measured{1, 1}}} {
		if _, err := Ratio(bad); err == nil {
			t.Errorf("%+v was not refused", bad)
		}
	}
}
