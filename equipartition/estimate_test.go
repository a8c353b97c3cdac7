package equipartition

import (
	"errors"
	"math"
	"testing"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
	"beadwell/calib/transform"
)

var processes = []relaxation.Process{
	{Corner: 0.02, Variance: 2.5, Interval: 1},
	{Corner: 0.05, Variance: 0.3, Noise: 0.05, Interval: 1},
	{Corner: 0.1, Variance: 1, Interval: 1, Exposure: 1},
	{Corner: 0.4, Variance: 1, Noise: 0.25, Interval: 1, Exposure: 1},
	{Corner: 1, Variance: 1, Noise: 0.01, Interval: 1, Exposure: 1},
}

// Kappler's torsion balance, Ann. Phys. 403 (1931) 233: directional moment D = 9.428e-16 N m,
// mean square angle 4.178e-6 rad2, 287.1 K (numbers as textbooks quote them; the temperature
// from memory), hence k = D <phi^2>/T = 1.37200e-23 J/K. The paper claims 1 %; k of 2019 is 0.63 % higher. A
// record of a million relaxation times of a mirror that is seen without blur or noise
// leaves the mean square as it is, but for one part in a million.
func TestKappler(t *testing.T) {
	const moment, square, temperature = 9.428e-16, 4.178e-6, 287.1
	p := relaxation.Process{Corner: 0.1, Variance: square, Interval: 1}
	r, err := Estimate(Input{MeanSquare: square, Samples: 2000000, Observed: 2000000, Process: p, Scale: square})
	if err != nil {
		t.Fatal(err)
	}
	k := moment * r.Variance / temperature
	if math.Abs(k/1.372002229188436e-23-1) > 1e-5 { // twice the million samples' mean and line
		t.Errorf("k = %.6g J/K, want 1.37200e-23", k)
	}
	if math.Abs(k/1.380649e-23-1) > 0.01 {
		t.Errorf("k = %.6g J/K is not within the paper's 1 %% of 1.380649e-23", k)
	}
	stiffness := 1.380649e-23 * temperature / r.Variance
	if math.Abs(stiffness/9.487418092388705e-16-1) > 1e-5 {
		t.Errorf("stiffness = %.6g N m, want 9.48742e-16 (2019 k)", stiffness)
	}
}

// The worked case: R = 0.5 um, 5 um above the surface, water of 298.15 K, fc = 500 Hz has
// kappa = 2.79192228e-5 N/m and an rms of 12.142480 nm (recomputed). Recorded by a camera of 1000 frames a
// second with open shutter, the rms is smaller by sqrt(S(pi)), S(pi) = 2/pi - 2 (1-exp(-pi))/pi^2.
func TestWorkedCase(t *testing.T) {
	const kT, kappa = 1.380649e-23 * 298.15, 2.7919222821315593e-5
	share := 2/math.Pi - 2*(1-math.Exp(-math.Pi))/(math.Pi*math.Pi)
	p := relaxation.Process{Corner: 500, Variance: kT / kappa, Interval: 1e-3, Exposure: 1e-3}
	const n = 10000000
	r, err := Estimate(Input{MeanSquare: share * kT / kappa, Samples: n, Observed: n, Process: p, Scale: kT / kappa})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(r.Blur-share) > 1e-15 || math.Abs(kT/r.Variance/kappa-1) > 1e-6 { // mean and line of 1e7 samples
		t.Errorf("blur %.12g, stiffness %.9g N/m, want %.12g, %.9g", r.Blur, kT/r.Variance, share, kappa)
	}
	if math.Abs(math.Sqrt(r.Variance)-12.142480e-9) > 1e-14 {
		t.Errorf("rms = %.8g nm, want 12.142480", 1e9*math.Sqrt(r.Variance))
	}
}

