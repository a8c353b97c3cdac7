package health

import (
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"

	"beadwell/calib/transform"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
)

// TestLimits drives the checks that judge the plan of a measurement by numbers alone,
// with the process given.
func TestLimits(t *testing.T) {
	for _, row := range []struct {
		code               string
		corner, rate, w    float64 // Hz, Hz, share of the interval
		samples            int
		value, toleranceOf float64
		level              Level
	}{
		// T fc = 300 and 12 and 6; the threshold of 30 is lowered by what the corner is uncertain
		{"short-record", 100, 1000, 0, 3000, 300, 1e-12, OK},
		{"short-record", 6, 1000, 0, 3000, 18, 1e-12, OK}, // 18 exp(3 x 0.2) is not below 30 for sure
		{"short-record", 4, 1000, 0, 3000, 12, 1e-12, Doubtful},
		{"short-record", 3, 1000, 0, 3000, 9, 1e-12, Doubtful},
		{"short-record", 2, 1000, 0, 3000, 6, 1e-12, Bad},
		// S(a) = 2/a - 2(1-exp(-a))/a^2: S(2 pi) = 0.2678, S(4 pi) = 0.1465, S(10 pi) = 0.0616
		{"long-exposure", 1000, 1000, 1, 3000, 0.2678, 1e-4, OK},
		{"long-exposure", 2000, 1000, 1, 3000, 0.1465, 1e-4, Doubtful},
		{"long-exposure", 5000, 1000, 1, 3000, 0.0616, 1e-4, Bad},
		// sd = sqrt((1-c^2)/N)/(c |ln c|), c = exp(-2 pi fc/fs), without blur
		{"slow-sampling", 400, 1000, 0, 3000, 0.08939, 1e-4, OK},
		{"slow-sampling", 900, 1000, 0, 900, 1.6840, 1e-3, OK}, // too few to tell
		{"slow-sampling", 900, 1000, 0, 2000, 1.1296, 1e-3, Doubtful},
		{"slow-sampling", 1200, 1000, 0, 2000, 5.5799, 1e-3, Bad},
	} {
		truth := simulate.Truth{Samples: row.samples, Rate: row.rate, Exposure: row.w / row.rate, Axes: []simulate.Axis{{Corner: min(row.corner, 300), Variance: rms * rms}}}
		a := axis("x", simulate.Record(truth, 1)[0])
		a.Process = relaxation.Process{Corner: row.corner, Variance: rms * rms, Interval: 1 / row.rate, Exposure: row.w / row.rate}
		c := find(t, Run(Input{Axes: []Axis{a}, Rate: row.rate, Exposure: row.w / row.rate}), row.code, "x")
		if math.Abs(c.Value-row.value) > row.toleranceOf*math.Max(1, row.value) || c.Level != row.level {
			t.Errorf("fc %v Hz: %s = %.5g %v, want %.5g %v", row.corner, row.code, c.Value, c.Level, row.value, row.level)
		}
	}
}

// TestCornerSDGiven: a stated uncertainty of the corner replaces the bound.
func TestCornerSDGiven(t *testing.T) {
	truth := simulate.Truth{Samples: 3000, Rate: 1000, Axes: []simulate.Axis{{Corner: 6, Variance: rms * rms}}}
	a := axis("x", simulate.Record(truth, 1)[0])
	a.Process = relaxation.Process{Corner: 6, Variance: rms * rms, Interval: 1e-3}
	a.CornerSD = 0.1 // 18 exp(0.3) = 24 is below 30
	if c := find(t, Run(Input{Axes: []Axis{a}, Rate: 1000}), "short-record", "x"); c.Level != Doubtful {
		t.Errorf("T fc = 18 with 10 %%: %v, want doubtful", c.Level)
	}
}

