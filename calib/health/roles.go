package health

import (
	"fmt"
	"math"
	"slices"
)

// RunFree makes the checks that hold for a bead that diffuses with the laser off: those of the clock, of the values, and of the
// steps from sample to sample. Position and fit mean nothing to it: a free bead has neither place nor relaxation time.
func RunFree(in Input) []Check {
	checks := in.clock()
	for _, a := range in.Axes {
		a.Known = false
		v, steps := newView(in, a), newView(in, a.steps())
		rough, held, unsteady := steps.wideSteps(), steps.held(), steps.unsteadySteps()
		if rough.Level != OK { // a few wide steps make the rest look still
			held = held.spared("some steps are too large")
			unsteady = unsteady.spared("some steps are too large")
		}
		checks = append(checks, v.rail(), steps.coarse(), v.frozenSamples(), rough, held, unsteady)
	}
	return checks
}

// RunBackground makes the checks that hold for a recording without a bead, or with a stuck one. A straight drift is taken out of it and
// counts as doubtful at most.
func RunBackground(in Input) []Check {
	checks := in.clock()
	for _, a := range in.Axes {
		a.Known = false
		v := newView(in, a)
		drift := v.drift()
		drift.Level = min(drift.Level, Doubtful)
		checks = append(checks, v.rail(), v.coarse(), v.frozenSamples(), v.jump(), drift, v.unsteady())
	}
	return checks
}

// wideDeviations is the size of a step, in standard deviations by the median of the sizes, that a normal one does not
// reach: 2.6e-12 of them do.
const wideDeviations = 7

// wideParts is the number of parts in which the usual size of a step is looked for: a bead that sticks for half of the
// recording has its usual steps in the other half.
const wideParts = 8

// normalMedian is the median of the size of a standard normal deviate.
const normalMedian = 0.6744897501960817

// wideSteps looks for single steps of a free bead that are too large; the view is that of the steps.
func (v *view) wideSteps() Check {
	c := v.check("rough-steps")
	var sizes []float64
	for _, s := range v.X {
		if s == s {
			sizes = append(sizes, math.Abs(s))
		}
	}
	if len(sizes) < 64 {
		return c.spared("too few steps")
	}
	sd := 0.0 // of the part in which the bead moves most
	for k := range wideParts {
		part := slices.Clone(sizes[k*len(sizes)/wideParts : (k+1)*len(sizes)/wideParts])
		slices.Sort(part)
		sd = math.Max(sd, part[len(part)/2]/normalMedian)
	}
	slices.Sort(sizes)
	if !(sd > 0) {
		return c.spared("most samples do not move")
	}
	from, _ := slices.BinarySearch(sizes, wideDeviations*sd)
	count := len(sizes) - from
	c.Value, c.Threshold = float64(count)/float64(len(sizes)), 0
	c.Text = "The steps from sample to sample are those of a bead."
	if count == 0 {
		return c
	}
	c.Level = Doubtful
	c.Text = fmt.Sprintf("%d of %d steps from one sample to the next are larger than %d times their usual size; the largest is %s. Samples lost without a trace, or single wrong positions, do this.",
		count, len(sizes), wideDeviations, length(sizes[len(sizes)-1], v.Unit))
	c.Remedy = "Compare the frame numbers of camera and file, and look at the largest steps in the track; record with time stamps."
	return c
}

// steps are the differences of neighbouring samples, a stationary series where the bead is free.
func (a Axis) steps() Axis {
	steps := make([]float64, max(len(a.X)-1, 0))
	for i := range steps {
		steps[i] = a.X[i+1] - a.X[i]
	}
	a.X = steps
	return a
}

// unsteadySteps looks for stretches in which the steps of a free bead are larger or smaller than in the rest.
func (v *view) unsteadySteps() Check {
	c := v.unsteady()
	if c.Level == OK {
		if c.Judged {
			c.Text = "The steps have the same variance throughout."
		}
		return c
	}
	where := "in a stretch"
	if len(c.Ranges) > 0 {
		where = fmt.Sprintf("from %s to %s", v.moment(c.Ranges[0][0]), v.moment(c.Ranges[0][1]))
	}
	c.Text = fmt.Sprintf("The steps %s have %s times the variance of the rest.", where, digits(math.Abs(c.Value)))
	c.Remedy = "Look whether the bead stuck, was caught, came near a surface or met another one; record again, or cut the recording."
	return c
}
