package batch

import (
	"bytes"
	_ "embed"
	"fmt"
	"html/template"
	"math"

	"beadwell/calib/series"
	"beadwell/cmd/beadwell/internal/figure"
	"beadwell/cmd/beadwell/internal/report"
)

//go:embed trend.html.tmpl
var trendText string

type trendPage struct {
	Policy, Lead string
	Style        template.CSS
	Charts       []trendSection
}

type trendSection struct {
	ID, Title, Centre, Between, Reason, Caption string
	Figure                                      template.HTML
	Alarms                                      []string
}

// HTML is the trend as a page with a chart for each number.
func (t *Trend) HTML() ([]byte, error) {
	page := trendPage{Style: template.CSS(report.StyleSheet()), Policy: report.Policy(report.StyleSheet()), Lead: sessionCount(len(t.Sessions))}
	for i, c := range t.Charts {
		s := trendSection{ID: fmt.Sprintf("chart-%d", i+1), Title: c.Name, Reason: c.Reason, Alarms: c.alarms()}
		if c.Chart != nil {
			s.Centre, s.Between = c.shown(c.Chart.Centre.Value, c.Chart.Centre.Combined), c.shown(c.Chart.Between, math.NaN())
		}
		drawn := c.figure(i)
		s.Figure, s.Caption = template.HTML(figure.Inline(drawn)), drawn.Caption
		page.Charts = append(page.Charts, s)
	}
	tmpl, err := template.New("trend").Parse(trendText)
	if err != nil {
		return nil, err
	}
	var out bytes.Buffer
	err = tmpl.Execute(&out, page)
	return out.Bytes(), err
}

var trendAxes = map[string]figure.AxisOf{
	"N/(m W)": {Quantity: "stiffness per power", Unit: "pN/(µm mW)", SI: "N/(m W)", Factor: 1e3},
	"m/V":     {Quantity: "sensitivity", Unit: "µm/V", SI: "m/V", Factor: 1e6},
	"1":       {Quantity: "measured over computed drag", Unit: "", SI: "1", Factor: 1},
}

// figure draws the values in order, the centre on either side of a change, and the limits.
func (c TrendChart) figure(i int) figure.Figure {
	r := figure.Recordings{Name: fmt.Sprintf("trend-%d", i+1), Title: c.Name, Across: figure.AxisOf{Quantity: "session", Unit: "", SI: "1", Factor: 1},
		Up: trendAxes[c.Unit], Upright: math.NaN(), Description: c.Name + " of each session in order, with the centre line and the limits. Bars are standard uncertainties."}
	for k, v := range c.Values {
		r.X, r.Y = append(r.X, float64(k+1)), append(r.Y, v.Value)
		r.Low, r.High = append(r.Low, v.Value-v.Uncertainty), append(r.High, v.Value+v.Uncertainty)
		r.Outlier = append(r.Outlier, c.Chart != nil && c.Chart.Points[k].Outside)
	}
	if c.Chart == nil {
		return figure.OfRecordings(r)
	}
	last := float64(len(c.Values))
	r.Curve = [][2]float64{{1, c.Chart.Centre.Value}, {last, c.Chart.Centre.Value}}
	if ch := c.Chart.Change; ch != nil && ch.PValue < changeLevel {
		at := float64(ch.Index) + 0.5
		r.Curve = [][2]float64{{1, ch.Before.Value}, {at, ch.Before.Value}, {at, ch.After.Value}, {last, ch.After.Value}}
		r.Upright, r.UprightName = at, "change"
	}
	r.Limits = limits(c.Chart.Points)
	return figure.OfRecordings(r)
}

func limits(points []series.ChartPoint) [2][][2]float64 {
	var both [2][][2]float64
	for k, p := range points {
		for side := range both {
			both[side] = append(both[side], [2]float64{float64(k + 1), p.Observed[side]})
		}
	}
	return both
}
