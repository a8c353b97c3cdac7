package batch

import (
	"bytes"
	_ "embed"
	"fmt"
	"html/template"
	"math"
	"net/url"
	"path/filepath"
	"strings"

	"beadwell/calib/quantity"
	"beadwell/cmd/beadwell/internal/figure"
	"beadwell/cmd/beadwell/internal/report"
)

//go:embed index.html.tmpl
var indexText string

// The outputs of a recording to which the index links.
const (
	ResultName = "result.json"
	ReportName = "report.html"
)

type indexPage struct {
	Policy, Lead string
	Style        template.CSS
	Axes         []string
	FreeBead     bool // any row used one
	Choices      []indexChoice
	Rows         []indexRow
	Series       []indexSeries
	Notes        []string
}

// indexChoice shows the rows of one class alone.
type indexChoice struct{ Class, Text string }

// choiceStyle lets the choices act without a script: a row is hidden while another class is chosen.
const choiceStyle = `.choices{border:0;padding:0;margin:0 0 1rem;display:flex;flex-wrap:wrap;gap:.3rem 1.4rem;font:.92rem "Helvetica Neue",Helvetica,Arial,"Liberation Sans",sans-serif}
.choices legend{float:left;padding:.25rem 0;margin-right:1.4rem;color:var(--soft)}
.choices label{padding:.25rem 0}
section:has(#show-good:checked) tbody tr:not(.good),section:has(#show-distrusted:checked) tbody tr:not(.distrusted),section:has(#show-failed:checked) tbody tr:not(.failed),section:has(#show-aside:checked) tbody tr:not(.aside){display:none}
@media print{.choices{display:none}}
`

type indexRow struct {
	Class                      string // of its status, as in the choices
	File, Link, Status, Reason string
	FreeBead                   string   // recordings of the free bead that gave a drag
	Facts                      []string // power, height
	Stiffness                  []string // by axis
}

type indexSeries struct {
	ID, Title, Fit, Reason string
	Figure                 template.HTML
	Caption                string
	Values                 [][2]string
	Outliers               []string
}

// HTML is the content of index.html: the table of the recordings with links to their
// reports, and the series with their figures.
func (s *Summary) HTML() ([]byte, error) {
	good, distrusted, failed, aside := s.Counts()
	style := report.StyleSheet() + choiceStyle
	page := indexPage{Style: template.CSS(style), Policy: report.Policy(style), Axes: s.axes(), Notes: s.Notes,
		Lead: fmt.Sprintf("%d recordings: %d consistent, %d not to be trusted, %d failed, %d set aside", len(s.Rows), good, distrusted, failed, aside)}
	for _, c := range []struct {
		class, text string
		count       int
	}{{classGood, "consistent", good}, {classDistrusted, "not to be trusted", distrusted}, {classFailed, "failed", failed}, {classAside, "set aside", aside}} {
		if c.count > 0 && c.count < len(s.Rows) {
			page.Choices = append(page.Choices, indexChoice{c.class, fmt.Sprintf("%d %s", c.count, c.text)})
		}
	}
	folder := s.folder()
	if folder != "." {
		page.Lead += "; names are those in " + report.Plain(folder)
	}
	for _, row := range s.Rows {
		shown := indexRowOf(row, page.Axes)
		shown.File, shown.FreeBead = inFolder(folder, shown.File), inFolder(folder, shown.FreeBead)
		page.Rows = append(page.Rows, shown)
		page.FreeBead = page.FreeBead || len(row.FreeBead) > 0
	}
	for i, one := range s.Series {
		page.Series = append(page.Series, indexSeriesOf(i, one))
	}
	t, err := template.New("index").Parse(indexText)
	if err != nil {
		return nil, err
	}
	var out bytes.Buffer
	err = t.Execute(&out, page)
	return out.Bytes(), err
}

// folder is the one that all recordings stand in, or "." when there is none.
func (s *Summary) folder() string {
	if len(s.Rows) == 0 {
		return "."
	}
	folder := filepath.Dir(s.Rows[0].File)
	for _, row := range s.Rows {
		for folder != "." && folder != filepath.Dir(folder) && !strings.HasPrefix(row.File, folder+string(filepath.Separator)) {
			folder = filepath.Dir(folder)
		}
	}
	return folder
}

// inFolder takes the folder off the names in a text.
func inFolder(folder, names string) string {
	return strings.TrimPrefix(strings.ReplaceAll(names, "; "+report.Plain(folder)+"/", "; "), report.Plain(folder)+"/")
}

// axes are those that any row has.
func (s *Summary) axes() []string {
	var names []string
	for _, name := range axisNames {
		for _, row := range s.Rows {
			if _, has := row.axis(name); has {
				names = append(names, name)
				break
			}
		}
	}
	return names
}

