package health

import (
	"fmt"
	"math"
)

const (
	jumpDoubtful   = 0.15 // jump over rms
	jumpBad        = 0.5  // one in the middle adds 1/16 of the variance
	driftDoubtful  = 0.25 // change over the record, over rms; adds 0.5 % to the variance where no line is removed
	driftBad       = 1    // by more than three standard deviations
	wanderDoubtful = 0.1  // rms of the slow waves over that of the bead; adds 1 % to the variance
	wanderBad      = 0.3  // 9 %
	// scanBeyond is the deviate beyond which the largest of many looks along the
	// record is beyond chance. The largest deviate of a step at any of 2000 places passes
	// 5 with a probability of 1e-4 (James, James and Siegmund, Biometrika 74 (1987)
	// 71: phi(b)[(b - 1/b) ln(r) + 4/b], ln(r) the logarithm of the ratio of the odds
	// of the two ends, up to 15).
	scanBeyond = 5
	// spellBeyond is the same for the variance of any interval, of which there are 8000.
	spellBeyond = 5.5
)

// meanFindings is what the means of blocks say about the place of the bead.
type meanFindings struct {
	step      step
	jump      bool
	h         null    // by which the mean was judged
	line      line    // about which the rest is judged, the step taken off
	driftZ    float64 // slope in standard deviations, as a normal deviate
	driftSD   float64 // standard deviation of the slope, in units of the scale
	wander    bool
	ratio     float64 // mean squared amplitude of slow waves over expectation
	wanderRMS float64 // beyond expectation, over the rms of the samples
}

// judgeMean tells drift, jump and wander from each other. Where an event may have
// misled the fit, a jump is looked for without it: one that is twice as clear, and far
// larger than any other change from one block to the next.
func (v *view) judgeMean() meanFindings {
	p := points(v.blocks, v.length, v.samples)
	m := v.findJump(p, v.h, scanBeyond, 0)
	h := v.h
	if !m.jump && v.misled() {
		_, difference, _ := v.within()
		if other := v.findJump(p, v.local, 2*scanBeyond, 8*difference); other.jump {
			m, h = other, v.local
		}
	}
	if m.jump {
		p = without(p, m.step)
	}
	m.h = h
	unit := math.Sqrt(h.r0) / v.scale // one rms in units of the scale
	m.line = fitLine(p)
	m.driftSD = math.Sqrt(h.longRun() / (v.scale * v.scale) / math.Max(m.line.tt, 1e-300))
	m.driftZ = normal(m.line.slope/m.driftSD, h.freedom())
	ratio, pValue, excess := wander(p, h, v.scale)
	m.ratio = ratio
	m.wanderRMS = math.Sqrt(excess) / unit
	m.wander = pValue < chance && m.wanderRMS > wanderDoubtful
	return m
}

// findJump looks for a step of at least a height [units of the scale] that is beyond
// a deviate.
func (v *view) findJump(p []point, h null, beyond, height float64) meanFindings {
	long := h.longRun() / (v.scale * v.scale)
	m := meanFindings{step: fitStep(p, long, h.freedom(), 4*h.memory())}
	size := math.Abs(m.step.height)
	m.jump = math.Abs(m.step.z) > beyond && size > height && size > jumpDoubtful*math.Sqrt(h.r0)/v.scale && v.sudden(p, m.step, long, h.memory())
	return m
}

// judgeSpell looks for a stretch of unusual variance. Where an event may have misled
// the fit, a bead that is held fast is looked for without it.
func (v *view) judgeSpell(coarse []block) spell {
	s := loudest(coarse, v.h, math.Max(8*v.h.memory(), 16))
	if !v.misled() {
		return s
	}
	other := loudest(coarse, v.local, math.Max(8*v.local.memory(), 16))
	if math.Abs(other.z) > 1.5*spellBeyond && v.stuckIn(other).found {
		return other
	}
	return s
}

// sudden tells a step from the steepest part of a slow wave: of a step, the means of
// short stretches before and after it differ by its height. The stretches are as
// long as it takes to know the difference to a fifth of the height.
func (v *view) sudden(p []point, s step, long, memory float64) bool {
	w := math.Max(50*long/(s.height*s.height), 3*memory)
	w = math.Max(w, 2*float64(v.length))
	d, ok := local(p, s, w, math.Max(float64(v.length), 2*memory))
	if !ok || w > 0.08*float64(v.samples) {
		return math.Abs(s.z) > 2*scanBeyond // too long to tell; what is this clear is no wave of small height
	}
	return d/s.height > 0.5
}

