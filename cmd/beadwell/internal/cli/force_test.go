package cli

import (
	"math"
	"testing"

	"beadwell/calib"
)

// Thermal displacements that the calibration was too short to see are not told; a pull is, also a short one.
func TestFarOut(t *testing.T) {
	summary := func(beyond int, furthest float64) calib.ForceSummary {
		return calib.ForceSummary{Samples: 2100, Missing: 100, Beyond: beyond, Furthest: calib.Float(furthest), Linear: [2]calib.Float{-25e-9, 30e-9}}
	}
	for _, c := range []struct {
		beyond   int
		furthest float64
		want     bool
	}{
		{0, 20e-9, false}, {5, 45e-9, false}, {5, -45e-9, false}, {21, 45e-9, true}, {1, 61e-9, true}, {1, -51e-9, true}, {1, 51e-9, false},
	} {
		if got := farOut(summary(c.beyond, c.furthest)); got != c.want {
			t.Errorf("farOut of %d samples up to %g m = %v, want %v", c.beyond, c.furthest, got, c.want)
		}
	}
	unknown := summary(0, 1e-6)
	unknown.Linear = [2]calib.Float{calib.Float(math.NaN()), calib.Float(math.NaN())}
	if farOut(unknown) {
		t.Error("told without a range")
	}
}

// Every form of a centre, and what is none.
func TestParseCentre(t *testing.T) {
	for text, want := range map[string]string{
		"mean": "mean of the whole recording", " mean ": "mean of the whole recording", "calibration": "mean position of the calibration",
		"mean 0.5 s to 2 s": "mean from 0.5 s to 2 s", "1.2(1) um": "as given", "x=1 um, y = 2 um": "as given",
	} {
		c, err := parseCentre(text)
		if err != nil || c.words() != want {
			t.Errorf("parseCentre(%q) = %q, %v, want %q", text, c.words(), err, want)
		}
	}
	for _, text := range []string{"", "mean 2 s", "mean 2 s to 2 s", "mean 1 um to 2 um", "1.2", "x=", "x=1 um,x=2 um", "q=1 um", "=1 um", "1 um, 2 um", "1 V"} {
		if c, err := parseCentre(text); err == nil {
			t.Errorf("parseCentre(%q) = %+v, want an error", text, c)
		}
	}
	c, err := parseCentre("x=1.20(1) um, y=2 um")
	if err != nil || math.Abs(c.values["x"].SI-1.2e-6) > 1e-20 || math.Abs(c.values["x"].U-1e-8) > 1e-20 || c.values["y"].U != 0 {
		t.Errorf("values %+v, %v", c.values, err)
	}
}