// TestClock drives the checks of the recording as a whole around their thresholds.
func TestClock(t *testing.T) {
	x := white(1000, rms, 1)
	for _, row := range []struct {
		code string
		in   Input
		want Level
	}{
		{"dropped-samples", Input{}, OK},
		{"dropped-samples", Input{Missing: 1}, OK}, // one alone is never worth a word
		{"dropped-samples", Input{Missing: 20}, Doubtful},
		{"dropped-samples", Input{Missing: 201}, Bad},
		{"uneven-clock", Input{JitterRMS: math.NaN()}, OK},
		{"uneven-clock", Input{JitterRMS: 0.29e-3}, Doubtful}, // stamps rounded to the interval
		{"uneven-clock", Input{JitterRMS: 0.05e-3}, OK},
		{"uneven-clock", Input{JitterRMS: 0.5e-3}, Bad},
		{"repeated-stamps", Input{}, OK},
		{"repeated-stamps", Input{Duplicates: 20}, Doubtful},
		{"repeated-stamps", Input{Duplicates: 100}, Bad},
	} {
		row.in.Rate = 1000
		row.in.Axes = []Axis{axis("x", x)}
		if c := find(t, Run(row.in), row.code, ""); c.Level != row.want {
			t.Errorf("%s of %+v: %v, want %v (%s)", row.code, row.in.JitterRMS, c.Level, row.want, c.Text)
		}
	}
}

// TestMissingSeen counts missing samples even when the caller has not.
func TestMissingSeen(t *testing.T) {
	x := white(1000, rms, 1)
	for i := range 50 {
		x[i*20] = math.NaN()
	}
	c := find(t, Run(Input{Axes: []Axis{axis("x", x)}, Rate: 1000}), "dropped-samples", "")
	if c.Value != 0.05 || c.Level != Doubtful {
		t.Errorf("5 %% missing: %v %v", c.Value, c.Level)
	}
}

// TestGoodness: the p-value decides, and an unknown one does not.
func TestGoodness(t *testing.T) {
	for p, want := range map[float64]Level{0.5: OK, 2e-4: OK, 1e-6: Doubtful, math.NaN(): OK} {
		a := axis("x", white(1000, rms, 1))
		a.GoodnessP = p
		if c := find(t, Run(Input{Axes: []Axis{a}, Rate: 1000}), "odd-spectrum", "x"); c.Level != want || c.Judged == math.IsNaN(p) {
			t.Errorf("p = %v: %v judged %v, want %v", p, c.Level, c.Judged, want)
		}
	}
}

// TestWhite: white samples are bad with and without a fit, unless there are too few to
// tell; slow samples without a fit are not judged.
func TestWhite(t *testing.T) {
	for _, known := range []bool{false, true} {
		for n, want := range map[int]Level{5000: Bad, 500: OK} {
			a := axis("x", white(n, rms, 1))
			a.Process.Corner, a.Process.Variance, a.Process.Noise = 10, 0.01*rms*rms, 0.99*rms*rms
			a.Known = known
			if c := find(t, Run(Input{Axes: []Axis{a}, Rate: 1000}), "slow-sampling", "x"); c.Level != want {
				t.Errorf("%d white samples, fit %v: %v, want %v", n, known, c.Level, want)
			}
		}
	}
	slow := simulate.Record(regime{ratio: 0.05, periods: 200}.truth(1), 1)
	b := Axis{Name: "x", X: slow[0]}
	if c := find(t, Run(Input{Axes: []Axis{b}, Rate: 2000}), "slow-sampling", "x"); c.Judged {
		t.Errorf("slow samples without a fit: judged %v", c.Level)
	}
}

// TestTone checks frequency and amplitude of a line in white noise on the absolute
// scale. The frequency is that of a bin; the amplitude has the standard deviation
// sqrt(2/N) rms = 0.014 rms.
func TestTone(t *testing.T) {
	x := white(10000, rms, 1)
	for i := range x {
		x[i] += 0.3 * rms * math.Sin(2*math.Pi*50*float64(i)/1000)
	}
	c := find(t, Run(Input{Axes: []Axis{axis("x", x)}, Rate: 1000}), "tone", "x")
	if math.Abs(c.Value-0.3) > 0.05 || c.Level != Doubtful || !strings.Contains(c.Text, "50 Hz") {
		t.Errorf("line of 0.3 rms at 50 Hz: %v %v %q", c.Value, c.Level, c.Text)
	}
	a := axis("x", white(10000, rms, 2))
	a.Lines = []Line{{Frequency: 60, Amplitude: rms}, {Frequency: 120, Amplitude: 0.2 * rms}}
	if c := find(t, Run(Input{Axes: []Axis{a}, Rate: 1000}), "tone", "x"); math.Abs(c.Value-1) > 0.02 || c.Level != Bad || !strings.Contains(c.Text, "60 Hz") {
		t.Errorf("a line of one rms that the fit took out: %v %v %q", c.Value, c.Level, c.Text)
	}
	a.Lines = []Line{{Frequency: 0.5, Amplitude: rms}} // 5 periods: wander
	if c := find(t, Run(Input{Axes: []Axis{a}, Rate: 1000}), "tone", "x"); c.Level != OK {
		t.Errorf("five periods in the record: %v, want ok", c.Level)
	}
}

