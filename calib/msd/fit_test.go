package msd

import (
	"errors"
	"math"
	"sort"
	"testing"

	"gonum.org/v1/gonum/mat"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
	"beadwell/calib/transform"
)

// likelihoodFit is an efficient fit of a record: x is its residue about the line.
type likelihoodFit struct {
	x       []float64
	scale   float64
	process relaxation.Process
	total   relaxation.Matrix
}

// fitOf simulates a record of the process (unit sampling interval) of an even 5-smooth
// length and fits it by maximum likelihood, with the noise known or not.
func fitOf(t *testing.T, p relaxation.Process, n int, known bool, seed uint64) likelihoodFit {
	t.Helper()
	truth := simulate.Truth{Samples: n, Rate: 1 / p.Interval, Exposure: p.Exposure,
		Axes: []simulate.Axis{{Corner: p.Corner, Variance: p.Variance, Noise: math.Sqrt(p.Noise)}}}
	f := likelihoodFit{x: simulate.Record(truth, seed)[0]}
	removeLine(f.x)
	for _, v := range f.x {
		f.scale += v * v / float64(n)
	}
	plan, err := transform.NewPlan(n)
	if err != nil {
		t.Fatal(err)
	}
	blocks := relaxation.NewBlocks(plan.Power(nil, f.x), n, true, nil)
	pr := relaxation.Problem{Likelihood: relaxation.NewSpectral(blocks, f.x, p.Exposure/p.Interval, f.scale)}
	if known {
		pr.Directions = []relaxation.Parameters{{1, 0, 0}, {0, 1, 0}}
	}
	m, err := pr.Maximise(pr.Start(p.Noise, !known))
	if err != nil {
		t.Fatal(err)
	}
	if f.total, _, err = pr.Covariance(m.Information); err != nil {
		t.Fatal(err)
	}
	f.process = relaxation.Process{Corner: math.Exp(m.At[0]) / p.Interval, Variance: f.scale * math.Exp(m.At[1]), Noise: f.scale * m.At[2],
		Interval: p.Interval, Exposure: p.Exposure}
	return f
}

