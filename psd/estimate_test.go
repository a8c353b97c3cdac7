package psd_test

import (
	"errors"
	"math"
	"strings"
	"testing"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
	"beadwell/psd"
)

// near compares two fits: fc, V/unit and q/unit.
func near(t *testing.T, what string, got, want *psd.Fit, unit, bound float64) {
	t.Helper()
	for _, c := range []struct {
		name      string
		got, want float64
	}{{"corner frequency", got.Corner, want.Corner}, {"variance", got.Variance / unit, want.Variance}} {
		if gap := math.Abs(c.got/c.want - 1); !(gap <= bound) {
			t.Errorf("%s: %s = %.14g, want %.14g, relative gap %.1e", what, c.name, c.got, c.want, gap)
		}
	}
	if gap := math.Abs(got.NoiseQ/unit-want.NoiseQ) / want.Variance; !(gap <= bound) {
		t.Errorf("%s: noise = %.14g, want %.14g, gap %.1e of the variance", what, got.NoiseQ/unit, want.NoiseQ, gap)
	}
}

// Exact properties, by either likelihood. Scaling by a power of two changes no digit, by other
// factors rounding alone, which the search, of the same steps, carries on to some 1e-12; in the time
// domain the gradient is a difference over 1e-5 of sums of 1e3, which rounding moves by 1e-8, and the
// estimate by that times its variance of about 0.05. A mean of
// a million rms leaves 1e6 x 1e-16 of each position, averaged over the record; a drift likewise.
// Backwards the periodogram is the same and the ends are swapped.
func TestEstimateProperties(t *testing.T) {
	for _, n := range []int{1000, 3000} { // even 5-smooth lengths: no sample is trimmed
		g := regime{corner: 0.03, exposure: 0.5, noise: 0.1, turns: 0.03 * float64(n)}
		x := simulate.Record(g.truth(), 4)[0]
		opt := psd.Options{Exposure: 5e-4}
		base := estimate(t, x, 1000, opt)
		if want := map[int]string{1000: psd.Exact, 3000: psd.Whittle}[n]; base.Method != want {
			t.Errorf("n = %d: method %q, want %q", n, base.Method, want)
		}
		rounding := map[int]float64{1000: 1e-8, 3000: 1e-10}[n]
		change := func(f func(i int, v float64) float64) []float64 {
			y := make([]float64, n)
			for i, v := range x {
				y[i] = f(i, v)
			}
			return y
		}
		near(t, "times 1024", estimate(t, change(func(_ int, v float64) float64 { return 1024 * v }), 1000, opt), base, 1024*1024, 0)
		near(t, "times 1e9", estimate(t, change(func(_ int, v float64) float64 { return 1e9 * v }), 1000, opt), base, 1e18, rounding)
		near(t, "upside down", estimate(t, change(func(_ int, v float64) float64 { return -v }), 1000, opt), base, 1, 0)
		near(t, "far from zero", estimate(t, change(func(_ int, v float64) float64 { return v + 1e6*rms }), 1000, opt), base, 1, 1e-7)
		near(t, "drifting", estimate(t, change(func(i int, v float64) float64 { return v + rms*float64(i)/float64(n) }), 1000, opt), base, 1, max(1e-9, rounding))
		near(t, "backwards", estimate(t, change(func(i int, _ float64) float64 { return x[n-1-i] }), 1000, opt), base, 1, 1e-6)

		faster := estimate(t, x, 4000, psd.Options{Exposure: 1.25e-4}) // the clock runs four times as fast
		if gap := math.Abs(faster.Corner/4/base.Corner - 1); gap > 1e-10 {
			t.Errorf("n = %d: four times the rate: corner frequency %.12g, want %.12g", n, faster.Corner, 4*base.Corner)
		}
	}
}

func TestEstimateKeepsInput(t *testing.T) {
	g := regime{corner: 0.03, turns: 60}
	x := simulate.Record(g.truth(), 4)[0]
	y := append([]float64(nil), x...)
	estimate(t, x, 1000, psd.Options{})
	for i := range x {
		if x[i] != y[i] {
			t.Fatalf("sample %d was changed from %g to %g", i, y[i], x[i])
		}
	}
}

