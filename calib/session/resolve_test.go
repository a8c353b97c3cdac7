package session

import (
	"strings"
	"testing"
)

func text(t *testing.T, s *Settings, key string) string {
	t.Helper()
	setting, _ := s.Lookup(key, "")
	return setting.Text
}

func TestForTrackDefaults(t *testing.T) {
	s, err := ForTrack(Sources{})
	if err != nil {
		t.Fatal(err)
	}
	if _, ok := s.Lookup("bead.diameter", ""); ok {
		t.Error("the diameter has a default")
	}
	temperature, _ := s.Lookup("medium.temperature", "")
	if v := temperature.Value; v.SI != 295.15 || v.U != 2 || !temperature.Assumed || temperature.Origin != FromDefault {
		t.Errorf("temperature = %+v, want 295.15 K with 2 K, assumed", temperature)
	}
	if fluid, _ := s.Lookup("medium.fluid", ""); fluid.Word != "water" || !fluid.Assumed {
		t.Errorf("fluid = %+v, want water, assumed", fluid)
	}
	for key, want := range map[string]string{"role": "trapped", "fit.drag": "auto", "fit.perpendicular": "z", "fit.band": "auto"} {
		if got, _ := s.Lookup(key, ""); got.Word != want || got.Assumed {
			t.Errorf("%s = %+v, want %s, not assumed", key, got, want)
		}
	}
}

func TestForTrackMerges(t *testing.T) {
	header := given(t, FromHeader, "a.csv:1", "recording.rate", "", "1.001 kHz", "recording.unit", "x", "um")
	folder := given(t, FromSession, "session.toml:1:1", "chamber.height", "", "5 um", "medium.temperature", "", "25 C", "recording.rate", "", "1 kHz", "recording.noise", "", "4 nm")
	row := given(t, FromTracks, "tracks.csv:2:1", "chamber.height", "", "6 um", "role", "", "free")
	flags := given(t, FromFlag, "--temperature", "medium.temperature", "", "30 C")
	s, err := ForTrack(Sources{header, folder, row, flags})
	if err != nil {
		t.Fatal(err)
	}
	for key, want := range map[string]string{"chamber.height": "6 um", "medium.temperature": "30 C", "recording.rate": "1 kHz", "recording.noise": "4 nm", "role": "free", "medium.fluid": "water"} {
		if got := text(t, s, key); got != want {
			t.Errorf("%s = %q, want %q", key, got, want)
		}
	}
	for _, setting := range s.All() {
		if setting.Assumed && setting.Key != "medium.fluid" {
			t.Errorf("%s is marked assumed", setting.Key)
		}
	}
	if got := text(t, folder, "medium.temperature"); got != "25 C" || len(folder.All()) != 4 {
		t.Error("ForTrack changed its sources")
	}
}

func TestForTrackExclusive(t *testing.T) {
	own := given(t, FromSession, "s.toml:1:1", "medium.viscosity", "", "2 mPa s", "medium.density", "", "1.1 g/cm3")
	s, err := ForTrack(Sources{Session: own})
	if err != nil {
		t.Fatal(err)
	}
	if got := text(t, s, "medium.fluid"); got != "" {
		t.Errorf("fluid %q beside a viscosity", got)
	}
	s, err = ForTrack(Sources{Session: own, Flags: given(t, FromFlag, "--fluid", "medium.fluid", "", "water")})
	if err != nil {
		t.Fatal(err)
	}
	if text(t, s, "medium.viscosity")+text(t, s, "medium.density") != "" || text(t, s, "medium.fluid") != "water" {
		t.Errorf("a flag's fluid leaves %+v", s.All())
	}
	s, err = ForTrack(Sources{Session: given(t, FromSession, "", "recording.noise", "x", "4 nm"), Row: given(t, FromTracks, "", "recording.background", "", "b.csv")})
	if err != nil {
		t.Fatal(err)
	}
	if _, ok := s.Lookup("recording.noise", "x"); ok || text(t, s, "recording.background") != "b.csv" {
		t.Errorf("a row's background leaves %+v", s.All())
	}
}

// The axis of the highest origin decides between the two of a pair.
func TestForTrackExclusiveByAxis(t *testing.T) {
	s, err := ForTrack(Sources{Session: given(t, FromSession, "", "recording.noise", "", "4 nm"),
		Row: given(t, FromTracks, "", "recording.background", "", "b.csv"), Flags: given(t, FromFlag, "", "recording.noise", "x", "5 nm")})
	if err != nil {
		t.Fatal(err)
	}
	if noise, _ := s.Lookup("recording.noise", "x"); noise.Text != "5 nm" || text(t, s, "recording.background") != "" {
		t.Errorf("a flag's noise leaves %+v", s.All())
	}
}

// An exposure that is overridden for all axes is reported once.
func TestExposureOnce(t *testing.T) {
	_, err := ForTrack(Sources{Session: given(t, FromSession, "", "recording.rate", "", "2 kHz", "recording.exposure", "x", "0.1 ms"),
		Flags: given(t, FromFlag, "--exposure", "recording.exposure", "", "1 ms")})
	if err == nil || strings.Count(err.Error(), "is longer") != 1 {
		t.Errorf("%v, want one problem", err)
	}
}

