package report

import (
	"bytes"
	"encoding/csv"
	"errors"
	"math"
	"strconv"
	"strings"
	"testing"

	"beadwell/calib"
)

// forceOf is a trace of a trap of 50.0(10) pN/um, with a range that was seen to be harmonic of 30 nm.
func forceOf(positions ...float64) calib.ForceTrace {
	stiffness := calib.Quantity{Value: 50e-6, Unit: "N/m", Combined: &calib.Uncertainty{Standard: 1e-6, Interval68: [2]calib.Float{49e-6, 51e-6}}}
	return calib.ForceTrace{Trap: calib.Trap{Axis: "x", Estimate: calib.EstimateAdopted, Stiffness: stiffness, Relative: 0.02, Corner: 500,
		Linear: calib.Linear{Low: -30e-9, High: 30e-9, Reason: "the bead was not seen further out"}}, Noise: math.NaN(), Positions: positions, Rate: 1000}
}

// Every number is found again from position and stiffness: displacement, 50 pN/um times it, and 2 % of that.
func TestForceCSV(t *testing.T) {
	trace := forceOf(-70e-9, 0, math.NaN(), 33e-9)
	var out bytes.Buffer
	if err := ForceCSV(&out, 2.5, 1000, []calib.ForceTrace{trace}); err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(&out).ReadAll()
	if err != nil || len(rows) != 5 {
		t.Fatalf("%d rows, %v, want a header and 4", len(rows), err)
	}
	for i, position := range trace.Positions {
		row := rows[i+1]
		if want := strconv.FormatFloat(2.5+float64(i)/1000, 'g', 15, 64); row[0] != want {
			t.Errorf("row %d: time %s, want %s", i, row[0], want)
		}
		if math.IsNaN(position) {
			if strings.Join(row[1:], "") != "" {
				t.Errorf("row %d: %v, want empty cells for a missing sample", i, row)
			}
			continue
		}
		for column, want := range map[int]float64{1: position, 2: 50e-6 * position, 4: 0.02 * 50e-6 * math.Abs(position)} {
			tolerance := 1e-11 // 12 digits are written
			if column == 4 {
				tolerance = 1e-3 // 4 digits
			}
			got, err := strconv.ParseFloat(row[column], 64)
			if err != nil || math.Abs(got-want) > tolerance*math.Abs(want) {
				t.Errorf("row %d, %s: %s, want %g", i, rows[0][column], row[column], want)
			}
		}
		if row[3] != "" {
			t.Errorf("row %d: noise %q, which is not known", i, row[3])
		}
	}
}

// A trace that cannot be written says so, however long it is.
func TestForceCSVFull(t *testing.T) {
	for _, n := range []int{1, 100_000} {
		if err := ForceCSV(fullDevice{}, 0, 1000, []calib.ForceTrace{forceOf(make([]float64, n)...)}); !errors.Is(err, errFull) {
			t.Errorf("%d samples: %v, want %v", n, err, errFull)
		}
	}
}

func TestForceText(t *testing.T) {
	trace := forceOf(-70e-9, 0, math.NaN(), 33e-9)
	f := Force{Input: calib.Input{Name: "pull\x1b[2J.csv"}, Calibration: calib.Input{Name: "run.csv"}, Verdict: calib.Verdict{Status: calib.Consistent},
		Centre: "as given", Rate: 1000, Duration: 0.004, Axes: []calib.ForceSummary{trace.Summary()},
		Findings: []calib.Finding{{Code: "beyond-linear-range", Severity: calib.Doubtful, Text: "Far out.", Remedy: "pull less"}}}
	var out bytes.Buffer
	if err := ForceText(&out, f); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"-3.5 ", "1.65 ", "50.0(10)", "calibration 2.0 % of each force", "localisation noise not known", "from -30 to 30 nm",
		"1 of 4 samples missing", "doubtful, beyond-linear-range: Far out. To do: pull less."} {
		if !strings.Contains(strings.Join(strings.Fields(out.String()), " "), want) { // however the lines are broken
			t.Errorf("the text lacks %q:\n%s", want, out.String())
		}
	}
	if strings.Contains(out.String(), "\x1b") {
		t.Error("the name of the input steers the terminal")
	}
	for line := range strings.Lines(out.String()) {
		if n := len([]rune(line)); n > 100 {
			t.Errorf("a line of %d characters: %s", n, line)
		}
	}
}
