package session

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"beadwell/calib/bound"
)

func TestLoadFull(t *testing.T) {
	s, err := Load("testdata/full.toml")
	if err != nil {
		t.Fatal(err)
	}
	seen := map[string]bool{}
	for _, setting := range s.All() {
		seen[setting.Key] = true
		if setting.Origin != FromSession || !strings.HasPrefix(setting.Where, "full.toml:") {
			t.Errorf("%s: origin %v, place %q", setting.Key, setting.Origin, setting.Where)
		}
	}
	for _, key := range Keys() {
		elsewhere := key.TrackOnly || key.Name == "medium.fluid" || key.Name == "recording.background"
		if seen[key.Name] == elsewhere {
			t.Errorf("%s: read %v", key.Name, seen[key.Name])
		}
	}
	places := map[string]string{
		"bead.diameter|": "3:12", "medium.temperature|": "8:15", "recording.noise|y": "18:30", "recording.columns|stage": "19:51",
		"detector.alpha|": "30:9", "fit.exclude|": "34:1",
	}
	for key, want := range places {
		name, axis, _ := strings.Cut(key, "|")
		if got, _ := s.Lookup(name, axis); got.Where != "full.toml:"+want {
			t.Errorf("%s stands at %s, want %s", key, got.Where, want)
		}
	}
	if exclude, _ := s.Lookup("fit.exclude", ""); len(exclude.Bands) != 2 || exclude.Bands[1].Low != 99 {
		t.Errorf("exclude = %+v", exclude.Bands)
	}
	if stage, _ := s.Lookup("recording.columns", "stage"); stage.Word != "4" {
		t.Errorf("column of the stage = %q, want 4", stage.Word)
	}
}

func TestReadForms(t *testing.T) {
	for _, text := range []string{
		"[recording]\nnoise = { x = \"4 nm\" }", "[recording]\nnoise.x = \"4 nm\"", "[recording.noise]\nx = \"4 nm\"",
		"recording.noise.x = \"4 nm\"", "recording = { noise = { x = \"4 nm\" } }", "[recording]\nnoise = \"x=4 nm\"",
		"\ufeff[recording]\r\nnoise.x = '4 nm'\r\n", "[recording]\nnoise.x = \"\"\"4 nm\"\"\"",
	} {
		s, err := Read("session.toml", []byte(text))
		if err != nil {
			t.Errorf("%q: %v", text, err)
			continue
		}
		if got, ok := s.From(FromSession, "recording.noise", "x"); !ok || got.Text != "4 nm" || len(s.All()) != 1 {
			t.Errorf("%q gave %+v", text, s.All())
		}
	}
	if s, err := Read("session.toml", []byte("[fit]\nexclude = []")); err != nil {
		t.Error(err)
	} else if got, _ := s.Lookup("fit.exclude", ""); got.Word != "none" {
		t.Errorf("an empty list = %+v, want none", got)
	}
	for _, empty := range []string{"", "# nothing\n", "[bead]\n"} {
		if s, err := Read("session.toml", []byte(empty)); err != nil || len(s.All()) != 0 {
			t.Errorf("%q: %v, %v; want empty settings", empty, s.All(), err)
		}
	}
}

