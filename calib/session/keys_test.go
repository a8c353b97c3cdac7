package session

import (
	"slices"
	"strings"
	"testing"

	"beadwell/calib/quantity"
)

func TestRegistry(t *testing.T) {
	names, flags := map[string]bool{}, map[string]bool{}
	for _, key := range Keys() {
		if names[key.Name] || flags[key.Flag] {
			t.Errorf("%s or --%s stands twice in the registry", key.Name, key.Flag)
		}
		names[key.Name], flags[key.Flag] = true, true
		if key.Meaning == "" || key.Placeholder == "" || strings.ContainsAny(key.Meaning, "|`") {
			t.Errorf("%s: meaning %q and placeholder %q must be there, and plain", key.Name, key.Meaning, key.Placeholder)
		}
		if key.PerAxis != (len(key.Axes) > 0) {
			t.Errorf("%s: per axis %v with axes %v", key.Name, key.PerAxis, key.Axes)
		}
		var s Settings
		if err := s.Set(key.Name, "", key.Placeholder, FromFlag, "--"+key.Flag); err != nil {
			t.Errorf("the placeholder of %s cannot be read: %v", key.Name, err)
		}
		if key.Default != "" {
			if _, problem := interpret(key, "", key.Default, FromDefault); problem != nil {
				t.Errorf("the default of %s cannot be read: %v", key.Name, problem)
			}
		}
		for _, alias := range key.aliases {
			if !slices.Contains(key.Words, alias) {
				t.Errorf("%s: an alias means %q, which is no word of it", key.Name, alias)
			}
		}
		if key.Limits != "" {
			testLimits(t, key)
		}
	}
	if len(names) != 37 {
		t.Errorf("%d settings, want 37: update this count and the documentation", len(names))
	}
}

// testLimits holds that both limits of a key can be read and stated, and that
// what is beyond them cannot.
func testLimits(t *testing.T, key Key) {
	ends := strings.Split(key.Limits, " to ")
	if len(ends) != 2 {
		t.Errorf("%s: limits %q are no range", key.Name, key.Limits)
		return
	}
	for _, end := range ends {
		if _, err := quantity.Parse(end, key.Dimensions...); err != nil {
			t.Errorf("%s: limit %v", key.Name, err)
		}
		var s Settings
		if err := s.Set(key.Name, "", end, FromFlag, ""); err != nil {
			t.Errorf("%s: its limit %q is refused: %v", key.Name, end, err)
		}
	}
	low, high := key.bounds()
	unit := key.Dimensions[0].SIUnit()
	for _, beyond := range []float64{low - 0.01*(high-low), high * 1.01} {
		var s Settings
		if err := s.Set(key.Name, "", quantity.Format(beyond, 0, unit), FromFlag, ""); err == nil {
			t.Errorf("%s: %g %s is accepted, beyond %s", key.Name, beyond, unit, key.Limits)
		}
	}
}

func TestKeyNames(t *testing.T) {
	key, ok := Find("recording.time_unit")
	if !ok || key.Section() != "recording" || key.Short() != "time_unit" || key.Flag != "time-unit" {
		t.Errorf("Find(recording.time_unit) = %+v, %v", key, ok)
	}
	if _, ok := Find("diameter"); ok {
		t.Error("Find takes a short name")
	}
	role, _ := Find("role")
	if role.Short() != "role" {
		t.Errorf("Short of role = %q", role.Short())
	}
}

func TestOrigins(t *testing.T) {
	want := []string{"default", "header", "session file", "track list", "flag"}
	for i, name := range want {
		if got := Origin(i).String(); got != name {
			t.Errorf("Origin(%d) = %q, want %q", i, got, name)
		}
		if got, err := ParseOrigin(name); err != nil || got != Origin(i) {
			t.Errorf("ParseOrigin(%q) = %v, %v", name, got, err)
		}
	}
	if _, err := ParseOrigin("hearsay"); err == nil {
		t.Error("ParseOrigin accepts what is no origin")
	}
}

func TestNearest(t *testing.T) {
	for word, want := range map[string]string{
		"bead.diamter": "bead.diameter", "bead.daimeter": "bead.diameter", "recording.exposure_time": "recording.exposure",
		"recording.exposur": "recording.exposure", "zzz": "",
	} {
		if got := nearest(word, knownNames()); got != want {
			t.Errorf("nearest(%q) = %q, want %q", word, got, want)
		}
	}
	for _, tt := range []struct {
		a, b string
		want int
	}{{"", "abc", 3}, {"abc", "abc", 0}, {"abc", "acb", 1}, {"kitten", "sitting", 3}, {"abc", "", 3}} {
		if got := distance(tt.a, tt.b); got != tt.want {
			t.Errorf("distance(%q, %q) = %d, want %d", tt.a, tt.b, got, tt.want)
		}
	}
}
