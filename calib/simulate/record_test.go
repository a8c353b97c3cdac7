package simulate

import (
	"math"
	"math/cmplx"
	"testing"
)

// limit is the number of standard deviations at which a seeded statistical test
// fails: with fixed seeds it either always passes or never, and a correct program had a
// chance of 6e-6 per comparison to be stuck on the wrong side when the seed was chosen.
const limit = 4.5

// expected returns the covariance [m²] of recorded samples n apart (n >= 0).
func expected(a Axis, rate, exposure float64, n int) float64 {
	blur := 2 * math.Pi * a.Corner * exposure
	if n == 0 {
		return a.Variance*blurVariance(blur) + a.Noise*a.Noise
	}
	return a.Variance * blurLag(blur) * math.Exp(-2*math.Pi*a.Corner*float64(n)/rate)
}

// regimes spans detectors to slow cameras.
var regimes = []Truth{
	{Samples: 4096, Rate: 50e3, Axes: []Axis{{Corner: 500, Variance: 1.5e-16}}},
	{Samples: 4096, Rate: 2000, Exposure: 0.4e-3, Axes: []Axis{{Corner: 100, Variance: 4e-16, Noise: 4e-9}}},
	{Samples: 4096, Rate: 500, Exposure: 2e-3, Axes: []Axis{{Corner: 200, Variance: 1e-16, Noise: 1e-9}}},
	{Samples: 4096, Rate: 100, Exposure: 10e-3, Axes: []Axis{{Corner: 100, Variance: 1e-16}}},
}

// Sample covariances at several lags, averaged over records, against the closed forms.
// The variance of the estimate about a known mean is (1/N²) sum R(d)² + R(d+n)R(d-n)
// over all pairs (Isserlis), summed here without approximation.
func TestRecordAutocovariance(t *testing.T) {
	const records = 40
	for r, truth := range regimes {
		a := truth.Axes[0]
		covariance := func(n int) float64 {
			return expected(a, truth.Rate, truth.Exposure, max(n, -n))
		}
		for _, lag := range []int{0, 1, 2, 7} {
			sum := 0.0
			for seed := range uint64(records) {
				x := Record(truth, seed)[0]
				for i := lag; i < len(x); i++ {
					sum += x[i] * x[i-lag]
				}
			}
			pairs := truth.Samples - lag
			got := sum / float64(records*pairs)
			spread := 0.0
			for d := -pairs + 1; d < pairs; d++ {
				term := covariance(d)*covariance(d) + covariance(d+lag)*covariance(d-lag)
				spread += term * float64(pairs-max(d, -d))
			}
			sd := math.Sqrt(spread/float64(records)) / float64(pairs)
			if want := covariance(lag); !(math.Abs(got-want) <= limit*sd) {
				t.Errorf("regime %d, lag %d: covariance %v, want %v within %v", r, lag, got, want, limit*sd)
			}
		}
	}
}

// The periodogram averaged over M records follows a gamma law about its exact mean
// dt sum (1-|j|/N) R(j) cos(2 pi jk/N), with a relative scatter of 1/sqrt(M); the published
// closed form S(f) differs from it by the leakage of order 1/N.
func TestRecordSpectrum(t *testing.T) {
	const records, samples = 400, 256
	for r, truth := range regimes {
		truth.Samples = samples
		a := truth.Axes[0]
		for _, k := range []int{0, 1, 10, 64, 127} {
			mean, transform := 0.0, 0.0
			for j := -samples + 1; j < samples; j++ {
				mean += (1 - math.Abs(float64(j))/samples) * expected(a, truth.Rate, truth.Exposure, max(j, -j)) *
					math.Cos(2*math.Pi*float64(j*k)/samples) / truth.Rate
			}
			for seed := range uint64(records) {
				sum := complex(0, 0)
				for i, x := range Record(truth, seed)[0] {
					sum += complex(x, 0) * cmplx.Rect(1, -2*math.Pi*float64(i*k%samples)/samples)
				}
				transform += real(sum)*real(sum) + imag(sum)*imag(sum)
			}
			got := transform / (records * samples * truth.Rate)
			relative := math.Sqrt(1.0 / records)
			if k == 0 {
				relative *= math.Sqrt2 // one degree of freedom instead of two
			}
			if !(math.Abs(got/mean-1) <= limit*relative) {
				t.Errorf("regime %d, bin %d: spectrum %v, want %v within %.3f of it", r, k, got, mean, limit*relative)
			}
		}
	}
}