// Where both forms apply they agree to a small part of a standard error: they differ by
// terms of 1/(2 pi fc T) of one, here 0.3 %, in the removal of the line.
func TestSpectralAndExactAgree(t *testing.T) {
	for _, g := range []regime{
		{corner: 0.02, turns: 60, noise: 0.1},
		{corner: 0.15, turns: 60 * 5, exposure: 1, noise: 0.1, known: true},
	} {
		f := estimate(t, simulate.Record(g.truth(), 8)[0], 1000, g.options())
		if f.Method != psd.Whittle {
			t.Fatalf("method %q", f.Method)
		}
		r, err := psd.Prepare(simulate.Record(g.truth(), 8)[0], 1000)
		if err != nil {
			t.Fatal(err)
		}
		pr := f.Problem
		pr.Likelihood = relaxation.NewExact(r.X, relaxation.RemovedLine, true, g.exposure, f.Scale())
		m, err := pr.Maximise(f.Maximum.At)
		if err != nil {
			t.Fatal(err)
		}
		for k := range m.At {
			if sd := math.Sqrt(f.Total[k][k]); math.Abs(m.At[k]-f.Maximum.At[k]) > 0.05*sd {
				t.Errorf("%+v: parameter %d = %.6f by the spectrum, %.6f in the time domain, %.3f standard errors", g, k, f.Maximum.At[k], m.At[k], (f.Maximum.At[k]-m.At[k])/sd)
			}
		}
	}
}

// Absolute scale: the one-sided spectrum integrates to the recorded variance (the trapezoidal rule
// over a period is exact), its points add up to the mean square (Parseval), and the diffusion
// plateau is that of the process within the standard error.
func TestEstimateScale(t *testing.T) {
	g := regime{corner: 0.05, exposure: 0.5, noise: 0.2, turns: 0.05 * 5000}
	x := simulate.Record(g.truth(), 21)[0]
	r, err := psd.Prepare(x, 1000)
	if err != nil {
		t.Fatal(err)
	}
	opt := psd.Options{Exposure: 5e-4, KeepLines: true}
	f, err := psd.Estimate(r, opt)
	if err != nil {
		t.Fatal(err)
	}
	const steps = 2000
	sum := f.Spectrum(0)/2 + f.Spectrum(500)/2
	for k := 1; k < steps; k++ {
		sum += f.Spectrum(500 * float64(k) / steps)
	}
	if got, want := sum*500/steps, f.Process().RecordedVariance(); math.Abs(got/want-1) > 1e-10 {
		t.Errorf("the fitted spectrum integrates to %.12g m2, want %.12g", got, want)
	}
	points, used := f.SpectrumPoints(r, 80)
	power, bins := 0.0, 0
	for i, p := range points {
		power += p.Power * float64(p.Bins) * r.Rate / float64(r.Length)
		bins += p.Bins
		if !used[i] {
			t.Errorf("point at %g Hz is not used, with nothing left out", p.Frequency)
		}
	}
	half := r.Power[r.Length/2] / float64(r.Length) / float64(r.Length) // counted twice in a one-sided spectrum
	if want := r.MeanSquare() + half; bins != r.Length/2 || math.Abs(power/want-1) > 1e-10 {
		t.Errorf("%d bins of the spectrum add up to %.12g m2, want %d of %.12g", bins, power, r.Length/2, want)
	}
	sd, _ := f.SD(alongVariance)
	if gap := math.Abs(math.Log(f.Variance / (rms * rms))); gap > 4*sd {
		t.Errorf("variance = %.4g m2, want %.4g: %.1f standard errors", f.Variance, rms*rms, gap/sd)
	}
}

