package health

import (
	"math"
	"math/rand/v2"
	"reflect"
	"slices"
	"strings"
	"testing"

	"beadwell/calib/relaxation"
)

// process is a bead of corner 100 Hz seen at 1 kHz with some blur and noise.
var process = relaxation.Process{Corner: 100, Variance: rms * rms, Noise: 0.1 * rms * rms, Interval: 1e-3, Exposure: 5e-4}

// TestInflation compares the closed sums of the null hypothesis with direct ones over the
// autocovariance of package relaxation. The sums are geometric: only rounding, 1e-12 of
// sums of 300 terms, is allowed for.
func TestInflation(t *testing.T) {
	const m = 300
	h := newNull(process, m, m)
	for power := 1; power <= 4; power++ {
		want := 1.0
		for k := 1; k < m; k++ {
			want += 2 * (1 - float64(k)/m) * math.Pow(process.Autocovariance(k)/process.Autocovariance(0), float64(power))
		}
		if got := h.inflation(power, m); math.Abs(got-want) > 1e-12*want {
			t.Errorf("inflation(%d, %d) = %v, want %v (direct sum)", power, m, got, want)
		}
	}
}

// TestDensity compares the spectral density with that of package relaxation, at zero
// frequency with the long-run variance, and with all samples observed.
func TestDensity(t *testing.T) {
	h := newNull(process, 1000, 1000)
	for _, f := range []float64{0, 1, 77, 400, 500} {
		got, want := h.density(2*math.Pi*f*process.Interval), process.Spectrum(f)/process.Interval
		if math.Abs(got-want) > 1e-12*want { // rounding
			t.Errorf("density at %v Hz = %v, want %v", f, got, want)
		}
	}
	if got, want := h.longRun(), h.density(0); math.Abs(got-want) > 1e-12*want {
		t.Errorf("longRun() = %v, want %v, the density at zero frequency", got, want)
	}
}

// TestMomentTransforms checks the transformations of skewness and kurtosis on the
// published worked example of D'Agostino, Belanger and D'Agostino, Am. Stat. 44 (1990)
// 316 (cholesterol of 62 men: sqrt(b1) = 1.02, b2 = 4.58, Z = 3.14 and 2.21, from memory).
func TestMomentTransforms(t *testing.T) {
	// from g1 = 1.02 and g2 = 1.58 given to two decimals, a rounding error of 0.005 makes 0.02 in Z
	if z := skewDeviate(1.02, 62); math.Abs(z-3.14) > 0.02 {
		t.Errorf("skewDeviate(1.02, 62) = %.3f, want 3.14", z)
	}
	if z := kurtosisDeviate(1.58, 62); math.Abs(z-2.21) > 0.02 {
		t.Errorf("kurtosisDeviate(1.58, 62) = %.3f, want 2.21", z)
	}
}

// TestNormal checks deviates of equal tail probability: t = 2.571 of 5 degrees of
// freedom and 1.960 of a normal distribution both have 2.5 % beyond them (any table
// of Student's distribution; three decimals).
func TestNormal(t *testing.T) {
	if z := normal(2.571, 5); math.Abs(z-1.960) > 1e-3 {
		t.Errorf("normal(2.571, 5) = %v, want 1.960", z)
	}
	if z := normal(-2.571, 5); math.Abs(z+1.960) > 1e-3 {
		t.Errorf("normal(-2.571, 5) = %v, want -1.960", z)
	}
	if z := normal(1e9, 1e6); !(z > 30) || math.IsInf(z, 0) {
		t.Errorf("normal(1e9, 1e6) = %v, want a large finite number", z)
	}
}

// TestLine fits a line and a step to means that are exactly that.
func TestLine(t *testing.T) {
	x := make([]float64, 5000)
	for i := range x {
		u := (float64(i)+0.5)/float64(len(x)) - 0.5
		x[i] = 3 + 2*u
		if i >= 3000 {
			x[i] += 5
		}
	}
	s := summarise(x)
	p := points(s.blocks, s.length, s.samples)
	st := fitStep(p, 1e-6, 1e6, 10)
	// positions are known to one block of three samples, and its share of the step
	if math.Abs(st.height*s.scale-5) > 0.01 || math.Abs(st.at-3000) > 3 {
		t.Errorf("step %v at %v, want 5 at 3000", st.height*s.scale, st.at)
	}
	if l := fitLine(without(p, st)); math.Abs(l.slope*s.scale-2) > 0.01 {
		t.Errorf("slope %v, want 2", l.slope*s.scale)
	}
}

