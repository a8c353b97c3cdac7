package calib

import (
	"context"
	"math"
	"math/rand/v2"
	"runtime"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"
)

const exampleDraws = 200_000

func rectangular(rng *rand.Rand, low, high float64) float64 { return low + (high-low)*rng.Float64() }

// propagated draws a model of one output.
func propagated(t *testing.T, model func(rng *rand.Rand) float64) *propagation {
	t.Helper()
	p, err := propagate(context.Background(), exampleDraws, 1, 11, func(rng *rand.Rand, out []float64) bool {
		out[0] = model(rng)
		return true
	})
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// The additive models of JCGM 101:2008, 9.2. With 2e5 draws an end of an interval has a standard
// error of 0.6 % of the standard deviation (endError), and four of them are allowed.
func TestAdditiveModels(t *testing.T) {
	for _, c := range []struct {
		name    string
		widths  []float64 // standard deviations
		normal  bool
		u, half float64
	}{
		{"9.2.2, four normal", []float64{1, 1, 1, 1}, true, 2, 3.92},
		{"9.2.3, four rectangular", []float64{1, 1, 1, 1}, false, 2, 3.88},               // a normal of the same u would have 3.92
		{"9.2.4, one of ten times the width", []float64{1, 1, 1, 10}, false, 10.1, 17.0}, // a normal: 19.9
	} {
		p := propagated(t, func(rng *rand.Rand) float64 {
			y := 0.0
			for _, u := range c.widths {
				if c.normal {
					y += u * rng.NormFloat64()
				} else {
					y += rectangular(rng, -u*math.Sqrt(3), u*math.Sqrt(3))
				}
			}
			return y
		})
		tol := 4*endError(c.u, exampleDraws, coverage) + 0.005*c.u // and half a unit of the published digits
		low, high := p.symmetric(0, coverage)
		if math.Abs(p.sd[0]-c.u) > tol || math.Abs(low+c.half) > tol || math.Abs(high-c.half) > tol {
			t.Errorf("%s: u = %.4g, interval [%.4g, %.4g], want %g and +- %g (JCGM 101:2008)", c.name, p.sd[0], low, high, c.u, c.half)
		}
	}
}

// The mass calibration of JCGM 101:2008, 9.3: deviation from the nominal 100 g in mg. First-order
// propagation, which has 0.0539 mg, misses most of it.
func TestMassCalibration(t *testing.T) {
	p := propagated(t, func(rng *rand.Rand) float64 {
		reference := 100000 + 0.050*rng.NormFloat64()
		added := 1.234 + 0.020*rng.NormFloat64()
		air, weight, standard := rectangular(rng, 1.10, 1.30), rectangular(rng, 7000, 9000), rectangular(rng, 7950, 8050)
		return (reference+added)*(1+(air-1.2)*(1/weight-1/standard)) - 100000
	})
	low, high := p.shortest(0, coverage)
	for _, c := range []struct {
		name           string
		got, want, tol float64
	}{
		{"mean", p.mean[0], 1.234, 0.0006}, // 0.0754/sqrt(2e5) = 0.0002
		{"u", p.sd[0], 0.0754, 0.0005},
		// the shortest interval slides easily along so flat a density (its place is found with the cube root of the
		// number of draws), its width does not
		{"low end", low, 1.0834, 0.008},
		{"high end", high, 1.3825, 0.008},
		{"width", high - low, 0.2991, 0.001},
	} {
		if math.Abs(c.got-c.want) > c.tol {
			t.Errorf("%s = %.5g mg, want %g (JCGM 101:2008, Table 6)", c.name, c.got, c.want)
		}
	}
}

// Resistance, reactance and impedance from five simultaneous readings, JCGM 100:2008, H.2:
// correlated inputs, correlated outputs.
func TestImpedance(t *testing.T) {
	readings := mat.NewDense(5, 3, []float64{ // V/V, I/A, phi/rad: Table H.2
		5.007, 19.663e-3, 1.0456, 4.994, 19.639e-3, 1.0438, 5.005, 19.640e-3, 1.0468, 4.990, 19.685e-3, 1.0428, 4.999, 19.678e-3, 1.0433})
	means := make([]float64, 3)
	for i := range means {
		means[i] = stat.Mean(mat.Col(nil, i, readings), nil)
	}
	var covariance mat.SymDense
	stat.CovarianceMatrix(&covariance, readings, nil)
	covariance.ScaleSym(1.0/5, &covariance) // of the means
	var chol mat.Cholesky
	if !chol.Factorize(&covariance) {
		t.Fatal("the readings have no covariance")
	}
	var l mat.TriDense
	chol.LTo(&l)
	p, err := propagate(context.Background(), exampleDraws, 3, 12, func(rng *rand.Rand, out []float64) bool {
		z := mat.NewVecDense(3, []float64{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()})
		z.MulVec(&l, z)
		v, i, phi := means[0]+z.AtVec(0), means[1]+z.AtVec(1), means[2]+z.AtVec(2)
		out[0], out[1], out[2] = v/i*math.Cos(phi), v/i*math.Sin(phi), v/i
		return true
	})
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name           string
		got, want, tol float64 // half a unit of the published digits, and four standard errors of 2e5 draws
	}{
		{"R", p.mean[0], 127.732, 0.001}, {"X", p.mean[1], 219.847, 0.003}, {"Z", p.mean[2], 254.260, 0.002},
		{"u(R)", p.sd[0], 0.071, 0.0009}, {"u(X)", p.sd[1], 0.295, 0.002}, {"u(Z)", p.sd[2], 0.236, 0.002},
		{"r(R, X)", p.correlation[0][1], -0.588, 0.005}, {"r(R, Z)", p.correlation[0][2], -0.485, 0.006}, {"r(X, Z)", p.correlation[1][2], 0.993, 0.001},
	} {
		if math.Abs(c.got-c.want) > c.tol {
			t.Errorf("%s = %.6g, want %g (JCGM 100:2008, H.2)", c.name, c.got, c.want)
		}
	}
}