// TestToneInSegments: a record of more than one segment shows the same line.
func TestToneInSegments(t *testing.T) {
	x := white(3*toneSegment+1000, rms, 1)
	for i := range x {
		x[i] += 0.1 * rms * math.Sin(2*math.Pi*50*float64(i)/1000)
	}
	c := find(t, Run(Input{Axes: []Axis{axis("x", x)}, Rate: 1000}), "tone", "x")
	// off the centre of a bin the amplitude is seen as low as 2/pi
	if c.Level != Doubtful || c.Value < 0.1*2/math.Pi-0.01 || c.Value > 0.11 {
		t.Errorf("line of 0.1 rms in four segments: %v %v", c.Value, c.Level)
	}
}

// TestGrid: the spacing of rounded values is found, and unrounded ones have none.
func TestGrid(t *testing.T) {
	x := white(5000, rms, 1)
	if g := grid(sampled(x, 4096), rms); g != 0 {
		t.Errorf("spacing %v of values that have none", g)
	}
	for _, step := range []float64{1e-4, 0.01, 0.3, 2} {
		y := make([]float64, len(x))
		for i := range y {
			y[i] = 1e-6 + math.Round(x[i]/(step*rms))*step*rms
		}
		if g := grid(sampled(y, 4096), rms); math.Abs(g-step*rms) > 1e-6*step*rms {
			t.Errorf("spacing %v, want %v", g, step*rms)
		}
	}
}

// TestRoundedClean: values on a grid, as an analogue-to-digital converter makes them,
// are no rail, not frozen, and fine as long as the steps are.
func TestRoundedClean(t *testing.T) {
	for _, r := range []regime{{0.001, 30, 0, 0}, {0.01, 100, 0, 0.1}, {0.2, 1000, 0.5, 0.2}} {
		for _, step := range []float64{0.002, 0.05, 0.4} {
			for seed := range uint64(5) {
				truth := r.truth(1)
				truth.Faults.Rounding = step * rms
				in := fitted(simulate.Record(truth, seed), truth.Rate, truth.Exposure)
				for _, c := range Run(in) {
					if c.Level != OK {
						t.Errorf("%+v rounded to %v rms: %s: %s", r, step, c.Code, c.Text)
					}
				}
			}
		}
	}
}

// TestFixedDigitsClean: numbers of four significant digits, as many programs write them, are ten times as coarse beyond a power of
// ten; where they are coarse, neighbours are equal by chance.
func TestFixedDigitsClean(t *testing.T) {
	for _, mean := range []float64{0, 100e-9, -1e-6} {
		for seed := range uint64(5) {
			truth := regime{0.001, 100, 0, 0}.truth(1)
			truth.Axes[0].Mean = mean
			x := simulate.Record(truth, seed)
			for i, v := range x[0] {
				x[0][i], _ = strconv.ParseFloat(strconv.FormatFloat(v*1e9, 'g', 4, 64), 64)
				x[0][i] *= 1e-9
			}
			if c := find(t, Run(fitted(x, truth.Rate, truth.Exposure)), "frozen-samples", "x"); c.Level != OK {
				t.Errorf("four digits about %v m: %s", mean, c.Text)
			}
		}
	}
}

