package report

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"math"
	"strconv"
	"strings"
	"testing"

	"beadwell/calib"
	"beadwell/calib/session"
)

func planOf(t *testing.T) *calib.Plan {
	t.Helper()
	flags := &session.Settings{}
	for key, text := range map[string]string{"bead.diameter": "1.02(3) um", "medium.fluid": "water", "medium.temperature": "24.5(5) C", "chamber.height": "far",
		"recording.rate": "400 Hz", "recording.noise": "1 nm"} {
		if err := flags.Set(key, "", text, session.FromFlag, key); err != nil {
			t.Fatal(err)
		}
	}
	settings, err := session.ForTrack(session.Sources{Flags: flags})
	if err != nil {
		t.Fatal(err)
	}
	plan, err := calib.Forecast(settings, calib.PlanOptions{Stiffness: 20e-6, Wanted: 0.02})
	if err != nil {
		t.Fatal(err)
	}
	return plan
}

// The table has a row for each duration and rate, and its numbers are those of the plan.
func TestPlanCSV(t *testing.T) {
	plan := planOf(t)
	var out bytes.Buffer
	if err := PlanCSV(&out, plan); err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(&out).ReadAll()
	if want := 1 + len(plan.Times) + len(plan.Rates.Rows); err != nil || len(rows) != want {
		t.Fatalf("%d rows, %v, want %d", len(rows), err, want)
	}
	for i, row := range plan.Times {
		for column, want := range map[int]calib.Float{1: row.Duration, 2: 400, 5: row.Routes.Drag.Combined, 6: row.Routes.Amplitude.Statistical, 8: row.Routes.Both.Statistical, 10: row.Drift} {
			if !want.Known() && rows[i+1][column] == "" {
				continue
			}
			if got, err := strconv.ParseFloat(rows[i+1][column], 64); err != nil || got != float64(want) {
				t.Errorf("duration %g, %s: %s, want %g", float64(row.Duration), rows[0][column], rows[i+1][column], float64(want))
			}
		}
	}
}

// A stored plan reads back to the same, with what is not known as null.
func TestPlanJSON(t *testing.T) {
	plan := planOf(t)
	var out bytes.Buffer
	if err := PlanJSON(&out, plan); err != nil {
		t.Fatal(err)
	}
	var again calib.Plan
	if err := json.Unmarshal(out.Bytes(), &again); err != nil {
		t.Fatal(err)
	}
	var twice bytes.Buffer
	if err := PlanJSON(&twice, &again); err != nil || !bytes.Equal(out.Bytes(), twice.Bytes()) {
		t.Errorf("a plan that was read writes other bytes (%v)", err)
	}
	if q := again.Wanted.Drag; q.Known() || q.Reason == "" {
		t.Errorf("2 %% by drag with a bead of 3 %%: %+v, want null with a reason", q)
	}
}

func TestPlanText(t *testing.T) {
	plan := planOf(t)
	plan.Times[0].Routes.Drag = calib.PlanUncertainty{Statistical: calib.Float(math.NaN()), Combined: calib.Float(math.NaN())}
	var out bytes.Buffer
	if err := PlanText(&out, plan); err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"stiffness 20 pN/um", "bead of 1.020(30) um, far from any surface", "localisation noise 1 nm", "for 2.0 %: record for ", "never: the inputs alone leave",
		"enough: longer than ", "rate: ", "as planned", "without end"} {
		if !strings.Contains(strings.Join(strings.Fields(out.String()), " "), want) { // however the lines are broken
			t.Errorf("the text lacks %q:\n%s", want, out.String())
		}
	}
	for line := range strings.Lines(out.String()) {
		if n := len([]rune(line)); n > 100 || strings.Contains(line, "NaN") || strings.Contains(line, "e+") {
			t.Errorf("a line that is too long, or has a number that people do not read: %s", line)
		}
	}
}
