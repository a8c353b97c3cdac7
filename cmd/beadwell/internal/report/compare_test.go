package report

import (
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"beadwell/calib"
)

// A result is the same as itself, whatever clock, version, command line and name say.
func TestCompareSame(t *testing.T) {
	now := storedSample()
	now.Created, now.Program, now.Input.Name = "later", calib.Program{Name: "beadwell", Version: "next"}, "elsewhere.csv"
	c, err := Compare(storedSample(), now)
	if err != nil || !c.Same || len(c.Changes) > 0 || len(c.Wording) > 0 || c.Stored != "test" || c.Now != "next" {
		t.Errorf("Compare = %+v, %v", c, err)
	}
}

// The smallest change of any number is a difference; a sentence is none.
func TestCompareFinds(t *testing.T) {
	for _, test := range []struct {
		name   string
		change func(*calib.Result)
		key    string
		words  bool
	}{
		{"last bit", func(r *calib.Result) {
			v := &r.Axes[1].Adopted.Stiffness.Value
			*v = calib.Float(math.Nextafter(float64(*v), 1))
		}, "axes[1].adopted.stiffness.value", false},
		{"unknown", func(r *calib.Result) { r.Axes[0].Mean = unknown }, "axes[0].mean_m", false},
		{"status", func(r *calib.Result) { r.Verdict.Status = calib.Unfit }, "verdict.status", false},
		{"setting", func(r *calib.Result) { r.Settings[0].Text = "2 um" }, "settings[0].text", false},
		{"list", func(r *calib.Result) { r.Axes = r.Axes[:2] }, "axes", false},
		{"optional part", func(r *calib.Result) { r.Choices = &calib.Choices{Adopt: "drag"} }, "choices", false},
		{"hash", func(r *calib.Result) { r.Input.SHA256 = "01ff" }, "input.sha256", false},
		{"sentence", func(r *calib.Result) { r.Verdict.Text = "They agree." }, "verdict.text", true},
		{"reason", func(r *calib.Result) { r.Axes[2].Adopted.Stiffness.Reason = "why" }, "axes[2].adopted.stiffness.reason", true},
	} {
		now := storedSample()
		test.change(now)
		c, err := Compare(storedSample(), now)
		if err != nil {
			t.Fatal(err)
		}
		found := c.Changes
		if test.words {
			found = c.Wording
		}
		if c.Same != test.words || len(c.Changes)+len(c.Wording) != 1 || len(found) != 1 || found[0].Key != test.key {
			t.Errorf("%s: %+v, want one change of %s", test.name, c, test.key)
		}
	}
}

// The relative difference has the sign of the change, and none where it has no meaning.
func TestCompareRelative(t *testing.T) {
	stored, now := storedSample(), storedSample()
	stored.Axes[0].Mean, now.Axes[0].Mean = -2, -3
	stored.Axes[1].Mean, now.Axes[1].Mean = 0, 1
	stored.Axes[2].Mean, now.Axes[2].Mean = 4, 5
	c, err := Compare(stored, now)
	if err != nil || len(c.Changes) != 3 {
		t.Fatalf("%+v, %v", c, err)
	}
	// (-3 - -2)/2, and (5-4)/4
	if c.Changes[0].Relative != -0.5 || c.Changes[1].Relative.Known() || c.Changes[2].Relative != 0.25 || c.Largest.Key != "axes[0].mean_m" {
		t.Errorf("relative differences %+v, largest %+v", c.Changes, c.Largest)
	}
}

// The table shows a part of very many changes and says so; CSV has all.
func TestComparisonOfMany(t *testing.T) {
	c := Comparison{Input: "run\x1b.csv", Stored: "1", Now: "1"}
	for range 50 {
		c.Changes = append(c.Changes, Change{Key: "k", Stored: strings.Repeat("=long ", 20), Now: nil, Relative: unknown})
	}
	var text, table strings.Builder
	if err := ComparisonText(&text, c); err != nil {
		t.Fatal(err)
	}
	if err := ComparisonCSV(&table, c); err != nil {
		t.Fatal(err)
	}
	if !strings.HasPrefix(text.String(), "run\\x1b.csv: 50 values differ\n") || !strings.Contains(text.String(), "\n  and 10 more; ") || strings.Contains(text.String(), "relative difference: ") {
		t.Errorf("text:\n%s", text.String())
	}
	lines := strings.Split(strings.TrimSpace(table.String()), "\n")
	if len(lines) != 51 || !strings.HasPrefix(lines[1], "k,'=long ") {
		t.Errorf("CSV has %d lines, the second is %q", len(lines), lines[1])
	}
}

// The JSON of a comparison has its lists even when they are empty.
func TestComparisonJSON(t *testing.T) {
	c, err := Compare(storedSample(), storedSample())
	if err != nil {
		t.Fatal(err)
	}
	var b strings.Builder
	if err := ComparisonJSON(&b, c); err != nil {
		t.Fatal(err)
	}
	want := `{
 "schema": "beadwell-comparison/1",
 "input": "tonight/run7.csv",
 "same": true,
 "stored_version": "test",
 "program_version": "test",
 "largest_change": null,
 "changes": [],
 "changes_in_words": []
}
`
	if diff := cmp.Diff(want, b.String()); diff != "" {
		t.Errorf("(-want +got):\n%s", diff)
	}
}
