package batch

import (
	"math"

	"gonum.org/v1/gonum/mat"

	"beadwell/calib"
	"beadwell/calib/drag"
	"beadwell/calib/series"
)

// The kinds of series.
const (
	kindPower   = "stiffness against power"
	kindDrag    = "measured drag against height"
	kindCorner  = "corner frequency against height"
	kindRepeats = "repeats of the stiffness"
	kindRatio   = "ratio of the stiffnesses of two axes"
)

// againstPower fits stiffness per watt, through the origin and with an intercept.
func againstPower(m []member) Series {
	m, points := take(m, func(one member) calib.Float { return one.row.Power.Value }, stiffness)
	s := newSeries(kindPower, "W", "N/m", points)
	if len(points) < fewest {
		return s
	}
	var data []series.Point
	for _, p := range points {
		data = append(data, series.Point{X: float64(p.X), Y: float64(p.Y), UY: float64(p.YU)})
	}
	// What is stated of a power is the scale of the meter, which all recordings of the evening share.
	options := series.LineOptions{SharedX: sharedRelative(m, func(one member) Number { return one.row.Power }), SharedY: sharedRelative(m, stiffness)}
	free, noIntercept := series.Line(data, options)
	options.ThroughOrigin = true
	line, err := series.Line(data, options)
	if err != nil {
		s.Reason = err.Error()
		return s
	}
	for _, o := range line.Outliers {
		s.Points[o.Index].Outlier = true
	}
	s.goodness(line.Goodness)
	slope := line.Slope
	s.Values = append(s.Values, value("stiffness per power, through the origin", "N/(m W)", line.Slope))
	if line.Without != nil {
		slope = line.Without.Slope
		s.goodness(line.Without.Goodness)
		s.Values = append(s.Values, value("the same without the outliers", "N/(m W)", slope))
	}
	if noIntercept == nil {
		s.Values = append(s.Values, value("slope, with an intercept", "N/(m W)", free.Slope), value("intercept", "N/m", free.Intercept))
	}
	for _, x := range samples(points, true, 2) {
		s.Curve = append(s.Curve, [2]float64{x, slope.Value * x})
	}
	return s
}

// readings are the points of a height series, with the options of its fit.
func readings(m []member, points []SeriesPoint, scale series.Input, opt SeriesOptions) ([]series.Reading, series.SurfaceOptions) {
	var out []series.Reading
	for i, one := range m {
		out = append(out, series.Reading{Stage: float64(points[i].X), Value: float64(points[i].Y), ValueU: float64(points[i].YU), Perpendicular: one.axis.Perpendicular})
	}
	half := func(f calib.Float) float64 {
		if !f.Known() {
			return 0
		}
		return float64(f) / 2
	}
	d := m[0].row.Diameter
	return out, series.SurfaceOptions{Scale: scale, Radius: series.Input{Value: half(d.Value), Uncertainty: half(d.Combined), Free: opt.FitDiameter},
		StiffnessSlope: opt.StiffnessSlope}
}

func heightOf(one member) calib.Float { return one.row.Height.Value }

// dragAgainstHeight fits where the surface is. The viscosity is fitted too, so that a wrong
// temperature or length scale does not move the surface, unless scale and diameter are both
// to be fitted, which only a stated viscosity can tell apart.
func dragAgainstHeight(m []member, opt SeriesOptions) Series {
	m, points := take(m, heightOf, func(one member) Number { return one.axis.Drag })
	s := newSeries(kindDrag, "m", "N s/m", points)
	if len(points) < fewest {
		return s
	}
	scale, err := heightScale(m, opt)
	if err != nil {
		s.Reason = err.Error()
		return s
	}
	data, options := readings(m, points, scale, opt)
	// A scale of length that is off moves all drags by one factor, as the viscosity does.
	common := sharedRelative(m, func(one member) Number { return one.axis.Drag })
	if opt.FitDiameter && scale.Free {
		v := m[0].row.Viscosity
		options.Viscosity = series.Input{Value: float64(v.Value), Uncertainty: common * float64(v.Value)}
		if v.Combined.Known() {
			options.Viscosity.Uncertainty = math.Hypot(options.Viscosity.Uncertainty, float64(v.Combined))
		}
	}
	fit, err := series.DragAgainstHeight(data, options)
	if err != nil {
		s.Reason = err.Error()
		return s
	}
	viscosity := fit.Viscosity
	if viscosity.Fitted {
		viscosity = viscosity.WithShared(common)
	}
	s.surface(fit, value("viscosity", "Pa s", viscosity))
	stokes := drag.Stokes(fit.Viscosity.Value, fit.Radius.Value)
	s.wallCurve(fit, m[0].axis.Perpendicular, func(_, factor float64) float64 { return stokes * factor })
	return s
}

