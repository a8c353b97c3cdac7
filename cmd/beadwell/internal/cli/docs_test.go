package cli

import (
	"flag"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/spf13/pflag"

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

// Every command and every flag that a page names in code is one of the program; those of other programs stand
// in blocks of their commands.
func TestPagesNameWhatThereIs(t *testing.T) {
	root := (&app{World: inventedWorld()}).root()
	commands, flags := map[string]bool{"help": true}, map[string]bool{"--help": true, "--version": true}
	for _, cmd := range root.Commands() {
		commands[cmd.Name()] = true
		cmd.Flags().VisitAll(func(f *pflag.Flag) { flags["--"+f.Name] = true })
	}
	pages, err := filepath.Glob("../../../../docs/*.md")
	if err != nil {
		t.Fatal(err)
	}
	pages = append(pages, "../../../../README.md", "../../../../DEVELOPERS.md", "../../../../docs/pipelines/README.md")
	inCode := regexp.MustCompile("`[^`\n]+`")
	command := regexp.MustCompile(`^beadwell ([a-z]+)`)
	flag := regexp.MustCompile(`--[a-z][a-z0-9-]*`)
	named := 0
	for _, path := range pages {
		text, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		outside := regexp.MustCompile("(?ms)^```.*?^```").ReplaceAllString(string(text), "")
		for _, code := range inCode.FindAllString(outside, -1) {
			code = strings.Trim(code, "`")
			if m := command.FindStringSubmatch(code); m != nil && !commands[m[1]] {
				t.Errorf("%s: %q names a command that there is not", filepath.Base(path), code)
			}
			for _, name := range flag.FindAllString(code, -1) {
				named++
				if !flags[name] {
					t.Errorf("%s: %q names a flag that there is not", filepath.Base(path), code)
				}
			}
		}
	}
	if named < 50 {
		t.Errorf("the pages name %d flags; there were more than 50", named)
	}
}