func TestReadErrors(t *testing.T) {
	tests := []struct{ text, want string }{
		{"[bead]\n\n\ndiameter = \"-1 um\"", "s.toml:4:12: bead.diameter \"-1 um\" is negative\n  hint: "},
		{"[bead]\ndiamter = \"1 um\"", "s.toml:2:1: bead.diamter is not a setting\n  hint: did you mean bead.diameter?"},
		{"[chamber]\n  diameter = \"1 um\"", "s.toml:2:3: chamber.diameter is not a setting\n  hint: did you mean bead.diameter?"},
		{"diameter = \"1 um\"", "s.toml:1:1: diameter is not a setting\n  hint: did you mean bead.diameter?"},
		{"\"bead.diameter\" = \"1 um\"", "s.toml:1:1: bead.diameter is not a setting"},
		{"[beed]\ndiameter = \"1 um\"", "s.toml:1:2: beed is not a section\n  hint: did you mean [bead]?"},
		{"[other]\n", "the sections are bead, medium, chamber"},
		{"[bead.x]\n", "s.toml:1:2: bead.x is not a section"},
		{"[[bead]]\ndiameter = \"1 um\"", "s.toml:1:3: bead is a list of tables"},
		{"[bead]\ndiameter = 1.02", "s.toml:2:12: bead.diameter \"1.02\" has no unit\n  hint: write a length, such as 1.02(3) um"},
		{"[bead]\ndiameter = true", "s.toml:2:12: bead.diameter \"true\" is not a text"},
		{"[bead]\ndiameter = 2024-01-01", "is not a text"},
		{"[bead]\ndiameter = [\"1 um\"]", "s.toml:2:1: bead.diameter is a list, but has one value"},
		{"[bead]\ndiameter = { x = \"1 um\" }", "bead.diameter is a table, but has one value"},
		{"[fit]\nexclude = [1, 2]", "fit.exclude has an item that is not a text"},
		{"[recording]\nnoise = { w = \"1 nm\" }", "s.toml:2:15: recording.noise.w names an axis that is not known\n  hint: the axes are x, y, z"},
		{"[recording]\nnoise.x.y = \"1 nm\"", "is not a setting"},
		{"[medium]\ntemperature = \"300 C\"", "s.toml:2:15: medium.temperature \"300 C\" is outside the possible range, -20 C to 110 C"},
		{"[medium]\nfluid = \"watr\"", "s.toml:2:9: medium.fluid \"watr\" is not known"},
		{"[medium]\nfluid = \"water\"\nviscosity = \"1 mPa s\"", "s.toml:3:13: medium.viscosity \"1 mPa s\" is given beside medium.fluid \"water\" (s.toml:2:9)"},
		{"[recording]\nnoise.y = \"4 nm\"\nbackground = \"b.csv\"", "recording.background \"b.csv\" is given beside recording.noise"},
		{"[recording]\nrate = \"2 kHz\"\nexposure.x = \"0.6 ms\"", "s.toml:3:14: recording.exposure.x \"0.6 ms\" is longer than the 0.5 ms between samples at recording.rate \"2 kHz\" (s.toml:2:8)"},
		{"[chamber]\nheight = \"8 um\"\ndepth = \"5 um\"", "s.toml:2:10: chamber.height \"8 um\" is not below chamber.depth"},
		{strings.Repeat("#", maxSession+1), "s.toml: is larger than 64 KiB"},
		{"role = \"free\"", "s.toml:1:1: role belongs to one recording\n  hint: give it in the column role of tracks.csv, or with --role"},
		{"[bead]\ndiameter = \"1 um\"\ndiameter = \"2 um\"", "s.toml:3:1: "},
		{"[bead]\ndiameter = 1.02 um", "s.toml:2:"},
		{"[bead\n", "s.toml:1:"},
		{"[bead]\ndiameter = \"1\xff um\"", "s.toml:2:"},
		{"[bead]\ndiameter = \"x\"\ndensity = \"y\"", "s.toml:2:12: bead.diameter \"x\" does not start with a number"},
		{"[bead]\ndiameter = \"x\"\ndensity = \"y\"", "s.toml:3:11: bead.density \"y\" does not start with a number"},
	}
	for _, tt := range tests {
		s, err := Read("s.toml", []byte(tt.text))
		if err == nil || !strings.Contains(err.Error(), tt.want) || s != nil {
			t.Errorf("%q gave %v\nwant an error with %s", tt.text, err, tt.want)
			continue
		}
		var problem *Error
		if !errors.As(err, &problem) || problem.Hint == "" {
			t.Errorf("%q: no hint in %v", tt.text, err)
		}
	}
}

