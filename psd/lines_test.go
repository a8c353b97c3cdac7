package psd_test

import (
	"math"
	"testing"

	"beadwell/calib/simulate"
	"beadwell/psd"
)

// Mains pickup of 0.3 rms: found with its frequency and amplitude, and gone from the fit.
// Of a sinusoid of amplitude A in a spectrum S (two-sided), over T, an efficient estimate has
// the variances 2 S/T of the amplitude and 6 S/(pi^2 A^2 T^3) of the frequency (Rife and Boorstyn,
// IEEE Trans. Inf. Theory 20 (1974) 591, for a real sinusoid of twice the power).
func TestMainsLine(t *testing.T) {
	g := regime{corner: 0.02, noise: 0.05, turns: 400} // fc = 20 Hz, 20 s
	const duration, hz, amplitude = 20.0, 50.03, 0.3 * rms
	truth := g.truth()
	truth.Axes[0].Lines = []simulate.Line{{Frequency: hz, Amplitude: amplitude, Phase: 1}}
	background := estimate(t, simulate.Record(g.truth(), 1)[0], 1000, psd.Options{}).Spectrum(hz) / 2
	sdA := math.Sqrt(2 * background / duration)
	sdF := math.Sqrt(6 * background / (math.Pi * math.Pi * amplitude * amplitude * duration * duration * duration))
	var a, f, corner, variance, shift moments
	const records = 60
	extra := 0
	for i := range records {
		whole, err := psd.Prepare(simulate.Record(g.truth(), uint64(900+i))[0], 1000)
		if err != nil {
			t.Fatal(err)
		}
		clean, err := psd.Estimate(whole, psd.Options{KeepLines: true})
		if err != nil {
			t.Fatal(err)
		}
		r, err := psd.Prepare(simulate.Record(truth, uint64(900+i))[0], 1000)
		if err != nil {
			t.Fatal(err)
		}
		fit, err := psd.Estimate(r, psd.Options{})
		if err != nil {
			t.Fatal(err)
		}
		if len(r.Lines) > 1 {
			extra++
		}
		if len(r.Lines) == 0 {
			t.Errorf("record %d: no line, want one at %g Hz", i, hz)
			continue
		}
		l := r.Lines[0] // in order of frequency; the chance lines so far lie above
		a.add((l.Amplitude - amplitude) / sdA)
		f.add((l.Frequency - hz) / sdF)
		if l.Low > hz || l.High < hz || l.High-l.Low > 1 {
			t.Errorf("record %d: %g to %g Hz are left out for a line at %g Hz", i, l.Low, l.High, hz)
		}
		if want := r.Length/2 - 5; len(r.Lines) == 1 && fit.Bins != want { // two frequencies to either side
			t.Errorf("record %d: %d frequencies are fitted, want %d", i, fit.Bins, want)
		}
		// The line had 4.5 % of the mean square; its removal takes three degrees of freedom of the
		// record along, each 2 P(50 Hz)/T = 4e-4 of the variance at most.
		if gap := r.MeanSquare()/whole.MeanSquare() - 1; math.Abs(gap) > 3e-3 {
			t.Errorf("record %d: without its line the mean square is off by %.2g of itself", i, gap)
		}
		sd, _ := fit.SD(alongCorner)
		corner.add(math.Log(fit.Corner/20) / sd)
		shift.add(math.Log(fit.Corner/clean.Corner) / sd)
		sd, _ = fit.SD(alongVariance)
		variance.add(math.Log(fit.Variance/rms/rms) / sd)
	}
	if extra > 1 { // 0.06 are expected by chance (see RemoveLines), and more than one with probability 0.2 %
		t.Errorf("more than one line in %d of %d records", extra, records)
	}
	for _, c := range []struct {
		what string
		m    moments
	}{{"amplitude", a}, {"frequency", f}, {"ln fc", corner}, {"ln V", variance}} {
		// 60 records: 3/sqrt(60) = 0.39 and 3/sqrt(120) = 0.27; 0.1 for a bias
		if math.Abs(c.m.mean()) > 0.49 || c.m.deviation() > 1.37 || c.m.deviation() < 0.6 {
			t.Errorf("%s: (estimate-truth)/SE has mean %.2f and spread %.2f, want 0 and 1", c.what, c.m.mean(), c.m.deviation())
		}
	}
	// five of the 10000 frequencies are left out: the estimate hardly moves
	if math.Abs(shift.mean()) > 0.05 || shift.deviation() > 0.2 {
		t.Errorf("the line moves ln fc by %.3f(%.3f) standard errors, want 0", shift.mean(), shift.deviation())
	}
}

// Mains with two harmonics, in order of frequency.
func TestSeveralLines(t *testing.T) {
	g := regime{corner: 0.02, turns: 400}
	truth := g.truth()
	truth.Axes[0].Lines = []simulate.Line{{Frequency: 150.1, Amplitude: 0.1 * rms}, {Frequency: 50.04, Amplitude: 0.3 * rms}, {Frequency: 100.08, Amplitude: 0.2 * rms}}
	r, err := psd.Prepare(simulate.Record(truth, 2)[0], 1000)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := psd.Estimate(r, psd.Options{}); err != nil {
		t.Fatal(err)
	}
	if len(r.Lines) != 3 {
		t.Fatalf("%d lines, want 3: %+v", len(r.Lines), r.Lines)
	}
	for i, want := range []float64{50.04, 100.08, 150.1} {
		if math.Abs(r.Lines[i].Frequency-want) > 0.01 { // a fifth of 1/T
			t.Errorf("line %d at %.4f Hz, want %.4f", i, r.Lines[i].Frequency, want)
		}
	}
}

// A search finds a line in 0.1 % of records without one: of 1000, one is expected and more
// than five (0.5 %) come with probability 6e-4.
func TestNoLineInCleanRecords(t *testing.T) {
	g := regime{corner: 0.05, exposure: 0.5, noise: 0.1, known: true, turns: 0.05 * 1280}
	found := 0
	for i := range 1000 {
		r, err := psd.Prepare(simulate.Record(g.truth(), uint64(5000+i))[0], 1000)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := psd.Estimate(r, g.options()); err != nil {
			t.Fatal(err)
		}
		if len(r.Lines) > 0 {
			found++
		}
	}
	if found > 5 {
		t.Errorf("lines found in %d of 1000 records without any, want at most 5", found)
	}
}

// Whoever knows better can keep them.
func TestKeepLines(t *testing.T) {
	g := regime{corner: 0.02, turns: 400}
	truth := g.truth()
	truth.Axes[0].Lines = []simulate.Line{{Frequency: 50.03, Amplitude: rms}}
	r, err := psd.Prepare(simulate.Record(truth, 2)[0], 1000)
	if err != nil {
		t.Fatal(err)
	}
	f, err := psd.Estimate(r, psd.Options{KeepLines: true})
	if err != nil {
		t.Fatal(err)
	}
	if len(r.Lines) != 0 {
		t.Errorf("lines %+v were removed", r.Lines)
	}
	if f.Goodness.PValue > 1e-6 {
		t.Errorf("p-value of a fit through a line of one rms = %.2g, want it tiny", f.Goodness.PValue)
	}
}
