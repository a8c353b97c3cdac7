package calib

import (
	"context"
	"errors"
	"math"
	"testing"

	"beadwell/calib/simulate"
)

// companion is another recording of a stage; role and more settings as given.
func (s stage) companion(t testing.TB, seed uint64, stated stage, more map[string]string) Companion {
	t.Helper()
	rec := s.recording(t, seed)
	return Companion{Recording: rec, Settings: stated.settingsWith(t, more)}
}

// free is the bead of the stage with the laser off, for a second.
func (s stage) free(t testing.TB, seed uint64) Companion {
	t.Helper()
	rec := s.recording(t, seed)
	truth := s.simulated(t)
	truth.Samples = int(s.rate)
	for i := range truth.Axes {
		a := &truth.Axes[i]
		a.Diffusion = 2 * math.Pi * a.Corner * a.Variance
		a.Corner, a.Variance = 0, 0
	}
	rec.Samples = truth.Samples
	for i, x := range simulate.Record(truth, seed) {
		for j := range x {
			x[j] /= s.pixel
		}
		rec.Axes[i].Values = x
	}
	return Companion{Recording: rec, Settings: s.settingsWith(t, map[string]string{"role": RoleFree})}
}

// A trap that the laser heats by 8 K, which nobody stated: one recording alone cannot tell it from a wrong scale, and
// with a free bead, recorded without the laser, it is the only cause.
func TestFreeBeadTellsHeating(t *testing.T) {
	hot, stated := ordinary(), ordinary()
	hot.kelvin += 8
	rec := hot.recording(t, 1)
	alone, err := Calibrate(context.Background(), rec, stated.settings(t), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if found := tied(alone.Diagnosis); len(found) < 3 {
		t.Errorf("one recording alone ties %d causes: %s", len(found), alone.Diagnosis.Text)
	}
	free := stated.free(t, 2)
	r, err := Calibrate(context.Background(), rec, stated.settings(t), Options{Companions: []Companion{free}})
	if err != nil {
		t.Fatal(err)
	}
	found := tied(r.Diagnosis)
	c, ok := found[CauseHeating]
	if !ok || len(found) != 1 {
		t.Fatalf("with a free bead %d causes are tied: %s", len(found), r.Diagnosis.Text)
	}
	// four standard uncertainties
	if d := float64(c.Needed.Value) - hot.kelvin; math.Abs(d) > 4*float64(c.Needed.Combined.Standard) {
		t.Errorf("the trap is off by %.2f K with a standard uncertainty of %.2f K", d, float64(c.Needed.Combined.Standard))
	}
	if c.Caution == "" || len(r.Diagnosis.Companions) != 1 || r.Diagnosis.Companions[0] != "simulated" {
		t.Errorf("caution %q, companions %v", c.Caution, r.Diagnosis.Companions)
	}
}

// Recordings at three heights, all stated twice as large as they are: only the heights explain all three.
func TestHeightsTellHeight(t *testing.T) {
	at := func(height float64, seed uint64) Companion {
		truth, stated := ordinary(), ordinary()
		truth.height, stated.height = height, 2*height
		return truth.companion(t, seed, stated, nil)
	}
	main := at(0.7e-6, 1)
	r, err := Calibrate(context.Background(), main.Recording, main.Settings, Options{Companions: []Companion{at(1.4e-6, 2), at(5e-6, 3)}})
	if err != nil {
		t.Fatal(err)
	}
	for key, c := range tied(r.Diagnosis) {
		if c.Code != CauseHeight {
			t.Errorf("%s is tied with the height: %s", key, r.Diagnosis.Text)
		}
	}
	c := r.Diagnosis.Causes[0]
	if c.Name != "factor on all heights" || math.Abs(float64(c.Needed.Value)-0.7e-6) > 4*float64(c.Needed.Combined.Standard) {
		t.Errorf("first cause %q needs %v, want a factor that makes 0.7 um of 1.4 um", c.Name, c.Needed)
	}
}

// A free bead whose drag is not the computed one has a diagnosis of its own, in which nothing of a trap stands.
func TestFreeBeadHasADiagnosis(t *testing.T) {
	s := ordinary()
	free := s.free(t, 3)
	stated := s
	stated.pixel = 0.9 * s.pixel
	r, err := Calibrate(context.Background(), free.Recording, stated.settingsWith(t, map[string]string{"role": RoleFree}), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if r.Diagnosis == nil {
		t.Fatalf("no diagnosis: %s", r.Verdict.Reason)
	}
	found := tied(r.Diagnosis)
	for _, code := range []string{CauseScale, CauseDiameter, CauseViscosity} {
		if _, ok := found[code]; !ok {
			t.Errorf("%s is not in the tie: %s", code, r.Diagnosis.Text)
		}
	}
	for _, c := range r.Diagnosis.Causes {
		if c.Code == CauseDrift || c.Code == CauseInertia || c.Code == CauseHeating {
			t.Errorf("%s is a cause of a free bead", c.Code)
		}
	}
}

// A recording without a bead that moves is no companion.
func TestBackgroundIsNoCompanion(t *testing.T) {
	f := faults[0]
	truth, stated := ordinary(), ordinary()
	f.truth(&truth)
	f.stated(&stated)
	other := truth.companion(t, 2, stated, map[string]string{"role": RoleBackground})
	_, err := Calibrate(context.Background(), truth.recording(t, 1), stated.settings(t), Options{Companions: []Companion{other}})
	var wrong *SettingError
	if !errors.As(err, &wrong) || wrong.Key != "recording.companions" {
		t.Errorf("err = %v, want one of recording.companions", err)
	}
}
