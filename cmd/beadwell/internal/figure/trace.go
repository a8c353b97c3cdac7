package figure

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"beadwell/calib"
)

// trace draws the position against time as the range from the smallest to the
// largest value of consecutive stretches, with the stretches that findings name.
func trace(r *calib.Result, a *calib.Axis) Figure {
	f := Figure{Kind: Trace, Title: "Position against time, " + axisName(a), height: 48}
	s, times, reach := envelopeOf(a)
	if len(s.x) == 0 {
		return f.empty("the result holds no trace of this axis")
	}
	unit := scale{quantity: "time", unit: "s", si: "s", factor: 1}
	if times.high-times.low < 0.2 {
		unit.unit, unit.factor = "ms", 1e3
	}
	p := panel{name: "trace", share: 1, x: unit.over(times), y: traceScale(a.Trace.Unit, reach)}
	marks, named := findingSpans(r, a)
	unused := unusedSpans(r, times)
	for _, m := range unused {
		p.add(m)
	}
	for _, m := range marks {
		p.add(m)
	}
	p.add(s)
	f.panels = []panel{p}
	f.key = []keyItem{{"smallest to largest position", envelope, record}}
	for _, kind := range []keyItem{{"doubtful", strip, doubt}, {"bad", strip, alarm}} {
		if slices.ContainsFunc(marks, func(s series) bool { return s.ink == kind.ink }) {
			f.key = append(f.key, kind)
		}
	}
	if len(unused) > 0 {
		f.key = append(f.key, keyItem{"not used", strip, left})
		named = append(named, fmt.Sprintf("used only from %s to %s", plain(float64(*r.Recording.UsedFrom), "s"), plain(float64(*r.Recording.UsedTo), "s")))
	}
	if len(marks) > 0 {
		f.height += 3 // for their names
	}
	return f.described(describeTrace(a, times, reach, named))
}

// envelopeOf returns the trace in at most maxPoints stretches.
func envelopeOf(a *calib.Axis) (s series, times, reach extent) {
	s = series{name: "position", mark: envelope, ink: record}
	times, reach = newExtent(), newExtent()
	t := a.Trace
	n := min(len(t.Low), len(t.High))
	start, step := float64(t.Start), float64(t.Step)
	if !finite(start) {
		start = 0
	}
	if !finite(step) || step <= 0 {
		return s, times, reach
	}
	group := max(1, (n+maxPoints-1)/maxPoints)
	for from := 0; from < n; from += group {
		low, high := math.NaN(), math.NaN()
		for i := from; i < min(from+group, n); i++ {
			low, high = smaller(low, float64(t.Low[i])), larger(high, float64(t.High[i]))
		}
		if reach.show(low, high); !finite(low, high) {
			low, high = math.NaN(), math.NaN()
		}
		middle := start + (float64(from)+float64(min(group, n-from))/2)*step
		s.x = append(s.x, middle)
		s.low, s.high = append(s.low, low), append(s.high, high)
	}
	if reach.empty() {
		return series{}, times, reach
	}
	times.show(start, start+float64(n)*step)
	return s, times, reach
}

// unusedSpans returns what lies before and behind the part that was used.
func unusedSpans(r *calib.Result, times extent) (spans []series) {
	from, to := r.Recording.UsedFrom, r.Recording.UsedTo
	if from == nil || to == nil || !finite(float64(*from), float64(*to)) {
		return nil
	}
	for _, ends := range [][2]float64{{times.low, float64(*from)}, {float64(*to), times.high}} {
		if ends[1] > ends[0] {
			spans = append(spans, series{name: "not used", mark: strip, ink: left, front: true, low: []float64{ends[0]}, high: []float64{ends[1]}})
		}
	}
	return spans
}

// smaller and larger pass over what is not a number.
func smaller(a, b float64) float64 {
	if !(b >= a) && finite(b) {
		return b
	}
	return a
}

func larger(a, b float64) float64 {
	if !(b <= a) && finite(b) {
		return b
	}
	return a
}

// findingSpans returns the marked stretches of this axis, at most eight, and
// their names in words.
func findingSpans(r *calib.Result, a *calib.Axis) (marks []series, named []string) {
	for _, finding := range r.Findings {
		if finding.Code == calib.CodeGoodPart { // shown by what was not used
			continue
		}
		if finding.Range == nil || (finding.Axis != "" && finding.Axis != a.Name) {
			continue
		}
		low, high := float64(finding.Range[0]), float64(finding.Range[1])
		if !finite(low, high) || len(marks) == 8 {
			continue
		}
		colour := doubt
		if finding.Severity == calib.Bad {
			colour = alarm
		}
		label := clean(finding.Code)
		marks = append(marks, series{name: label, mark: strip, ink: colour, label: label, wedge: true, front: true,
			low: []float64{low}, high: []float64{high}})
		named = append(named, fmt.Sprintf("%s from %s to %s", label, plain(low, "s"), plain(high, "s")))
	}
	return marks, named
}

// traceScale is the scale of positions in m, or in a detector's unit.
func traceScale(unit string, reach extent) scale {
	if unit == "" {
		return positionScale("position", reach)
	}
	return scale{quantity: "position", unit: clean(unit), si: unit, factor: 1}.over(reach)
}

func describeTrace(a *calib.Axis, times, reach extent, named []string) string {
	factor, unit := 1e9, "nm"
	if a.Trace.Unit != "" {
		factor, unit = 1, clean(a.Trace.Unit)
	}
	s := fmt.Sprintf("Position along %s over %s, between %s and %s", clean(a.Name), plain(times.high-times.low, "s"),
		plain(reach.low*factor, unit), plain(reach.high*factor, unit))
	if len(named) > 0 {
		s += "; marked: " + strings.Join(named, ", ")
	}
	return s + "."
}
