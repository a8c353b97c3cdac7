package health

import (
	"fmt"
	"math"
)

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
	c.Text = fmt.Sprintf("From %s to %s the bead hardly moved: its variance was %s of that in the rest of the record.", v.moment(from), v.moment(to), percent(s.ratio))
	c.Remedy = "Use the part in which it moved. Raise the bead from the surface, or passivate the surface, and record again."
	c.Ranges = [][2]float64{{from, to}}
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
	c.Text = fmt.Sprintf("From %s to %s the variance was %s times that in the rest of the record.", v.moment(from), v.moment(to), digits(s.ratio))
	c.Remedy = "Look at the sample for a second bead or debris, and at the laser power for a change. Calibrate the parts apart." + caution
	c.Ranges = [][2]float64{{from, to}}
	return c
}
