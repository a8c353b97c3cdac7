package simulate

import (
	"math"
	"testing"
)

// moment returns <u^n> over the Boltzmann distribution exp(-u²/2 - q u⁴/4), |u| < 9, by the
// midpoint rule, which is exact to rounding for such a function.
func moment(n, q float64) float64 {
	sum, weight := 0.0, 0.0
	for i := range 18000 {
		u := -9 + (float64(i)+0.5)/1000
		p := math.Exp(-u*u/2 - q*u*u*u*u/4)
		sum += math.Pow(math.Abs(u), n) * p
		weight += p
	}
	return sum / weight
}

// Second and fourth moments in equilibrium. Samples are 6 relaxation times apart and so
// nearly independent: scatter sqrt((<u^2n> - <u^n>²)/N). At q = 1 the split adds up to 2e-4.
func TestAnharmonicMoments(t *testing.T) {
	for _, q := range []float64{-0.01, 0.05, 1} {
		truth := Truth{Samples: 20000, Rate: 10, Axes: []Axis{{Corner: 10, Variance: 4e-16, Quartic: q}}}
		x := Record(truth, 3)[0]
		for _, n := range []float64{2, 4} {
			got := 0.0
			for _, v := range x {
				got += math.Pow(v/2e-8, n) / float64(len(x))
			}
			want := moment(n, q)
			sd := math.Sqrt((moment(2*n, q) - want*want) / float64(len(x)))
			if !(math.Abs(got-want) <= limit*sd+2e-4*want) {
				t.Errorf("quartic %v: moment %v = %v, want %v within %v", q, n, got, want, limit*sd)
			}
		}
	}
}

// Without a quartic term the steps add up to the exact update, exposure included.
func TestAnharmonicReducesToHarmonic(t *testing.T) {
	truth := Truth{Samples: 30000, Rate: 500, Exposure: 1e-3, Axes: []Axis{{Corner: 100, Variance: 1e-16}}}
	a := truth.Axes[0]
	x := truth.anharmonic(a, 0, 5)
	c := math.Exp(-2 * math.Pi * a.Corner / truth.Rate)
	for lag := range 3 {
		got := 0.0
		for i := lag; i < len(x); i++ {
			got += x[i] * x[i-lag] / float64(len(x)-lag)
		}
		// The scatter is at most that of the variance of the unblurred process.
		sd := a.Variance * math.Sqrt(2*(1+c*c)/(1-c*c)/float64(len(x)))
		if want := expected(a, truth.Rate, truth.Exposure, lag); !(math.Abs(got-want) <= limit*sd) {
			t.Errorf("lag %d: covariance %v, want %v within %v", lag, got, want, limit*sd)
		}
	}
}

// The first sample is in equilibrium already: its mean square over records, scatter as above.
func TestAnharmonicStartsInEquilibrium(t *testing.T) {
	const records = 3000
	truth := Truth{Samples: 1, Rate: 1e6, Axes: []Axis{{Corner: 1, Variance: 1, Quartic: 1}}}
	got := 0.0
	for seed := range uint64(records) {
		x := Record(truth, seed)[0][0]
		got += x * x / records
	}
	want := moment(2, 1)
	if sd := math.Sqrt((moment(4, 1) - want*want) / records); !(math.Abs(got-want) <= limit*sd) {
		t.Errorf("mean square of the first sample %v, want %v within %v", got, want, limit*sd)
	}
}
