package calib

import "math"

// hypothesis is one cause with a parameter that runs from low to high, in a scale in
// which equal steps are equally interesting.
type hypothesis struct {
	code, name, axis string
	stated           Quantity // unit too
	low, high        float64
	steps            int // of the first scan; 1: the parameter is fixed at low
	at               func(parameter float64) (weighed, bool)
	value            func(parameter float64) float64 // SI
	order            func(needed float64) float64    // change in standard uncertainties that are usual, where none is stated
	text             func(Cause) string
	also             func(top summit) (hypothesis, bool) // the same cause in another way, to be taken when it explains more; nil: none
}

func (h hypothesis) fixed() bool { return h.steps == 1 }

// summit is the best value of a parameter, with the ends of its 68 % interval.
type summit struct {
	weighed
	at, low, high float64 // an end that is not bounded is NaN
	atBound       bool    // the likelihood rises up to the end of the range
}

// maximise scans the range, refines the best of the scan by golden sections, and finds
// where the log-likelihood has fallen by one half.
func (h hypothesis) maximise() (summit, bool) {
	step := 0.0
	if h.steps > 1 {
		step = (h.high - h.low) / float64(h.steps-1)
	}
	best, found := summit{weighed: weighed{value: math.Inf(-1)}}, false
	for i := range h.steps {
		at := h.low + float64(i)*step
		if w, ok := h.at(at); ok && w.value > best.value {
			best, found = summit{weighed: w, at: at, low: math.NaN(), high: math.NaN()}, true
		}
	}
	if !found || h.steps == 1 {
		return best, found
	}
	best = h.refine(best, math.Max(h.low, best.at-step), math.Min(h.high, best.at+step))
	best.atBound = math.Min(best.at-h.low, h.high-best.at) < step/100
	best.low = h.fall(best, -1, step)
	best.high = h.fall(best, 1, step)
	return best, true
}

// golden sections: 16 of them narrow two steps of the scan to a thousandth of one.
const goldenSections = 16

func (h hypothesis) refine(best summit, low, high float64) summit {
	ratio := (math.Sqrt(5) - 1) / 2
	value := func(at float64) float64 {
		w, ok := h.at(at)
		if !ok {
			return math.Inf(-1)
		}
		if w.value > best.value {
			best.weighed, best.at = w, at
		}
		return w.value
	}
	a, b := high-ratio*(high-low), low+ratio*(high-low)
	va, vb := value(a), value(b)
	for range goldenSections {
		if va > vb {
			high, b, vb = b, a, va
			a = high - ratio*(high-low)
			va = value(a)
		} else {
			low, a, va = a, b, vb
			b = low + ratio*(high-low)
			vb = value(b)
		}
	}
	return best
}

// fall returns the parameter at which the log-likelihood is one half below the summit,
// by secant steps on the root of the fall, which is nearly linear in the distance.
func (h hypothesis) fall(top summit, sign, step float64) float64 {
	limit := h.high - top.at
	if sign < 0 {
		limit = top.at - h.low
	}
	root := func(d float64) float64 {
		w, ok := h.at(top.at + sign*d)
		if !ok {
			return math.Inf(1)
		}
		return math.Sqrt(math.Max(0, 2*(top.value-w.value)))
	}
	low, high, d := 0.0, math.Inf(1), math.Min(step/4, limit)
	for range 20 {
		r := root(d)
		if math.Abs(r-1) < 0.02 { // two digits of the uncertainty are shown
			return top.at + sign*d/r
		}
		if r < 1 {
			low = d
			if d >= limit {
				return math.NaN()
			}
		} else {
			high = d
		}
		d = math.Min(limit, d/math.Min(math.Max(r, 0.2), 5))
		if d <= low || d >= high {
			d = (low + math.Min(high, limit)) / 2
		}
	}
	return top.at + sign*d
}

// needed makes the quantity of a summit.
func (h hypothesis) needed(top summit) Quantity {
	v := h.value(top.at)
	q := Quantity{Value: Float(v), Unit: h.stated.Unit}
	if h.fixed() {
		return q
	}
	a, b := h.value(top.low), h.value(top.high)
	if h.value(h.low) > h.value(h.high) { // the value falls with the parameter
		a, b = b, a
	}
	u := (b - a) / 2
	switch {
	case math.IsNaN(a):
		u = b - v
	case math.IsNaN(b):
		u = v - a
	}
	if math.IsNaN(u) || math.IsInf(u, 0) {
		return q
	}
	q.Combined = &Uncertainty{Standard: Float(u), Interval68: [2]Float{Float(a), Float(b)},
		Interval95: [2]Float{Float(v - z95*(v-a)), Float(v + z95*(b-v))}}
	return q
}
