package report

import (
	"fmt"
	"strconv"
	"strings"

	"beadwell/calib"
)

// section is one part of the page below the figures.
type section struct {
	ID, Title  string
	Paragraphs []string
	Facts      []fact
	Tables     []table
}

type fact struct {
	Term, Text string
	Code       bool
}

type table struct {
	Caption string
	Head    []cellText
	Groups  []rowGroup
}

type rowGroup struct {
	Title string
	Span  int
	Rows  []tableRow
}

type tableRow struct {
	Name  string
	Cells []cellText
	Total bool
}

// cellText is a cell with, below it, a smaller part, and beside it a bar of
// Bar percent.
type cellText struct {
	Text, Part string
	Number     bool
	Bar        string
}

func sections(r *calib.Result) []section {
	all := append(whySections(r), kindSections(r)...)
	if !holdsTrap(r) {
		return append(all, readSection(r), settingsSection(r), provenance(r))
	}
	return append(all, []section{
		{ID: "estimates", Title: "Estimates", Paragraphs: []string{
			"Two routes lead from a recording to a stiffness: through the drag on the bead, and through the amplitude of its motion. " +
				"They fail for different reasons; estimates of the same route are nearly one statistic."},
			Tables: []table{estimatesTable(r), agreementTable(r)}},
		{ID: "drag", Title: "Measured and computed drag", Tables: []table{dragTable(r)}},
		{ID: "budget", Title: "Uncertainty budget", Paragraphs: append(budgetFacts(r), budgetNotes(r)...), Tables: budgetTables(r)},
		{ID: "fits", Title: "Fits", Tables: []table{fitsTable(r)}},
		readSection(r),
		settingsSection(r),
		provenance(r),
	}...)
}

func settingsSection(r *calib.Result) section {
	return section{ID: "settings", Title: "Settings", Tables: []table{settingsTable(r)}}
}

// budgetNotes says for which axes there is no budget.
func budgetNotes(r *calib.Result) []string {
	var without []string
	for _, a := range r.Axes {
		if len(a.Adopted.Budget) == 0 {
			without = append(without, Plain(a.Name))
		}
	}
	if len(without) == 0 {
		return nil
	}
	return []string{"No budget for " + strings.Join(without, ", ") + ": no stiffness was adopted."}
}

// readSection tells how the file was understood.
func readSection(r *calib.Result) section {
	s := section{ID: "reading", Title: "How the file was read", Paragraphs: []string{Plain(r.ReadAs.Line)}}
	for _, note := range r.ReadAs.Notes {
		s.Paragraphs = append(s.Paragraphs, Plain(note))
	}
	rec := r.Recording
	s.Facts = []fact{
		{Term: "Sampling rate", Text: origin(hertzOrDash(rec.Rate), rec.RateOrigin)},
		{Term: "Samples", Text: fmt.Sprintf("%d, of which %d missing", rec.Samples, rec.Missing)},
		{Term: "Duration", Text: plainNumber(rec.Duration, "s")},
		{Term: "Exposure", Text: typeset(plainNumber(rec.Exposure, "ms"))},
		{Term: "Jitter of the time stamps", Text: moment(rec.Jitter, "us")},
		{Term: "First time stamp", Text: moment(rec.Start, "s")},
	}
	if rec.UsedFrom != nil && rec.UsedTo != nil {
		s.Facts = append(s.Facts, fact{Term: "Part used", Text: plainNumber(*rec.UsedFrom, "s") + " to " + plainNumber(*rec.UsedTo, "s")})
	}
	t := table{Caption: "Columns of the file", Head: heads("header", "used as", "unit")}
	var rows []tableRow
	for _, c := range r.ReadAs.Columns {
		rows = append(rows, tableRow{Name: Plain(c.Header), Cells: texts(c.Role, c.Unit)})
	}
	if len(rows) > 0 {
		t.Groups = []rowGroup{{Rows: rows}}
		s.Tables = []table{t}
	}
	return s
}

func origin(text, from string) string {
	if from == "" {
		return text
	}
	return text + " (" + Plain(from) + ")"
}

func hertzOrDash(f calib.Float) string {
	if !f.Known() {
		return dash
	}
	return hertz(f)
}

func settingsTable(r *calib.Result) table {
	t := table{Caption: "Every setting in force and where it came from", Head: heads("setting", "axis", "value", "from", "place")}
	var rows []tableRow
	for _, s := range r.Settings {
		axis := s.Axis
		if axis == "" {
			axis = "all"
		}
		value := Plain(settingText(s)) // as it was given, to be copied
		from := cellText{Text: Plain(s.Origin)}
		if s.Assumed {
			from.Part = "assumed, for nobody stated it"
		}
		rows = append(rows, tableRow{Name: Plain(s.Key), Cells: []cellText{{Text: Plain(axis)}, {Text: value}, from, {Text: orDash(s.Where)}}})
	}
	t.Groups = []rowGroup{{Rows: rows}}
	return t
}

// provenance tells what made the result and from which bytes.
func provenance(r *calib.Result) section {
	facts := []fact{
		{Term: "Program", Text: Plain(strings.TrimSpace(r.Program.Name + " " + r.Program.Version))},
		{Term: "Command", Text: commandLine(r.Program.Command), Code: true},
		{Term: "Made", Text: orDash(r.Created)},
		{Term: "Input", Text: Plain(InputName(r.Input)), Code: true},
		{Term: "Size", Text: strconv.FormatInt(r.Input.Size, 10) + " bytes"},
		{Term: "SHA-256", Text: orDash(r.Input.SHA256), Code: true},
		{Term: "Viscosity", Text: typeset(withUnit(combined(r.Medium.Viscosity, "mPa s"), "mPa s"))},
		{Term: "Density", Text: typeset(withUnit(combined(r.Medium.Density, "kg/m3"), "kg/m3"))},
		{Term: "Source of both", Text: orDash(r.Medium.Source)},
		{Term: "Layout of the JSON", Text: orDash(r.Schema), Code: true},
	}
	return section{ID: "provenance", Title: "Provenance", Facts: facts}
}

func orDash(s string) string {
	if s == "" {
		return dash
	}
	return Plain(s)
}

// commandLine quotes the arguments that a shell would split or expand.
func commandLine(args []string) string {
	quoted := make([]string, len(args))
	for i, arg := range args {
		quoted[i] = Plain(arg)
		if arg == "" || strings.ContainsAny(arg, " \t\n'\"\\$`*?[](){}<>|&;#~!") {
			quoted[i] = "'" + strings.ReplaceAll(quoted[i], "'", `'\''`) + "'"
		}
	}
	if len(quoted) == 0 {
		return dash
	}
	return strings.Join(quoted, " ")
}

func heads(titles ...string) []cellText {
	cells := make([]cellText, len(titles))
	for i, title := range titles {
		cells[i] = cellText{Text: title}
	}
	return cells
}

func texts(values ...string) []cellText {
	cells := make([]cellText, len(values))
	for i, v := range values {
		cells[i] = cellText{Text: orDash(v)}
	}
	return cells
}
