package calib

import (
	"fmt"
	"math"
	"slices"
)

// leastPlanned is the smallest number of samples of a planned recording.
const leastPlanned = 64

// mostPlanned is the largest number of samples of a row: a terabyte of text.
const mostPlanned = 20_000_000_000

// longestPlanned is the longest duration that is looked for [s]: no trap stays the same for
// longer than a day.
const longestPlanned = 86400

const notReached = "not reached in a day"

// littleGain is the ratio to the floor at which a recording is long enough.
const littleGain = 1.05

func (f *forecast) samples(duration, rate float64) int { return int(math.Round(duration * rate)) }

// ladder returns 1, 2 and 5 times the powers of ten within low and high.
func ladder(low, high float64) []float64 {
	var steps []float64
	const slack = 1e-9 // of the rounding of the powers
	for decade := math.Floor(math.Log10(low)); decade <= math.Ceil(math.Log10(high)); decade++ {
		for _, m := range []float64{1, 2, 5} {
			if v := m * math.Pow(10, decade); v >= low*(1-slack) && v <= high*(1+slack) {
				steps = append(steps, v)
			}
		}
	}
	return steps
}

// times predicts durations over three decades and a half, from about three times 1/fc or
// the fewest samples on.
func (f *forecast) times() []PlanTime {
	shortest := math.Max(3/f.corner, leastPlanned/f.rate)
	var rows []PlanTime
	for _, t := range ladder(math.Max(shortest, 0.1), math.Max(1000, 1000*shortest)) {
		n := f.samples(t, f.rate)
		if n > mostPlanned {
			break
		}
		row := PlanTime{Duration: Float(t), Samples: n, Routes: f.at(f.rate, n).routes, Drift: Float(math.NaN())}
		if s := float64(row.Routes.Amplitude.Statistical); !math.IsNaN(s) {
			row.Drift = Float(math.Sqrt(s * f.variance)) // it adds its square to the variance
		}
		rows = append(rows, row)
	}
	return rows
}

// floor predicts a recording without an end.
func (f *forecast) floor() PlanFloor {
	o := f.at(f.rate, endless)
	floor := PlanFloor{Drag: o.routes.Drag.Combined, Amplitude: o.routes.Amplitude.Combined, Both: o.routes.Both.Combined, Weight: Float(o.weight)}
	add := func(line BudgetLine, c, relative float64) {
		line.Sensitivity = Float(math.NaN())
		if relative > 0 {
			line.Sensitivity = Float(c / relative)
		}
		line.Contribution = Float(math.Abs(c))
		line.Share = Float(math.NaN())
		if floor.Both > 0 {
			line.Share = Float(c * c / square(float64(floor.Both)))
		}
		floor.Budget = append(floor.Budget, line)
	}
	for _, in := range f.phys.influences {
		c := o.weight*in.drag + (1-o.weight)*(in.energy-2*in.length)
		add(BudgetLine{Input: in.name, Value: Float(in.value), Unit: in.unit, StandardUncertainty: Float(in.u)}, c, in.u/math.Abs(in.base))
	}
	if f.exposureU > 0 {
		relative := 0.0
		if f.exposure > 0 {
			relative = f.exposureU / f.exposure
		}
		add(BudgetLine{Input: "exposure", Value: Float(f.exposure), Unit: "s", StandardUncertainty: Float(f.exposureU)}, o.exposure, relative)
	}
	largest := negligible
	for _, line := range floor.Budget {
		if float64(line.Contribution) > largest {
			largest, floor.Dominant = float64(line.Contribution), line.Input
		}
	}
	return floor
}

// negligible is a floor that no recording reaches: 1e9 independent samples have 4e-5.
const negligible = 1e-5

// looked are the durations [s] between which a search looks closer, from the shortest to the
// longest, so close that a number which falls and rises again is not missed.
func (f *forecast) looked() []float64 {
	const step = 1.5
	var all []float64
	for t := leastPlanned / f.rate; t < longestPlanned; t *= step {
		all = append(all, t)
	}
	return append(all, longestPlanned)
}

