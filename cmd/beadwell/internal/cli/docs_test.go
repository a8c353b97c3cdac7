package cli

import (
	"flag"
	"os"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"beadwell/calib/session"
)

var update = flag.Bool("update", false, "write the golden files instead of comparing with them")

const settingsPage = "../../../../docs/settings.md"

// docs/settings.md holds the table of all settings, made from their registry.
func TestSettingsPageIsCurrent(t *testing.T) {
	page, err := os.ReadFile(settingsPage)
	if err != nil {
		t.Fatal(err)
	}
	const begin, end = "<!-- settings: made by go test -update -->\n", "<!-- end of settings -->"
	before, rest, found := strings.Cut(string(page), begin)
	_, after, closed := strings.Cut(rest, end)
	if !found || !closed {
		t.Fatalf("%s has no place for the settings", settingsPage)
	}
	want := before + begin + "\n" + session.Reference() + "\n" + end + after
	if *update {
		if err := os.WriteFile(settingsPage, []byte(want), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	if diff := cmp.Diff(want, string(page)); diff != "" {
		t.Errorf("%s is not what the registry says; run go test ./cmd/beadwell/internal/cli -update (-want +got):\n%s", settingsPage, diff)
	}
}
