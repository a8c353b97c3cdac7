package health

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// point is the mean of some consecutive samples.
type point struct {
	t      float64 // centre, as a share of the record about its middle: -1/2 to 1/2
	n      float64 // observed samples
	y      float64 // mean, in units of the scale
	centre float64 // centre [samples]
}

// points returns the means of blocks of the given number of samples each, those
// without samples left out.
func points(blocks []block, length, samples int) []point {
	p := make([]point, 0, len(blocks))
	for i, b := range blocks {
		if b.n == 0 {
			continue
		}
		from := float64(i * length)
		to := math.Min(from+float64(length), float64(samples))
		mid := (from + to) / 2
		p = append(p, point{t: mid/float64(samples) - 0.5, n: b.n, y: b.mean(), centre: mid})
	}
	return p
}

// line is a straight line fitted to means, weighted by their samples.
type line struct {
	level, slope float64 // at the mean time; change over the whole record
	t            float64 // mean time
	n, tt        float64 // sums of n and of n (t - mean t)^2
}

func fitLine(p []point) line {
	var l line
	y := 0.0
	for _, q := range p {
		l.n += q.n
		l.t += q.n * q.t
		y += q.n * q.y
	}
	if l.n == 0 {
		return l
	}
	l.t /= l.n
	l.level = y / l.n
	ty := 0.0
	for _, q := range p {
		l.tt += q.n * (q.t - l.t) * (q.t - l.t)
		ty += q.n * (q.t - l.t) * q.y
	}
	if l.tt > 0 {
		l.slope = ty / l.tt
	}
	return l
}

func (l line) at(t float64) float64 { return l.level + l.slope*(t-l.t) }

// step is a step in the mean, fitted together with a straight line.
type step struct {
	height float64 // in units of the scale
	z      float64 // height in its standard deviations by the null hypothesis, as a normal deviate
	at     float64 // sample at which it happens
	t      float64 // the same as a share of the record about its middle
}

// fitStep returns the step that stands out most from a straight line. Long is the
// long-run variance per sample in squares of the scale, nu its degrees of freedom;
// neither side is shorter than least samples.
//
// With the straight line fitted too, only the part of the step that no line can
// follow counts.
func fitStep(p []point, long, nu, least float64) step {
	l := fitLine(p)
	var best step
	var n, s, st float64 // over the points before the split: samples, sum of residuals, sum of n (t - mean t)
	for i := 0; i+1 < len(p); i++ {
		q := p[i]
		n += q.n
		s += q.n * (q.y - l.at(q.t))
		st += q.n * (q.t - l.t)
		if n < least || l.n-n < least || l.tt == 0 {
			continue
		}
		// of the step (1 after the split), what is orthogonal to constant and line has this norm
		norm := n*(l.n-n)/l.n - st*st/l.tt
		if norm <= 1e-9*l.n {
			continue
		}
		h := -s / norm
		if t := h * math.Sqrt(norm/long); math.Abs(t) > math.Abs(best.z) {
			best = step{height: h, z: t, at: (q.centre + p[i+1].centre) / 2, t: (q.t + p[i+1].t) / 2}
		}
	}
	best.z = normal(best.z, nu)
	return best
}

// without returns the points with a step taken off.
func without(p []point, s step) []point {
	out := make([]point, len(p))
	copy(out, p)
	for i := range out {
		if out[i].t > s.t {
			out[i].y -= s.height
		}
	}
	return out
}

// local returns the difference of the means over w samples on either side of a step,
// with a gap of g samples on each side; ok is false when the record is too short for it.
func local(p []point, s step, w, g float64) (difference float64, ok bool) {
	var before, after, nb, na float64
	for _, q := range p {
		switch d := q.centre - s.at; {
		case d < -g && d >= -g-w:
			before += q.n * q.y
			nb += q.n
		case d > g && d <= g+w:
			after += q.n * q.y
			na += q.n
		}
	}
	if nb < w/3 || na < w/3 {
		return 0, false
	}
	return after/na - before/nb, true
}

// The first and the last order of the cosines that make a slow wander.
const (
	wanderFrom = 2
	wanderTo   = 9
)

// wander measures the slowest waves about a straight line: the mean over the
// cosines cos(pi j t/T), j = 2 to 9, of their squared amplitudes over what the
// null hypothesis expects, its p-value, and the variance beyond expectation [squares of the scale].
func wander(p []point, h null, scale float64) (ratio, pValue, excess float64) {
	l := fitLine(p)
	orders := float64(wanderTo - wanderFrom + 1)
	var cosines, norms [wanderTo + 1]float64
	for _, q := range p {
		// cos(j a) of all j, by the recurrence of Chebyshev
		first := math.Cos(math.Pi * (q.t + 0.5))
		before, w := 1.0, first
		y := q.n * (q.y - l.at(q.t))
		for j := 1; j <= wanderTo; j++ {
			cosines[j] += w * y
			norms[j] += q.n * w * w
			before, w = w, 2*first*w-before
		}
	}
	for j := wanderFrom; j <= wanderTo; j++ {
		c, norm := cosines[j], norms[j]
		if norm == 0 {
			continue
		}
		expected := h.density(math.Pi*float64(j)/(h.n/h.observed)) / (scale * scale)
		power := c * c / norm
		ratio += power / expected / orders
		excess += (power - expected) / l.n
	}
	f := distuv.F{D1: orders, D2: h.freedom()}
	return ratio, f.Survival(ratio), math.Max(excess, 0)
}
