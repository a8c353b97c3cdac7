package health

import (
	"fmt"
	"math"
)

const (
	kurtosisDoubtful = 0.06 // excess kurtosis; the stiffness of a quartic trap is then off by 3 %
	kurtosisBad      = 0.8  // 40 %
	skewDoubtful     = 0.08
	skewBad          = 0.6
)

// moments returns skewness and excess kurtosis of the positions about the
// fitted line.
func (v *view) moments() (skew, excess float64) {
	sum := emptyBlock()
	for i, b := range v.blocks {
		mid := math.Min((float64(i)+0.5)*float64(v.length), float64(v.samples))
		b.shift(v.line.at(mid/float64(v.samples) - 0.5))
		sum.add(b)
	}
	n, m2, m3, m4 := sum.n, sum.s2, sum.s3, sum.s4
	m2, m3, m4 = m2/n, m3/n, m4/n
	if m2 <= 0 {
		return 0, 0
	}
	return m3 / math.Pow(m2, 1.5), m4/(m2*m2) - 3
}

// distribution compares the histogram of the positions with a Gaussian by its
// skewness and kurtosis.
//
// Blur and noise of a harmonic trap leave the positions Gaussian. In the potential
// kT(u^2/2 + e u^4/4), u = x/sqrt(V), the variance is V(1 - 3e) and the excess kurtosis
// -6e, to first order: the stiffness at the centre is wrong by half the kurtosis.
func (v *view) distribution() Check {
	c := v.check("not-gaussian")
	c.Threshold = kurtosisDoubtful
	if !v.judgeable() {
		return c.spared("too few samples")
	}
	if why := v.upset(); why != "" {
		return c.spared(why)
	}
	skew, excess := v.moments()
	c.Value = excess
	skewZ := skewDeviate(skew, math.Max(v.h.effective(3, v.h.n), 9))
	kurtosisZ := kurtosisDeviate(excess, math.Max(v.h.effective(4, v.h.n), 20))
	odd := twoSided(skewZ) < chance/4 && math.Abs(skew) > skewDoubtful
	heavy := twoSided(kurtosisZ) < chance/4 // the transformations are a factor of three short at 200 samples && math.Abs(excess) > kurtosisDoubtful
	if !odd && !heavy {
		c.Text = "The positions are distributed as in a harmonic trap."
		return c
	}
	c.Level = Doubtful
	if odd && math.Abs(skew) > skewBad || heavy && math.Abs(excess) > kurtosisBad {
		c.Level = Bad
	}
	c.Text = fmt.Sprintf("The positions are not distributed as in a harmonic trap: excess kurtosis %s, skewness %s.", digits(excess), digits(skew))
	if heavy && excess < 0 {
		c.Remedy = "The detector may be at the end of its linear range or the trap may steepen outwards: centre the bead on the detector, and calibrate with a stiffer trap." + caution
	} else {
		c.Remedy = "Look for glitches of the tracking, for a trap that softens outwards and for a second bead nearby. A stiffer trap keeps the bead where it is harmonic." + caution
	}
	return c
}

// skewDeviate returns a skewness of n independent samples as a normal deviate, by
// the transformation of D'Agostino (Biometrika 57 (1970) 679), n >= 8.
func skewDeviate(g, n float64) float64 {
	y := g * math.Sqrt((n+1)*(n+3)/(6*(n-2)))
	b := 3 * (n*n + 27*n - 70) * (n + 1) * (n + 3) / ((n - 2) * (n + 5) * (n + 7) * (n + 9))
	w2 := math.Sqrt(2*(b-1)) - 1
	alpha := math.Sqrt(2 / (w2 - 1))
	return math.Asinh(y/alpha) / math.Sqrt(math.Log(w2)/2)
}

// kurtosisDeviate returns an excess kurtosis of n independent samples as a normal
// deviate, by the transformation of Anscombe and Glynn (Biometrika 70 (1983) 227), n >= 20.
func kurtosisDeviate(g, n float64) float64 {
	sd := math.Sqrt(24 * n * (n - 2) * (n - 3) / ((n + 1) * (n + 1) * (n + 3) * (n + 5)))
	y := (g + 6/(n+1)) / sd
	b := 6 * (n*n - 5*n + 2) / ((n + 7) * (n + 9)) * math.Sqrt(6*(n+3)*(n+5)/(n*(n-2)*(n-3)))
	a := 6 + 8/b*(2/b+math.Sqrt(1+4/(b*b)))
	return ((1 - 2/(9*a)) - math.Cbrt((1-2/a)/(1+y*math.Sqrt(2/(a-4))))) / math.Sqrt(2/(9*a))
}