// escape looks for a bead that left the trap.
func (v *view) escape() Check {
	c := v.check("lost-bead")
	c.Threshold = escapeDeviations
	if !v.judgeable() {
		return c.spared("too few samples")
	}
	c.Value = v.beyond
	if v.escapeAt < 0 {
		c.Text = "The bead stayed in the trap."
		return c
	}
	at := v.second(float64(v.escapeAt * v.length))
	c.Level = Bad
	c.Text = fmt.Sprintf("The bead left the trap at about %s: it reached %s times the rms from before, and wandered freely.", moment(at, v.duration()), digits(v.beyond))
	c.Remedy = "Use the part before. For the next recording a stiffer trap holds the bead longer." + caution
	c.Ranges = [][2]float64{{at, v.duration()}}
	return c
}

// heldSpell is a stretch in which the bead hardly moves.
type heldSpell struct {
	found    bool
	from, to int // blocks of the spell scan
	ratio    float64
}

// heldRatio is the variance of a stretch over that elsewhere below which the bead
// counts as held. Localisation noise of half the thermal rms leaves 0.2; a second bead
// in the trap seldom makes it three times as stiff.
const heldRatio = 0.33

// stuck tells whether the spell of unusual variance is one of a bead held fast. The
// quiet part is the held one if it is whiter than the other, as localisation noise
// is, or if both are white. Otherwise the loud part is the unusual one.
func (v *view) stuck() heldSpell { return v.stuckIn(v.spell) }

func (v *view) stuckIn(s spell) heldSpell {
	quiet, loud := s.inside, s.rest
	ratio := s.ratio
	if s.ratio > 1 {
		quiet, loud, ratio = s.rest, s.inside, 1/s.ratio
	}
	if v.escapeAt >= 0 || math.Abs(s.z) < spellBeyond || ratio > heldRatio || !(quiet.whiteness() > math.Min(0.7, 2*loud.whiteness())) {
		return heldSpell{ratio: ratio}
	}
	out := heldSpell{found: true, from: s.from, to: s.to, ratio: ratio}
	if s.ratio > 1 { // the rest is quiet: before or after the spell, whichever is longer
		count := (len(v.blocks) + v.per - 1) / v.per
		if s.from > count-s.to {
			out.from, out.to = 0, s.from
		} else {
			out.from, out.to = s.to, count
		}
	}
	return out
}

// held looks for a bead that is stuck for part of the record, or all the time.
func (v *view) held() Check {
	c := v.check("held-bead")
	c.Threshold = heldRatio
	switch {
	case v.total.low == v.total.high && v.total.n > 1:
		c.Level, c.Value = Bad, 0
		c.Text = "All samples have the same value: nothing moves."
		c.Remedy = "Check that the column is the position of a bead, and that the detector is on."
		return c
	case !v.judgeable():
		return c.spared("too few samples")
	case v.escapeAt >= 0:
		return c.spared("the bead escaped")
	}
	s := v.stuck()
	c.Value = s.ratio
	if !s.found {
		c.Text = "The bead moved all the time."
		return c
	}
	from := v.second(float64(s.from * v.per * v.length))
	to := math.Min(v.second(float64(s.to*v.per*v.length)), v.duration())
	c.Level = Bad
	c.Text = fmt.Sprintf("From %s to %s the bead hardly moved: its variance was %s of that in the rest of the record.", moment(from, v.duration()), moment(to, v.duration()), percent(s.ratio))
	c.Remedy = "Use the part in which it moved. Raise the bead from the surface, or passivate the surface, and record again."
	c.Ranges = [][2]float64{{from, to}}
	return c
}

// jump looks for a sudden change of the mean position.
func (v *view) jump() Check {
	c := v.check("jump")
	c.Threshold = jumpDoubtful
	switch {
	case !v.judgeable():
		return c.spared("too few samples")
	case v.escapeAt >= 0:
		return c.spared("the bead escaped")
	case v.stuck().found:
		return c.spared("the bead was held fast for a while")
	}
	height := v.mean.step.height * v.scale
	c.Value = math.Abs(height) / v.rms
	if !v.mean.jump {
		c.Text = "The mean position did not jump."
		return c
	}
	c.Level = Doubtful
	if c.Value > jumpBad {
		c.Level = Bad
	}
	at := v.second(v.mean.step.at)
	c.Text = fmt.Sprintf("The mean position jumped by %s, %s times the rms, at %s.", length(height, v.Unit), digits(c.Value), moment(at, v.duration()))
	c.Remedy = "Look at the sample: a second bead in the trap, the bead touching the surface, or a knock against the microscope do this. Use the part before, or record again."
	c.Ranges = [][2]float64{{at, v.duration()}}
	if at < 0.1*v.duration() { // what came before is too short to be the record
		c.Ranges = [][2]float64{{0, at}}
	}
	return c
}