func TestForTrackErrors(t *testing.T) {
	tests := []struct {
		name    string
		sources Sources
		want    string
	}{
		{"both", Sources{Flags: given(t, FromFlag, "--viscosity", "medium.fluid", "", "water", "medium.viscosity", "", "1 mPa s")}, "--viscosity \"1 mPa s\" is given beside medium.fluid \"water\""},
		{"density alone", Sources{Session: given(t, FromSession, "s.toml:2:1", "medium.density", "", "1 g/cm3")}, "s.toml:2:1: medium.density \"1 g/cm3\" has no effect without medium.viscosity"},
		{"heating alone", Sources{Session: given(t, FromSession, "s.toml:2:1", "laser.heating", "", "36 K/W")}, "laser.heating \"36 K/W\" has no effect without laser.power"},
		{"heating, driven", Sources{Row: given(t, FromTracks, "t.csv:2:1", "laser.heating", "", "36 K/W", "role", "", "driven")}, "has no effect without laser.power"},
		{"exposure of a row", Sources{Session: given(t, FromSession, "s.toml:2:1", "recording.rate", "", "2 kHz"), Row: given(t, FromTracks, "t.csv:2:1", "recording.exposure", "", "1 ms")}, "t.csv:2:1: recording.exposure \"1 ms\" is longer than the 0.5 ms"},
		{"exposure and header", Sources{Header: given(t, FromHeader, "a.csv", "recording.rate", "", "2000 Hz"), Flags: given(t, FromFlag, "--exposure", "recording.exposure", "", "1 ms")}, "--exposure \"1 ms\" is longer than the 0.5 ms"},
		{"cold saline", Sources{Session: given(t, FromSession, "s.toml:2:1", "medium.fluid", "", "saline 0.15 mol/kg", "medium.temperature", "", "5 C")}, "s.toml:2:1: medium.temperature \"5 C\" does not fit medium.fluid \"saline 0.15 mol/kg\""},
	}
	for _, tt := range tests {
		s, err := ForTrack(tt.sources)
		if err == nil || !strings.Contains(err.Error(), tt.want) || s != nil || !strings.Contains(err.Error(), "hint: ") {
			t.Errorf("%s: %v, want an error with %s", tt.name, err, tt.want)
		}
	}
	free := Sources{Session: given(t, FromSession, "", "laser.heating", "", "36 K/W"), Row: given(t, FromTracks, "", "role", "", "free")}
	if _, err := ForTrack(free); err != nil {
		t.Errorf("heating without power, laser off: %v", err)
	}
}

func TestContradictions(t *testing.T) {
	header := given(t, FromHeader, "a.csv:1:1", "recording.rate", "", "1998.0(5) Hz", "recording.unit", "x", "um", "recording.unit", "z", "V", "recording.pixel", "", "65 nm",
		"recording.sensitivity", "", "1 um/V")
	tests := []struct {
		name       string
		origin     Origin
		triples    []string
		want       string // in the message; "" for none
		overridden bool
	}{
		{"agree", FromSession, []string{"recording.rate", "", "2 kHz", "recording.pixel", "", "65.1 nm"}, "", false},
		{"rate", FromSession, []string{"recording.rate", "", "1 kHz"}, "recording.rate \"1 kHz\" contradicts the recording, which says \"1998.0(5) Hz\" (a.csv:1:1)\n  hint: correct the one that is wrong, or insist with --rate", false},
		{"rate near", FromTracks, []string{"recording.rate", "", "2010 Hz"}, "contradicts", false},
		{"rate within its uncertainty", FromTracks, []string{"recording.rate", "", "2010(5) Hz"}, "", false},
		{"flag", FromFlag, []string{"recording.rate", "", "1 kHz"}, "\"1 kHz\" contradicts the recording, which says \"1998.0(5) Hz\"", true},
		{"unit for all", FromSession, []string{"recording.unit", "", "um"}, "which says \"V\"", false},
		{"unit for one", FromSession, []string{"recording.unit", "x", "nm"}, "recording.unit.x \"nm\" contradicts", false},
		{"unit for another", FromSession, []string{"recording.unit", "y", "nm"}, "", false},
		{"scale", FromSession, []string{"recording.pixel", "x", "80 nm"}, "recording.pixel.x \"80 nm\" contradicts", false},
		{"scale for all", FromSession, []string{"recording.pixel", "", "80 nm"}, "recording.pixel \"80 nm\" contradicts", false},
		{"scale per other unit", FromSession, []string{"recording.sensitivity", "", "1 um/count"}, "recording.sensitivity \"1 um/count\" contradicts", false},
		{"not of the file", FromSession, []string{"chamber.height", "", "8 um"}, "", false},
	}
	for _, tt := range tests {
		s := given(t, tt.origin, "here", tt.triples...)
		s.merge(header)
		s.merge(given(t, FromDefault, "", "recording.pixel", "y", "1 um")) // a lower origin's axis adds no second report
		got := s.Contradictions()
		if (tt.want != "") != (len(got) == 1) {
			t.Errorf("%s: %d contradictions: %v", tt.name, len(got), got)
			continue
		}
		if tt.want != "" && (!strings.Contains(got[0].Error(), tt.want) || got[0].Overridden != tt.overridden) {
			t.Errorf("%s: %v, overridden %v; want %s", tt.name, got[0].Error(), got[0].Overridden, tt.want)
		}
	}
}
