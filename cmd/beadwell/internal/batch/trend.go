package batch

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"errors"
	"fmt"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"

	"beadwell/calib"
	"beadwell/calib/series"
	"beadwell/cmd/beadwell/internal/report"
)

// Trend is the trap over many sessions.
type Trend struct {
	Sessions []string // names, in natural order: dates as 2026-03-01 sort by time
	Charts   []TrendChart
}

// TrendChart is one number over the sessions.
type TrendChart struct {
	Name     string // "stiffness per power, x"
	Unit     string // SI
	Sessions []string
	Values   []series.Measured
	Chart    *series.Chart // nil with the reason
	Reason   string
}

// trendNumbers are those that are followed. of gives the number of one axis of one row and
// its standard uncertainty; false when the row has none.
var trendNumbers = []struct {
	name, unit string
	of         func(Row, RowAxis) (value, u float64, ok bool)
}{
	{"stiffness per power", "N/(m W)", func(r Row, a RowAxis) (float64, float64, bool) {
		p := float64(r.Power.Value)
		return float64(a.Stiffness.Value) / p, float64(a.Stiffness.Statistical) / p, known(r.Power.Value) && known(a.Stiffness.Value) && known(a.Stiffness.Statistical)
	}},
	{"sensitivity", "m/V", func(_ Row, a RowAxis) (float64, float64, bool) {
		return float64(a.Sensitivity.Value), float64(a.Sensitivity.Combined), known(a.Sensitivity.Value) && known(a.Sensitivity.Combined)
	}},
	{"drag ratio", "1", func(_ Row, a RowAxis) (float64, float64, bool) {
		return float64(a.DragRatio.Value), float64(a.DragRatio.Statistical), known(a.DragRatio.Value) && known(a.DragRatio.Statistical)
	}},
}

// NewTrend reads the summaries of sessions: each path is a folder of results or a
// summary.json. Recordings that were found unfit stay out.
func NewTrend(paths []string) (*Trend, error) {
	type session struct {
		name    string
		summary *Summary
	}
	var sessions []session
	for _, path := range paths {
		name := filepath.Clean(path)
		if info, err := os.Stat(path); err == nil && info.IsDir() {
			path = filepath.Join(path, SummaryJSON)
		}
		summary, err := readSummary(path)
		if err != nil {
			return nil, err
		}
		sessions = append(sessions, session{name, summary})
	}
	slices.SortStableFunc(sessions, func(a, b session) int { return natural(a.name, b.name) })
	t := &Trend{}
	for _, s := range sessions {
		t.Sessions = append(t.Sessions, s.name)
	}
	for _, n := range trendNumbers {
		for _, axis := range axisNames {
			chart := TrendChart{Name: n.name + ", " + axis, Unit: n.unit}
			for _, s := range sessions {
				if value, ok := s.summary.together(axis, n.of); ok {
					chart.Sessions, chart.Values = append(chart.Sessions, s.name), append(chart.Values, value)
				}
			}
			if len(chart.Values) == 0 {
				continue
			}
			var err error
			if chart.Chart, err = series.NewChart(chart.Values, series.ChartOptions{}); err != nil {
				chart.Reason = err.Error()
			}
			t.Charts = append(t.Charts, chart)
		}
	}
	return t, nil
}

// readSummary reads a summary.json.
func readSummary(path string) (*Summary, error) {
	text, err := os.ReadFile(path)
	if errors.Is(err, fs.ErrNotExist) {
		return nil, fileError(path, "no such file; give a folder that beadwell batch wrote")
	}
	if err != nil {
		return nil, err
	}
	s := new(Summary)
	if err := json.Unmarshal(text, s); err != nil || s.Schema != SummarySchema {
		return nil, fileError(path, "is not a summary of this version; run beadwell batch again")
	}
	return s, nil
}

// together is the number of a session: that of its only recording, or the mean over its
// recordings with what they differ among each other.
func (s *Summary) together(axis string, of func(Row, RowAxis) (float64, float64, bool)) (series.Measured, bool) {
	var values []series.Measured
	for _, row := range s.Rows {
		a, has := row.axis(axis)
		if !has || row.Status == calib.Unfit || !row.holdsTrap() {
			continue
		}
		if v, u, ok := of(row, a); ok {
			values = append(values, series.Measured{Value: v, Uncertainty: u})
		}
	}
	switch len(values) {
	case 0:
		return series.Measured{}, false
	case 1:
		return values[0], true
	}
	fit, err := series.Repeats(values, 0)
	if err != nil {
		return series.Measured{}, false
	}
	return series.Measured{Value: fit.Random.Value, Uncertainty: fit.Random.Statistical}, true
}

