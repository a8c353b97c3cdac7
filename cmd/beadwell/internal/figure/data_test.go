package figure

import (
	"bytes"
	"encoding/csv"
	"strconv"
	"testing"

	"beadwell/cmd/beadwell/internal/figure/specimen"
)

// rowsOf reads the data of a figure back, by column name.
func rowsOf(t *testing.T, f Figure) []map[string]string {
	t.Helper()
	out, err := Data(f)
	if err != nil {
		t.Fatal(err)
	}
	table, err := csv.NewReader(bytes.NewReader(out)).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []map[string]string
	for _, cells := range table[1:] {
		row := map[string]string{}
		for i, title := range table[0] {
			row[title] = cells[i]
		}
		rows = append(rows, row)
	}
	return rows
}

func TestDataHoldsTheNumbersInSI(t *testing.T) {
	r := specimen.Result()
	a := &r.Axes[0]
	figures := All(r)
	exact := func(text string, want float64) bool {
		got, err := strconv.ParseFloat(text, 64)
		return err == nil && got == want
	}
	points := 0
	for _, row := range rowsOf(t, figures[1]) {
		if row["x_unit"] != "Hz" {
			t.Fatalf("x in %q, want Hz", row["x_unit"])
		}
		if row["panel"] == "spectrum" && (row["series"] == "used" || row["series"] == "left out") {
			points++
			if row["y_unit"] != "m2/Hz" {
				t.Fatalf("y in %q, want m2/Hz", row["y_unit"])
			}
		}
	}
	if points != len(a.Spectrum.Points) {
		t.Errorf("%d points in the data, the result has %d", points, len(a.Spectrum.Points))
	}
	for _, row := range rowsOf(t, figures[0]) {
		if row["panel"] != "x" || row["series"] != a.Estimates[0].Leg {
			continue
		}
		q := a.Estimates[0].Stiffness
		if !exact(row["x"], float64(q.Value)) || !exact(row["x_low"], float64(q.Combined.Interval95[0])) ||
			!exact(row["x_high_68"], float64(q.Combined.Interval68[1])) || row["x_unit"] != "N/m" || row["y"] != "" {
			t.Errorf("row %v does not hold %v", row, q)
		}
		return
	}
	t.Error("the first estimate of x is not in the data")
}

func TestDataIsSafeInASpreadsheet(t *testing.T) {
	r := specimen.Result()
	r.Findings[0].Code = "=cmd()"
	for _, row := range rowsOf(t, All(r)[4]) {
		if row["series"][0] == '=' {
			t.Errorf("series %q would be read as a formula", row["series"])
		}
	}
}

func TestDataOfAnEmptyFigure(t *testing.T) {
	if rows := rowsOf(t, Figure{}.empty("nothing")); len(rows) != 0 {
		t.Errorf("%d rows, want none", len(rows))
	}
}
