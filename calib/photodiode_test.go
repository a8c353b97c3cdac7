package calib

import (
	"context"
	"math"
	"strings"
	"testing"

	"beadwell/calib/simulate"
	"beadwell/calib/track"
	"beadwell/psd"
)

// behind makes a recording of the scene that is seen through a photodiode.
func (s scene) behind(t *testing.T, seed uint64, diode simulate.Photodiode) *track.Recording {
	t.Helper()
	rec := s.record(t, seed)
	truth := simulate.Truth{Samples: s.samples, Rate: s.rate, Exposure: s.exposure, Photodiode: &diode}
	truth.Axes = s.trapped(t)
	for i, x := range simulate.Record(truth, seed) {
		rec.Axes[i].Values = x
	}
	return rec
}

// quick is a scene of a fast detector with a constant drag.
func quick() scene {
	s := usual().with("fit.drag", "constant")
	s.rate, s.samples, s.axes = 50e3, 1<<16, []string{"x"}
	return s
}

var silicon = simulate.Photodiode{Alpha: 0.3, F3dB: 8000}

// A photodiode takes a twentieth of the variance, and no estimate may keep that: each is right within its uncertainty, on
// average too, with the photodiode stated and with it fitted.
func TestPhotodiodeEstimates(t *testing.T) {
	const n = 20
	for name, s := range map[string]scene{
		"stated": quick().with("detector.alpha", "0.3").with("detector.f3db", "8 kHz"),
		"fitted": quick().with("detector.f3db", "fit"),
	} {
		sum := map[string]float64{}
		square := map[string]float64{}
		covered := 0
		add := func(what string, z float64) { sum[what] += z / n; square[what] += z * z / n }
		for seed := range uint64(n) {
			a := calibrated(t, s.behind(t, 300+seed, silicon), s).Axes[0]
			for _, leg := range legNames {
				if q := a.leg(leg); q.Known() {
					add(leg, math.Log(float64(q.Value)/s.kappa)/float64(q.Statistical.Standard/q.Value))
				}
			}
			q := a.leg(LegSpectrum)
			if i := q.Statistical.Interval95; float64(i[0]) <= s.kappa && s.kappa <= float64(i[1]) {
				covered++
			}
			if d := a.Photodiode; name == "fitted" {
				// the interval of alpha is that of its square
				root, u := float64(d.Alpha.Value), float64(d.Alpha.Statistical.Standard)
				add("alpha", (root*root-0.09)/(2*root*u))
				add("f3dB", math.Log(float64(d.F3dB.Value)/8000)/float64(d.F3dB.Statistical.Standard/d.F3dB.Value))
				if d.WithF3dB > -0.05 || d.AlphaOrigin != diodeFitted || d.F3dBOrigin != diodeFitted {
					t.Fatalf("photodiode %+v", d)
				}
			}
		}
		if len(sum) < 3 {
			t.Fatalf("%s: only %v", name, sum)
		}
		for what, mean := range sum {
			// at a standard normal z the mean of 20 has 1/sqrt(20), and the mean square sqrt(2/20) = 0.32: 3.5 of each, upwards
			if math.Abs(mean) > 3.5/math.Sqrt(n) || square[what] > 1+3.5*math.Sqrt(2.0/n) {
				t.Errorf("%s: z of %s has the mean %.2f and the mean square %.2f", name, what, mean, square[what])
			}
		}
		if covered < 16 { // fewer than 16 of 20 with a chance of 0.95 each: 0.3 %
			t.Errorf("%s: the interval by drag holds the truth in %d of %d", name, covered, n)
		}
	}
}

// The uncertainty of the stiffness by drag is larger when the photodiode is fitted, and a stated uncertainty of f3dB enters it
// with the derivative of the corner frequency.
func TestPhotodiodeUncertainty(t *testing.T) {
	stated := quick().with("detector.alpha", "0.3").with("detector.f3db", "8 kHz")
	rec := stated.behind(t, 11, silicon)
	exact := calibrated(t, rec, stated).Axes[0].leg(LegSpectrum)
	fitted := calibrated(t, rec, quick().with("detector.f3db", "fit")).Axes[0].leg(LegSpectrum)
	if fitted.Statistical.Standard < 1.1*exact.Statistical.Standard {
		t.Errorf("fitted %v, stated %v: the photodiode costs nothing", fitted.Statistical, exact.Statistical)
	}
	loose := calibrated(t, rec, quick().with("detector.alpha", "0.3").with("detector.f3db", "8.0(8) kHz")).Axes[0]
	up := calibrated(t, rec, quick().with("detector.alpha", "0.3").with("detector.f3db", "8.8 kHz")).Axes[0].leg(LegSpectrum)
	q := loose.leg(LegSpectrum)
	got := math.Sqrt(float64(q.Combined.Standard*q.Combined.Standard-exact.Combined.Standard*exact.Combined.Standard)) / float64(q.Value)
	want := math.Abs(math.Log(float64(up.Value / exact.Value)))
	if math.Abs(got/want-1) > 0.02 || want < 0.001 { // the search ends within 1e-4 of a standard uncertainty
		t.Errorf("an uncertainty of 10 %% in f3dB adds %.3g, a fit with f3dB 10 %% higher moves by %.3g", got, want)
	}
	found := false
	for _, l := range loose.Adopted.Budget {
		found = found || l.Input == f3dbLine && l.StandardUncertainty == 800 && l.Contribution > 0
	}
	if !found {
		t.Errorf("the budget has no line of f3dB: %+v", loose.Adopted.Budget)
	}
}

