package psd

import (
	"errors"
	"math"
	"strings"
	"sync"
	"testing"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
)

func recordOf(t *testing.T, truth simulate.Truth, seed uint64) *Record {
	t.Helper()
	r, err := Prepare(simulate.Record(truth, seed)[0], truth.Rate)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// A record of the relaxation process gets the same estimates from the general form with
// constant drag as from the relaxation process itself.
func TestConstantDragFit(t *testing.T) {
	for _, exposure := range []float64{0, 1e-4} {
		truth := simulate.Truth{Samples: 1 << 15, Rate: 1e4, Exposure: exposure, Axes: []simulate.Axis{{Corner: 300, Variance: 1e-16, Noise: 1e-9}}}
		r := recordOf(t, truth, 3)
		want, err := Estimate(r, Options{Exposure: exposure, KeepLines: true})
		if err != nil {
			t.Fatal(err)
		}
		got, err := Estimate(r, Options{Exposure: exposure, KeepLines: true, Form: Hydrodynamic{}.Form(truth.Rate, exposure)})
		if err != nil {
			t.Fatal(err)
		}
		_, sd := want.SD(relaxation.Parameters{1, 0, 0})
		// the two treat the ends of the record differently, which is worth about one degree of
		// freedom of 2 pi fc T = 6000: a part of a standard deviation of the order of 1/sqrt(6000)
		if z := math.Log(got.Corner/want.Corner) / sd; math.Abs(z) > 0.05 {
			t.Errorf("exposure %g: fc %g and %g Hz, %.3f standard deviations apart", exposure, got.Corner, want.Corner, z)
		}
		_, gotSD := got.SD(relaxation.Parameters{1, 0, 0})
		if relative(gotSD, sd) > 0.01 {
			t.Errorf("exposure %g: standard deviations %g and %g", exposure, gotSD, sd)
		}
	}
}

// Lengths in other units: x -> s x leaves fc and multiplies V by s^2. An absolute scale
// is held by TestRecovery.
func TestHydrodynamicScale(t *testing.T) {
	c := cells()[5]
	c.samples = 1 << 13
	x := simulate.Record(c.truth(), 4)[0]
	var fits []*Fit
	for _, by := range []float64{1, 1e-3, 1e6} {
		y := make([]float64, len(x))
		for i := range x {
			y[i] = by * x[i]
		}
		r, err := Prepare(y, c.rate)
		if err != nil {
			t.Fatal(err)
		}
		f, err := Estimate(r, Options{KeepLines: true, Form: c.spectrum().Form(c.rate, 0)})
		if err != nil {
			t.Fatal(err)
		}
		fits = append(fits, f)
		// the search ends 1e-5 standard errors, that is 1e-6, from the maximum
		if relative(f.Corner, fits[0].Corner) > 1e-6 || relative(f.Variance, by*by*fits[0].Variance) > 1e-6 {
			t.Errorf("times %g: fc %g, V %g; before %g, %g", by, f.Corner, f.Variance, fits[0].Corner, fits[0].Variance)
		}
	}
}

// The fitted spectrum that a Fit draws is that of the likelihood, and a good fit passes its
// own test where one with constant drag fails.
func TestHydrodynamicGoodness(t *testing.T) {
	c := cell{bead: bead{radius: 2.5e-6}, corner: 500, rate: 100e3, noise: 1e-5, samples: 1 << 17}
	r := recordOf(t, c.truth(), 9)
	h := c.spectrum()
	right, err := Estimate(r, Options{KeepLines: true, Form: h.Form(c.rate, 0)})
	if err != nil {
		t.Fatal(err)
	}
	if right.Goodness.PValue < 0.001 {
		t.Errorf("p of the right model %g", right.Goodness.PValue)
	}
	for _, f := range []float64{1, 500, 20000, 50000} {
		got := right.Spectrum(f)
		// aliases by brute force, noise on top
		want := right.Variance*brute(h, f, c.rate, 0, right.Corner) + 2*right.NoiseQ/c.rate
		if relative(got, want) > 1e-6 { // accuracy of the aliases
			t.Errorf("Spectrum(%g) = %g, want %g", f, got, want)
		}
	}
	wrong, err := Estimate(r, Options{KeepLines: true, Noise: Noise{Known: true}})
	if err != nil {
		t.Fatal(err)
	}
	if wrong.Goodness.PValue > 1e-6 {
		t.Errorf("p of constant drag %g", wrong.Goodness.PValue)
	}
	bias, err := h.Bias(Design{Rate: c.rate, Corner: c.corner})
	if err != nil {
		t.Fatal(err)
	}
	// what Bias foretells is what happens; fc scatters by 2.4 %
	if got := wrong.Corner/c.corner - 1; math.Abs(got-bias.Corner) > 0.1 || bias.Corner > -0.3 {
		t.Errorf("constant drag gives fc %.3f off, foretold %.3f", got, bias.Corner)
	}
}

// A photodiode before constant drag has a closed form: alpha^2 times a relaxation
// spectrum, and the product of two Lorentzians by partial fractions.
func TestDiodeClosedForm(t *testing.T) {
	const rate, corner, f3dB, alpha = 20000.0, 700.0, 3000.0, 0.4
	for _, share := range []float64{0, 0.5, 1} {
		w := likelihoodOf(Hydrodynamic{Alpha: alpha, F3dB: f3dB}, relaxation.Blocks{}, rate, share/rate)
		lorentz := func(fc float64) relaxation.Process { // 1/(fc^2 + f^2) = pi/fc times it
			return relaxation.Process{Corner: fc, Variance: 1, Interval: 1 / rate, Exposure: share / rate}
		}
		for _, f := range []float64{0, 300, 5000, 10000} {
			both := f3dB * f3dB / (f3dB*f3dB - corner*corner) * (lorentz(corner).Spectrum(f) - corner/f3dB*lorentz(f3dB).Spectrum(f))
			want := 2 * (alpha*alpha*lorentz(corner).Spectrum(f) + (1-alpha*alpha)*both)
			got := w.Density(relaxation.Parameters{math.Log(corner / rate), 0, 0}, f)
			if relative(got, want) > 1e-7 { // the summed part falls as 1/f^4
				t.Errorf("share %g, f %g: %g, want %g", share, f, got, want)
			}
		}
	}
}

// A detector without low-pass, fitted with one: alpha ends at 1, or f3dB where it does
// nothing, and fc is what it is without.
func TestFreeDiodeAbsent(t *testing.T) {
	c := cell{bead: bead{radius: 0.5e-6}, corner: 500, rate: 20e3, known: true, samples: 1 << 14}
	r := recordOf(t, c.truth(), 21)
	h := c.spectrum()
	o := Options{KeepLines: true, Noise: Noise{Known: true}, Form: h.Form(c.rate, 0)}
	without, err := Estimate(r, o)
	if err != nil {
		t.Fatal(err)
	}
	if _, ok := without.Diode(); ok {
		t.Error("a photodiode is reported that was not fitted")
	}
	h.FitAlpha, h.FitF3dB = true, true
	o.Form = h.Form(c.rate, 0)
	with, err := Estimate(r, o)
	if err != nil {
		t.Fatal(err)
	}
	d, ok := with.Diode()
	if !ok || !(d.Alpha >= 0 && d.Alpha <= 1 && d.F3dB > 0) {
		t.Errorf("fitted photodiode %+v, %t", d, ok)
	}
	_, sd := with.SD(relaxation.Parameters{1, 0, 0})
	// more parameters move an estimate by less than the growth of its uncertainty allows
	if z := math.Log(with.Corner/without.Corner) / sd; math.Abs(z) > 3 {
		t.Errorf("fc %g with, %g Hz without, %.1f standard deviations apart", with.Corner, without.Corner, z)
	}
	if v := with.Maximum.Value - without.Maximum.Value; v < -1e-6 {
		t.Errorf("two more parameters lowered the log-likelihood by %g", -v)
	}
}

func TestHydrodynamicCheck(t *testing.T) {
	if err := (Hydrodynamic{}).Check(); err != nil {
		t.Error(err)
	}
	for text, h := range map[string]Hydrodynamic{
		"mass":  {MassCorner: -1},
		"alpha": {Alpha: 1.2, F3dB: 1},
		"f3dB":  {F3dB: math.NaN()},
	} {
		if err := h.Check(); err == nil || !strings.Contains(err.Error(), text) {
			t.Errorf("%+v: error %v does not name %s", h, err, text)
		}
	}
}

// Degenerate inputs give an error, or minus infinity, never a panic.
func TestHydrodynamicDegenerate(t *testing.T) {
	for _, h := range []Hydrodynamic{{}, {FitAlpha: true, FitF3dB: true, F3dB: 200, Alpha: 0.5}, {Drag: func(float64) complex128 { return complex(-1, 0) }}} {
		form := h.Form(1000, 0)
		white := make([]float64, 200)
		for i := range white {
			white[i] = math.Mod(float64(i)*0.6180339887, 1)
		}
		r, err := Prepare(white, 1000)
		if err != nil {
			t.Fatal(err)
		}
		l := form(r.blocks(Range{}, nil), 1)
		for _, p := range []relaxation.Parameters{{math.NaN(), 0, 0}, {0, math.NaN(), 0}, {0, 0, math.NaN()}, {100, 0, 0}, {-100, 0, 0}, {-1, 0, -1e9}, {-1, 100, 0}} {
			v, _, _ := l.Score(p)
			if !math.IsInf(v, -1) || !math.IsInf(l.Value(p), -1) {
				t.Errorf("at %v: Score %g, Value %g", p, v, l.Value(p))
			}
		}
		if h.FitAlpha { // here it is only slow
			continue
		}
		if f, err := Estimate(r, Options{Form: form, KeepLines: true}); err == nil && !(f.Corner > 0) {
			t.Errorf("white noise: fc %g without an error", f.Corner)
		}
	}
	r, _ := Prepare(make([]float64, 100), 1000)
	if _, err := Estimate(r, Options{Form: Hydrodynamic{}.Form(1000, 0)}); !errors.Is(err, ErrTooShort) {
		t.Errorf("a constant record: %v", err)
	}
}

// The same numbers from several goroutines at once.
func TestHydrodynamicConcurrent(t *testing.T) {
	b := lorentzBlocks(4096, 0.01)
	l := bead{radius: 1e-6}.spectrum().Form(5e4, 0)(b, 1).(*whittle)
	var group sync.WaitGroup
	got := make([][2]float64, 8)
	for i := range got {
		group.Go(func() {
			p := relaxation.Parameters{math.Log(0.01 + 0.001*float64(i%2)), 0, 0}
			for range 20 {
				got[i] = [2]float64{l.Value(p), l.Density(p, 100)}
			}
		})
	}
	group.Wait()
	for i := range got {
		if got[i] != got[i%2] {
			t.Errorf("goroutine %d: %v, want %v", i, got[i], got[i%2])
		}
	}
}
