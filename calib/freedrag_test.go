package calib

import (
	"context"
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"beadwell/calib/medium"
	"beadwell/calib/simulate"
	"beadwell/calib/track"
)

// freeRecord makes a recording of the free bead of a scene.
func (s scene) freeRecord(t *testing.T, seed uint64) *track.Recording {
	t.Helper()
	gamma := s.gamma(t)
	rec := s.like(t, simulate.Axis{Diffusion: medium.Boltzmann * s.kelvin / gamma, Noise: s.noise}, seed)
	rec.Name = "free.csv"
	return rec
}

// measuredFree is the drag that a recording of the free bead gives.
func measuredFree(t *testing.T, rec *track.Recording, s scene) *FreeBeadDrag {
	t.Helper()
	f, err := MeasureFreeDrag(context.Background(), rec, s.with("role", "free").set(t))
	if err != nil {
		t.Fatal(err)
	}
	return f
}

// inPixels turns a recording into one of a camera with a pixel of a length [m].
func inPixels(rec *track.Recording, pixel float64) *track.Recording {
	rec = inVolts(rec, pixel)
	for i := range rec.Axes {
		rec.Axes[i].Unit = "px"
	}
	return rec
}

// freePair is a bead in the trap and free, with stated inputs that err by what is stated of them.
type freePair struct {
	trapped, free scene
	pixel         float64 // true length of a pixel [m]; 0: positions in metres
	volts         bool    // the trapped one is in volts, without a sensitivity
}