// drift looks for a steady change of the mean position.
func (v *view) drift() Check {
	c := v.check("slow-drift")
	c.Threshold = driftDoubtful
	switch {
	case !v.judgeable():
		return c.spared("too few samples")
	case v.escapeAt >= 0:
		return c.spared("the bead escaped")
	case v.stuck().found:
		return c.spared("the bead was held fast for a while")
	}
	change := v.mean.line.slope * v.scale
	sd := v.mean.driftSD * v.scale
	c.Value = math.Abs(change) / v.rms
	c.Text = fmt.Sprintf("The mean position drifted by %s, %s times the rms, which the bead alone does by chance.", length(change, v.Unit), digits(c.Value))
	if twoSided(v.mean.driftZ) > chance {
		return c
	}
	c.Text = fmt.Sprintf("The mean position drifted by %s, %s times the rms, during the record.", length(change, v.Unit), digits(c.Value))
	switch {
	case c.Value-3*sd/v.rms > driftBad:
		c.Level = Bad
		c.Text += " The fit takes off a straight line, but so large a drift is seldom straight."
	case c.Value > driftDoubtful:
		c.Level = Doubtful
		c.Text += " The estimates allow for a straight line."
	}
	if c.Level != OK {
		c.Remedy = "Let the microscope settle for an hour, shield it from air currents, switch off lamps; or record for a shorter time."
	}
	return c
}

// slowWander looks for slow waves that are no straight line.
func (v *view) slowWander() Check {
	c := v.check("slow-wander")
	c.Threshold = wanderDoubtful
	switch {
	case !v.judgeable():
		return c.spared("too few samples")
	case v.escapeAt >= 0:
		return c.spared("the bead escaped")
	case v.stuck().found:
		return c.spared("the bead was held fast for a while")
	}
	c.Value = v.mean.wanderRMS
	if !v.mean.wander {
		c.Text = "About a straight line the mean position wandered no more than the bead alone makes it."
		return c
	}
	c.Level = Doubtful
	if c.Value > wanderBad {
		c.Level = Bad
	}
	c.Text = fmt.Sprintf("The mean position wandered slowly, by %s times the rms of the bead beyond what chance makes.", digits(c.Value))
	c.Remedy = "Fit above the frequencies of the wander, or cut the record to its calm part. Shield the microscope from air currents and temperature changes." + caution
	return c
}

const (
	unsteadyDoubtful = 1.15 // ratio of variances
	unsteadyBad      = 1.6
)

// unsteady looks for a change of the variance along the record.
func (v *view) unsteady() Check {
	c := v.check("unsteady-motion")
	c.Threshold = unsteadyDoubtful
	if !v.judgeable() {
		return c.spared("too few samples")
	}
	if v.escapeAt >= 0 {
		return c.spared("the bead escaped")
	}
	if v.stuck().found {
		return c.spared("the bead was held fast for a while")
	}
	s := v.spell
	if s.to == 0 {
		return c.spared("the record is too short to compare its parts")
	}
	c.Value = math.Max(s.ratio, 1/s.ratio)
	if math.Abs(s.z) < spellBeyond || c.Value < unsteadyDoubtful {
		c.Text = "The motion is as strong in one part of the record as in another."
		return c
	}
	c.Level = Doubtful
	if c.Value > unsteadyBad {
		c.Level = Bad
	}
	from := v.second(float64(s.from * v.per * v.length))
	to := math.Min(v.second(float64(s.to*v.per*v.length)), v.duration())
	c.Text = fmt.Sprintf("From %s to %s the variance was %s times that in the rest of the record.", moment(from, v.duration()), moment(to, v.duration()), digits(s.ratio))
	c.Remedy = "Look at the sample for a second bead or debris, and at the laser power for a change. Calibrate the parts apart." + caution
	c.Ranges = [][2]float64{{from, to}}
	return c
}
