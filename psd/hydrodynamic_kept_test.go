package psd

import (
	"math"
	"testing"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
)

// Without exposure and with a constant drag the variance behind a photodiode has a closed form: the low-pass part
// of a relaxation process of corner fc keeps f3dB/(f3dB + fc) of its variance.
func TestKeptClosedForm(t *testing.T) {
	for _, c := range []struct{ corner, alpha, f3dB float64 }{{500, 0.3, 8000}, {5000, 0.3, 8000}, {8000, 0, 8000}, {50, 0.9, 1e5}} {
		h := Hydrodynamic{Alpha: c.alpha, F3dB: c.f3dB}
		a := c.alpha * c.alpha
		want := a + (1-a)*c.f3dB/(c.f3dB+c.corner)
		got, slope := h.Kept(c.corner, 0)
		// the octaves that are left out hold 2e-6 at most
		if math.Abs(got-want) > 3e-6 {
			t.Errorf("%+v: kept %g, want %g", c, got, want)
		}
		wantSlope := -(1 - a) * c.f3dB * c.corner / ((c.f3dB + c.corner) * (c.f3dB + c.corner))
		if math.Abs(slope-wantSlope) > 3e-6 {
			t.Errorf("%+v: slope %g, want %g", c, slope, wantSlope)
		}
	}
	for _, a := range []float64{0, 0.1, 2} {
		s, ds := relaxation.BlurVariance(a)
		got, slope := Hydrodynamic{}.Kept(100, a/(2*math.Pi*100))
		if math.Abs(got-s) > 1e-12 || math.Abs(slope-a*ds) > 1e-12 {
			t.Errorf("a = %g: kept %g and slope %g, want %g and %g of the exposure alone", a, got, slope, s, a*ds)
		}
	}
}

// With the inertia of the liquid the integral of the spectrum is still V (equipartition), and with exposure and
// photodiode on top the variance of a simulated record is what Kept says.
func TestKeptOfRecord(t *testing.T) {
	c := cell{bead: bead{radius: 0.5e-6}, corner: 2000, rate: 100e3, samples: 1 << 18, exposure: 0.5,
		diode: &simulate.Photodiode{Alpha: 0.3, F3dB: 8000}}
	h := c.spectrum()
	if got, _ := h.Kept(c.corner, 0); math.Abs(got-1) > 1e-4 { // r = sqrt(f/f_nu) leaves 1e-5 beyond the last octave
		t.Errorf("without detector %g of the variance is kept", got)
	}
	h.Alpha, h.F3dB = c.diode.Alpha, c.diode.F3dB
	want, _ := h.Kept(c.corner, c.exposure/c.rate)
	truth, sum := c.truth(), 0.0
	const records = 8
	for seed := range uint64(records) {
		x := simulate.Record(truth, 50+seed)[0]
		for _, v := range x {
			sum += v * v / float64(len(x)) / records
		}
	}
	// relative standard deviation of the mean square: 1/sqrt(pi fc T) with T = 21 s, 0.28 %
	if got := sum / truth.Axes[0].Variance; math.Abs(got/want-1) > 0.01 {
		t.Errorf("the record keeps %.4f of the variance, Kept says %.4f", got, want)
	}
}

// With a constant drag trap and photodiode may change roles without a change of the likelihood when both parameters
// of the photodiode are fitted; a given alpha tells which is which.
func TestExchangedDiode(t *testing.T) {
	c := cell{bead: bead{radius: 0.5e-6}, corner: 2500, rate: 100e3, known: true, samples: 1 << 17, diode: &simulate.Photodiode{Alpha: 0.6, F3dB: 9000}}
	truth := c.truth()
	truth.Hydrodynamics = nil
	r, err := Prepare(simulate.Record(truth, 3)[0], c.rate)
	if err != nil {
		t.Fatal(err)
	}
	for _, free := range []bool{true, false} {
		f, err := Estimate(r, Options{KeepLines: true, Noise: Noise{Known: true}, Form: Hydrodynamic{FitAlpha: free, Alpha: 0.6, FitF3dB: true}.Form(c.rate, 0)})
		if err != nil {
			t.Fatal(err)
		}
		before, _ := f.Diode()
		other, ok := f.Exchanged(r)
		if !free {
			if ok && other.Maximum.Value > f.Maximum.Value-10 {
				t.Errorf("a given alpha leaves an exchange at fc %.0f Hz, %.2f in log-likelihood", other.Corner, other.Maximum.Value-f.Maximum.Value)
			}
			continue
		}
		if !ok {
			t.Fatal("no exchange was found")
		}
		after, _ := other.Diode()
		// both searches end at a gain of the log-likelihood below 1e-7; corners agree to its root, in standard uncertainties
		if math.Abs(other.Maximum.Value-f.Maximum.Value) > 1e-3 || math.Abs(other.Corner/before.F3dB-1) > 1e-3 || math.Abs(after.F3dB/f.Corner-1) > 1e-3 {
			t.Errorf("fc %.1f Hz, f3dB %.1f Hz become fc %.1f Hz, f3dB %.1f Hz, a change of %.2g in log-likelihood",
				f.Corner, before.F3dB, other.Corner, after.F3dB, other.Maximum.Value-f.Maximum.Value)
		}
		if want := before.Alpha * f.Corner / before.F3dB; math.Abs(f.Corner-2500) < 500 && math.Abs(after.Alpha-want) > 0.01 {
			t.Errorf("alpha %.3f becomes %.3f, want %.3f", before.Alpha, after.Alpha, want)
		}
		if d := math.Log(other.Variance / f.Variance / (other.Corner / f.Corner)); math.Abs(d) > 1e-3 {
			t.Errorf("the plateau changes by %.2g in its logarithm", d)
		}
	}
}

// One of the two parameters may be given and the other fitted: it stays, and the other comes back.
func TestHalfFreeDiode(t *testing.T) {
	c := cell{bead: bead{radius: 0.5e-6}, corner: 500, rate: 100e3, noise: 1e-3, samples: 1 << 17,
		diode: &simulate.Photodiode{Alpha: 0.3, F3dB: 8000}}
	r, err := Prepare(simulate.Record(c.truth(), 9)[0], c.rate)
	if err != nil {
		t.Fatal(err)
	}
	for _, half := range []Hydrodynamic{{FitAlpha: true, F3dB: 8000}, {Alpha: 0.3, FitF3dB: true}} {
		h := c.spectrum()
		h.Alpha, h.F3dB, h.FitAlpha, h.FitF3dB = half.Alpha, half.F3dB, half.FitAlpha, half.FitF3dB
		f, err := Estimate(r, Options{KeepLines: true, Form: h.Form(c.rate, 0)})
		if err != nil {
			t.Fatal(err)
		}
		d, _ := f.Diode()
		switch {
		case half.FitAlpha && (d.F3dB != 8000 || d.F3dBU != 0 || !(math.Abs(d.Share-0.09) < 4*d.ShareU)):
			t.Errorf("alpha fitted: %+v", d)
		case half.FitF3dB && (d.Alpha != 0.3 || d.ShareU != 0 || !(math.Abs(d.F3dB-8000) < 4*d.F3dBU)):
			t.Errorf("f3dB fitted: %+v", d)
		}
	}
}
