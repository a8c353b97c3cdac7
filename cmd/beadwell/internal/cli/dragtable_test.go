package cli

import (
	"math"
	"testing"

	"beadwell/calib/session"
)

// dragSettings are a bead in water near a surface, each with an uncertainty.
func dragSettings(t *testing.T, texts map[string]string) *session.Settings {
	t.Helper()
	var flags session.Settings
	for key, text := range texts {
		if err := flags.Set(key, "", text, session.FromFlag, ""); err != nil {
			t.Fatal(err)
		}
	}
	settings, err := session.ForTrack(session.Sources{Flags: &flags})
	if err != nil {
		t.Fatal(err)
	}
	return settings
}

// oneRow is the row for one bead and one height.
func oneRow(t *testing.T, texts map[string]string, height, stiffness measure) dragRow {
	t.Helper()
	in, err := newDragInput(dragSettings(t, texts), stiffness)
	if err != nil {
		t.Fatal(err)
	}
	row, err := in.row(height, false)
	if err != nil {
		t.Fatal(err)
	}
	return row
}

// Each input alone moves drag, diffusion and corner frequency by what the
// uncertainty says: half the difference between the input one standard
// uncertainty up and down. First order and differences agree to u^2 of the
// input, a few 1e-4; the uncertainty of the models (below 0.2 %) is the rest.
func TestDragUncertainty(t *testing.T) {
	texts := func(diameter, temperature string) map[string]string {
		return map[string]string{"bead.diameter": diameter, "medium.temperature": temperature}
	}
	exactHeight, exactStiffness := measure{2e-6, 0}, measure{5e-5, 0}
	for _, test := range []struct {
		name         string
		u, low, high dragRow
	}{
		{name: "diameter", u: oneRow(t, texts("1.00(3) um", "25(0) C"), exactHeight, exactStiffness),
			low: oneRow(t, texts("0.97 um", "25 C"), exactHeight, exactStiffness), high: oneRow(t, texts("1.03 um", "25 C"), exactHeight, exactStiffness)},
		{name: "temperature", u: oneRow(t, texts("1 um", "25(2) C"), exactHeight, exactStiffness),
			low: oneRow(t, texts("1 um", "23 C"), exactHeight, exactStiffness), high: oneRow(t, texts("1 um", "27 C"), exactHeight, exactStiffness)},
		{name: "height", u: oneRow(t, texts("1 um", "25 C"), measure{2e-6, 1e-7}, exactStiffness),
			low: oneRow(t, texts("1 um", "25 C"), measure{1.9e-6, 0}, exactStiffness), high: oneRow(t, texts("1 um", "25 C"), measure{2.1e-6, 0}, exactStiffness)},
	} {
		for name, m := range map[string][3]measure{
			"drag":      {test.u.drag, test.low.drag, test.high.drag},
			"diffusion": {test.u.diffusion, test.low.diffusion, test.high.diffusion},
			"corner":    {test.u.corner, test.low.corner, test.high.corner},
			"factor":    {test.u.factor, test.low.factor, test.high.factor},
		} {
			want := math.Abs(m[2].value-m[1].value) / 2 / m[0].value
			if got := m[0].relative(); math.Abs(got-want) > 0.002+0.02*want {
				t.Errorf("%s: u(%s)/%s = %.5f, want %.5f", test.name, name, name, got, want)
			}
		}
	}
}

// The numbers themselves: 6 pi eta R for a bead of 1 um in water of 25 C, whose viscosity is
// 0.8900 mPa s (IAPWS SR6-08(2011), Table 8), is 8.388 nN s/m; kT over it is 0.4907 um2/s with
// k = 1.380649e-23 J/K; and 50 pN/um over 2 pi of it is 948.7 Hz.
func TestDragScale(t *testing.T) {
	row := oneRow(t, map[string]string{"bead.diameter": "1 um", "medium.temperature": "25 C"}, measure{math.Inf(1), 0}, measure{5e-5, 0})
	for _, test := range []struct {
		name      string
		got, want float64
	}{{"drag", row.drag.value, 8.3880e-9}, {"diffusion", row.diffusion.value, 4.9074e-13}, {"corner", row.corner.value, 948.7}} {
		if math.Abs(test.got/test.want-1) > 1e-4 { // of the digits above
			t.Errorf("%s = %.5g, want %.5g", test.name, test.got, test.want)
		}
	}
}