// TestRailOnGrid: clipping of rounded values, and its share: 2 Q(2.5) = 1.24 %.
func TestRailOnGrid(t *testing.T) {
	for _, step := range []float64{0, 0.01, 0.1} {
		truth := detector.truth(1)
		truth.Faults.Rail = 2.5 * rms
		truth.Faults.Rounding = step * rms
		c := find(t, Run(fitted(simulate.Record(truth, 5), truth.Rate, 0)), "rail", "x")
		// the share has a standard deviation of about a tenth in 3000 independent positions; rounding adds half a step
		if c.Level != Bad || math.Abs(c.Value-0.0124) > 0.005+0.02*step {
			t.Errorf("clipped at 2.5 rms, rounded to %v: %v %v", step, c.Value, c.Level)
		}
	}
}

// TestOneSidedRail: one rail is found by itself, and the text names its value.
func TestOneSidedRail(t *testing.T) {
	x := white(20000, rms, 1)
	for i := range x {
		x[i] = math.Min(x[i], 2*rms)
	}
	c := find(t, Run(Input{Axes: []Axis{axis("x", x)}, Rate: 1000}), "rail", "x")
	// Q(2) = 2.28 %, standard deviation 0.1 %
	if c.Level != Bad || math.Abs(c.Value-0.0228) > 0.004 || !strings.Contains(c.Text, "highest value 40 nm") {
		t.Errorf("clipped above 2 rms: %v %v %q", c.Value, c.Level, c.Text)
	}
}

// TestFewAtRail: where values are on no grid, three separate visits to the same extreme are
// enough, and so is one long stay.
func TestFewAtRail(t *testing.T) {
	x := white(1000, rms, 1)
	for i := range x {
		x[i] = math.Max(math.Min(x[i], 2.5*rms), -2.5*rms)
	}
	if c := find(t, Run(Input{Axes: []Axis{axis("x", x)}, Rate: 1000}), "rail", "x"); c.Level != Bad {
		t.Errorf("a thousand samples clipped at 2.5 rms: %v %v", c.Level, c.Value)
	}
	y := white(1000, rms, 2)
	for i := 400; i < 425; i++ {
		y[i] = 5 * rms
	}
	if c := find(t, Run(Input{Axes: []Axis{axis("x", y)}, Rate: 1000}), "rail", "x"); c.Level != Bad || c.Value != 0.025 {
		t.Errorf("25 samples at a rail in one stay: %v %v, want bad 0.025", c.Level, c.Value)
	}
	if c := find(t, Run(Input{Axes: []Axis{axis("x", white(1000, rms, 2))}, Rate: 1000}), "rail", "x"); c.Level != OK || c.Value != 0 {
		t.Errorf("clean: %v %v", c.Level, c.Value)
	}
}

// TestToneWithGaps: the amplitude does not depend on how many samples are there.
func TestToneWithGaps(t *testing.T) {
	x := white(20000, rms, 1)
	r := rand.New(rand.NewPCG(1, 1))
	for i := range x {
		x[i] += 0.4 * rms * math.Sin(2*math.Pi*50*float64(i)/1000)
		if r.Float64() < 0.3 {
			x[i] = math.NaN()
		}
	}
	c := find(t, Run(Input{Axes: []Axis{axis("x", x)}, Rate: 1000}), "tone", "x")
	if math.Abs(c.Value-0.4) > 0.06 { // standard deviation sqrt(2/14000) = 0.012
		t.Errorf("amplitude %v rms, want 0.4", c.Value)
	}
}

// TestMixedLevels: correlation coefficients of 0, 0.2 and 0.7, known to 1/sqrt(N) = 0.01.
func TestMixedLevels(t *testing.T) {
	for share, want := range map[float64]Level{0: OK, 0.2: Doubtful, 0.7: Bad} {
		x, y := white(10000, rms, 1), white(10000, rms, 2)
		for i := range y {
			y[i] = share*x[i] + math.Sqrt(1-share*share)*y[i]
		}
		c := find(t, Run(Input{Axes: []Axis{axis("x", x), axis("y", y)}, Rate: 1000}), "axes-mixed", "x-y")
		if c.Level != want || math.Abs(c.Value-share) > 0.05 {
			t.Errorf("share %v: %v %v, want %v", share, c.Value, c.Level, want)
		}
	}
}