// A stated noise with an uncertainty: between exact and unknown in what it gives, and the
// estimate of the noise stays near what was stated.
func TestStatedNoise(t *testing.T) {
	g := regime{corner: 0.1, exposure: 1, noise: 0.3, turns: 300}
	x := simulate.Record(g.truth(), 3)[0]
	q := 0.09 * rms * rms
	sd := func(n psd.Noise) (total float64) {
		f := estimate(t, x, 1000, psd.Options{Exposure: 1e-3, Noise: n})
		if n.Known && math.Abs(f.NoiseQ-q) > 5*n.VarianceU+1e-12*q {
			t.Errorf("%+v: noise = %.4g m2", n, f.NoiseQ)
		}
		data, total := f.SD(alongCorner)
		if data > total*(1+1e-12) {
			t.Errorf("%+v: uncertainty of the record %.4g exceeds the total %.4g", n, data, total)
		}
		return total
	}
	exact := sd(psd.Noise{Known: true, Variance: q})
	tight := sd(psd.Noise{Known: true, Variance: q, VarianceU: 1e-6 * q})
	loose := sd(psd.Noise{Known: true, Variance: q, VarianceU: 0.2 * q})
	vague := sd(psd.Noise{Known: true, Variance: q, VarianceU: 1e4 * q})
	unknown := sd(psd.Noise{})
	if !(exact < loose && loose < vague) {
		t.Errorf("uncertainty of ln fc = %.4g, %.4g, %.4g for a noise known exactly, to 20 %%, vaguely: want it to rise", exact, loose, vague)
	}
	// the limits are the other two cases; 1e-4 allows for the search's end
	if math.Abs(tight/exact-1) > 1e-4 || math.Abs(vague/unknown-1) > 1e-3 {
		t.Errorf("uncertainty of ln fc = %.6g and %.6g in the limits, want %.6g and %.6g", tight, vague, exact, unknown)
	}
}

// A stated noise adds its information: with C the covariance of the fit that knows nothing of the
// noise and u its uncertainty, the covariance is C - C e e' C/(u^2 + C_22), and the record's part of it is
// less by what u carries in. The fits end a fraction of a standard error apart, where the information
// differs by a few percent.
func TestStatedNoiseAddsInformation(t *testing.T) {
	g := regime{corner: 0.03, noise: 0.3, turns: 300}
	x := simulate.Record(g.truth(), 3)[0]
	q := 0.09 * rms * rms
	free := estimate(t, x, 1000, psd.Options{})
	c, scale := free.Total, free.Scale()
	for _, share := range []float64{0.02, 0.1} {
		u := share * q
		f := estimate(t, x, 1000, psd.Options{Noise: psd.Noise{Known: true, Variance: q, VarianceU: u}})
		prior := u * u / scale / scale
		for k := range 3 {
			total := c[k][k] - c[k][2]*c[k][2]/(prior+c[2][2])
			carried := f.Total[k][2] * f.Total[k][2] / prior
			if math.Abs(f.Total[k][k]/total-1) > 0.05 || math.Abs(f.Data[k][k]/(f.Total[k][k]-carried)-1) > 1e-9 {
				t.Errorf("noise known to %g: variance of parameter %d = %.5g, of the record alone %.5g, want %.5g, %.5g", share, k, f.Total[k][k], f.Data[k][k], total, f.Total[k][k]-carried)
			}
		}
	}
}

// A band keeps what is in it; ranges that are left out are not looked at.
func TestBandAndExclusion(t *testing.T) {
	g := regime{corner: 0.02, turns: 200}
	x := simulate.Record(g.truth(), 31)[0] // 10000 samples, fc = 20 Hz, steps of 0.1 Hz
	opt := psd.Options{Band: psd.Range{Low: 2, High: 300}, Exclude: []psd.Range{{Low: 49.95, High: 51.05}}, KeepLines: true}
	f := estimate(t, x, 1000, opt)
	if want := 2981 - 11; f.Bins != want {
		t.Errorf("%d bins, want %d", f.Bins, want)
	}
	for i := range x { // power where nobody looks
		x[i] += rms*math.Sin(2*math.Pi*0.05*float64(i)+1)*5 + rms*math.Cos(2*math.Pi*0.4*float64(i))
	}
	near(t, "lines outside the band", estimate(t, x, 1000, opt), f, 1, 5e-3) // the line's removal moves leakage by less than a tenth of a standard error
	opt.Band = psd.Range{Low: 10, High: 10.5}
	r, err := psd.Prepare(x, 1000)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := psd.Estimate(r, opt); !errors.Is(err, psd.ErrTooShort) {
		t.Errorf("six frequencies: error %v, want %v", err, psd.ErrTooShort)
	}
}