// A camera's full frame is no contradiction, nor is the rounding of its label.
func TestFullFrameExposure(t *testing.T) {
	for _, text := range []string{"rate = \"2 kHz\"\nexposure = \"0.5 ms\"", "rate = \"300 Hz\"\nexposure = \"3.333 ms\"", "rate = \"29.97 Hz\"\nexposure = \"33.4 ms\""} {
		if _, err := Read("s.toml", []byte("[recording]\n"+text)); err != nil {
			t.Errorf("%s: %v", text, err)
		}
	}
}

func TestReadShowsTenProblems(t *testing.T) {
	var b strings.Builder
	b.WriteString("[bead]\n")
	for i := range 13 {
		fmt.Fprintf(&b, "unknown%d = 1\n", i)
	}
	_, err := Read("s.toml", []byte(b.String()))
	if err == nil || strings.Count(err.Error(), "is not a setting") != 10 || !strings.HasSuffix(err.Error(), "and 3 more") {
		t.Errorf("error = %v, want ten problems and a count", err)
	}
}

func TestLoadFiles(t *testing.T) {
	dir := t.TempDir()
	if _, err := Load(filepath.Join(dir, FileName)); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("Load of no file = %v, want fs.ErrNotExist", err)
	}
	if _, err := Load(dir); err == nil {
		t.Error("Load of a folder succeeded")
	}
	big := filepath.Join(dir, "big.toml")
	if err := os.WriteFile(big, make([]byte, maxFile+1), 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := Load(big); err == nil || !strings.Contains(err.Error(), "larger than 16 MiB") {
		t.Errorf("Load of a huge file = %v", err)
	}
	if s, tracks, err := LoadFolder(dir); s != nil || tracks != nil || err != nil {
		t.Errorf("LoadFolder of an empty folder = %v, %v, %v", s, tracks, err)
	}
	write := func(name, text string) {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	write(FileName, "[bead]\ndiameter = \"1 um\"")
	write(TracksName, "file\na.csv\n")
	if s, tracks, err := LoadFolder(dir); err != nil || len(s.All()) != 1 || len(tracks.Rows) != 1 {
		t.Errorf("LoadFolder = %v, %v, %v", s, tracks, err)
	}
	write(TracksName, "run\na.csv\n")
	if s, tracks, err := LoadFolder(dir); err == nil || s != nil || tracks != nil {
		t.Errorf("LoadFolder with a bad list = %v, %v, %v", s, tracks, err)
	}
	write(FileName, "[bed]")
	if _, _, err := LoadFolder(dir); err == nil || !strings.Contains(err.Error(), dir) {
		t.Errorf("LoadFolder with a bad session file = %v, want its path", err)
	}
}

func FuzzRead(f *testing.F) {
	full, err := os.ReadFile("testdata/full.toml")
	if err != nil {
		f.Fatal(err)
	}
	f.Add(full)
	for _, seed := range []string{"", "[bead]\ndiameter = \"1 um\"", "a.b.c = 1", "[[bead]]", "recording = { noise = { x = \"4 nm\" } }", "\xef\xbb\xbf[fit]\nexclude=[]", "x = {y={z=[[[]]]}}"} {
		f.Add([]byte(seed))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		if len(data) > bound.Input {
			return
		}
		var s *Settings
		var err error
		bound.Effort(t, func() { s, err = Read("s.toml", data) })
		if (err == nil) == (s == nil) {
			t.Fatalf("Read gave %v and %v", s, err)
		}
		if err != nil {
			if strings.ContainsAny(err.Error(), "\x00\x1b\r") {
				t.Fatalf("unsafe message %q", err)
			}
			return
		}
		for _, setting := range s.All() {
			if setting.Where == "" || setting.Origin != FromSession {
				t.Fatalf("setting without a place: %+v", setting)
			}
		}
	})
}
