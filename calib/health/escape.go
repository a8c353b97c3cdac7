package health

import (
	"fmt"
	"math"
)

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
	c.Text = fmt.Sprintf("The bead left the trap at about %s: it reached %s times the rms from before, and wandered freely.", v.moment(at), digits(v.beyond))
	c.Remedy = "Use the part before. For the next recording a stiffer trap holds the bead longer." + caution
	c.Ranges = [][2]float64{{at, v.duration()}}
	return c
}

// Bounds of an escape. A bead in a harmonic trap goes beyond 8 standard deviations
// once in 1e15 independent positions; 9 leaves room for the error of the standard
// deviation, which comes from a fifth of the record at least.
const escapeDeviations = 9

// escaped returns the block at which the bead leaves, if it does: from there on its
// mean wanders as that of a free bead does, and it reaches beyond escapeDeviations of
// the beginning of the record. The beginning is a fifth of the record or, when that
// does not show it, more. It needs no model, for a fit to a record with an escape has none.
// The excursion is the largest seen, in standard deviations of the beginning.
func escaped(blocks []block) (at int, excursion float64, ok bool) {
	const steps = 20
	sum := emptyBlock()
	for k := range steps - 1 {
		from, to := k*len(blocks)/steps, (k+1)*len(blocks)/steps
		for _, b := range blocks[from:to] {
			sum.add(b)
		}
		sd := math.Sqrt(sum.variance())
		if k < steps/5-1 || sum.n == 0 || sd == 0 {
			continue
		}
		i, reach := farthest(blocks[to:], sum.mean(), sd)
		if k == steps/5-1 {
			excursion = reach
		}
		if reach <= escapeDeviations {
			continue
		}
		if start := onset(blocks, to+i, sum.mean(), sd); walks(blocks[start:]) {
			return start, reach, true
		}
	}
	return 0, excursion, false
}

// farthest returns the first block that reaches beyond escapeDeviations of a mean, and
// the largest reach of all [standard deviations].
func farthest(blocks []block, mean, sd float64) (first int, reach float64) {
	first = -1
	for i, b := range blocks {
		if b.n == 0 {
			continue
		}
		r := math.Max(b.high-mean, mean-b.low) / sd
		if r > escapeDeviations && first < 0 {
			first = i
		}
		reach = math.Max(reach, r)
	}
	return first, reach
}

// onset goes back from the block of the excursion to the last one whose mean is
// still near the centre of the trap.
func onset(blocks []block, i int, m, sd float64) int {
	for i > 0 && !(math.Abs(blocks[i-1].mean()-m) < 2*sd) {
		i--
	}
	return max(i-1, 0)
}

// before goes back further, by the time that a free bead may take from the trap to
// the first excursion: it diffuses over 9 standard deviations in 40 relaxation times, and
// seldom takes more than 100. The relaxation time comes from the motion before. At most a
// fifth of what is there is given away.
func before(blocks []block, onset, length int) int {
	var p part
	for _, b := range blocks[:onset] {
		p.add(b)
	}
	margin := 100 / math.Max(p.whiteness(), 1e-9) / float64(length)
	return onset - int(math.Min(math.Ceil(margin), float64(onset)/5))
}

// walks tells whether the means of sixteen parts scatter more than the positions
// within the parts. The ratio of the two variances is about 8 for free diffusion,
// and 32 tau/T for a trapped bead in a stretch of length T.
func walks(blocks []block) bool {
	const parts = 16
	if len(blocks) < parts {
		return false
	}
	var within, m1, m2, count float64
	for k := range parts {
		b := emptyBlock()
		for _, o := range blocks[k*len(blocks)/parts : (k+1)*len(blocks)/parts] {
			b.add(o)
		}
		if b.n == 0 {
			continue
		}
		within += b.variance()
		m1 += b.mean()
		m2 += b.mean() * b.mean()
		count++
	}
	if count < 4 {
		return false
	}
	means := m2/count - m1*m1/(count*count)
	return means > 1.5*within/count
}