// changeLevel is the p-value below which a change is told as one.
const changeLevel = 0.01

func (c TrendChart) alarms() []string {
	if c.Chart == nil {
		return nil
	}
	var all []string
	for i, p := range c.Chart.Points {
		if p.Outside {
			all = append(all, fmt.Sprintf("%s is outside, %.1f standard deviations from the centre", report.Plain(c.Sessions[i]), p.Score))
		}
	}
	for _, r := range c.Chart.Runs {
		side := "below"
		if r.Above {
			side = "above"
		}
		all = append(all, fmt.Sprintf("%d in a row %s the centre, from %s to %s", r.Last-r.First+1, side, report.Plain(c.Sessions[r.First]), report.Plain(c.Sessions[r.Last])))
	}
	if ch := c.Chart.Change; ch != nil && ch.PValue < changeLevel {
		bounds := ""
		if ch.Earliest != ch.Latest {
			bounds = fmt.Sprintf(" (between %s and %s)", report.Plain(c.Sessions[ch.Earliest]), report.Plain(c.Sessions[ch.Latest]))
		}
		all = append(all, fmt.Sprintf("a change at %s%s: %s, that is %+.2g %%, p <= %.2g", report.Plain(c.Sessions[ch.Index]), bounds, c.shown(ch.Step.Value, ch.Step.Combined), 100*ch.Step.Value/ch.Before.Value, ch.PValue))
	}
	return all
}

// shown prints a number of the chart in its unit for people.
func (c TrendChart) shown(value, u float64) string {
	v := SeriesValue{Value: calib.Float(value), Unit: c.Unit, Combined: calib.Float(u)}
	text, _, _ := strings.Cut(v.text(), ", stated")
	return text
}

// Text is the trend for a person.
func (t *Trend) Text() string {
	var b strings.Builder
	fmt.Fprintf(&b, "%s\n", sessionCount(len(t.Sessions)))
	for _, c := range t.Charts {
		fmt.Fprintf(&b, "\n%s, %s\n", c.Name, sessionCount(len(c.Values)))
		if c.Chart == nil {
			fmt.Fprintf(&b, "  no chart: %s\n", c.Reason)
			continue
		}
		fmt.Fprintf(&b, "  centre: %s\n", c.shown(c.Chart.Centre.Value, c.Chart.Centre.Combined))
		fmt.Fprintf(&b, "  standard deviation between sessions beyond the stated uncertainties: %s\n", c.shown(c.Chart.Between, math.NaN()))
		if c.Chart.Goodness.PValue < 0.05 {
			fmt.Fprintf(&b, "  the scatter is %.2g times the stated uncertainties, p = %.2g\n", c.Chart.Goodness.Birge, c.Chart.Goodness.PValue)
		}
		alarms := c.alarms()
		for _, alarm := range alarms {
			fmt.Fprintf(&b, "  %s\n", alarm)
		}
		if len(alarms) == 0 {
			b.WriteString("  steady: no point outside, no run, no change\n")
		}
	}
	return b.String()
}

// CSV is a row for each session and number, in SI units at full precision.
func (t *Trend) CSV() ([]byte, error) {
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	w.Write([]string{"number", "unit", "session", "value", "standard_uncertainty", "centre", "stated_low", "stated_high", "observed_low", "observed_high", "score", "outside"})
	cells := func(values ...float64) (out []string) {
		for _, v := range values {
			out = append(out, exact(calib.Float(v)))
		}
		return out
	}
	for _, c := range t.Charts {
		for i, v := range c.Values {
			row := append([]string{c.Name, c.Unit, report.Cell(c.Sessions[i])}, cells(v.Value, v.Uncertainty)...)
			if c.Chart == nil {
				row = append(row, "", "", "", "", "", "", "")
			} else {
				p := c.Chart.Points[i]
				row = append(row, cells(c.Chart.Centre.Value, p.Stated[0], p.Stated[1], p.Observed[0], p.Observed[1], p.Score)...)
				row = append(row, strconv.FormatBool(p.Outside))
			}
			w.Write(row)
		}
	}
	w.Flush()
	return b.Bytes(), w.Error()
}

func sessionCount(n int) string {
	if n == 1 {
		return "1 session"
	}
	return fmt.Sprintf("%d sessions", n)
}