// The draws do not depend on the number of processors, do on the seed, and stop with the context.
func TestDrawsAreReproducible(t *testing.T) {
	draw := func(seed uint64) []float64 {
		p, err := propagate(context.Background(), 3*drawsPerBlock+5, 1, seed, func(rng *rand.Rand, out []float64) bool {
			out[0] = rng.NormFloat64()
			return out[0] < 2
		})
		if err != nil {
			t.Fatal(err)
		}
		if n := len(p.sorted[0]); n+p.rejected != 3*drawsPerBlock+5 || p.rejected == 0 {
			t.Errorf("%d values and %d left out of %d draws", n, p.rejected, 3*drawsPerBlock+5)
		}
		return p.sorted[0]
	}
	first := draw(1)
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	if diff := cmp.Diff(first, draw(1)); diff != "" {
		t.Errorf("one processor draws other values:\n%s", diff)
	}
	if cmp.Equal(first, draw(2)) {
		t.Error("another seed draws the same values")
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := propagate(ctx, 10, 1, 1, func(*rand.Rand, []float64) bool { return true }); err == nil {
		t.Error("a cancelled propagation returned no error")
	}
}

func TestTolerance(t *testing.T) {
	// JCGM 101:2008, 7.9.2: u = 0.035 has two digits 35e-3, half a unit is 0.0005
	for u, want := range map[float64]float64{0.035: 0.0005, 32: 0.5, 1.1e-6: 0.05e-6} {
		if got := tolerance(u); math.Abs(got/want-1) > 1e-9 {
			t.Errorf("tolerance(%g) = %g, want %g", u, got, want)
		}
	}
}

const budgetDraws = 20_000

// Where the inputs are known to a per cent the model is a straight line, and the draws
// agree with the budget. Axes share bead, liquid and scale, so their stiffnesses go together.
func TestDrawsAgreeWithTheBudget(t *testing.T) {
	s := ordinary()
	s.axes = "xz"
	more := map[string]string{"recording.noise": "2(1) nm", "recording.exposure": "30(10) us"}
	for _, adopt := range []string{"", RouteDrag, RouteAmplitude} {
		r := stagedResult(t, s, more, Options{Adopt: adopt, MonteCarlo: MonteCarloOptions{Draws: budgetDraws, Seed: 3}})
		m := r.MonteCarlo
		if m == nil || len(m.Axes) != 2 || m.Rejected != 0 {
			t.Fatalf("adopt %q: %+v", adopt, m)
		}
		for i, a := range m.Axes {
			q := r.Axes[i].Adopted.Stiffness
			// the standard deviation of 2e4 draws has a standard error of 0.5 %; the rest is the curvature of the model
			if ratio := float64(a.Standard / q.Combined.Standard); math.Abs(ratio-1) > 0.03 {
				t.Errorf("adopt %q, axis %s: standard uncertainty of the draws over that of the budget is %.4f", adopt, a.Axis, ratio)
			}
			if !a.Agrees {
				t.Errorf("adopt %q, axis %s: ends differ by %v, tolerance %g, end error %g", adopt, a.Axis, a.Difference, float64(a.Tolerance), float64(a.EndError))
			}
		}
		if c := float64(m.Correlation[0][1]); c < 0.3 || c > 1 {
			t.Errorf("adopt %q: correlation of the axes is %.3f, want that of the inputs they share", adopt, c)
		}
	}
}

// Near the surface a height known to a tenth acts too strongly for a straight line.
func TestDrawsShowCurvature(t *testing.T) {
	s := ordinary()
	s.height = 0.62e-6
	more := map[string]string{"chamber.height": "0.62(5) um"}
	r := stagedResult(t, s, more, Options{Adopt: RouteDrag, MonteCarlo: MonteCarloOptions{Draws: budgetDraws, Seed: 3}})
	m := r.MonteCarlo
	if m.Axes[0].Agrees || !strings.Contains(m.Text, "too strongly for a straight line") {
		t.Errorf("%s %+v", m.Text, m.Axes[0])
	}
	if m.Rejected == 0 || !strings.Contains(m.Text, "no bead fits") { // 0.62 um is 2.4 standard uncertainties above the radius
		t.Errorf("%d draws were left out; %s", m.Rejected, m.Text)
	}
}

// A stiffness through amplitude goes with the length scale to the power -2: for a scale known to 15 %
// the mean of the draws is 1 + 3 x 0.15^2 + 15 x 0.15^4 times the value (moments of a normal), known to 0.35/sqrt(2e4) = 0.25 %.
func TestScaleIsDrawnToItsPower(t *testing.T) {
	r := stagedResult(t, ordinary(), map[string]string{"recording.pixel": "100(15) nm"}, Options{Adopt: RouteAmplitude, MonteCarlo: MonteCarloOptions{Draws: budgetDraws, Seed: 5}})
	const u = 0.15
	want := 1 + 3*u*u + 15*u*u*u*u
	if got := float64(r.MonteCarlo.Axes[0].Mean / r.Axes[0].Adopted.Stiffness.Value); math.Abs(got-want) > 0.012 { // four standard errors, and the sixth moment
		t.Errorf("mean of the draws over the value is %.4f, want %.4f", got, want)
	}
}