// Values of the two-sided spectrum of a sampled, blurred, noisy process of unit variance
// and of its mean-square displacement, fc = 300 Hz, dt = 0.5 ms, W = 0.5 ms, q = 0.04,
// recomputed from Berg-Sorensen & Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594 (aliasing) and
// Wong & Halvorsen 2006 (blur). They hold the helper `expected`, and so all tests above, to an absolute scale.
func TestExpectedPublished(t *testing.T) {
	a := Axis{Corner: 300, Variance: 1, Noise: 0.2}
	for _, row := range []struct{ frequency, want float64 }{
		{0, 0.0010810329539459684}, {250, 0.0006155138531511063}, {1000, 9.21387021054606e-05},
	} {
		got := 0.0005 * expected(a, 2000, 0.0005, 0)
		for n := 1; n < 200; n++ {
			got += 2 * 0.0005 * expected(a, 2000, 0.0005, n) * math.Cos(2*math.Pi*row.frequency*0.0005*float64(n))
		}
		// 1e-9: the tolerance of the source; the sum is cut at c^200 = 1e-82.
		if !near(got, row.want, 1e-9) {
			t.Errorf("spectrum(%v Hz) = %v, want %v", row.frequency, got, row.want)
		}
	}
	for _, row := range []struct {
		lag  int
		want float64
	}{{1, 0.736931294232378}, {2, 1.24884978048618}, {5, 1.5563394810539781}, {20, 1.5756759802526767}} {
		got := 2 * (expected(a, 2000, 0.0005, 0) - expected(a, 2000, 0.0005, row.lag))
		if !near(got, row.want, 1e-9) {
			t.Errorf("displacement(%d) = %v, want %v", row.lag, got, row.want)
		}
	}
}

// A free bead: increments over n samples have variance 2D(n dt - W/3) + 2q. Increments
// that do not share a sample are correlated through blur alone, by less than 1/6: the scatter
// of the mean square is bounded by that of independent ones times 1.1.
func TestRecordFreeBead(t *testing.T) {
	axis := Physical{Radius: 0.5e-6, Viscosity: 0.89e-3, Temperature: 298.15}.Axis()
	axis.Noise = 5e-9
	truth := Truth{Samples: 200001, Rate: 200, Exposure: 4e-3, Axes: []Axis{axis}}
	x := Record(truth, 5)[0]
	for _, lag := range []int{1, 4, 20} {
		sum, count := 0.0, 0
		for i := 0; i+lag < len(x); i += lag {
			sum += (x[i+lag] - x[i]) * (x[i+lag] - x[i])
			count++
		}
		got := sum / float64(count)
		want := 2*axis.Diffusion*(float64(lag)/truth.Rate-truth.Exposure/3) + 2*axis.Noise*axis.Noise
		if sd := 1.1 * math.Sqrt(2/float64(count)); !(math.Abs(got/want-1) <= limit*sd) {
			t.Errorf("lag %d: mean-square displacement %v, want %v within %.4f of it", lag, got, want, limit*sd)
		}
	}
}

