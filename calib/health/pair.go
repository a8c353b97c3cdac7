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
	s := momentsOf(a, b)
	r, n := s.coefficient(), s.n
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
	if math.Abs(r) >= talkDoubtful && s.takeLines(a, b) { // a line that stands in both axes has a finding of its own
		r = s.coefficient()
		c.Value = r
	}
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

// moments are sums over the samples that are there on both of two axes, each about its fitted line and in its own scale.
type moments struct{ xx, yy, xy, n float64 }

func (s moments) coefficient() float64 {
	if !(s.xx > 0) || !(s.yy > 0) {
		return 0
	}
	return s.xy / math.Sqrt(s.xx*s.yy)
}

func momentsOf(a, b *view) (s moments) {
	if a.Gathered != nil || b.Gathered != nil {
		return s
	}
	perA, perB := 1/a.scale, 1/b.scale
	for k := 0; k*a.length < a.samples; k++ {
		p := together(a, b, k)
		for i, x := range p.xs {
			u, w := (x-p.la)*perA, (p.ys[i]-p.lb)*perB
			uw := u * w
			if uw-uw != 0 {
				continue
			}
			s.n++
			s.xx += u * u
			s.yy += w * w
			s.xy += uw
		}
	}
	return s
}

// pairedBlock is a block of samples of two axes with the values of their fitted lines in its middle.
type pairedBlock struct {
	from   int
	xs, ys []float64
	la, lb float64
}

func together(a, b *view, k int) pairedBlock {
	from, to := k*a.length, min((k+1)*a.length, a.samples)
	t := (float64(from+to)/2)/float64(a.samples) - 0.5
	return pairedBlock{from: from, xs: a.X[from:to], ys: b.X[from:to], la: a.line.at(t)*a.scale + a.centre, lb: b.line.at(t)*b.scale + b.centre}
}

// takeLines takes from the sums what narrow lines that stand in both axes add to them, and tells whether there are any. Lines
// count as one when they are closer than 1/T.
func (s *moments) takeLines(a, b *view) bool {
	if a.Gathered != nil || b.Gathered != nil {
		return false
	}
	taken := false
	for _, l := range a.Lines {
		for _, other := range b.Lines {
			if math.Abs(l.Frequency-other.Frequency) < a.rate/float64(a.samples) {
				s.takeLine(a, b, (l.Frequency+other.Frequency)/2/a.rate)
				taken = true
				break
			}
		}
	}
	return taken
}

// takeLine takes a sinusoid of a frequency in periods a sample, at its amplitude and phase on each axis, from the sums.
func (s *moments) takeLine(a, b *view, turns float64) {
	var onA, onB complex128
	for k := 0; k*a.length < a.samples; k++ {
		p := together(a, b, k)
		for i, x := range p.xs {
			u, w := (x-p.la)/a.scale, (p.ys[i]-p.lb)/b.scale
			if d := u * w; d-d != 0 {
				continue
			}
			sin, cos := math.Sincos(2 * math.Pi * math.Mod(turns*float64(p.from+i), 1))
			onA += complex(u*cos, u*sin)
			onB += complex(w*cos, w*sin)
		}
	}
	square := func(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }
	s.xx -= 2 * square(onA) / s.n
	s.yy -= 2 * square(onB) / s.n
	s.xy -= 2 * (real(onA)*real(onB) + imag(onA)*imag(onB)) / s.n
}
