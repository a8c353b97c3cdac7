package health

import "math"

// spell is an interval of the record that differs in variance from the rest.
type spell struct {
	from, to     int     // blocks, to exclusive
	z            float64 // significance of the ratio as a normal deviate; positive when the spell is louder
	ratio        float64 // variance within over variance in the rest, each about its own mean
	inside, rest part
}

// part is what tells noise from motion in a part of the record: half the mean square
// step between neighbours, and the variance within the blocks, each about its own mean.
type part struct {
	n, steps, equal float64
	half            float64 // sum of half the squared steps
	within          float64 // sum of squares about the means of the blocks
	blocks          float64
}

func (p *part) add(b block) {
	if b.n == 0 {
		return
	}
	p.n += b.n
	p.steps += b.steps
	p.equal += b.equal
	p.half += b.d2 / 2
	p.within += b.n * b.variance()
	p.blocks++
}

// whiteness returns 1 - rho(1) as seen within blocks: 1 for white noise or when
// nothing moves at all, near 0 for a slow bead sampled fast.
func (p part) whiteness() float64 {
	if p.within == 0 || p.steps == 0 || p.equal > 0.9*p.steps {
		return 1
	}
	return p.half / p.steps * math.Max(p.n-p.blocks, 1) / p.within
}

// loudest returns the interval whose variance differs most significantly from
// that of the rest of the record. Each is taken about its own mean, so that a step
// between them does not count. No part is shorter than least samples.
func loudest(blocks []block, h null, least float64) spell {
	sums := make([]block, len(blocks)+1) // only n, s1 and s2 are used
	for i, b := range blocks {
		sums[i+1] = block{n: sums[i].n + b.n, s1: sums[i].s1 + b.s1, s2: sums[i].s2 + b.s2}
	}
	total := sums[len(blocks)]
	inside, outside := newLosses(h, len(blocks)), newLosses(h, len(blocks))
	ordinary := make([]ordinaryRatio, len(blocks)+1) // of intervals of so many blocks
	var best spell
	for i := range blocks {
		for j := i + 1; j <= len(blocks); j++ {
			in := block{n: sums[j].n - sums[i].n, s1: sums[j].s1 - sums[i].s1, s2: sums[j].s2 - sums[i].s2}
			out := block{n: total.n - in.n, s1: total.s1 - in.s1, s2: total.s2 - in.s2}
			if in.n < least || out.n < least {
				continue
			}
			a, b := inside.of(j-i, in.n), outside.of(j-i, out.n)
			ratio := varianceRatio(in, out, a, b)
			if ordinary[j-i].holds(ratio, a, b, math.Abs(best.z)) {
				continue
			}
			if z := deviate(ratio, a, b); math.Abs(z) > math.Abs(best.z) {
				best = spell{from: i, to: j, z: z, ratio: ratio}
			}
		}
	}
	for i, b := range blocks {
		if i >= best.from && i < best.to {
			best.inside.add(b)
		} else {
			best.rest.add(b)
		}
	}
	return best
}

// losses remembers what the means of intervals take. Those over equally many blocks mostly have equally many samples.
type losses struct {
	h       null
	samples []float64 // of the last interval over so many blocks
	loss    []meanLoss
}

func newLosses(h null, blocks int) *losses {
	return &losses{h: h, samples: make([]float64, blocks+1), loss: make([]meanLoss, blocks+1)}
}

func (l *losses) of(blocks int, samples float64) meanLoss {
	if l.samples[blocks] != samples {
		l.samples[blocks], l.loss[blocks] = samples, l.h.meanLoss(samples)
	}
	return l.loss[blocks]
}

// varianceRatio returns the ratio of two variances, each corrected for the part that its own mean takes.
func varianceRatio(a, b block, lossA, lossB meanLoss) float64 {
	va, vb := a.variance()/(1-lossA.taken), b.variance()/(1-lossB.taken)
	if va <= 0 && vb <= 0 {
		return 1
	}
	// A constant stretch has the ratio 0; the floor keeps logarithms finite.
	return max(va, 1e-12*vb) / max(vb, 1e-12*va)
}

// deviate returns the significance of a ratio of variances as a normal deviate.
//
// The effective degrees of freedom of each come from the second Hermite order, and
// the cube root of the ratio is taken as normal (Paulson, Ann. Math. Stat. 13
// (1942) 233).
func deviate(ratio float64, lossA, lossB meanLoss) float64 {
	r := math.Cbrt(ratio)
	ka, kb := 2/(9*lossA.freedom), 2/(9*lossB.freedom)
	return ((1-kb)*r - (1 - ka)) / math.Sqrt(kb*r*r+ka)
}

// ordinaryRatio is the range of ratios whose deviate is no larger than a limit.
type ordinaryRatio struct {
	a, b             meanLoss
	limit, low, high float64
}

// holds tells whether a ratio is surely within; the range is found anew when its limit or the degrees of freedom change.
func (o *ordinaryRatio) holds(ratio float64, a, b meanLoss, limit float64) bool {
	if limit == 0 {
		return false
	}
	if o.limit != limit || o.a != a || o.b != b {
		*o = ordinaryRatio{a: a, b: b, limit: limit, low: math.Inf(1)}
		// ((1-kb) r - (1-ka))^2 = z^2 (kb r^2 + ka) for r, the cube root of the ratio
		ka, kb := 2/(9*a.freedom), 2/(9*b.freedom)
		qa := (1-kb)*(1-kb) - limit*limit*kb
		qb := (1 - ka) * (1 - kb)
		qc := (1-ka)*(1-ka) - limit*limit*ka
		if root := math.Sqrt(qb*qb - qa*qc); qa > 0 && root > 0 {
			const margin = 1e-9 // of rounding
			low, high := (qb-root)/qa, (qb+root)/qa
			o.low, o.high = low*low*low*(1+margin), high*high*high*(1-margin)
		}
	}
	return ratio > o.low && ratio < o.high
}

// meanLoss is what the mean of a stretch takes: the share of its variance, and the effective
// degrees of freedom that are left.
type meanLoss struct{ taken, freedom float64 }

// meanLoss returns that of n consecutive samples.
func (h null) meanLoss(n float64) meanLoss {
	taken := math.Min(1/h.effective(1, n), 0.9)
	return meanLoss{taken: taken, freedom: math.Max(h.effective(2, n)*(1-taken), 1)}
}
