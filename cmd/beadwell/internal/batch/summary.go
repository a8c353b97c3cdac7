package batch

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"slices"
	"strconv"
	"strings"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/report"
)

// SummarySchema names the layout of summary.json.
const SummarySchema = "beadwell-summary/1"

// Summary is what all recordings say together. Numbers are SI.
type Summary struct {
	Schema string   `json:"schema"`
	Rows   []Row    `json:"rows"`   // in natural order of the files
	Series []Series `json:"series"` // never null
	// Joined are the lines through recordings of one trap whose stage moves at constant speed.
	Joined []calib.FlowJoin `json:"joined_flow,omitempty"`
	// Notes say what the series assume.
	Notes []string `json:"notes"`
}

func newSummary(entries []entry, growing []Growing, opt SeriesOptions) *Summary {
	s := &Summary{Schema: SummarySchema, Rows: []Row{}, Series: []Series{}, Notes: []string{}}
	for _, e := range entries {
		s.Rows = append(s.Rows, e.Rows...)
	}
	for _, g := range growing {
		s.Rows = append(s.Rows, emptyRow(g.Path, SetAside, g.Note))
	}
	slices.SortStableFunc(s.Rows, func(a, b Row) int { return natural(a.File, b.File) })
	s.addSeries(opt)
	s.join()
	s.noteCopies()
	return s
}

// join makes the lines of displacement against speed.
func (s *Summary) join() {
	var parts []calib.FlowPart
	for _, row := range s.Rows {
		parts = append(parts, row.Flow...)
	}
	joined := calib.JoinFlow(parts)
	if len(joined) == 0 {
		return
	}
	s.Joined = joined
	for _, j := range joined {
		s.Notes = append(s.Notes, fmt.Sprintf("displacement against speed, axis %s: %s; stiffness %s by constant flow, %s without viscosity; slope %s, intercept %s",
			j.Axis, j.Text, report.Of(j.Stiffness, "pN/um"), report.Of(j.Driven, "pN/um"), report.Of(j.Slope, "us"), report.Of(j.Intercept, "nm")))
	}
}

// noteCopies tells of recordings that are there twice: a copy is no repeat, and makes the scatter of a series look smaller than it is.
func (s *Summary) noteCopies() {
	type content struct{ sum, bead string }
	first := map[content]string{}
	copies, example := 0, ""
	for _, row := range s.Rows {
		of := content{row.SHA256, row.Bead}
		switch original, seen := first[of]; {
		case row.SHA256 == "":
		case !seen:
			first[of] = row.File
		default:
			if copies++; example == "" {
				example = fmt.Sprintf("%s has the content of %s", report.Plain(row.File), report.Plain(original))
			}
		}
	}
	switch {
	case copies == 1:
		s.Notes = append(s.Notes, example+": a copy is no repeat, leave one of them out of the series")
	case copies > 1:
		s.Notes = append(s.Notes, fmt.Sprintf("%d recordings are copies of others (%s): a copy is no repeat, leave them out of the series", copies, example))
	}
}

// Counts are the rows by what came of them.
func (s *Summary) Counts() (good, distrusted, failed, aside int) {
	for _, row := range s.Rows {
		switch row.class() {
		case classGood:
			good++
		case classFailed:
			failed++
		case classAside:
			aside++
		default:
			distrusted++
		}
	}
	return good, distrusted, failed, aside
}

// What came of a recording, in one word.
const (
	classGood       = "good"
	classDistrusted = "distrusted"
	classFailed     = "failed"
	classAside      = "aside"
)

func (r Row) class() string {
	switch r.Status {
	case calib.Consistent, calib.Unchecked:
		return classGood
	case Failed:
		return classFailed
	case SetAside:
		return classAside
	}
	return classDistrusted
}

// write writes the summary in its three forms.
func (s *Summary) write(root *os.Root) error {
	stored, err := s.JSON()
	if err != nil {
		return err
	}
	page, err := s.HTML()
	if err != nil {
		return err
	}
	table, err := s.CSV()
	if err != nil {
		return err
	}
	for _, o := range []Output{{SummaryJSON, stored}, {SummaryCSV, table}, {IndexName, page}} {
		if err := writeFile(root, o.Name, o.Content); err != nil {
			return err
		}
	}
	return nil
}

// JSON is the content of summary.json.
func (s *Summary) JSON() ([]byte, error) { return indented(s) }

func indented(value any) ([]byte, error) {
	var b bytes.Buffer
	err := report.WriteJSON(&b, value)
	return b.Bytes(), err
}

