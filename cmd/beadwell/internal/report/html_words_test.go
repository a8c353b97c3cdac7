package report

import (
	"encoding/xml"
	"math"
	"os"
	"strings"
	"testing"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure/specimen"

	"github.com/google/go-cmp/cmp"
)

func TestLaserCaution(t *testing.T) {
	for remedy, want := range map[string]bool{
		"lower the laser power and repeat":            true,
		"let the Laser warm up for half an hour":      true,
		"realign the beam":                            true,
		"use less trapping light":                     true,
		"reduce the trap power":                       true,
		"close the shutter between recordings":        true,
		"let the stage settle and repeat":             false,
		"state the exposure: --exposure 0.4ms":        false,
		"raise the statistical power by a longer run": false,
		"": false,
	} {
		if got := findingOf(calib.Finding{Remedy: remedy}).Caution != ""; got != want {
			t.Errorf("caution for %q: %t, want %t", remedy, got, want)
		}
	}
	page := htmlOf(t, specimen.Result())
	if n := strings.Count(page, laserCaution); n != 1 {
		t.Errorf("%d cautions, want one for the one remedy that names the laser", n)
	}
}

func TestTypesetUnits(t *testing.T) {
	for in, want := range map[string]string{
		"52.3(11) pN/um":            "52.3(11)\u00a0pN/µm",
		"bead of 1.02(3) um, 22 C":  "bead of 1.02(3)\u00a0µm, 22\u00a0°C",
		"155.8(17) nm2":             "155.8(17)\u00a0nm²",
		"stiffness in pN/um":        "stiffness in pN/µm",
		"time in s, x in um, 10 Hz": "time in s, x in um, 10\u00a0Hz",
		"-39 nm to 4 nm":            "−39\u00a0nm to 4\u00a0nm",
		"run-3 of 2026-01-02":       "run-3 of 2026-01-02",
		"5 %":                       "5\u00a0%",
		"use --unit um":             "use --unit um",
		"997.77(50) kg/m3":          "997.77(50) kg/m³",
		"drum 2 um":                 "drum 2\u00a0µm",
		"3 sum":                     "3 sum",
		"0.43(2) um2/s":             "0.43(2)\u00a0µm²/s",
	} {
		if got := typeset(in); got != want {
			t.Errorf("typeset(%q) = %q, want %q", in, got, want)
		}
	}
}

func TestCommandLineQuotes(t *testing.T) {
	got := commandLine([]string{"beadwell", "calibrate", "--diameter", "1.02(3) um", "it's.csv", ""})
	if want := `beadwell calibrate --diameter '1.02(3) um' 'it'\''s.csv' ''`; got != want {
		t.Errorf("commandLine = %s, want %s", got, want)
	}
}

func TestBudgetRow(t *testing.T) {
	row := budgetRow(calib.BudgetLine{Input: "temperature", Value: 295.15, Unit: "K", StandardUncertainty: 2, Sensitivity: 1.2, Contribution: 0.0081, Share: 0.34})
	var got []string
	for _, c := range row.Cells {
		got = append(got, c.Text)
	}
	want := []string{"22.0(20)\u00a0°C", "1.2", "∞", "0.81\u00a0%", "34\u00a0%"}
	if diff := cmp.Diff(want, got); diff != "" {
		t.Error(diff)
	}
	if row.Cells[4].Bar != "34.0" {
		t.Errorf("bar of %s percent, want 34.0", row.Cells[4].Bar)
	}
	if row := budgetRow(calib.BudgetLine{Value: calib.Float(math.NaN())}); row.Cells[0].Text != dash {
		t.Errorf("value %q of an input without one, want %q", row.Cells[0].Text, dash)
	}
}

func TestNumbersForReaders(t *testing.T) {
	for _, c := range []struct{ got, want string }{
		{percent(0.999), "100\u00a0%"}, {percent(0.0138), "1.4\u00a0%"}, {percent(-0.155), "−16\u00a0%"}, {percent(1.9e-9), "below 0.01\u00a0%"},
		{percent(0), "0\u00a0%"}, {percent(unknown), "-"},
		{inOwnUnit(0.0467773, "1"), "0.0468"}, {inOwnUnit(12.3456e-9, "m"), "12.3 nm"}, {inOwnUnit(2.3456, "sigma"), "2.35 sigma"},
		{rounded(1.050139, 5, "1"), "1.0501"}, {rounded(unknown, 5, "1"), "-"},
		{moment(-8e-15, "s"), "0\u00a0s"}, {moment(2.5e-6, "us"), "2.5\u00a0µs"},
	} {
		if c.got != c.want {
			t.Errorf("got %q, want %q", c.got, c.want)
		}
	}
}