// TestMixedByLine: a line of 0.4 rms on both axes gives independent ones a correlation coefficient of 0.08/1.08 = 0.074. It is
// left out when the fit has found it: 0 within 1/sqrt(N) = 0.005. A true 0.2 stays within that beside it.
func TestMixedByLine(t *testing.T) {
	for share, want := range map[float64]Level{0: OK, 0.2: Doubtful} {
		x, y := white(40000, rms, 1), white(40000, rms, 2)
		for i := range y {
			pickup := 0.4 * rms * math.Sin(2*math.Pi*50.3/1000*float64(i)+0.4)
			y[i] = share*x[i] + math.Sqrt(1-share*share)*y[i] + pickup
			x[i] += pickup
		}
		a, b := axis("x", x), axis("y", y)
		a.Lines, b.Lines = []Line{{Frequency: 50.301, Amplitude: 0.4 * rms}}, []Line{{Frequency: 50.299, Amplitude: 0.4 * rms}}
		c := find(t, Run(Input{Axes: []Axis{a, b}, Rate: 1000}), "axes-mixed", "x-y")
		if c.Level != want || math.Abs(c.Value-share) > 0.02 {
			t.Errorf("share %v: %v %v, want %v", share, c.Value, c.Level, want)
		}
	}
}

// TestSkewed: y = x + 0.045 (x^2 - 1) has the skewness 6 x 0.045 = 0.27. With 300 periods
// of 1/fc that of a Gaussian has the standard deviation sqrt(6 x 2/(3 x 2 pi x 300)) =
// 0.046. If the samples decorrelated only as fast as for the mean it would be 0.08.
func TestSkewed(t *testing.T) {
	tr := regime{ratio: 0.01, periods: 300}
	x := simulate.Record(tr.truth(1), 2)[0]
	in := fitted([][]float64{x}, tr.rate(), 0)
	for i, v := range x {
		u := v / rms
		x[i] = rms * (u + 0.045*(u*u-1))
	}
	c := find(t, Run(in), "not-gaussian", "x")
	if c.Level != Doubtful {
		t.Errorf("skewed positions: %v (%s)", c.Level, c.Text)
	}
}

// A periodogram at hand, in one piece or with its frequencies in groups, is what the line is looked for in, and shows its amplitude.
func TestToneFromSpectrum(t *testing.T) {
	for _, n := range []int{1 << 17, 3 * toneSegment} {
		x := white(n, rms, 1)
		for i := range x {
			x[i] += 0.1 * rms * math.Sin(2*math.Pi*50*float64(i)/1000)
		}
		plan, err := transform.NewPlan(n)
		if err != nil {
			t.Fatal(err)
		}
		a := axis("x", white(n, rms, 2)) // which has no line: it comes from the spectrum
		a.Spectrum = SpectrumOf(plan.Power(nil, x), n)
		c := find(t, Run(Input{Axes: []Axis{a}, Rate: 1000}), "tone", "x")
		if c.Level != Doubtful || c.Value < 0.1*2/math.Pi-0.01 || c.Value > 0.11 { // off the centre of a bin as low as 2/pi
			t.Errorf("line of 0.1 rms in the spectrum of %d samples: %v %v", n, c.Value, c.Level)
		}
	}
}

// TestToneRemedy: a line that the fit has removed need not be left out by hand; one that it has not does.
func TestToneRemedy(t *testing.T) {
	truth := detector.truth(1)
	truth.Axes[0].Lines = []simulate.Line{{Frequency: 50, Amplitude: 0.5 * rms}}
	in := fitted(simulate.Record(truth, 1), truth.Rate, 0)
	if c := find(t, Run(in), "tone", "x"); c.Level != Doubtful || !strings.Contains(c.Remedy, "--exclude") {
		t.Errorf("not removed: %s %s", c.Text, c.Remedy)
	}
	in.Axes[0].Lines = []Line{{Frequency: 50, Amplitude: 0.5 * rms}}
	if c := find(t, Run(in), "tone", "x"); !strings.Contains(c.Text, "taken it out") || strings.Contains(c.Remedy, "--exclude") {
		t.Errorf("removed: %s %s", c.Text, c.Remedy)
	}
}