// What a recording does not show of a photodiode is withheld, with a finding; one of the two may be stated.
func TestPhotodiodeNotDetermined(t *testing.T) {
	code := func(r *Result, code string) (Finding, bool) {
		for _, f := range r.Findings {
			if f.Code == code {
				return f, true
			}
		}
		return Finding{}, false
	}
	none := quick().with("detector.f3db", "fit") // no photodiode there
	r := calibrated(t, none.behind(t, 5, simulate.Photodiode{Alpha: 1, F3dB: 8000}), none)
	if p := r.Axes[0].Photodiode; p.F3dB.Known() {
		t.Errorf("f3dB %v of a detector without one", p.F3dB)
	}
	if f, ok := code(r, CodeDiode); !ok || f.Severity != Doubtful || !strings.Contains(f.Text, "f3dB") {
		t.Errorf("no finding: %+v", r.Findings)
	}
	if k := r.Axes[0].Adopted.Stiffness; math.Abs(float64(k.Value)-none.kappa) > 4*float64(k.Statistical.Standard) {
		t.Errorf("stiffness %v", k)
	}
	half := quick().with("detector.f3db", "fit").with("detector.alpha", "0.3")
	r = calibrated(t, half.behind(t, 6, silicon), half)
	p := r.Axes[0].Photodiode
	if p.AlphaOrigin != diodeStated || p.Alpha.Value != 0.3 || math.Abs(float64(p.F3dB.Value)-8000) > 4*float64(p.F3dB.Combined.Standard) {
		t.Errorf("alpha stated, f3dB fitted: %+v", p)
	}
	other := quick().with("detector.f3db", "8 kHz").with("detector.alpha", "fit")
	p = calibrated(t, other.behind(t, 7, silicon), other).Axes[0].Photodiode
	if p.F3dBOrigin != diodeStated || p.F3dB.Value != 8000 || math.Abs(float64(p.Alpha.Value)-0.3) > 4*float64(p.Alpha.Combined.Standard) {
		t.Errorf("f3dB stated, alpha fitted: %+v", p)
	}
	prompt := quick().with("detector.f3db", "fit") // nothing prompt: alpha has only a bound
	r = calibrated(t, prompt.behind(t, 8, simulate.Photodiode{Alpha: 0, F3dB: 8000}), prompt)
	if p := r.Axes[0].Photodiode; p.Alpha.Known() || !p.F3dB.Known() {
		t.Errorf("alpha %v, f3dB %v, want a bound for alpha of 0", p.Alpha, p.F3dB)
	}
	if f, ok := code(r, CodeDiode); !ok || f.Severity != Note {
		t.Errorf("no note on alpha: %+v", r.Findings)
	}
}

// A stiff trap and a photodiode can change roles: the computed drag tells them apart; without a length it cannot, and
// the slower one is taken and said.
func TestPhotodiodeOrTrap(t *testing.T) {
	s := quick().with("detector.f3db", "fit").with("recording.noise", "0")
	s.kappa *= 5 // fc 2.5 kHz
	rec := s.behind(t, 4, silicon)
	r := calibrated(t, rec, s)
	a := r.Axes[0]
	if fc, f3dB := float64(a.Spectrum.Corner.Value), float64(a.Photodiode.F3dB.Value); math.Abs(fc/2500-1) > 0.2 || math.Abs(f3dB/8000-1) > 0.2 {
		t.Errorf("fc %g Hz, f3dB %g Hz", fc, f3dB)
	}
	has := func(r *Result) bool {
		for _, f := range r.Findings {
			if f.Code == CodeDiodeRoles {
				return true
			}
		}
		return false
	}
	if has(r) {
		t.Error("the computed drag does not tell trap and photodiode apart")
	}
	r = calibrated(t, inVolts(rec, 1e-6), s)
	if fc := float64(r.Axes[0].Spectrum.Corner.Value); math.Abs(fc/2500-1) > 0.2 || !has(r) {
		t.Errorf("in volts: fc %g Hz, finding %t", fc, has(r))
	}
}

// The bias that decides on frequency-dependent drag is that of constant drag behind the same photodiode, not of a plain
// Lorentz curve: with a bead of 1 um and fc = 500 Hz up to 25 kHz it is 2 to 10 %.
func TestPhotodiodeAndInertia(t *testing.T) {
	s := quick().with("fit.drag", "auto").with("detector.alpha", "0.3").with("detector.f3db", "8 kHz").with("bead.density", "1.05 g/cm3")
	rec := s.behind(t, 3, silicon)
	w, err := newWork(rec, 0, s.set(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	h, _ := w.hydrodynamic(true)
	bias, err := h.Bias(psd.Design{Rate: s.rate, Corner: 500})
	if err != nil {
		t.Fatal(err)
	}
	if b := -bias.Corner; b < 0.02 || b > 0.1 {
		t.Errorf("constant drag would lower fc by %.3g", b)
	}
	if _, err := Calibrate(context.Background(), rec, s.set(t), Options{}); err != nil {
		t.Error(err)
	}
}