func indexRowOf(row Row, axes []string) indexRow {
	out := indexRow{Class: row.class(), File: report.Plain(row.File), Status: row.word(), Reason: report.PlainLines(row.Reason), FreeBead: "-"}
	if len(row.FreeBead) > 0 {
		out.FreeBead = report.Plain(strings.Join(row.FreeBead, "; "))
	}
	if row.Problem != nil && row.Problem.Remedy != "" {
		out.Reason += "; " + report.Plain(row.Problem.Remedy)
	}
	if row.Bead != "" {
		out.File += ", bead " + report.Plain(row.Bead)
	}
	if folder, name, ok := strings.Cut(row.Report, "/"); ok {
		out.Link = url.PathEscape(folder) + "/" + name
	}
	for _, fact := range []struct {
		n    Number
		unit string
	}{{row.Power, "mW"}, {row.Height, "um"}} {
		out.Facts = append(out.Facts, shown(float64(fact.n.Value), math.NaN(), fact.unit))
	}
	for _, name := range axes {
		text := "-"
		if axis, has := row.axis(name); has && row.holdsTrap() {
			text = shown(float64(axis.Stiffness.Value), float64(axis.Stiffness.Combined), "pN/um")
			if text == "-" {
				text = "withheld"
			}
		}
		out.Stiffness = append(out.Stiffness, text)
	}
	return out
}

// shown prints a number of SI units in a unit for people.
func shown(value, u float64, unit string) string {
	if math.IsNaN(value) {
		return "-"
	}
	if math.IsNaN(u) {
		u = 0
	}
	return strings.TrimSuffix(quantity.Format(value, u, unit), " "+unit)
}

// axesOf says how the units of a series are shown.
var axesOf = map[string]figure.AxisOf{
	"W":         {Quantity: "laser power", Unit: "mW", SI: "W", Factor: 1e3},
	"m":         {Quantity: "height, as stated", Unit: "µm", SI: "m", Factor: 1e6},
	"recording": {Quantity: "recording", Unit: "", SI: "1", Factor: 1},
	"N/m":       {Quantity: "stiffness", Unit: "pN/µm", SI: "N/m", Factor: 1e6},
	"N s/m":     {Quantity: "measured drag", Unit: "nN s/m", SI: "N s/m", Factor: 1e9},
	"Hz":        {Quantity: "corner frequency", Unit: "Hz", SI: "Hz", Factor: 1},
	"1":         {Quantity: "ratio", Unit: "", SI: "1", Factor: 1},
}

// unitsShown are those of the values of a series, with the factor from SI.
var unitsShown = map[string]struct {
	unit   string
	factor float64
}{"N/(m W)": {"pN/(um mW)", 1e3}, "N/m": {"pN/um", 1e6}, "m": {"um", 1e6}, "Pa s": {"mPa s", 1e3}, "1/m": {"1/um", 1e-6}, "m/V": {"um/V", 1e6}}

func indexSeriesOf(i int, s Series) indexSeries {
	out := indexSeries{ID: fmt.Sprintf("series-%d", i+1), Title: s.Kind + ", " + s.Axis, Reason: s.Reason}
	if s.Group != "" {
		out.Title += ": " + s.Group
	}
	out.Title = report.Typeset(strings.ToUpper(out.Title[:1]) + out.Title[1:])
	if s.PValue.Known() {
		out.Fit = fmt.Sprintf("chi-square %.3g with %d degrees of freedom, p = %.2g", float64(s.ChiSquare), s.Freedom, float64(s.PValue))
	}
	drawn := s.figure(i, out.Title)
	out.Figure, out.Caption = template.HTML(figure.Inline(drawn)), drawn.Caption
	for _, v := range s.Values {
		out.Values = append(out.Values, [2]string{v.Name, report.Typeset(v.text())})
	}
	for _, p := range s.Points {
		if p.Outlier {
			out.Outliers = append(out.Outliers, report.Plain(p.File))
		}
	}
	return out
}

// text prints the value with its 95 % interval.
func (v SeriesValue) text() string {
	unit, factor := v.Unit, 1.0
	if known, ok := unitsShown[v.Unit]; ok {
		unit, factor = known.unit, known.factor
	}
	if unit == "1" {
		unit = ""
	}
	value, u := float64(v.Value)*factor, float64(v.Combined)*factor
	switch {
	case math.IsNaN(value):
		return "-"
	case math.IsNaN(u) || u == 0:
		return strings.TrimSpace(fmt.Sprintf("%.4g %s", value, unit))
	}
	text := strings.TrimSpace(strings.TrimSuffix(quantity.Format(value, u, "1"), " 1") + " " + unit)
	if !v.Fitted {
		return text + ", stated"
	}
	return text + fmt.Sprintf(", 95 %% interval %.4g to %.4g", float64(v.Interval[0])*factor, float64(v.Interval[1])*factor)
}

func (s Series) figure(i int, title string) figure.Figure {
	r := figure.Recordings{Name: fmt.Sprintf("%d", i+1), Title: title, Across: axesOf[s.XUnit], Up: axesOf[s.YUnit], Curve: s.Curve, Upright: math.NaN(),
		Description: fmt.Sprintf("%s; bars are standard uncertainties of each recording alone. %d recordings.", title, len(s.Points))}
	for _, p := range s.Points {
		r.X, r.Y = append(r.X, float64(p.X)), append(r.Y, float64(p.Y))
		r.Low, r.High = append(r.Low, float64(p.Y-p.YU)), append(r.High, float64(p.Y+p.YU))
		r.Outlier = append(r.Outlier, p.Outlier)
	}
	return figure.OfRecordings(r)
}
