package health

import (
	"math"
	"slices"

	"beadwell/calib/transform"
)

// Run makes every check, those of the recording first, then those of each axis, then
// those of each pair of axes, in a fixed order: the order of Codes within each
// group. Checks that find nothing are returned too, with the level OK. The same
// input gives the same result to the last bit.
//
// It does not modify the input. Axes of different lengths are a caller's error
// and panic.
func Run(in Input) []Check {
	for _, a := range in.Axes {
		if a.sampleCount() != in.Axes[0].sampleCount() {
			panic("health: axes of different lengths")
		}
	}
	checks := in.clock()
	views, made := make([]*view, len(in.Axes)), make([][]Check, len(in.Axes))
	transform.Each(len(in.Axes), func(next func() (int, bool)) {
		for i, ok := next(); ok; i, ok = next() {
			views[i] = newView(in, in.Axes[i])
			made[i] = views[i].checks()
		}
	})
	roughTogether(views, made)
	checks = append(checks, slices.Concat(made...)...)
	pair := 0
	for i := range views {
		for j := i + 1; j < len(views); j++ {
			checks = append(checks, crossTalk(in, views[i], views[j], pair))
			pair++
		}
	}
	return checks
}

// view is one axis with what the passes over it have found. Positions are in units
// of the scale about the centre unless their comment says otherwise.
type view struct {
	Axis
	summary
	rate      float64 // [Hz]
	start     float64 // [s]
	exposure  float64 // [s]
	h         null
	local     null // the same without a fit, from parts of the record
	values    values
	line      line
	rms       float64 // standard deviation of the samples by the null hypothesis [unit of X]
	mean      meanFindings
	spell     spell
	freeSteps float64 // steps between neighbours that count as independent in their kurtosis
	whole     part    // the record, line and step taken off
	per       int     // fine blocks in one block of the spell
	escapeAt  int     // fine block, -1 when there is none
	beyond    float64 // farthest position from the beginning of the record, in standard deviations of that
}

// newView reads an axis and makes the decisions that several checks share.
func newView(in Input, a Axis) *view {
	v := &view{Axis: a, rate: in.Rate, start: in.Start, exposure: in.Exposure, escapeAt: -1}
	if a.Gathered != nil {
		v.summary, v.values = a.Gathered.complete(), a.Gathered.survey()
	} else {
		v.summary = summarise(a.X)
		v.values = survey(a.X, v.summary)
	}
	n := int(v.total.n)
	v.Known = a.Known && in.Rate > 0 && known(in.Rate)
	if v.Known {
		v.h = newNull(a.Process, n, v.summary.samples)
	}
	if !v.Known || !v.h.usable() {
		v.Known = false
		v.h = newNull(v.rough(), n, v.summary.samples)
	}
	v.local = v.h
	if v.Known {
		v.local = newNull(v.rough(), n, v.summary.samples)
	}
	v.line = fitLine(points(v.blocks, v.length, v.samples))
	v.rms = math.Sqrt(v.h.r0)
	if !v.judgeable() {
		return v
	}
	at, beyond, ok := escaped(v.blocks)
	if v.beyond = beyond; ok {
		v.escapeAt = before(v.blocks, at, v.length)
	}
	v.mean = v.judgeMean()
	coarse := v.levelledBlocks()
	sum := emptyBlock()
	for _, b := range coarse {
		sum.add(b)
	}
	v.whole.add(sum)
	v.spell = v.judgeSpell(coarse)
	return v
}

// spellBlocks is the number of blocks from which stretches of unusual variance are
// made; the number of stretches is half its square.
const spellBlocks = 128

// levelledBlocks returns the sums of coarse blocks with the fitted line, and the step if
// there is one, taken off. The fine blocks at a step, where the bead is on its way,
// are left out.
func (v *view) levelledBlocks() []block {
	v.per = max(1, (len(v.blocks)+spellBlocks-1)/spellBlocks)
	coarse := make([]block, (len(v.blocks)+v.per-1)/v.per)
	for i := range coarse {
		coarse[i] = emptyBlock()
	}
	on := math.Max(1.5*float64(v.length), 3*v.local.memory())
	for i, b := range v.blocks {
		mid := (float64(i) + 0.5) * float64(v.length)
		t := mid/float64(v.samples) - 0.5
		a := v.mean.line.at(t)
		if v.mean.jump {
			if math.Abs(mid-v.mean.step.at) < on {
				continue
			}
			if t > v.mean.step.t {
				a += v.mean.step.height
			}
		}
		b.shift(a)
		coarse[i/v.per].add(b)
	}
	return coarse
}

// judgeable tells whether there are enough samples that move for any statistics.
func (v *view) judgeable() bool { return v.total.n >= 64 && v.h.usable() }

// second returns the time in the record of a sample [s].
func (v *view) second(sample float64) float64 { return sample / v.rate }

// duration returns the length of the record [s].
func (v *view) duration() float64 { return float64(v.samples) / v.rate }

// upset names what has happened to the bead that keeps the record from being one
// process, or returns an empty string. Checks that would only see the same event
// once more are not made then.
func (v *view) upset() string {
	switch {
	case v.escapeAt >= 0:
		return "the bead escaped"
	case v.stuck().found:
		return "the bead was held fast for a while"
	case v.mean.jump:
		return "the position jumped"
	case v.mean.wander && v.mean.wanderRMS > wanderBad:
		return "the position wandered"
	}
	return ""
}

// moment prints a time in the record [s] on the clock of the recording.
func (v *view) moment(t float64) string { return moment(v.start+t, v.duration()) }

// check starts the outcome of a check on an axis.
func (v *view) check(code string) Check {
	c := start(code)
	c.Axis = v.Name
	return c
}

// start returns an outcome that is OK and judged.
func start(code string) Check {
	e := explained(code)
	return Check{Code: code, Name: e.Title, Judged: true, Value: math.NaN(), Threshold: math.NaN(), Unit: e.unit, Reason: e.reason}
}

// spared marks a check as not made.
func (c Check) spared(why string) Check {
	c.Level, c.Judged, c.Text = OK, false, "Not judged: "+why+"."
	return c
}

// checks makes all checks of the axis.
func (v *view) checks() []Check {
	made := []func(*view) Check{
		(*view).rail, (*view).coarse, (*view).frozenSamples,
		(*view).escape, (*view).held, (*view).jump, (*view).drift, (*view).slowWander, (*view).unsteady,
		(*view).roughSteps, (*view).distribution, (*view).tone,
		(*view).short, (*view).blurred, (*view).slow, (*view).misfit,
	}
	out := make([]Check, 0, len(made))
	for _, f := range made {
		out = append(out, f(v))
	}
	return out
}
