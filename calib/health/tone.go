package health

import (
	"fmt"
	"math"
	"slices"

	"beadwell/calib/transform"
)

const (
	toneSegment  = 1 << 18 // samples transformed at a time: 2 MB
	fewestTone   = 256     // samples
	toneSide     = 24      // neighbours on each side that give the level
	toneGap      = 3       // neighbours left out, which the line itself leaks into
	toneDoubtful = 0.06    // amplitude over rms: adds 0.2 % to the variance
	toneBad      = 0.7     // 25 %
	toneCycles   = 16      // a line of fewer periods in the record is slow wander
)

// tone looks for a narrow line in the spectrum, and reports those that the fit removed.
func (v *view) tone() Check {
	c := v.check("tone")
	c.Threshold = toneDoubtful
	if !v.judgeable() {
		return c.spared("too few samples")
	}
	if why := v.upset(); why != "" && len(v.Lines) == 0 {
		return c.spared(why)
	}
	var best Line
	if v.upset() == "" {
		best = v.findTone()
	}
	for _, l := range v.Lines {
		if l.Amplitude > best.Amplitude && l.Frequency*v.duration() >= toneCycles {
			best = l
		}
	}
	c.Value = best.Amplitude / v.rms
	if c.Value < toneDoubtful {
		c.Text = "There is no narrow line that matters in the spectrum."
		return c
	}
	c.Level = Doubtful
	if c.Value > toneBad {
		c.Level = Bad
	}
	c.Text = fmt.Sprintf("The position swings at %s with an amplitude of %s, %s times the rms.", hertz(best.Frequency), length(best.Amplitude, v.Unit), digits(c.Value))
	c.Remedy = "Find the source: mains pickup, a fan, a pump or a lamp have a frequency of their own."
	if slices.ContainsFunc(v.Lines, func(l Line) bool { return math.Abs(l.Frequency-best.Frequency)*v.duration() < toneGap }) {
		c.Text += " The fit has taken it out."
	} else {
		c.Remedy += " Leave the line out of the fit with --exclude until then."
	}
	return c
}

// findTone returns the line that stands out most from its neighbours in the
// periodogram, averaged over segments, or nothing when chance makes as much.
//
// With M bins in the neighbourhood and K segments, the ratio r of a bin to the mean of
// its neighbours has for K = 1 the tail probability (1 + r/M)^-M, and in general
// that of a Fisher distribution with 2K and 2KM degrees of freedom.
func (v *view) findTone() Line {
	spectrum := v.spectrum()
	if spectrum == nil {
		return Line{}
	}
	power, n, segments := spectrum.Power, spectrum.Length, spectrum.Segments
	var best Line
	bestRatio := 0.0
	first := max(toneCycles, toneSide+toneGap+1)
	level := 0.0
	k := first
	bins := 2 * toneSide
	for i := k - toneGap - toneSide; i < k-toneGap; i++ {
		level += at(power, i) + at(power, i+toneGap+toneGap+1+toneSide)
	}
	for ; k < len(power)-toneGap-toneSide-1; k++ {
		if r := power[k] * float64(bins) / level; r > bestRatio {
			bestRatio = r
			// amplitude of a sinusoid at the centre of the bin: power N^2 A^2/4
			excess := math.Max(power[k]-level/float64(bins), 0)
			best = Line{Frequency: float64(k) * v.rate / n, Amplitude: 2 * math.Sqrt(excess) / n}
		}
		level += power[k-toneGap] - power[k-toneGap-toneSide]
		level += power[k+toneGap+toneSide+1] - power[k+toneGap+1]
	}
	if bestRatio < toneBeyond(len(power), bins, segments) {
		return Line{}
	}
	if v.Gathered == nil { // whose stretches have no gaps
		best.Amplitude *= v.scaleOfGaps()
	}
	return best
}

// scaleOfGaps corrects the amplitude for missing samples, which count as nothing.
func (v *view) scaleOfGaps() float64 { return float64(v.samples) / v.total.n }

func at(x []float64, i int) float64 {
	if i < 0 || i >= len(x) {
		return 0
	}
	return x[i]
}

// spectrum returns the periodogram that is at hand, or that of segments, the mean line taken off and missing samples as nothing;
// nil of a record that is too short.
func (v *view) spectrum() *Spectrum {
	if g := v.Gathered; g != nil {
		if g.Segments == 0 {
			return nil
		}
		return &Spectrum{Power: g.Power, Length: float64(g.Length), Segments: g.Segments}
	}
	n := transform.GoodLength(min(v.samples, toneSegment))
	if n < fewestTone {
		return nil
	}
	if v.Spectrum != nil {
		return v.Spectrum
	}
	plan, err := transform.NewPlan(n)
	if err != nil { // n is a good length
		return nil
	}
	s := &Spectrum{Power: make([]float64, n/2+1), Length: float64(n), Segments: v.samples / n}
	part := make([]float64, n)
	one := make([]float64, n/2+1)
	for i := range s.Segments {
		v.levelled(part, i*n)
		one = plan.Power(one, part)
		for k, p := range one {
			s.Power[k] += p / float64(s.Segments)
		}
	}
	return s
}

// levelled copies samples from one on, minus the fitted line [unit of X].
func (v *view) levelled(dst []float64, from int) {
	slope := v.line.slope * v.scale / float64(v.samples)
	level := v.line.at(float64(from)/float64(v.samples)-0.5)*v.scale + v.centre
	for i := range dst {
		y := v.X[from+i] - level - slope*float64(i)
		if y-y != 0 {
			y = 0
		}
		dst[i] = y
	}
}

// toneBeyond returns the ratio of a bin to the mean of its neighbours that the largest of
// all bins passes with the probability chance.
func toneBeyond(all, bins, segments int) float64 {
	p := chance / float64(all)
	k, m := float64(segments), float64(segments*bins)
	if segments == 1 {
		return float64(bins) * math.Expm1(-math.Log(p)/float64(bins))
	}
	// Wilson and Hilferty's cube root for numerator and denominator (Paulson 1942), solved for the ratio
	z := quantile(p)
	a, b := 1/(9*k), 1/(9*m)
	// ((1-b) r - (1-a))^2 = z^2 (b r^2 + a) for r, the cube root of the ratio
	qa := (1-b)*(1-b) - z*z*b
	qb := -2 * (1 - a) * (1 - b)
	qc := (1-a)*(1-a) - z*z*a
	r := (-qb + math.Sqrt(qb*qb-4*qa*qc)) / (2 * qa)
	return r * r * r
}