// From the mean square's exact expectation, the variance itself, for any length. The standard
// uncertainty of a known process is that of the mean square, times the gain V S + q over V S.
func TestEstimateInvertsExpectation(t *testing.T) {
	for i, p := range processes {
		for _, n := range []int{20, 300, 5000} {
			mean, variance := p.SampleVariance(n, relaxation.RemovedLine)
			r, err := Estimate(Input{MeanSquare: mean, Samples: n, Observed: n, Process: p, Scale: 1})
			if err != nil {
				t.Fatal(err)
			}
			if math.Abs(r.Variance/p.Variance-1) > 1e-12 { // some ten roundings, noise up to V
				t.Errorf("process %d, n = %d: variance %.15g, want %.15g", i, n, r.Variance, p.Variance)
			}
			s, _ := relaxation.BlurVariance(2 * math.Pi * p.Corner * p.Exposure)
			gain := (p.Variance*s + p.Noise) / (p.Variance * s)
			if want := gain * math.Sqrt(variance) / mean; math.Abs(r.SD/want-1) > 1e-12 {
				t.Errorf("process %d, n = %d: standard uncertainty of ln V = %.12g, want %.12g", i, n, r.SD, want)
			}
			if want := 2 * mean * mean / variance; math.Abs(r.Effective/want-1) > 1e-12 {
				t.Errorf("process %d, n = %d: %.6g independent samples, want %.6g", i, n, r.Effective, want)
			}
		}
	}
}

// The slopes against differences. That of the length share L is taken as 1-L, since what a mean
// and a line take is the long-run variance over the record, in inverse proportion to fc: right to the
// next order in 1/(fc T), with a factor of 3 for blur and noise, which do not follow it.
func TestSlopes(t *testing.T) {
	for i, p := range processes {
		const n = 1000
		mean, _ := p.SampleVariance(n, relaxation.RemovedLine)
		at := func(q relaxation.Process) Result {
			r, err := Estimate(Input{MeanSquare: mean, Samples: n, Observed: n, Process: q, Scale: 1})
			if err != nil {
				t.Fatal(err)
			}
			return r
		}
		base := at(p)
		const h = 1e-4
		up, down := p, p
		up.Corner, down.Corner = p.Corner*math.Exp(h), p.Corner*math.Exp(-h)
		slope := math.Log(at(up).Variance/at(down).Variance) / (2 * h)
		if bound := 3*(1-base.Length)*(1-base.Length) + 0.7*(1-base.Length)*p.Noise/p.Variance + 0.7*(1-base.Length)*2*math.Pi*p.Corner*p.Exposure + 1e-7; math.Abs(base.CornerSlope-slope) > bound {
			t.Errorf("process %d: d ln V/d ln fc = %.6f, want %.6f (difference) within %.6f", i, base.CornerSlope, slope, bound)
		}
		up, down = p, p
		up.Noise, down.Noise = p.Noise+h*p.Variance, p.Noise-h*p.Variance
		slope = math.Log(at(up).Variance/at(down).Variance) / (2 * h * p.Variance)
		// the noise enters L as well, by another share of it
		if math.Abs(base.NoiseSlope/slope-1) > 1e-6+2*(1-base.Length) {
			t.Errorf("process %d: d ln V/dq = %.6f, want %.6f (difference)", i, base.NoiseSlope, slope)
		}
		r, err := Estimate(Input{MeanSquare: mean * (1 + 1e-6), Samples: n, Observed: n, Process: p, Scale: 1})
		if err != nil {
			t.Fatal(err)
		}
		if got := math.Log(r.Variance/base.Variance) / 1e-6; math.Abs(base.Gain/got-1) > 1e-5 { // second order of the step
			t.Errorf("process %d: gain %.8f, want %.8f (difference)", i, base.Gain, got)
		}
	}
}