// With a fifth of the samples missing the exact likelihood is used and the truth is within the
// standard errors, which are larger by at most the root of what is missing twice over.
func TestMissingSamples(t *testing.T) {
	g := regime{corner: 0.05, noise: 0.1, known: true, turns: 150}
	var z, whole, gappy moments
	for i := range 60 {
		x := simulate.Record(g.truth(), uint64(500+i))[0]
		a, _ := estimate(t, x, 1000, g.options()).SD(alongCorner)
		for j := range x {
			if j%10 == 3 || j%400 < 44 { // single frames, and runs
				x[j] = math.NaN()
			}
		}
		f := estimate(t, x, 1000, g.options())
		if f.Method != psd.Exact {
			t.Fatalf("method %q", f.Method)
		}
		b, _ := f.SD(alongCorner)
		whole.add(a)
		gappy.add(b)
		z.add(math.Log(f.Corner/50) / b)
	}
	// 3/sqrt(60) and 3/sqrt(120), with a bias of 0.1
	if math.Abs(z.mean()) > 0.49 || math.Abs(z.deviation()-1) > 0.3 {
		t.Errorf("(estimate-truth)/SE of ln fc has mean %.2f and spread %.2f, want 0 and 1", z.mean(), z.deviation())
	}
	if r := gappy.mean() / whole.mean(); r < 1 || r > 1.25 {
		t.Errorf("standard error with gaps is %.3f of that without, want 1 to 1.25", r)
	}
}

// The mean square is over the samples there are, and the spectrum of what is left has that
// power, whatever is missing (Parseval, but for what the line takes from the first blocks, 1/N, and
// for the highest frequency, which counts half).
func TestMeanSquareOfGaps(t *testing.T) {
	const n = 3000
	x := simulate.Record(simulate.Truth{Samples: n, Rate: 1000, Axes: []simulate.Axis{{Corner: 50, Variance: rms * rms}}}, 9)[0]
	for i := range x {
		if i%3 == 1 {
			x[i] = math.NaN()
		}
	}
	r, err := psd.Prepare(x, 1000)
	if err != nil {
		t.Fatal(err)
	}
	sum := 0.0
	for _, v := range r.X {
		if v == v {
			sum += v * v
		}
	}
	if r.Missing != n/3 || math.Abs(r.MeanSquare()/(sum/(n-n/3))-1) > 1e-12 {
		t.Errorf("mean square of %d samples = %.12g m2, want %.12g", r.Observed(), r.MeanSquare(), sum/(n-n/3))
	}
	f, err := psd.Estimate(r, psd.Options{Noise: psd.Noise{Known: true}})
	if err != nil {
		t.Fatal(err)
	}
	power, bins := 0.0, 0
	for i, p := range f.Blocks.Power {
		power += p * float64(f.Blocks.Bins[i])
		bins += f.Blocks.Bins[i]
	}
	if got := power / float64(bins) / r.MeanSquare(); math.Abs(got-1) > 0.01 { // the first block's weight is 1-3/pi^2
		t.Errorf("mean power = %.5f of the mean square, want 1", got)
	}
}

// Mean and line are taken out to the rounding of what is left, not of what was recorded: of
// positions a million rms from zero, and drifting by ten, each with a rounding of 1e-10 rms. Mean
// and slope are reported.
func TestPrepareRemovesLine(t *testing.T) {
	const n, rate = 3000, 500.0
	x := simulate.Record(simulate.Truth{Samples: n, Rate: rate, Axes: []simulate.Axis{{Fixed: true, Noise: rms}}}, 1)[0]
	var mean, slope moments
	for i := range x {
		u := float64(i)/(n-1) - 0.5
		mean.add(x[i])
		slope.add(x[i] * u * 12)
		x[i] += 1e6*rms + 10*rms*u
	}
	r, err := psd.Prepare(x, rate)
	if err != nil {
		t.Fatal(err)
	}
	var left, leaning moments
	for i, v := range r.X {
		left.add(v / rms)
		leaning.add(v / rms * (float64(i)/(n-1) - 0.5))
	}
	if math.Abs(left.mean()) > 1e-14 || math.Abs(leaning.mean()) > 1e-14 {
		t.Errorf("what is left has the mean %.2g rms and the first moment %.2g rms", left.mean(), leaning.mean())
	}
	if want := 1e6*rms + mean.mean(); math.Abs(r.Mean-want) > 1e-9*rms { // rounding of 1e6
		t.Errorf("mean = %.16g m, want %.16g", r.Mean, want)
	}
	// per second: the record is (n-1)/rate long; the noise has its own slope
	if want := (10*rms + slope.mean()) * rate / (n - 1); math.Abs(r.Slope/want-1) > 1e-3 {
		t.Errorf("drift = %.8g m/s, want %.8g", r.Slope, want)
	}
}