// summaryColumns are those of a row; the columns of each axis follow.
var summaryColumns = []struct {
	name string
	cell func(Row) string
}{
	{"file", func(r Row) string { return report.Cell(r.File) }},
	{"bead", func(r Row) string { return report.Cell(r.Bead) }},
	{"status", func(r Row) string { return report.Cell(r.Status) }},
	{"reason", func(r Row) string { return report.Cell(r.Reason) }},
	{"role", func(r Row) string { return r.Role }},
	{"free_bead", func(r Row) string { return report.Cell(strings.Join(r.FreeBead, "; ")) }},
	{"family_wise_p_value", func(r Row) string { return exact(r.FamilyWiseP) }},
	{"diameter_m", func(r Row) string { return exact(r.Diameter.Value) }},
	{"height_m", func(r Row) string { return exact(r.Height.Value) }},
	{"height_scale", func(r Row) string { return exact(r.HeightScale.Value) }},
	{"power_W", func(r Row) string { return exact(r.Power.Value) }},
	{"temperature_K", func(r Row) string { return exact(r.Temperature.Value) }},
	{"viscosity_Pa_s", func(r Row) string { return exact(r.Viscosity.Value) }},
	{"folder", func(r Row) string { return report.Cell(r.Folder) }},
	{"sha256", func(r Row) string { return r.SHA256 }},
}

// axisColumns are those of one axis.
var axisColumns = []struct {
	name string
	cell func(RowAxis) calib.Float
}{
	{"stiffness_N_per_m", func(a RowAxis) calib.Float { return a.Stiffness.Value }},
	{"stiffness_statistical_u_N_per_m", func(a RowAxis) calib.Float { return a.Stiffness.Statistical }},
	{"stiffness_combined_u_N_per_m", func(a RowAxis) calib.Float { return a.Stiffness.Combined }},
	{"corner_frequency_Hz", func(a RowAxis) calib.Float { return a.Corner.Value }},
	{"corner_frequency_u_Hz", func(a RowAxis) calib.Float { return a.Corner.Statistical }},
	{"measured_drag_N_s_per_m", func(a RowAxis) calib.Float { return a.Drag.Value }},
	{"measured_drag_u_N_s_per_m", func(a RowAxis) calib.Float { return a.Drag.Statistical }},
	{"drag_ratio", func(a RowAxis) calib.Float { return a.DragRatio.Value }},
	{"drag_ratio_combined_u", func(a RowAxis) calib.Float { return a.DragRatio.Combined }},
	{"free_drag_ratio", func(a RowAxis) calib.Float { return a.FreeDragRatio.Value }},
	{"free_drag_ratio_combined_u", func(a RowAxis) calib.Float { return a.FreeDragRatio.Combined }},
	{"sensitivity_m_per_V", func(a RowAxis) calib.Float { return a.Sensitivity.Value }},
}

var axisNames = []string{"x", "y", "z"}

// CSV is the content of summary.csv: one row for each recording, in SI units at full
// precision; numbers that are not known are empty cells.
func (s *Summary) CSV() ([]byte, error) {
	var b bytes.Buffer
	w := csv.NewWriter(&b)
	var head []string
	for _, c := range summaryColumns {
		head = append(head, c.name)
	}
	for _, name := range axisNames {
		for _, c := range axisColumns {
			head = append(head, name+"_"+c.name)
		}
	}
	w.Write(head) // errors stay in the writer until Flush
	for _, row := range s.Rows {
		var cells []string
		for _, c := range summaryColumns {
			cells = append(cells, c.cell(row))
		}
		for _, name := range axisNames {
			axis, has := row.axis(name)
			for _, c := range axisColumns {
				if has {
					cells = append(cells, exact(c.cell(axis)))
				} else {
					cells = append(cells, "")
				}
			}
		}
		w.Write(cells)
	}
	w.Flush()
	return b.Bytes(), w.Error()
}

func (r Row) axis(name string) (RowAxis, bool) {
	for _, a := range r.Axes {
		if a.Axis == name {
			return a, true
		}
	}
	return RowAxis{}, false
}

// exact prints a number so that it reads back to the same bits.
func exact(f calib.Float) string {
	if !f.Known() {
		return ""
	}
	return strconv.FormatFloat(float64(f), 'g', -1, 64)
}

// known is a number that is there and above 0.
func known(f calib.Float) bool { return f.Known() && f > 0 && !math.IsInf(float64(f), 0) }