// In other units everything scales: variances by s^2, logarithms not at all.
func TestEstimateScales(t *testing.T) {
	const s2 = 9e-18
	p := processes[1]
	cov := relaxation.Matrix{{0.01, -0.006, 1e-4}, {-0.006, 0.012, -2e-4}, {1e-4, -2e-4, 3e-4}}
	one, err := Estimate(Input{MeanSquare: 0.36, Samples: 500, Observed: 480, Process: p, Scale: 0.4, Total: cov, Data: cov, Lost: 0.3})
	if err != nil {
		t.Fatal(err)
	}
	q := p
	q.Variance, q.Noise = s2*p.Variance, s2*p.Noise
	two, err := Estimate(Input{MeanSquare: 0.36 * s2, Samples: 500, Observed: 480, Process: q, Scale: 0.4 * s2, Total: cov, Data: cov, Lost: 0.3 * s2})
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		what      string
		got, want float64
	}{
		{"variance", two.Variance / s2, one.Variance}, {"SD", two.SD, one.SD}, {"length", two.Length, one.Length}, {"effective", two.Effective, one.Effective},
		{"gain", two.Gain, one.Gain}, {"noise slope", two.NoiseSlope * s2, one.NoiseSlope}, {"slope of q/scale", two.Slope[2], one.Slope[2]},
		{"covariance with ln fc", two.WithFit[0], one.WithFit[0]}, {"covariance with ln V", two.WithFit[1], one.WithFit[1]}, {"covariance with q/scale", two.WithFit[2], one.WithFit[2]},
	} {
		if math.Abs(c.got/c.want-1) > 1e-12 {
			t.Errorf("%s = %.15g, want %.15g", c.what, c.got, c.want)
		}
	}
	// what lines took is given back: 0.3 of 500 x (V + q)
	without, err := Estimate(Input{MeanSquare: 0.36, Samples: 500, Observed: 480, Process: p, Scale: 0.4, Total: cov, Data: cov})
	if err != nil {
		t.Fatal(err)
	}
	if got, want := without.Length-one.Length, 0.3/500/0.35; math.Abs(got-want) > 1e-13 {
		t.Errorf("lines of 0.3 m2 shorten the record by %.12g, want %.12g", got, want)
	}
}

// With a quarter of the samples missing at random the mean square scatters as that of a record of
// three quarters of the length: the convention for gaps, which long gaps meet exactly.
func TestMissingSamplesWiden(t *testing.T) {
	p := processes[2]
	in := Input{MeanSquare: 0.8, Samples: 1000, Observed: 1000, Process: p, Scale: 1}
	whole, err := Estimate(in)
	if err != nil {
		t.Fatal(err)
	}
	in.Observed = 750
	gappy, err := Estimate(in)
	if err != nil {
		t.Fatal(err)
	}
	if got := gappy.SD / whole.SD; math.Abs(got-math.Sqrt(4.0/3)) > 1e-12 {
		t.Errorf("standard uncertainty with gaps is %.12g of that without, want sqrt(4/3)", got)
	}
}

func TestEstimateRefuses(t *testing.T) {
	p := processes[1]
	for what, square := range map[string]float64{"nothing moves": 0, "less than the noise": 0.04, "NaN": math.NaN()} {
		r, err := Estimate(Input{MeanSquare: square, Samples: 1000, Observed: 1000, Process: p, Scale: 0.3})
		if !errors.Is(err, ErrNoVariance) || r.Variance != 0 {
			t.Errorf("%s: variance %g, error %v, want %v", what, r.Variance, err, ErrNoVariance)
		}
	}
}

// detrend takes the least-squares line out of x.
func detrend(x []float64) {
	mid := float64(len(x)-1) / 2
	var sum, product, square float64
	for i, v := range x {
		u := float64(i) - mid
		sum += v
		product += u * v
		square += u * u
	}
	for i := range x {
		x[i] -= sum/float64(len(x)) + product/square*(float64(i)-mid)
	}
}