// readableText is what a page says without its figures: a line for each row of
// a table, heading, paragraph and list entry.
func readableText(t *testing.T, page string) string {
	t.Helper()
	var out strings.Builder
	skip := 0
	for _, token := range htmlTokens(t, page) {
		switch e := token.(type) {
		case xml.StartElement:
			switch e.Name.Local {
			case "style", "script", "svg":
				skip++
			case "td", "dd":
				out.WriteString(" | ")
			case "dt", "title":
				out.WriteString("\n")
			case "br":
				out.WriteString("; ")
			}
		case xml.EndElement:
			switch e.Name.Local {
			case "style", "script", "svg":
				skip--
			case "th":
				out.WriteString(" ")
			case "tr", "p", "h1", "h2", "h3", "caption", "li", "div", "dl", "figcaption", "title":
				out.WriteString("\n")
			}
		case xml.CharData:
			if skip == 0 {
				out.WriteString(strings.Trim(string(e), "\n"))
			}
		}
	}
	var lines []string
	for line := range strings.SplitSeq(out.String(), "\n") {
		if line = strings.TrimSpace(line); line != "" {
			lines = append(lines, line)
		}
	}
	return strings.Join(lines, "\n") + "\n"
}

// TestHTMLSays compares the words of a page with a file; every number in it is
// rounded for a reader, so processors agree on it.
func TestHTMLSays(t *testing.T) {
	const name = "testdata/page.txt"
	got := readableText(t, htmlOf(t, specimen.Result()))
	if *update {
		if err := os.WriteFile(name, []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(string(want), got); diff != "" {
		t.Errorf("the page differs from %s; review, then go test -update (-want +got):\n%s", name, diff)
	}
}

// The page of a free bead and of a background answers what they were made for, and shows
// nothing of a trap; no heading of a table is empty, which a screen reader would read as nothing.
func TestPageWithoutATrap(t *testing.T) {
	sample := func(role string, change func(*calib.Axis)) *calib.Result {
		r := storedSample()
		r.Role, r.Axes = role, r.Axes[:1]
		change(&r.Axes[0])
		return r
	}
	diffusion := calib.Quantity{Value: 4.8e-13, Unit: "m2/s", Combined: &calib.Uncertainty{Standard: 2e-14, Interval68: [2]calib.Float{4.6e-13, 5e-13}, Interval95: [2]calib.Float{4.408e-13, 5.192e-13}}}
	for _, test := range []struct {
		r            *calib.Result
		want         []string
		estimatesToo bool
	}{
		{sample(calib.RoleFree, func(a *calib.Axis) { a.Free = &calib.FreeBead{Diffusion: diffusion, Expected: diffusion} }),
			[]string{"<dt>Free diffusion along x</dt>", "0.480(20)\u00a0µm²/s</dd>", "kT over the computed drag 0.480(20)"}, false},
		{sample(calib.RoleBackground, func(a *calib.Axis) {
			a.Background = &calib.Background{Noise: calib.Quantity{Value: 3e-9, Unit: "m", Combined: &calib.Uncertainty{Standard: 1e-10, Interval68: [2]calib.Float{2.9e-9, 3.1e-9}, Interval95: [2]calib.Float{2.804e-9, 3.196e-9}}}}
		}), []string{"<dt>Noise along x</dt>", "3.00(10)\u00a0nm</dd>"}, false},
		{sample("", func(a *calib.Axis) { a.Free = &calib.FreeBead{Diffusion: diffusion, Expected: diffusion} }), []string{"<dt>Stiffness along x</dt>"}, true},
	} {
		var b strings.Builder
		if err := HTML(&b, test.r); err != nil {
			t.Fatal(err)
		}
		page := b.String()
		for _, want := range test.want {
			if !strings.Contains(page, want) {
				t.Errorf("role %q: %q is not on the page", test.r.Role, want)
			}
		}
		for _, part := range []string{`id="estimates"`, `id="budget"`, `id="figure-spectrum-x"`} {
			if strings.Contains(page, part) != test.estimatesToo {
				t.Errorf("role %q: %s on the page is %v", test.r.Role, part, !test.estimatesToo)
			}
		}
		if strings.Contains(page, `<th scope="col"></th>`) {
			t.Errorf("role %q: a heading of a table is empty", test.r.Role)
		}
	}
}
