package main

import (
	"bytes"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"time"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/cli"
)

// shown finds the commands whose output a page shows.
var shown = regexp.MustCompile("(?s)<!-- output: beadwell ([^\n]*) -->\n```text\n(.*?)```")

// TestShownOutput runs every command that README.md or a page of docs shows with its
// output, from the top of the repository, and compares.
func TestShownOutput(t *testing.T) {
	t.Chdir("../..")
	pages, err := filepath.Glob("docs/*.md")
	if err != nil {
		t.Fatal(err)
	}
	found := 0
	for _, page := range append([]string{"README.md"}, pages...) {
		text, err := os.ReadFile(page)
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range shown.FindAllStringSubmatch(string(text), -1) {
			found++
			var out, errs bytes.Buffer
			world := cli.World{In: strings.NewReader(""), Out: &out, Err: &errs, Getenv: func(string) string { return "" },
				Now: func() time.Time { return time.Unix(0, 0) }, Version: "test", Calibrate: calib.Calibrate}
			status := cli.Main(strings.Fields(m[1]), world)
			if got := strings.TrimRight(out.String(), "\n"); got != strings.TrimRight(m[2], "\n") {
				t.Errorf("%s shows another output of beadwell %s (status %d, %s); it is now:\n%s", page, m[1], status, errs.String(), got)
			}
		}
	}
	if found == 0 {
		t.Error("no page shows a command with its output")
	}
}
