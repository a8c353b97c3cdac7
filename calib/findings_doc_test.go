package calib_test

import (
	"flag"
	"fmt"
	"os"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"beadwell/calib"
)

var update = flag.Bool("update", false, "write the generated part of docs/findings.md instead of comparing with it")

const findingsPage = "../docs/findings.md"

// docs/findings.md holds the long form of every finding, made from calib.Explanations.
func TestFindingsPageIsCurrent(t *testing.T) {
	page, err := os.ReadFile(findingsPage)
	if err != nil {
		t.Fatal(err)
	}
	const begin, end = "<!-- findings: made by go test -update -->\n", "<!-- end of findings -->"
	before, rest, found := strings.Cut(string(page), begin)
	_, after, closed := strings.Cut(rest, end)
	if !found || !closed {
		t.Fatalf("%s has no place for the findings", findingsPage)
	}
	want := before + begin + "\n" + findingsReference() + end + after
	if *update {
		if err := os.WriteFile(findingsPage, []byte(want), 0o644); err != nil {
			t.Fatal(err)
		}
		return
	}
	if diff := cmp.Diff(want, string(page)); diff != "" {
		t.Errorf("%s is not what the codes say; run go test ./calib -run TestFindingsPage -update (-want +got):\n%s", findingsPage, diff)
	}
}

// findingsReference writes a table of all codes, and a section for each.
func findingsReference() string {
	var b strings.Builder
	b.WriteString("| code | in short |\n| --- | --- |\n")
	for _, e := range calib.Explanations() {
		fmt.Fprintf(&b, "| [`%s`](#%s) | %s |\n", e.Code, e.Code, e.Title)
	}
	b.WriteString("\n")
	for _, e := range calib.Explanations() {
		fmt.Fprintf(&b, "### %s\n\n", e.Code)
		fmt.Fprintf(&b, "%s.\n\n", strings.ToUpper(e.Title[:1])+e.Title[1:])
		for paragraph := range strings.SplitSeq(e.Long, "\n") {
			b.WriteString(paragraph + "\n\n")
		}
	}
	return b.String()
}