// cornerAgainstHeight fits the same to corner frequencies.
func cornerAgainstHeight(m []member, opt SeriesOptions) Series {
	m, points := take(m, heightOf, func(one member) Number { return one.axis.Corner })
	s := newSeries(kindCorner, "m", "Hz", points)
	if len(points) < fewest {
		return s
	}
	scale, err := heightScale(m, opt)
	if err != nil {
		s.Reason = err.Error()
		return s
	}
	data, options := readings(m, points, scale, opt)
	fit, err := series.CornerAgainstHeight(data, options)
	if err != nil {
		s.Reason = err.Error()
		return s
	}
	s.surface(fit, value("corner frequency without a wall", "Hz", fit.CornerFar), value("change of ln(stiffness) with height", "1/m", fit.StiffnessSlope))
	s.wallCurve(fit, m[0].axis.Perpendicular, func(h, factor float64) float64 {
		return fit.CornerFar.Value * math.Exp(fit.StiffnessSlope.Value*h) / factor
	})
	return s
}

// surface takes over a fit of the surface.
func (s *Series) surface(fit *series.SurfaceFit, more ...SeriesValue) {
	s.goodness(fit.Goodness)
	s.Values = append(s.Values, value("reading at the surface", "m", fit.Surface))
	if fit.Without != nil {
		s.Values = append(s.Values, value("the same without the outliers", "m", fit.Without.Surface))
	}
	s.Values = append(s.Values, value("height scale", "1", fit.Scale), value("radius of the bead", "m", fit.Radius))
	s.Values = append(s.Values, more...)
	for _, i := range fit.Outliers {
		s.Points[i].Outlier = true
	}
	s.Relations = correlations(fit.Covariance)
}

func correlations(c *mat.SymDense) [][]calib.Float {
	n := c.SymmetricDim()
	out := make([][]calib.Float, n)
	for i := range out {
		for j := range n {
			out[i] = append(out[i], calib.Float(c.At(i, j)/math.Sqrt(c.At(i, i)*c.At(j, j))))
		}
	}
	return out
}

// wallCurve draws the fitted curve by the height and the wall factor there.
func (s *Series) wallCurve(fit *series.SurfaceFit, perpendicular bool, at func(height, factor float64) float64) {
	wall := drag.Parallel
	if perpendicular {
		wall = drag.Perpendicular
	}
	for _, x := range samples(s.Points, false, 60) {
		height := fit.Scale.Value * (x - fit.Surface.Value)
		if factor, err := wall(height / fit.Radius.Value); err == nil {
			s.Curve = append(s.Curve, [2]float64{x, at(height, factor)})
		}
	}
}

// repeats combines recordings of the same bead, power and height.
func repeats(m []member) Series {
	m, points := take(m, func(member) calib.Float { return 0 }, stiffness)
	for i := range points {
		points[i].X = calib.Float(i + 1)
	}
	s := newSeries(kindRepeats, "recording", "N/m", points)
	if len(points) < fewest {
		return s
	}
	s.combine("N/m", sharedRelative(m, stiffness))
	return s
}

// combine takes the points as repeats.
func (s *Series) combine(unit string, shared float64) {
	var data []series.Measured
	for _, p := range s.Points {
		data = append(data, series.Measured{Value: float64(p.Y), Uncertainty: float64(p.YU)})
	}
	fit, err := series.Repeats(data, shared)
	if err != nil {
		s.Reason = err.Error()
		return
	}
	s.goodness(fit.Goodness)
	nan := unknown.Value
	plain := func(name, unit string, v float64) SeriesValue {
		return SeriesValue{Name: name, Unit: unit, Value: calib.Float(v), Statistical: nan, Shared: nan, Combined: nan, Interval: [2]calib.Float{nan, nan}, Fitted: true}
	}
	s.Values = append(s.Values, value("weighted mean", unit, fit.Fixed), value("mean over recordings that differ", unit, fit.Random),
		plain("standard deviation between recordings", unit, fit.Between), plain("scatter over stated uncertainty (Birge ratio)", "1", fit.Goodness.Birge))
	last := float64(len(s.Points))
	s.Curve = append(s.Curve, [2]float64{1, fit.Random.Value}, [2]float64{last, fit.Random.Value})
}

// axesRatio compares the stiffness of x with that of y over all recordings.
func axesRatio(m []member) Series {
	var points []SeriesPoint
	for _, one := range m {
		y, has := one.row.axis("y")
		if !has || !known(one.axis.Stiffness.Value) || !known(y.Stiffness.Value) || !known(one.axis.Stiffness.Statistical) || !known(y.Stiffness.Statistical) {
			continue
		}
		ratio, err := series.Ratio(series.Pair{First: measured(one.axis.Stiffness), Second: measured(y.Stiffness)})
		if err == nil {
			points = append(points, SeriesPoint{File: one.row.File, FileBytes: one.row.FileBytes, X: calib.Float(len(points) + 1), Y: calib.Float(ratio.Value), YU: calib.Float(ratio.Uncertainty)})
		}
	}
	s := newSeries(kindRatio, "recording", "1", points)
	if len(points) >= fewest {
		s.combine("1", 0)
	}
	return s
}

func measured(n Number) series.Measured {
	return series.Measured{Value: float64(n.Value), Uncertainty: float64(n.Statistical)}
}
