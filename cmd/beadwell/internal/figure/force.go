package figure

import (
	"fmt"
	"math"

	"beadwell/calib"
)

// Forces is the kind of the figure of a force trace.
const Forces Kind = "force"

// Force draws the force of one axis against time, from the smallest to the largest of
// consecutive stretches, with their means and the linear range of the trap.
func Force(t *calib.ForceTrace, start float64) Figure {
	name := clean(t.Trap.Axis)
	f := Figure{Name: string(Forces) + "-" + fileSafe(t.Trap.Axis), Kind: Forces, Axis: name, Title: "Force against time, axis " + name, height: 56}
	s, mean, reach := forceEnvelope(t, start)
	if reach.empty() {
		return f.empty("no position of this axis is recorded")
	}
	times := newExtent()
	times.show(start, start+float64(len(t.Positions))/t.Rate)
	x := scale{quantity: "time", unit: "s", si: "s", factor: 1}
	if times.high-times.low < 0.2 {
		x.unit, x.factor = "ms", 1e3
	}
	reach.show(0)
	p := panel{name: "force", share: 1, x: x.over(times), y: scale{quantity: "force", unit: "pN", si: "N", factor: 1e12}.over(reach)}
	p.add(s)
	p.add(mean)
	f.key = []keyItem{{"smallest to largest", envelope, record}, {"mean", curve, text}}
	limited := false
	for _, end := range []float64{t.Trap.Linear.Low, t.Trap.Linear.High} {
		if force := end * float64(t.Trap.Stiffness.Value); finite(force) && force > reach.low && force < reach.high {
			p.add(series{name: "end of the linear range", mark: level, ink: rule, y: []float64{force}})
			limited = true
		}
	}
	if limited {
		f.key = append(f.key, keyItem{"end of the linear range", level, rule})
	}
	f.panels = []panel{p}
	return f.described(fmt.Sprintf("Force along %s over %s, between %s and %s, thermal motion of the bead included.", name, plain(times.high-times.low, "s"),
		plain(reach.low*1e12, "pN"), plain(reach.high*1e12, "pN")))
}

// forceEnvelope returns range and mean of at most maxPoints stretches.
func forceEnvelope(t *calib.ForceTrace, start float64) (s, mean series, reach extent) {
	s, mean = series{name: "force", mark: envelope, ink: record}, series{name: "mean force", mark: curve, ink: text}
	reach = newExtent()
	n := len(t.Positions)
	stretches := min(n, maxPoints)
	for i := range stretches {
		from, to := i*n/stretches, (i+1)*n/stretches
		e, sum, count := newExtent(), 0.0, 0
		for j := from; j < to; j++ {
			if _, force, _ := t.At(j); finite(force) {
				e.show(force)
				sum += force
				count++
			}
		}
		low, high, middle := math.NaN(), math.NaN(), math.NaN()
		if count > 0 {
			low, high, middle = e.low, e.high, sum/float64(count)
			reach.show(low, high)
		}
		at := start + float64(from+to)/2/t.Rate
		s.x, s.low, s.high = append(s.x, at), append(s.low, low), append(s.high, high)
		mean.x, mean.y = append(mean.x, at), append(mean.y, middle)
	}
	return s, mean, reach
}