// until returns the shortest duration [s] at which miss is not positive; +Inf when there is
// none.
func (f *forecast) until(miss func(PlanRoutes) float64) float64 {
	ok := func(t float64) bool { return miss(f.at(f.rate, f.samples(t, f.rate)).routes) <= 0 } // NaN is not there yet
	looked := f.looked()
	first := slices.IndexFunc(looked, ok)
	switch first {
	case -1:
		return math.Inf(1)
	case 0:
		return looked[0]
	}
	low, high := looked[first-1], looked[first]
	for math.Log(high/low) > 1e-4 { // finer than anything that is recorded by
		if middle := math.Sqrt(low * high); ok(middle) {
			high = middle
		} else {
			low = middle
		}
	}
	return high
}

// enough is the duration at which the combined uncertainty is within 5 % of the least that any
// duration gives: its floor, unless it rises towards that.
func (f *forecast) enough(floor float64) Quantity {
	if !(floor > negligible) {
		return Withheld("s", "no input is stated with an uncertainty: every recording gains by being longer")
	}
	least := floor
	for _, t := range f.looked() {
		if u := float64(f.at(f.rate, f.samples(t, f.rate)).routes.Both.Combined); u < least {
			least = u
		}
	}
	t := f.until(func(r PlanRoutes) float64 { return float64(r.Both.Combined) - littleGain*least })
	if math.IsInf(t, 1) {
		return Withheld("s", notReached)
	}
	return Exact(t, "s")
}

// wanted finds the durations for a wanted uncertainty.
func (f *forecast) wanted(u float64) *PlanWanted {
	duration := func(floor Float, of func(PlanRoutes) PlanUncertainty) Quantity {
		if !floor.Known() {
			return Withheld("s", "this recording does not determine it, however long")
		}
		t := f.until(func(r PlanRoutes) float64 { return float64(of(r).Combined) - u })
		switch {
		case math.IsInf(t, 1) && float64(floor) >= u:
			return Withheld("s", fmt.Sprintf("the inputs alone leave %.2g %%", 100*float64(floor)))
		case math.IsInf(t, 1):
			return Withheld("s", notReached)
		}
		return Exact(t, "s")
	}
	floor := f.floor()
	return &PlanWanted{Uncertainty: Float(u),
		Drag:      duration(floor.Drag, func(r PlanRoutes) PlanUncertainty { return r.Drag }),
		Amplitude: duration(floor.Amplitude, func(r PlanRoutes) PlanUncertainty { return r.Amplitude }),
		Both:      duration(floor.Both, func(r PlanRoutes) PlanUncertainty { return r.Both })}
}

// reference is the duration at which rates are compared [s]: the wanted one, else the one
// that is enough, else 100 relaxation times or 10 s.
func (f *forecast) reference(p *Plan) float64 {
	switch {
	case p.Wanted != nil && p.Wanted.Both.Known():
		return float64(p.Wanted.Both.Value)
	case p.Enough.Known():
		return float64(p.Enough.Value)
	}
	return math.Max(10, math.Max(100/f.corner, leastPlanned/f.rate))
}

// fastestPlanned is the highest rate that is compared [Hz]: that of the fastest detectors.
const fastestPlanned = 1e7

// rates compares sampling rates at a duration [s], with the exposure as it is stated.
func (f *forecast) rates(duration float64) PlanRates {
	high := math.Min(500*f.corner, fastestPlanned)
	if f.exposure > 0 {
		high = math.Min(high, 1/f.exposure)
	}
	list := ladder(math.Max(f.corner/highestRatio, leastPlanned/duration), math.Max(high, f.rate))
	out := PlanRates{Duration: Float(duration), Best: Withheld("Hz", "no rate that was compared determines the stiffness")}
	best := math.Inf(1)
	planned := false
	add := func(rate float64) {
		n := f.samples(duration, rate)
		if n < leastPlanned || n > mostPlanned || f.exposure*rate > 1+1e-9 {
			return
		}
		row := PlanRate{Rate: Float(rate), Samples: n, Planned: rate == f.rate, Routes: f.at(rate, n).routes}
		planned = planned || row.Planned
		if u := float64(row.Routes.Both.Combined); u < best {
			best = u
		}
		out.Rows = append(out.Rows, row)
	}
	for _, rate := range list {
		switch {
		case math.Abs(rate/f.rate-1) < 1e-9:
			rate = f.rate
		case rate > f.rate && !planned:
			add(f.rate)
		}
		add(rate)
	}
	if !planned {
		add(f.rate)
	}
	for _, row := range out.Rows {
		if float64(row.Routes.Both.Combined) <= littleGain*best {
			out.Best = Exact(float64(row.Rate), "Hz")
			break
		}
	}
	return out
}
