package figure

import (
	"bytes"
	"encoding/csv"
	"strconv"
	"strings"
)

// dataHeader names the columns of Data.
var dataHeader = []string{"panel", "series", "x", "x_unit", "x_low", "x_high", "x_low_68", "x_high_68", "y", "y_unit", "y_low", "y_high"}

// Data returns what a figure shows as CSV, one row a point, in SI units at full
// precision. A cell is empty where a series has no such number. For points low
// and high are one standard uncertainty away, for an envelope they are its ends,
// for columns and shaded stretches the ends along x, for estimates the 95 %
// interval, beside the one of 68 %. An empty figure has only the header.
func Data(f Figure) ([]byte, error) {
	var out bytes.Buffer
	w := csv.NewWriter(&out)
	rows := [][]string{dataHeader}
	for _, p := range f.panels {
		for _, s := range p.series {
			rows = append(rows, s.rows(p)...)
		}
	}
	if err := w.WriteAll(rows); err != nil {
		return nil, err
	}
	return out.Bytes(), nil
}

// rows are the points of a series as cells.
func (s series) rows(p panel) [][]string {
	n := max(len(s.x), len(s.y), len(s.low))
	rows := make([][]string, n)
	for i := range rows {
		low, high := cellAt(s.low, i), cellAt(s.high, i)
		row := []string{spreadsheetSafe(p.name), spreadsheetSafe(s.name), cellAt(s.x, i), p.x.si, "", "", "", "", cellAt(s.y, i), p.y.si, "", ""}
		switch s.mark {
		case columns, span, strip:
			row[4], row[5] = low, high
		case whisker:
			row[4], row[5], row[6], row[7] = low, high, cellAt(s.innerLow, i), cellAt(s.inHigh, i)
			row[8] = "" // the row of the figure is no number of the result
		default:
			row[10], row[11] = low, high
		}
		rows[i] = row
	}
	return rows
}

func cellAt(values []float64, i int) string {
	if i >= len(values) || !finite(values[i]) {
		return ""
	}
	return strconv.FormatFloat(values[i], 'g', -1, 64)
}

// spreadsheetSafe keeps a name from being read as a formula.
func spreadsheetSafe(name string) string {
	if strings.ContainsAny(name[:min(1, len(name))], "=+-@") {
		return "'" + name
	}
	return name
}
