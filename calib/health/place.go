package health

import "math"

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
	// of the two ends, up to 15; from memory, and checked by TestFalseAlarms).
	scanBeyond = 5
	// spellBeyond is the same for the variance of any interval, of which there are 8000.
	spellBeyond = 5.5
)

// meanFindings is what the means of blocks say about the place of the bead.
type meanFindings struct {
	step      step
	jump      bool
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