// white returns n normal deviates of the given standard deviation.
func white(n int, sd float64, seed uint64) []float64 {
	r := rand.New(rand.NewPCG(seed, 7))
	x := make([]float64, n)
	for i := range x {
		x[i] = sd * r.NormFloat64()
	}
	return x
}

// axis returns an axis of white samples with a process that fits it.
func axis(name string, x []float64) Axis {
	p := relaxation.Process{Corner: 500, Variance: 0.9999 * rms * rms, Noise: 1e-4 * rms * rms, Interval: 1e-3}
	return Axis{Name: name, X: x, Process: p, Known: true, GoodnessP: 0.5}
}

// TestDegenerate runs records of which nothing can be said: no panic, every check
// present, no number that is infinite.
func TestDegenerate(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	gaps := white(1000, rms, 1)
	for i := 100; i < 900; i++ {
		gaps[i] = nan
	}
	for name, x := range map[string][]float64{
		"empty": {}, "one": {1e-9}, "two": {1e-9, 2e-9}, "constant": slices.Repeat([]float64{1e-9}, 500),
		"missing": slices.Repeat([]float64{nan}, 500), "gaps": gaps, "two values": slices.Repeat([]float64{0, 1e-9}, 500),
		"infinite": append(white(500, rms, 2), inf, -inf), "huge": white(500, 1e300, 3), "tiny": white(500, 1e-300, 4),
		"one outlier": append(white(500, rms, 5), 1),
	} {
		for _, known := range []bool{false, true} {
			for _, rate := range []float64{1000, 0, nan} {
				a, b := axis("x", x), axis("y", slices.Clone(x))
				a.Known, b.Known = known, known
				if known && rate == 0 {
					a.Process = relaxation.Process{}
				}
				in := Input{Axes: []Axis{a, b}, Rate: rate, JitterRMS: nan}
				checks := Run(in)
				if len(checks) != 3+2*16+1 {
					t.Errorf("%s: %d checks, want 36", name, len(checks))
				}
				for _, c := range checks {
					if c.Text == "" || strings.Contains(c.Text, "NaN") && rate == 1000 || math.IsInf(c.Value, 0) {
						t.Errorf("%s: %s %v: %q", name, c.Code, c.Value, c.Text)
					}
				}
				GoodStretch(in, checks)
			}
		}
	}
	if got := len(Run(Input{})); got != 3 {
		t.Errorf("%d checks without axes, want 3", got)
	}
}

// TestUnchanged runs twice on the same input: equal results, untouched input.
func TestUnchanged(t *testing.T) {
	in, first := trial{regime: regime{ratio: 0.1, periods: 300, noise: 0.1}}.run(3, 9)
	before := slices.Clone(in.Axes[0].X)
	if second := Run(in); !reflect.DeepEqual(bits(first), bits(second)) {
		t.Error("the second run differs from the first")
	}
	if !slices.Equal(before, in.Axes[0].X) {
		t.Error("Run has changed the positions")
	}
}

// bits makes NaN comparable.
func bits(checks []Check) []Check {
	out := slices.Clone(checks)
	for i := range out {
		out[i].Value = float64(math.Float64bits(out[i].Value))
		out[i].Threshold = float64(math.Float64bits(out[i].Threshold))
	}
	return out
}

// TestUnits scales positions and process by 2^30, which is exact: the same values,
// levels and places.
func TestUnits(t *testing.T) {
	for _, tr := range trials()[:12] {
		in, want := tr.run(1, 3)
		const by = 1 << 30
		scaled := in
		scaled.Axes = slices.Clone(in.Axes)
		a := &scaled.Axes[0]
		a.X = slices.Clone(a.X)
		for i := range a.X {
			a.X[i] *= by
		}
		a.Process.Variance *= by * by
		a.Process.Noise *= by * by
		got := Run(scaled)
		for i := range got {
			if got[i].Level != want[i].Level || math.Abs(got[i].Value-want[i].Value) > 1e-9*math.Abs(want[i].Value) || !reflect.DeepEqual(got[i].Ranges, want[i].Ranges) {
				t.Errorf("%s, %s: %v %v %v, want %v %v %v", tr.name, got[i].Code, got[i].Level, got[i].Value, got[i].Ranges, want[i].Level, want[i].Value, want[i].Ranges)
			}
		}
	}
}
