package calib_test

import (
	"os/exec"
	"slices"
	"strings"
	"testing"
)

// allowed lists, for each leaf, what else of this module it may import. Estimators
// never import each other: a cross-check is worth as much as their independence.
var allowed = map[string][]string{
	"beadwell/calib/quantity":   {},
	"beadwell/calib/medium":     {},
	"beadwell/calib/transform":  {},
	"beadwell/calib/relaxation": {},
	"beadwell/calib/drag":       {},
	"beadwell/calib/series":     {"beadwell/calib/drag"},
	"beadwell/calib/track":      {},
	"beadwell/calib/health":     {"beadwell/calib/relaxation", "beadwell/calib/transform"},
	"beadwell/calib/simulate":   {"beadwell/calib/relaxation", "beadwell/calib/transform", "beadwell/calib/drag", "beadwell/calib/medium"},
	"beadwell/calib/session":    {"beadwell/calib/quantity", "beadwell/calib/medium"},
	"beadwell/psd":              {"beadwell/calib/relaxation", "beadwell/calib/transform"},
	"beadwell/equipartition":    {"beadwell/calib/relaxation", "beadwell/calib/transform"},
	"beadwell/calib/msd":        {"beadwell/calib/relaxation", "beadwell/calib/transform"},
	"beadwell/calib/bound":      {},
}

// TestArrows holds the direction of the imports: leaves import only what is listed, and
// nothing below cmd is imported from outside of it.
func TestArrows(t *testing.T) {
	seen := map[string]bool{}
	for _, line := range packages(t) {
		path, deps, _ := strings.Cut(line, " ")
		seen[path] = true
		for _, dep := range strings.Fields(deps) {
			if !strings.HasPrefix(dep, "beadwell/") {
				continue
			}
			if strings.HasPrefix(dep, "beadwell/cmd/") && !strings.HasPrefix(path, "beadwell/cmd/") {
				t.Errorf("%s imports %s, which is above it", path, dep)
			}
			list, leaf := allowed[path]
			if leaf && !slices.Contains(list, dep) {
				t.Errorf("%s imports %s; it may import only %v", path, dep, list)
			}
		}
		if _, leaf := allowed[path]; !leaf && path != "beadwell/calib" && !strings.HasPrefix(path, "beadwell/cmd/") && !strings.Contains(path, "/calib/drag/") {
			t.Errorf("%s has no arrows: add it to the list", path)
		}
	}
	for path := range allowed {
		if !seen[path] {
			t.Errorf("%s does not exist", path)
		}
	}
}

// packages lists every package of the module with what it imports, tests left out.
func packages(t *testing.T) []string {
	t.Helper()
	cmd := exec.Command("go", "list", "-f", `{{.ImportPath}} {{join .Imports " "}}`, "beadwell/...")
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("go list: %v", err)
	}
	return strings.Split(strings.TrimSpace(string(out)), "\n")
}