// Worked case in absolute units: bead of R = 0.5 um in water at 298.15 K, 5 um above a
// wall, fc = 500 Hz: drag 8.88696464e-9 N s/m, stiffness 27.9192228 pN/um, rms 12.142480 nm
// (IAPWS SR6-08 viscosity, exact parallel wall factor of Goldman, Cox & Brenner 1967; recomputed).
func TestPhysicalWorkedCase(t *testing.T) {
	p := Physical{Stiffness: 2.79192228e-5, Radius: 0.5e-6, Viscosity: 889.996774e-6, WallFactor: 1.05948276, Temperature: 298.15}
	// 1e-8: the inputs carry nine digits.
	if got := p.Drag(); !near(got, 8.88696464e-9, 1e-8) {
		t.Errorf("Drag() = %v, want 8.88696464e-9", got)
	}
	axis := p.Axis()
	if !near(axis.Corner, 500, 1e-8) {
		t.Errorf("corner frequency %v Hz, want 500", axis.Corner)
	}
	if got := math.Sqrt(axis.Variance); !near(got, 12.142480e-9, 1e-7) { // printed with 8 digits
		t.Errorf("thermal rms %v m, want 12.142480e-9", got)
	}
	p.WallFactor = 0                                    // far from walls
	if got := p.Drag(); !near(got, 8.388022e-9, 1e-7) { // printed with 7 digits
		t.Errorf("Drag() in bulk = %v, want 8.388022e-9", got)
	}
	p.WallFactor, p.Stiffness = 1.05948276, 0
	if got := p.Axis().Diffusion; !near(got, 4.63195834e-13, 1e-8) {
		t.Errorf("diffusion coefficient %v m²/s, want 4.63195834e-13", got)
	}
}

// Mean, drift and lines are added to the motion and change nothing else.
func TestRecordDecoration(t *testing.T) {
	plain := Truth{Samples: 1001, Rate: 1000, Axes: []Axis{{Corner: 50, Variance: 1e-16}}}
	full := plain
	full.Axes = []Axis{{Corner: 50, Variance: 1e-16, Mean: 3e-6, Drift: 2e-7,
		Lines: []Line{{Frequency: 50, Amplitude: 5e-9, Phase: 0.3}}}}
	x, y := Record(plain, 9)[0], Record(full, 9)[0]
	for i := range x {
		time := float64(i) / 1000
		want := x[i] + 3e-6 + 2e-7*(time-0.5) + 5e-9*math.Sin(2*math.Pi*50*time+0.3)
		// 1e-20 m: a few units of rounding of 3e-6 m.
		if !(math.Abs(y[i]-want) <= 1e-20) {
			t.Fatalf("sample %d: %v, want %v", i, y[i], want)
		}
	}
}

// Scaling every length by 2 (a power, so that rounding commutes) scales the recording.
func TestRecordScales(t *testing.T) {
	truth := Truth{Samples: 100, Rate: 1000, Exposure: 5e-4, Axes: []Axis{{Corner: 50, Variance: 1e-16, Noise: 2e-9, Mean: 1e-7}}}
	double := truth
	double.Axes = []Axis{{Corner: 50, Variance: 4e-16, Noise: 4e-9, Mean: 2e-7}}
	x, y := Record(truth, 3)[0], Record(double, 3)[0]
	for i := range x {
		if !near(y[i], 2*x[i], 1e-14) { // rounding of the coefficients
			t.Fatalf("sample %d: %v, want twice %v", i, y[i], x[i])
		}
	}
}