// Over seeded records that are fitted by maximum likelihood first: bias and scatter of ln V, and its
// covariance with the parameters of the fit, against what Estimate states. Bounds: of M
// records a covariance has the standard deviation sqrt((C_ii C_jj + C_ij^2)/M), of which four are allowed, and
// what normal theory leaves out is of the order 1/n, n = pi T fc, with a factor of 5.
func TestEstimateCalibrated(t *testing.T) {
	const records = 300
	for _, c := range []struct {
		name  string
		p     relaxation.Process
		n     int
		known bool
	}{
		{"detector", relaxation.Process{Corner: 0.03, Variance: 1, Noise: 0.01, Interval: 1}, 5000, true},
		{"detector, noise fitted", relaxation.Process{Corner: 0.03, Variance: 1, Noise: 0.1, Interval: 1}, 5000, false},
		{"camera", relaxation.Process{Corner: 0.15, Variance: 1, Noise: 0.04, Interval: 1, Exposure: 1}, 1500, true},
		{"short camera", relaxation.Process{Corner: 0.15, Variance: 1, Noise: 0.04, Interval: 1, Exposure: 1}, 240, true},
	} {
		plan, err := transform.NewPlan(c.n)
		if err != nil {
			t.Fatal(err)
		}
		truth := simulate.Truth{Samples: c.n, Rate: 1, Exposure: c.p.Exposure, Axes: []simulate.Axis{{Corner: c.p.Corner, Variance: 1, Noise: math.Sqrt(c.p.Noise)}}}
		var rows [][4]float64
		var stated, fisher [4][4]float64 // ln V first, then the fit's
		for i := range records {
			x := simulate.Record(truth, uint64(3000+i))[0]
			detrend(x)
			square := 0.0
			for _, v := range x {
				square += v * v / float64(c.n)
			}
			pr := relaxation.Problem{Likelihood: relaxation.NewSpectral(relaxation.NewBlocks(plan.Power(nil, x), c.n, true, nil), x, c.p.Exposure, square)}
			if c.known {
				pr.Directions = []relaxation.Parameters{{1, 0, 0}, {0, 1, 0}}
			}
			m, err := pr.Maximise(pr.Start(c.p.Noise, !c.known))
			if err != nil {
				t.Fatal(err)
			}
			total, data, err := pr.Covariance(m.Information)
			if err != nil {
				t.Fatal(err)
			}
			fit := relaxation.Process{Corner: math.Exp(m.At[0]), Variance: square * math.Exp(m.At[1]), Noise: square * m.At[2], Interval: 1, Exposure: c.p.Exposure}
			r, err := Estimate(Input{MeanSquare: square, Samples: c.n, Observed: c.n, Process: fit, Scale: square, Total: total, Data: data})
			if err != nil {
				t.Fatal(err)
			}
			rows = append(rows, [4]float64{math.Log(r.Variance), math.Log(fit.Corner / c.p.Corner), math.Log(fit.Variance), fit.Noise - c.p.Noise})
			stated[0][0] += r.SD * r.SD / records
			unit := [3]float64{1, 1, square}
			for a := range 3 {
				stated[0][1+a] += r.WithFit[a] * unit[a] / records
				fisher[1+a][1+a] += total[a][a] * unit[a] * unit[a] / records
			}
		}
		var mean [4]float64
		var cov [4][4]float64
		for _, r := range rows {
			for a, v := range r {
				mean[a] += v / records
			}
		}
		for _, r := range rows {
			for a := range r {
				for b := range r {
					cov[a][b] += (r[a] - mean[a]) * (r[b] - mean[b]) / (records - 1)
				}
			}
		}
		independent := math.Pi * c.p.Corner * float64(c.n)
		// bias: 4 standard deviations of a mean, and that of a logarithm, half its variance
		if math.Abs(mean[0]) > 4*math.Sqrt(cov[0][0]/records)+cov[0][0]/2 {
			t.Errorf("%s: mean of ln V = %.4f, scatter %.4f, want 0", c.name, mean[0], math.Sqrt(cov[0][0]))
		}
		for b, what := range []string{"ln V", "ln fc of the fit", "ln V of the fit", "q of the fit"} {
			if c.known && b == 3 {
				continue
			}
			unit := math.Sqrt(cov[0][0] * cov[b][b])
			bound := 4*math.Sqrt((cov[0][0]*cov[b][b]+cov[0][b]*cov[0][b])/records) + 5/independent*unit
			if math.Abs(stated[0][b]-cov[0][b]) > bound {
				t.Errorf("%s: Cov(ln V, %s) = %.4g, scatter %.4g, gap %.2f of the deviations, bound %.2f", c.name, what, stated[0][b], cov[0][b], (stated[0][b]-cov[0][b])/unit, bound/unit)
			}
		}
		// The difference from the fit's ln V is nearly nothing. What is stated of it is a difference of
		// three variances, each right to a few of 1/n, and may come out negative: up to 5/n of the
		// variance was seen, at n = 113.
		difference := cov[0][0] + cov[2][2] - 2*cov[0][2]
		want := stated[0][0] + fisher[2][2] - 2*stated[0][2]
		if math.Abs(difference-want) > 4*math.Sqrt(2.0/records)*difference+8/independent*cov[0][0] {
			t.Errorf("%s: variance of the difference from the fit's ln V = %.4g, scatter %.4g", c.name, want, difference)
		}
	}
}