func (p freePair) calibrate(t *testing.T, seed uint64, opt Options) *Result {
	t.Helper()
	trapped, free := p.trapped.record(t, 2*seed), p.free.freeRecord(t, 2*seed+1)
	switch {
	case p.volts:
		trapped = inVolts(trapped, 1.31e-6)
	case p.pixel > 0:
		trapped, free = inPixels(trapped, p.pixel), inPixels(free, p.pixel)
	}
	opt.FreeBead = append(opt.FreeBead, measuredFree(t, free, p.free))
	r, err := Calibrate(context.Background(), trapped, p.trapped.set(t), opt)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// erring draws true inputs about what is stated: a bead of 1.00(4) um, 25.0(5) C, heights of 3.0(3) um free and 5.0(3) um
// in the trap, a pixel of 100(3) nm.
func erring(rng *rand.Rand) freePair {
	s := usual().with("bead.diameter", "1.00(4) um").with("medium.temperature", "25.0(5) C").with("chamber.height", "5.0(3) um").with("recording.pixel", "100(3) nm")
	s.diameter *= 1 + 0.04*rng.NormFloat64()
	s.kelvin += 0.5 * rng.NormFloat64()
	free := s.with("chamber.height", "3.0(2) um")
	s.samples, free.height, free.samples = 5000, 3e-6+0.2e-6*rng.NormFloat64(), 5000
	s.height += 0.3e-6 * rng.NormFloat64()
	return freePair{trapped: s, free: free, pixel: 100e-9 * (1 + 0.03*rng.NormFloat64())}
}

// Over recordings whose inputs err by what is stated, the combined intervals of the stiffness by the free bead's drag
// and of the adopted one hold the truth in 95 % of cases, both are unbiased, and the test of the three drags rejects 5 %. The bounds are those of
// TestCoverage. Lengths in metres, where the scale is exact; in pixels, whose length both recordings share; in volts in the trap.
func TestFreeDragCoverage(t *testing.T) {
	const n = 120
	for _, kind := range []string{"metres", "pixels", "volts"} {
		rng := rand.New(rand.NewPCG(5, uint64(len(kind))))
		inside, sum, square, alarms, before, after := map[string]int{}, map[string]float64{}, map[string]float64{}, 0, 0.0, 0.0
		for seed := range uint64(n) {
			p := erring(rng)
			if kind != "pixels" {
				p.pixel = 0
			}
			p.volts = kind == "volts"
			a := p.calibrate(t, seed+1, Options{}).Axes[0]
			for name, q := range map[string]Quantity{LegFreeDrag: a.leg(LegFreeDrag), "adopted": a.Adopted.Stiffness} {
				if !q.Known() { // inconsistent, at the level of 0.005; those after it are too few to matter
					q = a.leg(LegFreeDrag)
				}
				if i := q.Combined.Interval95; float64(i[0]) <= p.trapped.kappa && p.trapped.kappa <= float64(i[1]) {
					inside[name]++
				}
				z := math.Log(float64(q.Value)/p.trapped.kappa) * float64(q.Value/q.Combined.Standard)
				sum[name] += z
				square[name] += z * z
			}
			if a.FreeDrag.Test.PValueCombined < 0.05 {
				alarms++
			}
			if q := a.Adopted.Stiffness; q.Known() {
				before += float64(a.leg(LegSpectrum).Combined.Standard)
				after += float64(q.Combined.Standard)
			}
		}
		for name, k := range inside {
			if off := math.Abs(float64(k) - 0.95*n); off > 3.5*math.Sqrt(0.0475*n) {
				t.Errorf("%s: the 95 %% interval of %s holds the truth in %d of %d", kind, name, k, n)
			}
			mean := sum[name] / n
			if math.Abs(mean) > 0.2+3.5/math.Sqrt(n) {
				t.Errorf("%s: bias of %s is %.2f of its uncertainty", kind, name, mean)
			}
			// a chi-square of 120 has a relative sd of 0.13; 3.5 of them
			if s := square[name] / n; s < 0.55 || s > 1.45 {
				t.Errorf("%s: the mean square of %s over its uncertainty is %.2f, want 1", kind, name, s)
			}
		}
		if alarms > 14 { // 6 expected, 3.5 standard deviations of 2.4
			t.Errorf("%s: the test rejects %d of %d", kind, alarms, n)
		}
		t.Logf("%s: inside %v, alarms %d, mean uncertainty %.3g of %.3g N/m", kind, inside, alarms, after/n, before/n)
		if kind == "metres" && !(after < before) {
			t.Errorf("%s: the free bead does not help: %g, computed drag alone %g", kind, after/n, before/n)
		}
	}
}

// What two recordings share acts once: with equal heights and temperatures the carried drag has nothing of the bead's diameter
// and of the liquid, and the length scale enters to the power -2. Worked by hand: gamma = kT/D, so that 3 % of a pixel make 6 %.
func TestFreeDragSharesInputs(t *testing.T) {
	s := usual().with("bead.diameter", "1.00(4) um").with("medium.temperature", "25.0(5) C").with("recording.pixel", "100(3) nm")
	a := freePair{trapped: s, free: s, pixel: 100e-9}.calibrate(t, 3, Options{}).Axes[0]
	f := a.FreeDrag
	inputs := func(q Quantity) float64 {
		return math.Sqrt(math.Pow(float64(q.Combined.Standard/q.Value), 2) - math.Pow(float64(q.Statistical.Standard/q.Value), 2))
	}
	// kT of 0.5 K in 298.15 K: 0.17 %
	if got, want := inputs(f.Drag), math.Hypot(0.06, 0.5/298.15); math.Abs(got-want) > 1e-9 {
		t.Errorf("inputs give the carried drag %.6f, want %.6f", got, want)
	}
	if f.LengthPower != -2 {
		t.Errorf("the carried drag goes with length to the power %g, want -2", float64(f.LengthPower))
	}
	// the ratio has the diameter and the viscosity, 1.0593 x 4 % and -6.793 + 1 of the temperature, besides
	slope := 2.28*0.5/100 + 0.5/298.15
	if got, want := inputs(f.Ratio), math.Sqrt(0.06*0.06+math.Pow(1.0593*0.04, 2)+slope*slope); math.Abs(got-want) > 2e-3*want {
		t.Errorf("inputs give the ratio %.5f, want %.5f", got, want)
	}
	// other pixels: the scale of the free bead is an input of its own
	other := freePair{trapped: s, free: s.with("recording.pixel", "100(2) nm"), pixel: 100e-9}.calibrate(t, 3, Options{}).Axes[0]
	if got, want := inputs(other.FreeDrag.Drag), math.Hypot(0.04, 0.5/298.15); math.Abs(got-want) > 1e-9 || other.FreeDrag.LengthPower != 0 {
		t.Errorf("an own pixel gives the carried drag %.6f, want %.6f", got, want)
	}
	if a.Drag.Value != other.Drag.Value || math.Abs(float64(a.Drag.Value)-usualDrag) > 1e-4*usualDrag {
		t.Errorf("the computed drag is %g, want that of Stokes and wall, %g", float64(a.Drag.Value), usualDrag)
	}
}

// Several recordings of the free bead count by their precision, those that say nothing are told, and a result says which were used.
func TestSeveralFreeBeads(t *testing.T) {
	s := usual()
	long, short := s, s
	long.samples, short.samples = 16000, 4000
	one, two := measuredFree(t, long.freeRecord(t, 5), long), measuredFree(t, short.freeRecord(t, 6), short)
	volts := measuredFree(t, inVolts(s.freeRecord(t, 7), 1e-6), s)
	volts.name = "volts.csv"
	r, err := Calibrate(context.Background(), s.record(t, 8), s.set(t), Options{FreeBead: []*FreeBeadDrag{one, two, volts, UnusableFreeBead("gone.csv", fmt.Errorf("no such file"))}})
	if err != nil {
		t.Fatal(err)
	}
	f := r.Axes[0].FreeDrag
	if len(f.Recordings) != 2 || math.Abs(float64(f.Recordings[0].Weight)-0.8) > 0.02 || f.Recordings[0].Name != "free.csv" {
		t.Errorf("used %+v, want two with weights 0.8 and 0.2", f.Recordings)
	}
	// one displacement gives ln D to sqrt(2) at best, 20000 of them to 1 %
	if u := float64(f.Ratio.Statistical.Standard); math.Abs(u-0.01) > 5e-4 {
		t.Errorf("both together give the ratio to %.4f, want 0.0100", u)
	}
	text, _ := json.Marshal(r.Findings)
	for _, want := range []string{CodeFreeUnused, "volts.csv: its positions are in V", "gone.csv: no such file"} {
		if !strings.Contains(string(text), want) {
			t.Errorf("findings do not say %q: %s", want, text)
		}
	}
}

// A bead 15 % larger than stated: the computed drag is wrong, and the free bead agrees with the drag in the trap. Nothing is
// adopted unless asked for, and then the free bead gives the right stiffness.
func TestFreeDragShowsAWrongBead(t *testing.T) {
	s := usual()
	s.diameter = 1.15e-6
	p := freePair{trapped: s, free: s}
	r := p.calibrate(t, 4, Options{})
	a := r.Axes[0]
	if r.Verdict.Status != Inconsistent || a.Adopted.Stiffness.Known() || a.FreeDrag.Share != 0 || !strings.Contains(a.Adopted.Withheld, "--adopt free-bead") {
		t.Errorf("verdict %+v, adopted %+v", r.Verdict, a.Adopted)
	}
	if !strings.Contains(a.FreeDrag.Text, "% above the computed one and ") {
		t.Errorf("text %q", a.FreeDrag.Text)
	}
	got := p.calibrate(t, 4, Options{Adopt: RouteFreeBead}).Axes[0].Adopted
	if d := float64(got.Stiffness.Value)/s.kappa - 1; math.Abs(d) > 4*float64(got.Stiffness.Combined.Standard)/s.kappa || got.Basis != "corner frequency and free bead's drag" {
		t.Errorf("by the free bead %+v, want %g", got, s.kappa)
	}
	if _, err := Calibrate(context.Background(), s.record(t, 4), s.set(t), Options{Adopt: RouteFreeBead}); err == nil || !strings.Contains(err.Error(), "no recording of the free bead") {
		t.Errorf("without a free bead: %v", err)
	}
}

// The budget and the draws hold with a free bead: contributions add up to the combined uncertainty, and draws agree with it.
func TestFreeDragBudget(t *testing.T) {
	p := erring(rand.New(rand.NewPCG(1, 1)))
	r := p.calibrate(t, 9, Options{MonteCarlo: MonteCarloOptions{Draws: 40000, Seed: 1}})
	a := r.Axes[0].Adopted
	sum, has := 0.0, false
	for _, l := range a.Budget {
		sum += float64(l.Contribution * l.Contribution)
		has = has || l.Input == freeStatistics && l.Contribution > 0
	}
	if u := float64(a.Stiffness.Combined.Standard / a.Stiffness.Value); math.Abs(math.Sqrt(sum)-u) > 1e-3*u || !has {
		t.Errorf("the budget adds up to %g, want %g: %+v", math.Sqrt(sum), u, a.Budget)
	}
	// 40000 draws give a standard deviation to 0.35 %, and curvature adds to it
	m := r.MonteCarlo.Axes[0]
	if d := float64(m.Standard/a.Stiffness.Combined.Standard) - 1; math.Abs(d) > 0.03 {
		t.Errorf("the draws give %g, the budget %g", float64(m.Standard), float64(a.Stiffness.Combined.Standard))
	}
}
