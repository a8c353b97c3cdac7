package batch

import (
	"fmt"
	"math"
	"slices"
	"sort"
	"strconv"
	"strings"

	"beadwell/calib"
	"beadwell/calib/series"
)

// SeriesOptions are choices for the series.
type SeriesOptions struct {
	// Scale is the travel of the bead over that of the stage, for heights that are stage
	// readings, in place of what the recordings state. Value 0: what they state, else exactly 1, assumed.
	Scale series.Input
	// FitDiameter fits the bead's diameter to a height series as well.
	FitDiameter bool
	// StiffnessSlope is d ln(stiffness)/d height [1/m] for corner frequencies against height.
	// Nil: these are not fitted.
	StiffnessSlope *series.Input
}

// fewest is the number of points from which on a series is shown.
const fewest = 3

// Series is one fit over several recordings.
type Series struct {
	Kind      string          `json:"kind"` // "stiffness against power", ...
	Axis      string          `json:"axis"`
	Group     string          `json:"group"` // what the recordings have in common
	XUnit     string          `json:"x_unit"`
	YUnit     string          `json:"y_unit"`
	Points    []SeriesPoint   `json:"points"`
	Curve     [][2]float64    `json:"curve"` // the fit, x and y
	Values    []SeriesValue   `json:"values"`
	ChiSquare calib.Float     `json:"chi_square"`
	Freedom   int             `json:"degrees_of_freedom"`
	PValue    calib.Float     `json:"p_value"`
	Reason    string          `json:"reason,omitempty"` // why there is no fit
	Relations [][]calib.Float `json:"correlation,omitempty"`
}

// SeriesPoint is one recording in a series.
type SeriesPoint struct {
	File      string      `json:"file"`
	FileBytes string      `json:"file_bytes,omitempty"` // as of a Row
	X         calib.Float `json:"x"`
	Y         calib.Float `json:"y"`
	YU        calib.Float `json:"y_standard_uncertainty"`
	Outlier   bool        `json:"outlier"`
}

// SeriesValue is one number of a fit.
type SeriesValue struct {
	Name        string         `json:"name"`
	Value       calib.Float    `json:"value"`
	Unit        string         `json:"unit"`
	Statistical calib.Float    `json:"statistical"`
	Shared      calib.Float    `json:"shared"`
	Combined    calib.Float    `json:"combined"`
	Interval    [2]calib.Float `json:"interval_95"`
	Fitted      bool           `json:"fitted"`
}

func value(name, unit string, p series.Parameter) SeriesValue {
	return SeriesValue{Name: name, Unit: unit, Value: calib.Float(p.Value), Statistical: calib.Float(p.Statistical), Shared: calib.Float(p.Shared),
		Combined: calib.Float(p.Combined), Interval: [2]calib.Float{calib.Float(p.Low), calib.Float(p.High)}, Fitted: p.Fitted}
}

// addSeries fits every series that has points enough. Recordings that a check found unfit
// stay out; those whose routes disagree have no adopted stiffness, and stay in the
// height series, which may explain them.
func (s *Summary) addSeries(opt SeriesOptions) {
	for _, axis := range axisNames {
		s.perGroup(axis, groupByBead|groupByHeight, distinctPowers, func(group string, m []member) Series { return againstPower(m) })
		s.perGroup(axis, groupByBead|groupByPower, distinctHeights, func(group string, m []member) Series { return dragAgainstHeight(m, opt) })
		if opt.StiffnessSlope != nil {
			s.perGroup(axis, groupByBead|groupByPower, distinctHeights, func(group string, m []member) Series { return cornerAgainstHeight(m, opt) })
		}
		s.perGroup(axis, groupByBead|groupByPower|groupByHeight, func([]member) bool { return true }, func(group string, m []member) Series { return repeats(m) })
	}
	s.perGroup("x", groupByBead, func([]member) bool { return true }, func(group string, m []member) Series { return axesRatio(m) })
	if opt.Scale.Value == 0 && slices.ContainsFunc(s.Series, func(one Series) bool { return one.XUnit == "m" }) && slices.ContainsFunc(s.Rows, Row.assumesScale) {
		s.Notes = append(s.Notes, "heights are taken as travel of the bead: the height scale is assumed to be 1; where they are stage readings under an oil objective in water it is some 0.8 (from memory), state it as height_scale, or fit it")
	}
}

// assumesScale tells that a recording has a height and nothing is said of its scale.
func (r Row) assumesScale() bool {
	return r.Height.Value.Known() && !r.HeightScale.Value.Known() && !r.FitScale
}

// heightScale is the height scale of a series: that of the options, else the one that all its recordings state.
func heightScale(m []member, opt SeriesOptions) (series.Input, error) {
	if opt.Scale.Value != 0 {
		return opt.Scale, nil
	}
	first := m[0].row
	for _, one := range m {
		a, b := one.row.HeightScale, first.HeightScale
		if one.row.FitScale != first.FitScale || exact(a.Value) != exact(b.Value) || exact(a.Combined) != exact(b.Combined) {
			return series.Input{}, fmt.Errorf("%s and %s state different height scales; state one for the whole series", first.File, one.row.File)
		}
	}
	switch n := first.HeightScale; {
	case first.FitScale:
		return series.Input{Value: 1, Free: true}, nil
	case n.Value.Known():
		in := series.Input{Value: float64(n.Value)}
		if n.Combined.Known() {
			in.Uncertainty = float64(n.Combined)
		}
		return in, nil
	}
	return series.Input{}, nil
}

