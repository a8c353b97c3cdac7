package health

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

const (
	talkDoubtful = 0.06 // correlation coefficient
	talkBad      = 0.5
)

// quantile returns the standard normal deviate that is passed with probability p.
func quantile(p float64) float64 { return -distuv.UnitNormal.Quantile(p) }

// crossTalk correlates two axes at equal times.
//
// For independent axes the coefficient has the variance sum_k rho_x(k) rho_y(k)/N
// (Bartlett, J. R. Stat. Soc. 98 (1935) 536).
func crossTalk(in Input, a, b *view, pair int) Check {
	c := start("axes-mixed")
	c.Axis = a.Name + "-" + b.Name
	c.Threshold = talkDoubtful
	if !a.judgeable() || !b.judgeable() {
		return c.spared("too few samples")
	}
	for _, v := range []*view{a, b} {
		if why := v.upset(); why != "" {
			return c.spared(why)
		}
	}
	r, n := correlation(a, b)
	if a.Gathered != nil && pair < len(in.Products) {
		p := in.Products[pair]
		n = float64(p.Samples)
		r = p.Sum / n / math.Sqrt(a.Gathered.MeanSquare*b.Gathered.MeanSquare)
	}
	if n < 32 || !known(r) {
		return c.spared("too few samples are there on both axes")
	}
	c.Value = r
	z := math.Atanh(math.Max(math.Min(r, 1-1e-15), -1+1e-15)) * math.Sqrt(n/mutual(a.h, b.h))
	axes := len(in.Axes)
	if pairs := float64(axes * (axes - 1) / 2); twoSided(z) > chance/math.Max(pairs, 1) || math.Abs(r) < talkDoubtful {
		c.Text = fmt.Sprintf("The axes move independently (correlation coefficient %s).", digits(r))
		return c
	}
	c.Level = Doubtful
	if math.Abs(r) > talkBad {
		c.Level = Bad
	}
	c.Text = fmt.Sprintf("The two axes move together: their correlation coefficient is %s, far beyond chance.", digits(r))
	c.Remedy = "Turn the detector or the coordinates until they lie along the axes of the trap; check the wiring and the alignment for cross-talk." + caution
	return c
}

// mutual returns sum_k rho_x(k) rho_y(k), the number of samples that count as one.
func mutual(a, b null) float64 {
	x := a.rho + b.rho
	return 1 + 2*(a.vb/a.r0)*(b.vb/b.r0)*math.Sqrt(a.observed*b.observed)*math.Exp(-x)/-math.Expm1(-x)
}

// correlation returns the correlation coefficient of two axes about their fitted
// lines, and the number of samples that are there on both.
func correlation(a, b *view) (r, n float64) {
	var xx, yy, xy float64
	if a.Gathered != nil || b.Gathered != nil {
		return 0, 0
	}
	perA, perB := 1/a.scale, 1/b.scale
	for k := 0; k*a.length < a.samples; k++ {
		from, to := k*a.length, min((k+1)*a.length, a.samples)
		t := (float64(from+to)/2)/float64(a.samples) - 0.5
		la, lb := a.line.at(t)*a.scale+a.centre, b.line.at(t)*b.scale+b.centre
		xs, ys := a.X[from:to], b.X[from:to]
		for i, x := range xs {
			u, w := (x-la)*perA, (ys[i]-lb)*perB
			p := u * w
			if p-p != 0 {
				continue
			}
			n++
			xx += u * u
			yy += w * w
			xy += p
		}
	}
	if xx == 0 || yy == 0 {
		return 0, n
	}
	return xy / math.Sqrt(xx*yy), n
}
