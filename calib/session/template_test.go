package session

import (
	"regexp"
	"strings"
	"testing"
)

func TestTemplateIsRead(t *testing.T) {
	s, err := Read("session.toml", []byte(Template(nil, "read as: commas\n\x1b[31mand more\r")))
	if err != nil || len(s.All()) != 0 {
		t.Errorf("the template states %+v, %v; want nothing", s.All(), err)
	}
}

// With every example uncommented, but one of each exclusive pair, the template
// states every setting of the registry.
func TestTemplateExamples(t *testing.T) {
	text := regexp.MustCompile(`(?m)^# (\w+ = )`).ReplaceAllString(Template(nil), "$1")
	for _, out := range []string{"viscosity", "background"} {
		text = regexp.MustCompile(`(?m)^`+out+` = .*\n`).ReplaceAllString(text, "")
	}
	s, err := Read("session.toml", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	for _, key := range Keys() {
		if key.TrackOnly || key.Name == "medium.viscosity" || key.Name == "recording.background" {
			continue
		}
		axis := ""
		if key.AxisOnly {
			axis = "x"
		}
		if _, ok := s.Lookup(key.Name, axis); !ok {
			t.Errorf("the template has no %s", key.Name)
		}
	}
}

func TestTemplateKnown(t *testing.T) {
	known := given(t, FromFlag, "", "bead.diameter", "", "1.02(3) um", "recording.noise", "", "4 nm", "recording.noise", "x", "5 nm",
		"recording.columns", "", `x="X" \ pos, time=t`, "recording.unit", "y", "nm", "fit.exclude", "", "1 Hz to 2 Hz, 3 Hz to 4 Hz")
	known.addDefaults()
	text := Template(known)
	s, err := Read("session.toml", []byte(text))
	if err != nil {
		t.Fatalf("%v\n%s", err, text)
	}
	for _, place := range [][3]string{{"bead.diameter", "", "1.02(3) um"}, {"recording.noise", "x", "5 nm"}, {"recording.noise", "z", "4 nm"},
		{"recording.columns", "x", `"X" \ pos`}, {"recording.columns", "time", "t"}, {"recording.unit", "y", "nm"}, {"fit.exclude", "", "1 Hz to 2 Hz, 3 Hz to 4 Hz"}} {
		if got, _ := s.Lookup(place[0], place[1]); got.Text != place[2] {
			t.Errorf("%s of %q = %q, want %q", place[0], place[1], got.Text, place[2])
		}
	}
	if _, ok := s.Lookup("medium.fluid", ""); ok {
		t.Error("the template states a default as if it were known")
	}
}

func TestReference(t *testing.T) {
	lines := strings.Split(strings.TrimSpace(Reference()), "\n")
	if len(lines) != len(Keys())+2 {
		t.Fatalf("%d lines, want one for each of %d settings and two of header", len(lines), len(Keys()))
	}
	for i, key := range Keys() {
		if line := lines[i+2]; !strings.Contains(line, "`"+key.Name+"`") || !strings.Contains(line, "`--"+key.Flag+"`") || strings.Count(line, "|") != 7 {
			t.Errorf("line of %s: %s", key.Name, line)
		}
	}
}
