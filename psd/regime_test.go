package psd_test

import (
	"math"
	"sort"
	"testing"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
	"beadwell/psd"
)

// regime is a way to record: the positions have a thermal rms of 10 nm.
type regime struct {
	name     string
	corner   float64 // fc dt
	exposure float64 // W/dt
	noise    float64 // rms of the noise over the thermal rms
	known    bool
	turns    float64 // T fc
}

const rms = 1e-8 // m

func (g regime) samples() int { return int(math.Round(g.turns / g.corner)) }

// truth samples at 1 kHz.
func (g regime) truth() simulate.Truth {
	return simulate.Truth{Samples: g.samples(), Rate: 1000, Exposure: g.exposure / 1000,
		Axes: []simulate.Axis{{Corner: g.corner * 1000, Variance: rms * rms, Noise: g.noise * rms}}}
}

func (g regime) options() psd.Options {
	return psd.Options{Exposure: g.exposure / 1000, Noise: psd.Noise{Known: g.known, Variance: g.noise * g.noise * rms * rms}}
}

func estimate(t *testing.T, x []float64, rate float64, opt psd.Options) *psd.Fit {
	t.Helper()
	r, err := psd.Prepare(x, rate)
	if err != nil {
		t.Fatal(err)
	}
	f, err := psd.Estimate(r, opt)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

var (
	alongCorner   = relaxation.Parameters{1, 0, 0}
	alongVariance = relaxation.Parameters{0, 1, 0}
)

// Over 400 records a regime each: mean and spread of (estimate - truth)/SE of ln fc and ln V,
// coverage of the likelihood intervals, and the distribution of the p-values of the fit. A regime's
// information holds about n = pi T fc independent samples, and everything that a normal
// limit leaves out is of the relative order 1/n.
//
// Bounds: a mean z of 3/sqrt(400) = 0.15 by chance, and a bias of 0.1 of the scatter; a spread of 1
// within 3/sqrt(800) = 0.106 by chance and 8/n; a coverage of 95 % (68.27 %) within 3 binomial
// standard deviations, 3.3 % (7.0 %), and the loss of up to 6/n in the mean of the likelihood
// ratio, which is a probability of 0.11 x 6/n (0.24 x 6/n); a Kolmogorov distance of
// 1.95/sqrt(400) = 0.1 (probability 0.1 %), and 0.02 for three parameters that are fitted in
// unequal blocks.
func TestEstimateCalibrated(t *testing.T) {
	const records = 400
	for _, g := range []regime{
		{"detector, short", 0.05, 0, 0.1, true, 30},
		{"detector, long", 0.05, 0, 0.1, true, 300},
		{"detector, noise fitted", 0.03, 0, 0.2, false, 300},
		{"camera, short", 0.15, 1, 0.1, true, 30},
		{"camera, long", 0.15, 1, 0.1, true, 300},
	} {
		independent := math.Pi * g.turns
		var z [2]moments
		var in68, in95 [2]float64
		var p []float64
		for i := range records {
			f := estimate(t, simulate.Record(g.truth(), uint64(1000+i))[0], 1000, g.options())
			p = append(p, f.Goodness.PValue)
			truth := [2]float64{math.Log(g.corner), math.Log(rms * rms / f.Scale())}
			for k, along := range []relaxation.Parameters{alongCorner, alongVariance} {
				sd, _ := f.SD(along)
				z[k].add((f.Maximum.At[k] - truth[k]) / sd)
				ratio, _, err := f.Problem.Ratio(f.Maximum, along, truth[k])
				if err != nil {
					t.Errorf("%s, record %d: %v", g.name, i, err)
				}
				if ratio < 1 {
					in68[k] += 1.0 / records
				}
				if ratio < 3.841459 { // 95 % quantile of chi-square with one degree of freedom
					in95[k] += 1.0 / records
				}
			}
		}
		const bias = 0.1
		for k, what := range []string{"ln fc", "ln V"} {
			if m := z[k].mean(); math.Abs(m) > 0.15+bias {
				t.Errorf("%s: mean of (estimate-truth)/SE of %s = %.3f, want 0 within %.2f", g.name, what, m, 0.15+bias)
			}
			if s := z[k].deviation(); math.Abs(s-1) > 0.106+8/independent {
				t.Errorf("%s: spread of (estimate-truth)/SE of %s = %.3f, want 1 within %.3f", g.name, what, s, 0.106+8/independent)
			}
			if c := in95[k]; c < 0.95-0.033-0.66/independent || c > 0.95+0.033 {
				t.Errorf("%s: coverage of 95 %% intervals of %s = %.3f", g.name, what, c)
			}
			if c := in68[k]; c < 0.6827-0.07-1.4/independent || c > 0.6827+0.07 {
				t.Errorf("%s: coverage of 68 %% intervals of %s = %.3f", g.name, what, c)
			}
		}
		if d := kolmogorov(p); g.turns >= 300 && d > 0.12 {
			t.Errorf("%s: p-values of the fit are %.3f from uniform, want below 0.12", g.name, d)
		}
	}
}

// A bead that is recorded at 1000 times its corner frequency, for 30 turns: what the ends of the record
// leak into the spectrum is some 1/(pi T fc) = 1 % of it at all frequencies above the corner, which
// 15000 of them see, and more where the ends differ more. The p-values of the fit allow for it: in all
// records, and in the fifth of them whose ends differ most.
func TestGoodnessOfOversampledRecords(t *testing.T) {
	g := regime{corner: 0.001, turns: 30, known: true}
	type row struct{ ends, p float64 }
	var rows []row
	var p []float64
	for i := range 300 {
		r, err := psd.Prepare(simulate.Record(g.truth(), uint64(7000+i))[0], 1000)
		if err != nil {
			t.Fatal(err)
		}
		f, err := psd.Estimate(r, g.options())
		if err != nil {
			t.Fatal(err)
		}
		rows = append(rows, row{math.Abs(r.X[0] - r.X[len(r.X)-1]), f.Goodness.PValue})
		p = append(p, f.Goodness.PValue)
	}
	if d := kolmogorov(p); d > 0.113 { // 1.95/sqrt(300), probability 0.1 %
		t.Errorf("p-values of the fit are %.3f from uniform, want below 0.113", d)
	}
	sort.Slice(rows, func(i, j int) bool { return rows[i].ends > rows[j].ends })
	mean := 0.0
	for _, r := range rows[:60] {
		mean += r.p / 60
	}
	if math.Abs(mean-0.5) > 0.112 { // 3/sqrt(12 x 60)
		t.Errorf("mean p-value of the 60 records whose ends differ most = %.3f, want 0.5", mean)
	}
}

// moments are the running sums of a sample.
type moments struct{ n, sum, square float64 }

func (m *moments) add(v float64) {
	m.n++
	m.sum += v
	m.square += v * v
}
func (m *moments) mean() float64      { return m.sum / m.n }
func (m *moments) deviation() float64 { return math.Sqrt(m.square/m.n - m.mean()*m.mean()) }

// kolmogorov returns the largest distance of the values' distribution from the uniform one.
func kolmogorov(p []float64) float64 {
	sort.Float64s(p)
	d := 0.0
	for i, v := range p {
		n := float64(len(p))
		d = math.Max(d, math.Max(float64(i+1)/n-v, v-float64(i)/n))
	}
	return d
}