func removeLine(x []float64) {
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

func (f likelihoodFit) input(n Noise) Input {
	return Input{X: f.x, Guess: f.process, Noise: n, Scale: f.scale, FitCovariance: f.total}
}

// vector is what one record yields: ln fc, ln V and q/V of the mean-square displacement, of
// the likelihood, and the logarithm of the mean square.
type vector [7]float64

// scatter is the covariance of vectors, and the mean of what is predicted for it.
type scatter struct {
	rows      []vector
	predicted [7][7]float64
}

func (s *scatter) covariance() (mean vector, cov [7][7]float64) {
	n := float64(len(s.rows))
	for _, r := range s.rows {
		for i, v := range r {
			mean[i] += v / n
		}
	}
	for _, r := range s.rows {
		for i := range r {
			for j := range r {
				cov[i][j] += (r[i] - mean[i]) * (r[j] - mean[j]) / (n - 1)
			}
		}
	}
	return mean, cov
}

var names = [7]string{"ln fc", "ln V", "q/V", "ln fc (likelihood)", "ln V (likelihood)", "q/V (likelihood)", "ln s2"}

// Over seeded records: the estimates' bias, their covariance, that with the likelihood fit and with the
// mean square, and the distribution of chi-square, each against what Estimate states.
//
// Bounds: of M records, a covariance has the standard deviation sqrt((C_ii C_jj + C_ij^2)/M), of
// which four are allowed, since some fifty are compared; what normal theory and the covariance of
// the lags leave out is of the order 1/n, n = pi T fc independent samples, with a factor of 5. The bias is
// bounded by four standard deviations of a mean and 0.15 of the scatter.
func TestEstimateCalibrated(t *testing.T) {
	const records = 240
	for _, c := range []struct {
		name  string
		p     relaxation.Process
		n     int
		known bool
	}{
		{"detector", relaxation.Process{Corner: 0.03, Variance: 1, Interval: 1}, 6000, true},
		{"detector, noise fitted", relaxation.Process{Corner: 0.03, Variance: 1, Noise: 0.1, Interval: 1}, 6000, false},
		{"camera", relaxation.Process{Corner: 0.15, Variance: 1, Noise: 0.04, Interval: 1, Exposure: 1}, 1500, true},
	} {
		var s scatter
		var p []float64
		for i := range records {
			f := fitOf(t, c.p, c.n, c.known, uint64(100+i))
			r, err := Estimate(f.input(Noise{Known: c.known, Variance: c.p.Noise}))
			if err != nil {
				t.Errorf("%s, record %d: %v", c.name, i, err)
				continue
			}
			p = append(p, r.PValue)
			s.rows = append(s.rows, vector{math.Log(r.Corner / c.p.Corner), math.Log(r.Variance / c.p.Variance), (r.NoiseQ - c.p.Noise) / c.p.Variance,
				math.Log(f.process.Corner / c.p.Corner), math.Log(f.process.Variance / c.p.Variance), (f.process.Noise - c.p.Noise) / c.p.Variance,
				math.Log(f.scale)})
			unit := [3]float64{1, 1, f.scale / c.p.Variance}
			for a := range 3 {
				for b := range 3 {
					s.predicted[a][b] += r.Covariance[a][b] * unit[a] * unit[b] / records
					s.predicted[a][3+b] += r.WithFit[a][b] * unit[a] * unit[b] / records
					s.predicted[3+a][3+b] += f.total[a][b] * unit[a] * unit[b] / records
				}
				s.predicted[a][6] += r.WithMeanSquare[a] * unit[a] / f.scale / records
			}
		}
		mean, cov := s.covariance()
		independent := math.Pi * c.p.Corner * float64(c.n)
		for a := range 3 {
			if c.known && a == 2 {
				continue
			}
			if z := mean[a] / math.Sqrt(cov[a][a]); math.Abs(z) > 4/math.Sqrt(records)+0.15 {
				t.Errorf("%s: bias of %s is %.3f of its scatter", c.name, names[a], z)
			}
			for b := a; b < 7; b++ {
				if c.known && (b == 2 || b == 5) {
					continue
				}
				unit := math.Sqrt(cov[a][a] * cov[b][b])
				bound := 4*math.Sqrt((cov[a][a]*cov[b][b]+cov[a][b]*cov[a][b])/records) + 5/independent*unit
				if gap := s.predicted[a][b] - cov[a][b]; math.Abs(gap) > bound {
					t.Errorf("%s: Cov(%s, %s) = %.3g, scatter %.3g, gap %.2f of the deviations, bound %.2f", c.name, names[a], names[b], s.predicted[a][b], cov[a][b], gap/unit, bound/unit)
				}
			}
			// The difference of two estimates that are nearly the same shows what their covariance
			// hides. Its variance is a few percent of theirs, and the ends of the record, which the
			// covariance of the lags leaves out, are a tenth of that.
			difference := make([]float64, 0, records)
			for _, r := range s.rows {
				difference = append(difference, r[a]-r[3+a])
			}
			var sum, square float64
			for _, d := range difference {
				sum += d
				square += d * d
			}
			got := square/records - sum*sum/records/records
			stated := s.predicted[a][a] + s.predicted[3+a][3+a] - 2*s.predicted[a][3+a]
			if math.Abs(got/stated-1) > 4*math.Sqrt(2.0/records)+0.1 {
				t.Errorf("%s: variance of the difference in %s = %.4g, scatter %.4g", c.name, names[a], stated, got)
			}
		}
		sort.Float64s(p)
		d := 0.0
		for i, v := range p {
			d = math.Max(d, math.Max(float64(i+1)/records-v, v-float64(i)/records))
		}
		if limit := 1.95/math.Sqrt(records) + 0.02; d > limit { // probability 0.1 %
			t.Errorf("%s: p-values are %.3f from uniform, want below %.3f", c.name, d, limit)
		}
	}
}

// withRidge repeats the estimate with another ridge.
func withRidge(t *testing.T, in Input, ridge float64) *Result {
	t.Helper()
	lags := Lags(len(in.X), 1/(2*math.Pi*in.Guess.Corner*in.Guess.Interval))
	values, pairs := Displacements(in.X, false, lags, nil)
	f, err := newFitter(in, lags, values, pairs)
	if err != nil {
		t.Fatal(err)
	}
	cov := Covariance(in.Guess, lags, pairs)
	corr := mat.NewSymDense(len(lags), nil)
	for i := range lags {
		for j := range lags {
			corr.SetSym(i, j, cov[i][j]/f.sd[i]/f.sd[j])
		}
		corr.SetSym(i, i, 1+ridge)
	}
	if !f.chol.Factorize(corr) {
		t.Fatalf("ridge %g: the matrix is not positive definite", ridge)
	}
	if err := f.search(); err != nil {
		t.Fatal(err)
	}
	return f.result()
}

// The ridge may be a hundred times smaller or larger: the estimates move by less than a
// fiftieth of a standard error, and the standard errors by less than 2 %.
func TestRidgeDoesNotMatter(t *testing.T) {
	for i, p := range processes[:4] {
		n := map[bool]int{true: 6000, false: 2000}[p.Corner < 0.1]
		f := fitOf(t, p, n, true, 50)
		in := f.input(Noise{Known: true, Variance: p.Noise})
		base := withRidge(t, in, ridge)
		for _, other := range []float64{1e-11, 1e-7} {
			r := withRidge(t, in, other)
			for k, move := range []float64{math.Log(r.Corner / base.Corner), math.Log(r.Variance / base.Variance)} {
				sd := math.Sqrt(base.Covariance[k][k])
				if math.Abs(move) > 0.02*sd {
					t.Errorf("process %d, ridge %g: parameter %d moves by %.3f standard errors", i, other, k, move/sd)
				}
				if ratio := math.Sqrt(r.Covariance[k][k]) / sd; math.Abs(ratio-1) > 0.02 {
					t.Errorf("process %d, ridge %g: standard error %d changes by a factor of %.4f", i, other, k, ratio)
				}
			}
		}
	}
}

// Exact properties: scaling, mirror and time reversal. The fit's start and covariance scale along.
func TestEstimateProperties(t *testing.T) {
	p := processes[1]
	f := fitOf(t, p, 3000, false, 5)
	base, err := Estimate(f.input(Noise{}))
	if err != nil {
		t.Fatal(err)
	}
	check := func(what string, in Input, unit, bound float64) {
		r, err := Estimate(in)
		if err != nil {
			t.Errorf("%s: %v", what, err)
			return
		}
		for _, c := range []struct{ got, want float64 }{{r.Corner, base.Corner}, {r.Variance / unit, base.Variance}, {r.NoiseQ / unit, base.NoiseQ},
			{r.Covariance[0][0], base.Covariance[0][0]}, {r.WithFit[1][0], base.WithFit[1][0]}, {r.WithMeanSquare[1] / unit, base.WithMeanSquare[1]}, {r.ChiSquare, base.ChiSquare}} {
			if math.Abs(c.got/c.want-1) > bound {
				t.Errorf("%s: %.12g, want %.12g", what, c.got, c.want)
			}
		}
	}
	const s = 3e-9
	scaled := f.input(Noise{})
	scaled.X = make([]float64, len(f.x))
	back := f.input(Noise{})
	back.X = make([]float64, len(f.x))
	for i, v := range f.x {
		scaled.X[i] = s * v
		back.X[len(f.x)-1-i] = -v
	}
	scaled.Scale *= s * s
	scaled.Guess.Variance *= s * s
	scaled.Guess.Noise *= s * s
	// Neighbouring lags are correlated to 1e-9, which is the ridge: rounding of 1e-14 grows by its
	// inverse in the whitened residuals, and falls again in the estimate.
	check("scaled", scaled, s*s, 1e-6)
	check("backwards and upside down", back, 1, 1e-6)
}

// A stated noise with an uncertainty lies between an exact and an unknown one, and what a change
// of the stated value does to the estimate is the stated slope.
func TestStatedNoise(t *testing.T) {
	p := processes[1]
	f := fitOf(t, p, 3000, false, 6)
	at := func(n Noise) *Result {
		r, err := Estimate(f.input(n))
		if err != nil {
			t.Fatal(err)
		}
		return r
	}
	for _, u := range []float64{0, 0.2 * p.Noise} {
		h := 1e-3 * p.Noise
		base, up, down := at(Noise{true, p.Noise, u}), at(Noise{true, p.Noise + h, u}), at(Noise{true, p.Noise - h, u})
		for k, move := range []float64{math.Log(up.Corner / down.Corner), math.Log(up.Variance / down.Variance), (up.NoiseQ - down.NoiseQ) / f.scale} {
			slope := move / (2 * h)
			// the slope is that of the linearised problem; the search stops within 1e-5 standard errors
			if math.Abs(base.NoiseSlope[k]-slope) > 0.02*math.Abs(slope)+1e-4*math.Sqrt(base.Covariance[k][k])/h {
				t.Errorf("uncertainty %g: slope %d = %.5g, want %.5g (difference)", u, k, base.NoiseSlope[k], slope)
			}
		}
	}
	// The information adds up: with C the covariance of a free noise and u the uncertainty of the stated one,
	// the total is C - C e e' C/(u^2 + C_22), and the record's part is that less what u carries in.
	u := 0.2 * p.Noise
	c, partly := at(Noise{}).Covariance, at(Noise{true, p.Noise, u})
	for k := range 2 {
		total := c[k][k] - c[k][2]*c[k][2]/(u*u/f.scale/f.scale+c[2][2])
		want := total - partly.NoiseSlope[k]*partly.NoiseSlope[k]*u*u
		// the two fits end a fraction of a standard error apart, where the gradients differ by a few percent
		if got := partly.Covariance[k][k]; math.Abs(got/want-1) > 0.03 {
			t.Errorf("variance of parameter %d, of the record alone: %.5g, want %.5g (of %.5g in all)", k, got, want, total)
		}
	}
	// A noise that is stated three of its uncertainties off costs (q - q0)^2/(u^2 + C_22) in chi-square,
	// to the order at which the model is not linear in q.
	free, off := at(Noise{}), at(Noise{true, 0.4 * p.Noise, u})
	gap := (free.NoiseQ - 0.4*p.Noise) / f.scale
	want := gap * gap / (u*u/f.scale/f.scale + free.Covariance[2][2])
	if got := off.ChiSquare - free.ChiSquare; math.Abs(got/want-1) > 0.1 {
		t.Errorf("chi-square rises by %.4g for a stated noise that is off, want %.4g", got, want)
	}
	tight, vague := at(Noise{true, p.Noise, 1e-4 * p.Noise}), at(Noise{true, p.Noise, 1e4 * p.Noise})
	exact, unknown := at(Noise{Known: true, Variance: p.Noise}), at(Noise{})
	if math.Abs(tight.Corner/exact.Corner-1) > 1e-5 || math.Abs(vague.Corner/unknown.Corner-1) > 1e-5 {
		t.Errorf("corner frequency in the limits of the stated noise: %.8g, %.8g, want %.8g, %.8g", tight.Corner, vague.Corner, exact.Corner, unknown.Corner)
	}
}

// A bead that does not move has no plateau: an error, or an uncertainty that says so.
func TestConstantPositions(t *testing.T) {
	guess := relaxation.Process{Corner: 0.05, Variance: 1, Interval: 1}
	r, err := Estimate(Input{X: make([]float64, 100), Guess: guess, Scale: 1})
	if err == nil && !(r.Covariance[1][1] > 1e4) {
		t.Errorf("ln V = %.3g +- %.3g from positions that do not change", math.Log(r.Variance), math.Sqrt(r.Covariance[1][1]))
	}
}

// Missing samples take nothing from the estimate but pairs.
func TestMissing(t *testing.T) {
	p := processes[2]
	var z []float64
	for i := range 60 {
		f := fitOf(t, p, 2000, true, uint64(700+i))
		in := f.input(Noise{Known: true})
		in.Missing = true
		for j := range in.X {
			if j%10 == 3 {
				in.X[j] = math.NaN()
			}
		}
		r, err := Estimate(in)
		if err != nil {
			t.Fatal(err)
		}
		z = append(z, math.Log(r.Variance/p.Variance)/math.Sqrt(r.Covariance[1][1]))
	}
	var sum, square float64
	for _, v := range z {
		sum += v / 60
		square += v * v / 60
	}
	// 3/sqrt(60) and 0.1; 3/sqrt(120) and the tenth of the samples that the covariance counts as there
	if math.Abs(sum) > 0.49 || math.Abs(math.Sqrt(square-sum*sum)-1) > 0.37 {
		t.Errorf("(estimate-truth)/SE of ln V: mean %.2f, spread %.2f, want 0 and 1", sum, math.Sqrt(square-sum*sum))
	}
}

func TestEstimateRefuses(t *testing.T) {
	guess := relaxation.Process{Corner: 0.05, Variance: 1, Interval: 1}
	nan := make([]float64, 100)
	for i := range nan {
		nan[i] = math.NaN()
	}
	for what, c := range map[string]struct {
		in   Input
		want error
	}{
		"empty":          {Input{Guess: guess, Scale: 1}, ErrTooShort},
		"two samples":    {Input{X: []float64{1, -1}, Guess: guess, Scale: 1}, ErrTooShort},
		"NaN everywhere": {Input{X: nan, Missing: true, Guess: guess, Scale: 1}, ErrTooShort},
	} {
		if r, err := Estimate(c.in); !errors.Is(err, c.want) {
			t.Errorf("%s: %+v, error %v, want %v", what, r, err, c.want)
		}
	}
}

// White samples have a plateau, whatever the corner frequency beyond the sampling rate: also where the guess
// stands at the end of the domain. The mean square of n samples is known to sqrt(2/n) of itself; four of
// those bound a fixed seed, and the plateau is what remains without a noise of a fifth.
func TestPlateauOfWhiteSamples(t *testing.T) {
	const n = 300
	x := noise(n, 5)
	mean := 0.0
	for _, v := range x {
		mean += v * v / n
	}
	for _, corner := range []float64{0.8, relaxation.HighestCorner, 5} {
		r, err := Estimate(Input{X: x, Scale: mean, Noise: Noise{Known: true, Variance: mean / 5},
			Guess: relaxation.Process{Corner: corner, Variance: 0.8 * mean, Noise: mean / 5, Interval: 1}})
		if err != nil {
			t.Errorf("corner %g: %v", corner, err)
			continue
		}
		if gap := r.Variance/(0.8*mean) - 1; math.Abs(gap) > 4*math.Sqrt(2./n)/0.8 {
			t.Errorf("corner %g: plateau off by %.2g", corner, gap)
		}
	}
}