// member is one axis of one row.
type member struct {
	row  Row
	axis RowAxis
}

type grouping int

const (
	groupByBead grouping = 1 << iota
	groupByHeight
	groupByPower
)

// perGroup sorts the rows that have the axis into groups, and adds a series for each with
// points enough, in the order in which they first appear.
func (s *Summary) perGroup(name string, by grouping, enough func([]member) bool, fit func(string, []member) Series) {
	members := map[string][]member{}
	var order []string
	for _, row := range s.Rows {
		axis, has := row.axis(name)
		if !has || row.Status == calib.Unfit {
			continue
		}
		key := row.groupKey(by)
		if _, seen := members[key]; !seen {
			order = append(order, key)
		}
		members[key] = append(members[key], member{row, axis})
	}
	for _, key := range order {
		m := members[key]
		if len(m) < fewest || !enough(m) {
			continue
		}
		one := fit(key, m)
		if len(one.Points) < fewest {
			continue
		}
		one.Axis, one.Group = name, key
		if one.Kind == kindRatio {
			one.Axis = "x/y"
		}
		if one.Values == nil {
			one.Values = []SeriesValue{}
		}
		s.Series = append(s.Series, one)
	}
}

// groupKey says what rows of a group have in common.
func (r Row) groupKey(by grouping) string {
	var parts []string
	add := func(flag grouping, n Number, scale float64, format string) {
		if by&flag != 0 && n.Value.Known() {
			parts = append(parts, fmt.Sprintf(format, strconv.FormatFloat(float64(n.Value)*scale, 'g', 6, 64)))
		}
	}
	add(groupByBead, r.Diameter, 1e6, "bead of %s um")
	add(groupByHeight, r.Height, 1e6, "%s um above the surface")
	add(groupByPower, r.Power, 1e3, "%s mW")
	return strings.Join(parts, ", ")
}

func distinctPowers(m []member) bool {
	return distinct(m, func(one member) calib.Float { return one.row.Power.Value })
}

func distinctHeights(m []member) bool {
	return distinct(m, func(one member) calib.Float { return one.row.Height.Value })
}

// distinct tells whether there are three different numbers.
func distinct(m []member, of func(member) calib.Float) bool {
	seen := map[calib.Float]bool{}
	for _, one := range m {
		if v := of(one); v.Known() {
			seen[v] = true
		}
	}
	return len(seen) >= fewest
}

// take keeps the members with a number, and makes points of them.
func take(m []member, x func(member) calib.Float, y func(member) Number) (kept []member, points []SeriesPoint) {
	for _, one := range m {
		n := y(one)
		if v := x(one); v.Known() && known(n.Value) && known(n.Statistical) {
			kept = append(kept, one)
			points = append(points, SeriesPoint{File: one.row.File, FileBytes: one.row.FileBytes, X: v, Y: n.Value, YU: n.Statistical})
		}
	}
	return kept, points
}

func stiffness(m member) Number { return m.axis.Stiffness }

// sharedRelative is the relative uncertainty that the inputs give to a number of all recordings alike:
// the median over the members of what combined has beyond statistical.
func sharedRelative(m []member, of func(member) Number) float64 {
	var shares []float64
	for _, one := range m {
		n := of(one)
		c, s := float64(n.Combined), float64(n.Statistical)
		if math.IsNaN(s) {
			s = 0 // an input
		}
		if c > s {
			shares = append(shares, math.Sqrt(c*c-s*s)/math.Abs(float64(n.Value)))
		} else {
			shares = append(shares, 0)
		}
	}
	sort.Float64s(shares)
	return shares[len(shares)/2]
}

func (s *Series) goodness(g series.Goodness) {
	s.ChiSquare, s.Freedom, s.PValue = calib.Float(g.ChiSquare), g.Freedom, calib.Float(g.PValue)
}

func newSeries(kind, xUnit, yUnit string, points []SeriesPoint) Series {
	return Series{Kind: kind, XUnit: xUnit, YUnit: yUnit, Points: points, ChiSquare: unknown.Value, PValue: unknown.Value, Curve: [][2]float64{}}
}

// samples are count places over the range of the points, with the origin where asked.
func samples(points []SeriesPoint, fromZero bool, count int) []float64 {
	low, high := math.Inf(1), math.Inf(-1)
	for _, p := range points {
		low, high = math.Min(low, float64(p.X)), math.Max(high, float64(p.X))
	}
	if fromZero {
		low = math.Min(low, 0)
	}
	x := make([]float64, count)
	for i := range x {
		x[i] = low + (high-low)*float64(i)/float64(count-1)
	}
	return x
}