const (
	stepsBeyond = 3.3  // deviates, one-sided: 5e-4
	stepsFloor  = 0.01 // 2 % of steps over two intervals make 0.057 where fc is small against the rate, 0.01 at fc/fs = 0.14
	stepsBad    = 5.0
)

// kurtosisAt is the excess kurtosis of n independent samples that is a normal deviate of z.
func kurtosisAt(z, n float64) float64 {
	low, high := 0.0, 100.0
	for range 50 {
		if mid := (low + high) / 2; kurtosisDeviate(mid, n) < z {
			low = mid
		} else {
			high = mid
		}
	}
	return high
}

// roughSteps compares the steps from sample to sample with Gaussian ones. Single
// wrong positions and samples lost without a trace make some steps too large.
func (v *view) roughSteps() Check {
	c := v.check("rough-steps")
	if !v.judgeable() || v.total.d2 == 0 {
		return c.spared("too few samples")
	}
	if why := v.upset(); why != "" {
		return c.spared(why)
	}
	if v.coarseSteps() {
		return c.spared("the values are too coarse for single steps")
	}
	n := v.total.steps
	m2, m4 := v.total.d2/n, v.total.d4/n
	c.Value = m4/(m2*m2) - 3
	v.freeSteps = math.Max(n/v.h.stepInflation(), 20)
	c.Threshold = math.Max(stepsFloor, kurtosisAt(stepsBeyond, v.freeSteps))
	if c.Value <= c.Threshold {
		c.Text = "The steps from sample to sample are those of a bead."
		return c
	}
	c.roughen("Some steps from one sample to the next are too large: their excess kurtosis is %s.")
	return c
}

// roughen raises the alarm of steps that are too large.
func (c *Check) roughen(text string) {
	c.Level = Doubtful
	if c.Value > stepsBad {
		c.Level = Bad
	}
	c.Text = fmt.Sprintf(text, digits(c.Value)) + " Samples lost without a trace, or single wrong positions, do this."
	c.Remedy = "Compare the frame numbers of camera and file, and look at the largest steps in the track; record with time stamps."
}

// roughTogether judges the steps of all axes as one where no axis shows anything by itself: a sample that is lost is
// lost on every axis. The alarm is that of the axis with the largest steps.
func roughTogether(views []*view, made [][]Check) {
	var most *Check
	z, mean, free, count := 0.0, 0.0, 0.0, 0.0
	for i, v := range views {
		for j := range made[i] {
			c := &made[i][j]
			if c.Code != "rough-steps" || !c.Judged {
				continue
			}
			if c.Level != OK {
				return
			}
			z += kurtosisDeviate(c.Value, v.freeSteps)
			mean += c.Value
			free += v.freeSteps
			count++
			if most == nil || c.Value > most.Value {
				most = c
			}
		}
	}
	if count < 2 || z/math.Sqrt(count) <= stepsBeyond || mean/count <= stepsFloor {
		return
	}
	most.Value, most.Threshold = mean/count, math.Max(stepsFloor, kurtosisAt(stepsBeyond, free))
	most.roughen("Some steps from one sample to the next are too large on all axes taken together: their mean excess kurtosis is %s.")
}

// stepInflation returns sum_k rho_d(k)^4 of the steps d between neighbours, whose
// autocovariance is 2 r(k) - r(k-1) - r(k+1): the number of steps that count as one
// in their kurtosis.
func (h null) stepInflation() float64 {
	share := h.vb / h.r0
	decay := math.Exp(-h.rho)
	one := 2 - 2*share*decay
	first := (2*share*decay - 1 - share*decay*decay) / one
	second := -share * decay * (1 - decay) * (1 - decay) / one // at lag 2; it decays with c from there
	return 1 + 2*math.Pow(first, 4) + 2*math.Pow(second, 4)/-math.Expm1(-4*h.rho)
}
