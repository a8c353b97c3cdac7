package psd_test

import (
	"math"
	"math/rand/v2"
	"testing"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
)

// holes takes samples out: a share of single ones, and one gap of a tenth of the record.
func holes(x []float64, share float64, seed uint64) {
	rng := rand.New(rand.NewPCG(seed, 9))
	for i := range x {
		if rng.Float64() < share || i >= 4*len(x)/10 && i < 5*len(x)/10 {
			x[i] = math.NaN()
		}
	}
}

// With a tenth of the record missing in one piece and 5 % here and there, the p-values of the fit are uniform:
// a Kolmogorov distance of 1.95/sqrt(200) = 0.138 has a probability of 0.1 %, and 0.02 is left for
// parameters that are fitted in unequal blocks.
func TestGoodnessWithGaps(t *testing.T) {
	const records = 200
	for _, g := range []regime{
		{"detector", 0.03, 0, 0.2, false, 150},
		{"camera", 0.15, 1, 0.1, true, 300},
	} {
		var p []float64
		for i := range records {
			x := simulate.Record(g.truth(), uint64(3000+i))[0]
			holes(x, 0.05, uint64(i))
			f := estimate(t, x, 1000, g.options())
			if f.Goodness.DegreesOfFreedom < 10 {
				t.Fatalf("%s: %d degrees of freedom", g.name, f.Goodness.DegreesOfFreedom)
			}
			p = append(p, f.Goodness.PValue)
		}
		if d := kolmogorov(p); d > 0.158 {
			t.Errorf("%s: p-values of the fit are %.3f from uniform, want below 0.158", g.name, d)
		}
	}
}

// A wander below the corner frequency, which no relaxation process has, is seen through the gaps.
func TestMisfitIsSeenWithGaps(t *testing.T) {
	g := regime{"detector", 0.03, 0, 0.2, true, 300}
	x := simulate.Record(g.truth(), 5)[0]
	rng := rand.New(rand.NewPCG(5, 5))
	walk := 0.0
	for i := range x {
		walk += rng.NormFloat64() * rms / math.Sqrt(float64(len(x))/15)
		x[i] += walk
	}
	holes(x, 0.05, 1)
	if f := estimate(t, x, 1000, g.options()); !(f.Goodness.PValue < 1e-4) {
		t.Errorf("p of a wandering bead with gaps is %g, want below 1e-4", f.Goodness.PValue)
	}
}

// The innovations of the process itself are white and of variance 1: of n independent ones the mean square has the
// standard deviation sqrt(2/n), neighbours a correlation of 1/sqrt(n).
func TestInnovationsAreWhite(t *testing.T) {
	g := regime{"camera", 0.15, 1, 0.3, true, 2000}
	x := simulate.Record(g.truth(), 2)[0]
	holes(x, 0.1, 3)
	p := relaxation.Process{Corner: g.corner * 1000, Variance: rms * rms, Noise: 0.09 * rms * rms, Interval: 1e-3, Exposure: 1e-3}
	e := p.Innovations(x)
	n := float64(len(e))
	var square, product float64
	for i, v := range e {
		square += v * v / n
		if i > 0 {
			product += v * e[i-1] / n
		}
	}
	if math.Abs(square-1) > 4*math.Sqrt(2/n) || math.Abs(product) > 4/math.Sqrt(n) {
		t.Errorf("innovations have mean square %.4f and correlation %.4f over %d samples", square, product, len(e))
	}
}
