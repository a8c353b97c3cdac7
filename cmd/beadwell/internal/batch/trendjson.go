package batch

import (
	"math"

	"beadwell/calib"
	"beadwell/calib/series"
)

// TrendSchema names the layout of a trend in JSON.
const TrendSchema = "beadwell-trend/1"

// storedTrend is a trend as JSON holds it. Numbers are SI; null where there is none.
type storedTrend struct {
	Schema   string   `json:"schema"`
	Sessions []string `json:"sessions"` // in natural order
	// SessionBytes are their names in hexadecimal, "" where a name is UTF-8; absent where all are.
	SessionBytes []string      `json:"session_bytes,omitempty"`
	Charts       []storedChart `json:"charts"` // never null
}

type storedChart struct {
	Name   string        `json:"name"`
	Unit   string        `json:"unit"`
	Points []storedPoint `json:"points"`
	// Centre is the centre line, Between the standard deviation between sessions beyond the stated uncertainties.
	Centre   *SeriesValue  `json:"centre"`
	Between  calib.Float   `json:"between"`
	Birge    calib.Float   `json:"birge_ratio"` // scatter over the stated uncertainties
	PValue   calib.Float   `json:"p_value"`     // of one value for all, by the stated uncertainties alone
	Runs     []storedRun   `json:"runs"`        // never null
	Change   *storedChange `json:"change"`      // the most likely one, whatever its p-value
	Messages []string      `json:"messages"`    // what a person should know: points outside, runs, a change
	Reason   string        `json:"reason,omitempty"`
}

type storedPoint struct {
	Session     string         `json:"session"`
	Bytes       string         `json:"session_bytes,omitempty"` // hexadecimal; of a name that is no UTF-8, which JSON cannot carry
	Value       calib.Float    `json:"value"`
	Uncertainty calib.Float    `json:"standard_uncertainty"`
	Stated      [2]calib.Float `json:"stated_limits"`
	Observed    [2]calib.Float `json:"observed_limits"`
	Score       calib.Float    `json:"score"`
	Outside     bool           `json:"outside"`
}

type storedRun struct {
	First string `json:"first"`
	Last  string `json:"last"`
	Count int    `json:"count"`
	Above bool   `json:"above"`
}

type storedChange struct {
	At       string      `json:"at"` // first session after the step
	Earliest string      `json:"earliest"`
	Latest   string      `json:"latest"`
	Before   SeriesValue `json:"before"`
	After    SeriesValue `json:"after"`
	Step     SeriesValue `json:"step"`
	PValue   calib.Float `json:"p_value"`
	Told     bool        `json:"told"` // the p-value is below 0.01
}

// JSON is the trend with the charts, their limits and what they show.
func (t *Trend) JSON() ([]byte, error) {
	out := storedTrend{Schema: TrendSchema, Sessions: t.Sessions, SessionBytes: namesBytes(t.Sessions), Charts: []storedChart{}}
	for _, c := range t.Charts {
		out.Charts = append(out.Charts, c.stored())
	}
	return indented(out)
}

func (c TrendChart) stored() storedChart {
	nan := calib.Float(math.NaN())
	out := storedChart{Name: c.Name, Unit: c.Unit, Between: nan, Birge: nan, PValue: nan, Runs: []storedRun{}, Messages: append([]string{}, c.alarms()...), Reason: c.Reason}
	for i, v := range c.Values {
		p := storedPoint{Session: c.Sessions[i], Bytes: nameBytes(c.Sessions[i]), Value: calib.Float(v.Value), Uncertainty: calib.Float(v.Uncertainty),
			Stated: [2]calib.Float{nan, nan}, Observed: [2]calib.Float{nan, nan}, Score: nan}
		if c.Chart != nil {
			of := c.Chart.Points[i]
			p.Stated, p.Observed, p.Score, p.Outside = floats(of.Stated), floats(of.Observed), calib.Float(of.Score), of.Outside
		}
		out.Points = append(out.Points, p)
	}
	if c.Chart == nil {
		return out
	}
	centre := value("centre", c.Unit, c.Chart.Centre)
	out.Centre, out.Between = &centre, calib.Float(c.Chart.Between)
	out.Birge, out.PValue = calib.Float(c.Chart.Goodness.Birge), calib.Float(c.Chart.Goodness.PValue)
	for _, r := range c.Chart.Runs {
		out.Runs = append(out.Runs, storedRun{First: c.Sessions[r.First], Last: c.Sessions[r.Last], Count: r.Last - r.First + 1, Above: r.Above})
	}
	if ch := c.Chart.Change; ch != nil {
		out.Change = c.storedChange(ch)
	}
	return out
}

func (c TrendChart) storedChange(ch *series.Change) *storedChange {
	return &storedChange{At: c.Sessions[ch.Index], Earliest: c.Sessions[ch.Earliest], Latest: c.Sessions[ch.Latest],
		Before: value("before", c.Unit, ch.Before), After: value("after", c.Unit, ch.After), Step: value("step", c.Unit, ch.Step),
		PValue: calib.Float(ch.PValue), Told: ch.PValue < changeLevel}
}

func floats(pair [2]float64) [2]calib.Float {
	return [2]calib.Float{calib.Float(pair[0]), calib.Float(pair[1])}
}
