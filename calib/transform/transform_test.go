package transform

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"
)

// noise returns n independent standard normal numbers.
func noise(seed uint64, n int) []float64 {
	rng := rand.New(rand.NewPCG(seed, 1))
	x := make([]float64, n)
	for j := range x {
		x[j] = rng.NormFloat64()
	}
	return x
}

// definition is the transform straight from its definition, in O(n^2).
func definition(x []float64) []complex128 {
	n := len(x)
	table := make([]complex128, n)
	for k := range table {
		table[k] = cmplx.Exp(complex(0, -2*math.Pi*float64(k)/float64(n)))
	}
	bins := make([]complex128, n/2+1)
	for k := range bins {
		for j, v := range x {
			bins[k] += complex(v, 0) * table[j*k%n]
		}
	}
	return bins
}

// distance returns the root mean square of got - want relative to that of want.
func distance(got, want []complex128) float64 {
	var difference, size float64
	for k := range want {
		difference += square(got[k] - want[k])
		size += square(want[k])
	}
	return math.Sqrt(difference / size)
}

// TestForwardDefinition compares every good length up to 1000 with the definition.
// The definition sums n terms one by one, so its own error grows as eps sqrt(n):
// 1e-14 is 45 eps, three times sqrt(1000)/2.
func TestForwardDefinition(t *testing.T) {
	for n := 2; n <= 1000; n = GoodLengthAbove(n + 1) {
		p, err := NewPlan(n)
		if err != nil {
			t.Fatal(err)
		}
		x := noise(uint64(n), n)
		want := definition(x)
		got := p.Forward(nil, x)
		if d := distance(got, want); d > 1e-14 {
			t.Errorf("Forward of length %d differs from the definition by %.1e of its size", n, d)
		}
		for k, v := range p.Power(nil, x) {
			if e := math.Abs(v - square(got[k])); e > 1e-15*square(got[k])*4 {
				t.Errorf("length %d: Power[%d] = %g, |Forward|^2 = %g", n, k, v, square(got[k]))
			}
		}
		for j, v := range p.Inverse(nil, got) {
			if e := math.Abs(v - x[j]); e > 1e-14 {
				t.Errorf("length %d: Inverse(Forward(x))[%d] = %g, want %g", n, j, v, x[j])
			}
		}
	}
}