func TestPrepareRefuses(t *testing.T) {
	nan := make([]float64, 100)
	for i := range nan {
		nan[i] = math.NaN()
	}
	for what, x := range map[string][]float64{"empty": nil, "one sample": {1}, "two samples": {1, 2}, "NaN everywhere": nan, "15 samples": make([]float64, 15)} {
		if _, err := psd.Prepare(x, 1000); !errors.Is(err, psd.ErrTooShort) {
			t.Errorf("%s: error %v, want %v", what, err, psd.ErrTooShort)
		}
	}
	for _, inf := range []float64{math.Inf(1), math.Inf(-1)} {
		x := make([]float64, 100)
		x[42] = inf
		if _, err := psd.Prepare(x, 1000); err == nil || !strings.Contains(err.Error(), "42") {
			t.Errorf("infinite sample 42: error %v, want one that names it", err)
		}
	}
}

// A bead that does not move, or only drifts, has no corner frequency, whatever the rounding of its
// position leaves.
func TestConstantPositions(t *testing.T) {
	for what, f := range map[string]func(i int) float64{
		"zero":     func(int) float64 { return 0 },
		"0.1 um":   func(int) float64 { return 1e-7 },
		"0.3":      func(int) float64 { return 0.3 },
		"drifting": func(i int) float64 { return 1e-6 + 1e-9*float64(i) },
	} {
		for _, n := range []int{100, 3000} {
			x := make([]float64, n)
			for i := range x {
				x[i] = f(i)
			}
			r, err := psd.Prepare(x, 1000)
			if err != nil {
				t.Errorf("%s: %v", what, err)
				continue
			}
			if fit, err := psd.Estimate(r, psd.Options{}); err == nil {
				t.Errorf("%s, %d samples: corner frequency %g Hz, variance %g m2, want an error", what, n, fit.Corner, fit.Variance)
			}
		}
	}
}

// White noise has no corner: no maximum, or an interval that says so; never a panic.
func TestWhiteNoise(t *testing.T) {
	truth := simulate.Truth{Samples: 3000, Rate: 1000, Axes: []simulate.Axis{{Fixed: true, Noise: 1e-9}}}
	for seed := range uint64(20) {
		r, err := psd.Prepare(simulate.Record(truth, seed)[0], 1000)
		if err != nil {
			t.Fatal(err)
		}
		f, err := psd.Estimate(r, psd.Options{})
		if err != nil {
			if !errors.Is(err, relaxation.ErrNoMaximum) {
				t.Errorf("seed %d: error %v, want %v", seed, err, relaxation.ErrNoMaximum)
			}
			continue
		}
		if sd, _ := f.SD(alongCorner); sd < 0.3 {
			t.Errorf("seed %d: ln fc = %.2f +- %.2f from white noise", seed, math.Log(f.Corner), sd)
		}
	}
}

// A first sample that is far from the others costs them no digits: their second differences are those that were recorded, to the rounding
// of the line through all of them, some 1e5 rms x 1e-16, and not to that of 1e8 rms.
func TestPrepareFarFirst(t *testing.T) {
	x := simulate.Record(simulate.Truth{Samples: 3000, Rate: 500, Axes: []simulate.Axis{{Fixed: true, Noise: rms}}}, 1)[0]
	x[0] = 1e8 * rms
	r, err := psd.Prepare(x, 500)
	if err != nil {
		t.Fatal(err)
	}
	for i := 2; i < len(x)-1; i++ {
		got, want := r.X[i+1]-2*r.X[i]+r.X[i-1], x[i+1]-2*x[i]+x[i-1]
		if math.Abs(got-want) > 1e-10*rms {
			t.Fatalf("sample %d: second difference %g, want %g", i, got, want)
		}
	}
}
