package cli

import (
	"slices"
	"strings"
	"testing"
)

// Names stand on lines of any system, or have NUL between them, as find -print0 writes those that hold ends of lines.
func TestReadLines(t *testing.T) {
	for text, want := range map[string][]string{
		"":                          {},
		"a.csv\nb c.csv":            {"a.csv", "b c.csv"},
		"a.csv\r\n\r\nb.csv\r\n":    {"a.csv", "b.csv"},
		"a\nb.csv\x00c\r\n.csv\x00": {"a\nb.csv", "c\r\n.csv"},
		"inv\xff.csv\n":             {"inv\xff.csv"},
	} {
		a := &app{World: World{In: strings.NewReader(text)}}
		if got, err := a.readLines("-"); err != nil || !slices.Equal(got, want) {
			t.Errorf("of %q: %q, %v, want %q", text, got, err, want)
		}
	}
}
