package report

import (
	"bytes"
	"encoding/csv"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"unicode"

	"github.com/google/go-cmp/cmp"

	"beadwell/calib"
)

// golden compares with a file of testdata, or writes it with -update.
func golden(t *testing.T, name string, got []byte) {
	t.Helper()
	path := filepath.Join("testdata", name)
	if *update {
		if err := os.WriteFile(path, got, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(string(want), string(got)); diff != "" {
		t.Errorf("%s differs; run go test ./cmd/beadwell/internal/report -update and review (-want +got):\n%s", path, diff)
	}
}

func TestTextGolden(t *testing.T) {
	var b bytes.Buffer
	if err := Text(&b, storedSample(), TextOptions{}); err != nil {
		t.Fatal(err)
	}
	golden(t, "sample.txt", b.Bytes())
}

func TestCSVGolden(t *testing.T) {
	var b bytes.Buffer
	set := Set{Results: []*calib.Result{storedSample()}, Failures: []Problem{{Input: "=bad.csv", Message: "line 3: is cut"}}}
	if err := CSV(&b, set); err != nil {
		t.Fatal(err)
	}
	golden(t, "sample.csv", b.Bytes())
}

// Each printer takes a result of which nothing is known.
func TestTextOfNothing(t *testing.T) {
	r := &calib.Result{Axes: []calib.Axis{{Name: "x"}}}
	r.Axes[0].Adopted.Stiffness = calib.Withheld("N/m", "the recording is empty")
	var b bytes.Buffer
	if err := Text(&b, r, TextOptions{}); err != nil || !strings.Contains(b.String(), "x withheld: the recording is empty") {
		t.Errorf("Text = %v, %q", err, b.String())
	}
}

func TestNoControlCharacters(t *testing.T) {
	var text, table bytes.Buffer
	if err := Text(&text, hostileSample(), TextOptions{}); err != nil {
		t.Fatal(err)
	}
	if err := CSV(&table, Set{Results: []*calib.Result{hostileSample()}}); err != nil {
		t.Fatal(err)
	}
	for name, out := range map[string]string{"Text": text.String(), "CSV": table.String()} {
		for _, r := range out {
			if r != '\n' && !unicode.IsPrint(r) {
				t.Errorf("%s lets %U through", name, r)
			}
		}
	}
	rows, err := csv.NewReader(&table).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if got := rows[1][0]; !strings.HasPrefix(got, "'=cmd") {
		t.Errorf("a name that starts a formula is the cell %q", got)
	}
	if got := rows[1][1]; !strings.HasPrefix(got, "'@sum") {
		t.Errorf("a bead that starts a formula is the cell %q", got)
	}
}

// A number in CSV reads back to the same bits, and no sign is taken for a formula.
func TestCSVNumbers(t *testing.T) {
	r := storedSample()
	r.Axes[0].Adopted.Stiffness.Value = -1.0 / 3
	var b bytes.Buffer
	if err := CSV(&b, Set{Results: []*calib.Result{r}}); err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(&b).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if got, err := strconv.ParseFloat(rows[1][5], 64); err != nil || got != -1.0/3 {
		t.Errorf("stiffness cell %q = %v, %v, want -1/3", rows[1][5], got, err)
	}
}

func TestNumber(t *testing.T) {
	lopsided := normal(52.34e-6, 1.1e-6)
	lopsided.Interval68 = [2]calib.Float{51.4e-6, 53.9e-6}
	open := normal(52.34e-6, 1.1e-6)
	open.Interval68[1] = unknown
	noWidth := normal(52.34e-6, 1.1e-6)
	noWidth.Standard = unknown
	for _, test := range []struct {
		u    *calib.Uncertainty
		want string
	}{
		{normal(52.34e-6, 1.1e-6), "52.3(11)"}, // JCGM 100:2008, 7.2.2, two digits
		{normal(52.34e-6, 0.31e-6), "52.34(31)"},
		{lopsided, "52.3 [51.4, 53.9]"},
		{open, "52.3 [51.2, unknown]"},
		{noWidth, "52.34(?)"},
		{nil, "52.34"},
	} {
		if got := number(52.34e-6, test.u, stiffnessUnit); got != test.want {
			t.Errorf("number(52.34e-6 N/m, %+v) = %q, want %q", test.u, got, test.want)
		}
	}
	if got := number(calib.Float(math.Inf(1)), nil, stiffnessUnit); got != dash {
		t.Errorf("number of an unknown value = %q, want %q", got, dash)
	}
}

func TestProbability(t *testing.T) {
	for p, want := range map[calib.Float]string{1: "1.0", 0.5412: "0.54", 0.7: "0.70", 0.0455: "0.045", 0.00123: "0.0012", 0.001: "0.001", 0.00099: "<0.001", 0: "<0.001", unknown: dash} {
		if got := probability(p); got != want {
			t.Errorf("probability(%v) = %q, want %q", p, got, want)
		}
	}
}

func TestPlain(t *testing.T) {
	for in, want := range map[string]string{
		"run 7 µm.csv": "run 7 µm.csv",
		"a\x1b[31mb":   `a\x1b[31mb`,
		"a\nb":         `a\x0ab`,
		"\u202e":       `\u202e`,
		"\U000e0001":   `\U000e0001`,
		"\xff":         `\xff`,
		"\ufffd":       "\ufffd",
		"tab\t":        `tab\x09`,
	} {
		if got := Plain(in); got != want {
			t.Errorf("Plain(%q) = %q, want %q", in, got, want)
		}
	}
}

// A test of equality that was made on no axis has no column.
func TestTextLeavesOutTests(t *testing.T) {
	r := storedSample()
	for i := range r.Axes {
		r.Axes[i].CrossCheck.Routes = calib.Test{PValue: unknown, PValueCombined: unknown}
	}
	var b bytes.Buffer
	if err := Text(&b, r, TextOptions{}); err != nil {
		t.Fatal(err)
	}
	if text := b.String(); strings.Contains(text, "p, routes") || strings.Contains(text, "p, amplitudes") || !strings.Contains(text, "p, all estimates") {
		t.Errorf("Text = %s", text)
	}
}

// One footnote for what several axes share, with a mark on each of them.
func TestSharedFootnote(t *testing.T) {
	r := storedSample()
	shared := r.Findings[0]
	shared.Axis = "z"
	r.Findings = append(r.Findings, shared)
	var b bytes.Buffer
	if err := Text(&b, r, TextOptions{}); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"[1] doubtful, slow-drift on x, z: ", "withheld [1]\n", "pN/um [1] "} {
		if !strings.Contains(b.String(), want) {
			t.Errorf("Text lacks %q:\n%s", want, b.String())
		}
	}
	if strings.Contains(b.String(), "[3]") {
		t.Error("a shared finding has two footnotes")
	}
}

func TestSetTextGolden(t *testing.T) {
	other := storedSample()
	other.Input.Name, other.Axes = "run8.csv", []calib.Axis{other.Axes[2], other.Axes[0]}
	var b bytes.Buffer
	set := Set{Results: []*calib.Result{other, storedSample()}, Failures: []Problem{{Input: "bad\x1b.csv"}}}
	if err := SetText(&b, set, TextOptions{}); err != nil {
		t.Fatal(err)
	}
	summary, _, _ := strings.Cut(b.String(), "\n\n")
	want := `recording, pN/um   verdict        x          y                   z
run8.csv           inconsistent   52.3(11)   -                   withheld
tonight/run7.csv   inconsistent   52.3(11)   48.1 [47.5, 49.6]   withheld
bad\x1b.csv        failed`
	if diff := cmp.Diff(want, summary); diff != "" {
		t.Errorf("SetText (-want +got):\n%s", diff)
	}
	if n := strings.Count(b.String(), "estimates, pN/um"); n != 2 {
		t.Errorf("SetText holds %d results, want 2", n)
	}
}

// Each verdict has a colour of its own beside its word, and the colour ends behind it.
func TestColour(t *testing.T) {
	seen := map[string]bool{}
	for _, status := range []string{calib.Consistent, calib.Inconsistent, calib.Unfit} {
		r := storedSample()
		r.Verdict.Status = status
		var b bytes.Buffer
		if err := Text(&b, r, TextOptions{Colour: true}); err != nil {
			t.Fatal(err)
		}
		before, after, found := strings.Cut(b.String(), status+"\x1b[0m")
		_, colour, coloured := strings.Cut(before, "\x1b[")
		if !found || !coloured || seen[colour] || strings.Contains(after, "\x1b") {
			t.Errorf("%s is not coloured apart: %q", status, before)
		}
		seen[colour] = true
	}
}
