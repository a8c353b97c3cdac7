package health

import (
	"fmt"
	"math"
)

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
	c.Text = fmt.Sprintf("The mean position jumped by %s, %s times the rms, at %s.", length(height, v.Unit), digits(c.Value), v.moment(at))
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
	c.Remedy = "Fit above the frequencies of the wander, or cut the record to its calm part. Shield the microscope and its beam path from air currents and changes of the temperature." + caution
	return c
}
