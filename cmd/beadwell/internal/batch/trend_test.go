package batch

import (
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"beadwell/calib"
)

// Twelve months, with the stiffness per watt 8 % lower from September on, and a drag ratio
// that stays: the change is named with its month, and nothing else is.
func TestTrendFindsTheChange(t *testing.T) {
	folder, r := t.TempDir(), rand.New(rand.NewPCG(3, 1))
	var paths []string
	for month := 1; month <= 12; month++ {
		k := 50e-6 // N/m, at 50 mW
		if month >= 9 {
			k *= 0.92
		}
		row := emptyRow("a.csv", calib.Consistent, "")
		row.Power.Value = 0.05
		noisy := func(v float64) Number {
			return Number{Value: calib.Float(v * (1 + 0.01*r.NormFloat64())), Statistical: calib.Float(0.01 * v), Combined: unknown.Value}
		}
		row.Axes = []RowAxis{{Axis: "x", Stiffness: noisy(k), DragRatio: noisy(1), Corner: unknown, Drag: unknown, Sensitivity: unknown, WallFactor: unknown}}
		s := &Summary{Schema: SummarySchema, Rows: []Row{row}}
		text, err := s.JSON()
		if err != nil {
			t.Fatal(err)
		}
		path := filepath.Join(folder, fmt.Sprintf("2026-%d", month))
		write(t, filepath.Join(path, SummaryJSON), string(text))
		paths = append([]string{path}, paths...) // the order of the arguments does not matter
	}
	trend, err := NewTrend(paths)
	if err != nil {
		t.Fatal(err)
	}
	text := trend.Text()
	if !strings.Contains(text, "a change at "+filepath.Join(folder, "2026-9")) || strings.Count(text, "a change at") != 1 || !strings.Contains(text, "steady") {
		t.Errorf("trend:\n%s", text)
	}
	table, err := trend.CSV()
	if err != nil || strings.Count(string(table), "\n") != 25 {
		t.Errorf("%d lines of CSV, want a header and 24 rows: %v", strings.Count(string(table), "\n"), err)
	}
	stored, err := trend.JSON()
	if err != nil {
		t.Fatal(err)
	}
	var got storedTrend
	if err := json.Unmarshal(stored, &got); err != nil || got.Schema != TrendSchema || len(got.Sessions) != 12 || len(got.Charts) != 2 {
		t.Fatalf("JSON: %v\n%s", err, stored)
	}
	change := got.Charts[0].Change
	if filepath.Base(change.At) != "2026-9" || !change.Told || math.Abs(float64(change.Step.Value)/-0.08e-3-1) > 0.3 { // 1 mN/(m W) falls by 8 %; 1 % of noise on each of 12
		t.Errorf("the change in JSON: %+v", change)
	}
	if steady := got.Charts[1]; steady.Change != nil && steady.Change.Told || len(steady.Messages) != 0 || len(steady.Points) != 12 || math.Abs(float64(steady.Centre.Value)-1) > 0.02 {
		t.Errorf("the drag ratio in JSON: %+v", steady)
	}
	if page, err := trend.HTML(); err != nil || !strings.Contains(string(page), "2026-9") || !strings.Contains(string(page), "<svg") {
		t.Errorf("page: %v", err)
	}
	if _, err := NewTrend([]string{filepath.Join(folder, "gone")}); err == nil {
		t.Error("a folder that is not there was not refused")
	}
	if err := os.WriteFile(filepath.Join(folder, SummaryJSON), []byte(`{"schema":"other"}`), 0o666); err != nil {
		t.Fatal(err)
	}
	if _, err := NewTrend([]string{folder}); err == nil {
		t.Error("another schema was not refused")
	}
}
