package session

import (
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// given makes settings from triples of key, axis and text.
func given(t *testing.T, origin Origin, where string, triples ...string) *Settings {
	t.Helper()
	s := &Settings{}
	for i := 0; i < len(triples); i += 3 {
		if err := s.Set(triples[i], triples[i+1], triples[i+2], origin, where); err != nil {
			t.Fatal(err)
		}
	}
	return s
}

func TestPrecedence(t *testing.T) {
	var s Settings
	for _, step := range []struct {
		origin Origin
		text   string
		want   string
	}{
		{FromSession, "3 um", "3 um"},
		{FromFlag, "5 um", "5 um"},
		{FromHeader, "2 um", "5 um"},
		{FromTracks, "4 um", "5 um"},
		{FromDefault, "1 um", "5 um"},
		{FromFlag, "6 um", "6 um"},
	} {
		if err := s.Set("chamber.height", "", step.text, step.origin, ""); err != nil {
			t.Fatal(err)
		}
		if got, ok := s.Lookup("chamber.height", ""); !ok || got.Text != step.want {
			t.Errorf("after %v from the %v: %q, want %q", step.text, step.origin, got.Text, step.want)
		}
	}
	if got, ok := s.From(FromTracks, "chamber.height", ""); !ok || got.Text != "4 um" {
		t.Errorf("From(track list) = %q, %v; want what the row said", got.Text, ok)
	}
}

func TestLookupByAxis(t *testing.T) {
	s := given(t, FromSession, "", "recording.noise", "", "4 nm", "recording.noise", "x", "5 nm")
	check := func(axis, want string) {
		t.Helper()
		if got, _ := s.Lookup("recording.noise", axis); got.Text != want {
			t.Errorf("noise of %q = %q, want %q", axis, got.Text, want)
		}
	}
	check("", "4 nm")
	check("x", "5 nm")
	check("y", "4 nm")
	// A flag for all axes goes before the session file's for one.
	if err := s.Set("recording.noise", "", "6 nm", FromFlag, "--noise"); err != nil {
		t.Fatal(err)
	}
	check("x", "6 nm")
	if all := s.All(); len(all) != 1 || all[0].Text != "6 nm" {
		t.Errorf("All = %+v, want the flag alone", all)
	}
	if err := s.Set("recording.noise", "", "x=7 nm, z = 8(1) nm", FromFlag, "--noise"); err != nil {
		t.Fatal(err)
	}
	check("x", "7 nm")
	check("z", "8(1) nm")
	check("y", "6 nm")
	if got, ok := s.Lookup("recording.pixel", "x"); ok {
		t.Errorf("Lookup of what nobody set = %+v", got)
	}
}

func TestNilSettings(t *testing.T) {
	var s *Settings
	if _, ok := s.Lookup("role", ""); ok || s.All() != nil || len(s.Contradictions()) != 0 || len(s.Clone().All()) != 0 {
		t.Error("nil settings are not empty")
	}
}

func TestSetErrors(t *testing.T) {
	tests := []struct{ key, axis, text, want string }{
		{"bead.diamter", "", "1 um", "did you mean bead.diameter?"},
		{"diameter", "", "1 um", "did you mean bead.diameter?"},
		{"nothing.like.it", "", "1 um", "docs/settings.md"},
		{"bead.diameter", "", "", "is empty"},
		{"bead.diameter", "", "1.02", "has no unit"},
		{"bead.diameter", "", "1.02 s", "is a time, not a length"},
		{"bead.diameter", "", "-1 um", "is negative"},
		{"bead.diameter", "", "0 um", "is zero"},
		{"bead.diameter", "", "0", "has no unit"},
		{"bead.diameter", "", "1.02 m", "outside the possible range, 1 nm to 1 mm"},
		{"bead.diameter", "", "1.02(102) um", "as large as itself"},
		{"bead.diameter", "x", "1 um", "holds for the whole recording"},
		{"medium.temperature", "", "300 C", "outside the possible range, -20 C to 110 C"},
		{"medium.temperature", "", "24.5 K", "check the unit, C or K"},
		{"medium.temperature", "", "-3 K", "outside the possible range"},
		{"medium.fluid", "", "watr", `is not known` + "\n  hint: did you mean \"water\"?"},
		{"medium.fluid", "", "glycerol", "has no amount in %"},
		{"chamber.height", "", "near", "or the word far"},
		{"recording.exposure", "", "-1 ms", "is negative"},
		{"recording.exposure", "", "1", "has no unit"},
		{"recording.noise", "w", "1 nm", "the axes are x, y, z"},
		{"recording.noise", "", "x=1 nm, x=2 nm", "is given twice"},
		{"recording.noise", "", "x=1 nm, w=2 nm", "the axes are x, y, z"},
		{"recording.unit", "", "inch", "write one of nm, um"},
		{"recording.columns", "", "t", "does not say which column is which"},
		{"recording.sensitivity", "", "0 um/V", "is zero"},
		{"recording.sensitivity", "", "1 V/um", "not a length per voltage or a length per count"},
		{"recording.background", "", "../stuck.csv", "leads out of the folder"},
		{"recording.background", "", "/data/stuck.csv", "leads out of the folder"},
		{"recording.background", "", `day\stuck.csv`, "has a backslash"},
		{"recording.bead", "", "a\x1b[31m", "cannot be printed"},
		{"detector.alpha", "", "1.2", "outside the possible range, 0 to 1"},
		{"fit.band", "", "10 Hz", "is not a range"},
		{"fit.band", "", "8 kHz to 10 Hz", "does not rise"},
		{"fit.band", "", "10 Hz to 10 Hz", "does not rise"},
		{"fit.band", "", "10 to 20", "has no unit"},
		{"fit.band", "", "-1 Hz to 20 Hz", "starts below zero"},
		{"fit.band", "", "10(1) Hz to 20 Hz", "has an uncertainty"},
		{"fit.exclude", "", ";", "holds no range"},
		{"fit.exclude", "", "49 Hz to 51 Hz; 99", "is not a range"},
		{"fit.drag", "", "always", "auto, constant, frequency-dependent"},
		{"role", "", "stuck", "trapped, free, driven, background"},
		{"recording.bead", "", strings.Repeat("b", 5000), "is too long"},
	}
	for _, tt := range tests {
		s := given(t, FromSession, "", "role", "", "free")
		err := s.Set(tt.key, tt.axis, tt.text, FromSession, "session.toml:4:12")
		if err == nil || !strings.Contains(err.Error(), tt.want) || !strings.HasPrefix(err.Error(), "session.toml:4:12: ") {
			t.Errorf("Set(%q, %q, %q) = %v, want an error with %q", tt.key, tt.axis, tt.text, err, tt.want)
		}
		if len(s.All()) != 1 {
			t.Errorf("Set(%q, %q, %q) changed the settings although it failed", tt.key, tt.axis, tt.text)
		}
	}
}

func TestErrorText(t *testing.T) {
	var s Settings
	err := s.Set("bead.diameter", "", "-1 um", FromSession, "session.toml:4:12")
	want := "session.toml:4:12: bead.diameter \"-1 um\" is negative\n  hint: write it like 1.02(3) um"
	if err == nil || err.Error() != want {
		t.Errorf("error = %v\nwant %s", err, want)
	}
	err = s.Set("bead.diameter", "", "-1 um", FromFlag, "--diameter")
	want = "--diameter \"-1 um\" is negative\n  hint: write it like 1.02(3) um"
	if err == nil || err.Error() != want {
		t.Errorf("error = %v\nwant %s", err, want)
	}
	for where, want := range map[string][3]any{
		"a:b.toml:4:12": {"a:b.toml", 4, 12}, "a.toml:4": {"a.toml", 4, 0}, "a.toml": {"a.toml", 0, 0}, "--rate": {"--rate", 0, 0},
	} {
		file, line, column := (&Error{Where: where}).Position()
		if got := [3]any{file, line, column}; got != want {
			t.Errorf("Position of %q = %v, want %v", where, got, want)
		}
	}
	shown := (&Error{Where: "a\x1b.toml", Key: "k\n", Text: strings.Repeat("é", 100), Problem: "is wrong"}).Error()
	if strings.ContainsAny(shown, "\x1b\n") || !strings.Contains(shown, "...") || strings.ContainsRune(shown, '\ufffd') {
		t.Errorf("unsafe message %q", shown)
	}
}

func TestWordsAndBands(t *testing.T) {
	s := given(t, FromFlag, "",
		"recording.unit", "", " µm ", "recording.delimiter", "", "\t", "recording.decimal", "", ",",
		"chamber.height", "", "far", "medium.fluid", "", "Glycerol  20 %", "fit.exclude", "", "49 to 51 Hz, 0.1 kHz to 110 Hz",
		"fit.band", "", "auto", "recording.exposure", "", "0", "recording.columns", "", "time=t, x=dx (um); y=2",
		"recording.background", "", "/data/stuck.csv") // a flag may point anywhere
	words := map[string]string{"recording.unit": "um", "recording.delimiter": "tab", "recording.decimal": "comma",
		"chamber.height": "far", "medium.fluid": "glycerol 20 %", "fit.band": "auto", "recording.background": "/data/stuck.csv"}
	for key, want := range words {
		if got, _ := s.Lookup(key, ""); got.Word != want {
			t.Errorf("%s = %q, want %q", key, got.Word, want)
		}
	}
	for axis, want := range map[string]string{"time": "t", "x": "dx (um)", "y": "2"} {
		if got, _ := s.Lookup("recording.columns", axis); got.Word != want {
			t.Errorf("column %s = %q, want %q", axis, got.Word, want)
		}
	}
	exclude, _ := s.Lookup("fit.exclude", "")
	if diff := cmp.Diff([]Interval{{49, 51}, {100, 110}}, exclude.Bands); diff != "" {
		t.Errorf("exclude (-want +got):\n%s", diff)
	}
	if err := s.Set("recording.noise", "", "4(5) nm", FromFlag, ""); err != nil {
		t.Errorf("a noise that may be zero: %v", err)
	}
	exposure, ok := s.Lookup("recording.exposure", "x")
	if !ok || exposure.Value.SI != 0 || exposure.Value.Unit != "s" || exposure.Word != "" {
		t.Errorf("exposure 0 = %+v", exposure)
	}
}

func TestValuesAreSI(t *testing.T) {
	s := given(t, FromFlag, "--x", "bead.diameter", "", "1.02(3) um", "medium.temperature", "", "24.5(5) C", "laser.heating", "", "36(4) K/W")
	for key, want := range map[string][2]float64{
		"bead.diameter": {1.02e-6, 0.03e-6}, "medium.temperature": {297.65, 0.5}, "laser.heating": {36, 4},
	} {
		got, _ := s.Lookup(key, "")
		// Two roundings of a float64.
		if math.Abs(got.Value.SI-want[0]) > 5e-16*want[0] || math.Abs(got.Value.U-want[1]) > 5e-16*want[1] {
			t.Errorf("%s = %v, %v; want %v", key, got.Value.SI, got.Value.U, want)
		}
	}
}

func TestCloneIsApart(t *testing.T) {
	s := given(t, FromSession, "", "fit.exclude", "", "49 Hz to 51 Hz")
	c := s.Clone()
	bands, _ := c.Lookup("fit.exclude", "")
	bands.Bands[0].Low = 1
	if err := c.Set("fit.drag", "", "constant", FromFlag, ""); err != nil {
		t.Fatal(err)
	}
	if got, _ := s.Lookup("fit.exclude", ""); got.Bands[0].Low != 49 || len(s.All()) != 1 {
		t.Errorf("a change of the clone reached the original: %+v", s.All())
	}
}

func TestAllIsOrdered(t *testing.T) {
	s := given(t, FromFlag, "", "role", "", "free", "recording.noise", "y", "1 nm", "recording.noise", "x", "1 nm", "recording.noise", "", "2 nm",
		"bead.diameter", "", "1 um", "recording.columns", "", "z=1, time=2")
	var got []string
	for _, setting := range s.All() {
		got = append(got, withAxis(setting.Key, setting.Axis))
	}
	want := []string{"bead.diameter", "recording.noise", "recording.noise.x", "recording.noise.y", "recording.columns.time", "recording.columns.z", "role"}
	if diff := cmp.Diff(want, got); diff != "" {
		t.Errorf("order (-want +got):\n%s", diff)
	}
}