// One seed, one recording; a longer one begins with the shorter; axes and seeds differ.
func TestRecordStreams(t *testing.T) {
	axis := Axis{Corner: 50, Variance: 1}
	truth := Truth{Samples: 50000, Rate: 100, Axes: []Axis{axis, axis}}
	first, again, other := Record(truth, 1), Record(truth, 1), Record(truth, 2)
	truth.Samples = 10
	short := Record(truth, 1)
	for i := range first[0] {
		if first[0][i] != again[0][i] {
			t.Fatalf("sample %d differs between two runs of one seed", i)
		}
		if i < 10 && short[1][i] != first[1][i] {
			t.Fatalf("sample %d depends on the length of the record", i)
		}
	}
	// Correlation of two independent series of correlation c: sd² = (1+c²)/(1-c²)/N.
	c := math.Exp(-math.Pi)
	sd := math.Sqrt((1 + c*c) / (1 - c*c) / float64(len(first[0])))
	for name, y := range map[string][]float64{"other axis": first[1], "other seed": other[0], "other seed and axis": other[1]} {
		sum := 0.0
		for i := range y {
			sum += first[0][i] * y[i]
		}
		if r := sum / float64(len(y)); !(math.Abs(r) <= limit*sd) {
			t.Errorf("%s: correlation %v, want 0 within %v", name, r, limit*sd)
		}
	}
}

// The first samples of seed 1, to seven digits: they may not change from one release to
// the next, nor from one processor to another beyond the last digit.
func TestRecordGolden(t *testing.T) {
	truth := Truth{Samples: 4, Rate: 1000, Exposure: 1e-3, Axes: []Axis{{Corner: 100, Variance: 1, Noise: 0.1}}}
	want := []float64{0.1046121, -0.4746715, 0.1530049, 0.8200588}
	for i, x := range Record(truth, 1)[0] {
		if !(math.Abs(x-want[i]) <= 1e-6*math.Max(1, math.Abs(want[i]))) {
			t.Errorf("sample %d = %.7g, want %.7g", i, x, want[i])
		}
	}
}

func TestValidate(t *testing.T) {
	good := func() Truth {
		return Truth{Samples: 10, Rate: 30, Exposure: 0.033333334, Axes: []Axis{{Corner: 5, Variance: 1e-16}}}
	}
	if err := good().Validate(); err != nil {
		t.Fatalf("Validate() = %v, want nil", err)
	}
	for name, spoil := range map[string]func(*Truth){
		"samples":       func(t *Truth) { t.Samples = 0 },
		"rate":          func(t *Truth) { t.Rate = math.NaN() },
		"exposure":      func(t *Truth) { t.Exposure = 0.034 },
		"negative":      func(t *Truth) { t.Exposure = -1 },
		"no axes":       func(t *Truth) { t.Axes = nil },
		"corner":        func(t *Truth) { t.Axes[0].Corner = 0 },
		"variance":      func(t *Truth) { t.Axes[0].Variance = math.Inf(1) },
		"free and not":  func(t *Truth) { t.Axes[0].Diffusion = 1e-13 },
		"free negative": func(t *Truth) { t.Axes[0] = Axis{Diffusion: -1} },
		"noise":         func(t *Truth) { t.Axes[0].Noise = -1e-9 },
		"mean":          func(t *Truth) { t.Axes[0].Mean = math.NaN() },
		"drift":         func(t *Truth) { t.Axes[0].Drift = math.Inf(-1) },
		"line":          func(t *Truth) { t.Axes[0].Lines = []Line{{Frequency: -50}} },
	} {
		truth := good()
		spoil(&truth)
		if truth.Validate() == nil {
			t.Errorf("%s: Validate() = nil, want an error for %+v", name, truth)
		}
	}
}

func TestRecordPanicsOnInvalid(t *testing.T) {
	defer func() {
		if recover() == nil {
			t.Error("Record of an empty truth returned")
		}
	}()
	Record(Truth{}, 1)
}

// Degenerate sizes: one sample, and a trap so fast that samples are independent.
func TestRecordDegenerate(t *testing.T) {
	truth := Truth{Samples: 1, Rate: 1, Exposure: 1, Axes: []Axis{{Corner: 1e9, Variance: 1e-16, Drift: 1}}}
	if x := Record(truth, 1)[0]; len(x) != 1 || !finite(x[0]) || math.Abs(x[0]) > 1e-8 {
		t.Errorf("one sample of a fast trap = %v", x)
	}
}
