package psd

import (
	"math"

	"beadwell/calib/relaxation"
	"beadwell/calib/transform"

	"gonum.org/v1/gonum/stat/distuv"
)

// Goodness is a chi-square test of the fitted spectrum.
type Goodness struct {
	ChiSquare        float64
	DegreesOfFreedom int
	PValue           float64
	Points           []Point
}

// Point is a block of the spectrum.
type Point struct {
	Frequency float64 // Hz
	Power     float64 // one-sided [m2/Hz]
	Model     float64 // one-sided [m2/Hz]
	Standard  float64 // standard uncertainty of Power, from the model [m2/Hz]
	Residual  float64 // standard normal deviate of Power
	Bins      int
}

// leastWeight is the number of complex periodogram values in a block of the test: from
// 12 on, the cube root of their mean is normal to within 0.3 % of probability
// (Wilson and Hilferty, Proc. Natl. Acad. Sci. 17 (1931) 684).
const leastWeight = 12

// mostPoints bounds the number of blocks of the test: it is meant to see broad
// misfits, which many narrow blocks would drown.
const mostPoints = 60

// goodness groups the blocks of a fit. Each group's mean ratio of data to model is
// gamma distributed with its weight as shape; its cube root is turned into a normal
// deviate, and the squares are added (docs/method.md, Eqs 24 and 25). As many degrees of freedom as parameters were
// fitted are taken off.
func goodness(f *Fit, r *Record) Goodness {
	g := Goodness{Points: group(f, f.leakage(r)), PValue: math.NaN()}
	tested := g.Points
	if float64(r.Missing) > mostGaps*float64(r.Samples) {
		tested = f.whitened(r)
	}
	for _, p := range tested {
		g.ChiSquare += p.Residual * p.Residual
	}
	fitted := 3
	if f.Problem.Directions != nil {
		fitted = len(f.Problem.Directions)
	}
	g.DegreesOfFreedom = max(0, len(tested)-fitted)
	if g.DegreesOfFreedom > 0 {
		g.PValue = distuv.ChiSquared{K: float64(g.DegreesOfFreedom)}.Survival(g.ChiSquare)
	}
	return g
}

// whitened groups the spectrum of the innovations, which is flat for the right model however many samples are
// missing between them (docs/method.md, Eq. 18). It returns nil where the innovations are not those of the fit: for a
// part of the band, and for other spectra.
func (f *Fit) whitened(r *Record) []Point {
	if f.Method != Exact {
		return nil
	}
	e := f.Process().Innovations(r.X)
	if len(e) < leastSamples {
		return nil
	}
	n := transform.GoodLength(len(e))
	plan, err := transform.NewPlan(n)
	if err != nil {
		return nil
	}
	power := plan.Power(nil, e[:n])
	flat := func(float64) float64 { return 1 }
	return gather(relaxation.NewBlocks(power, n, true, nil), f.Interval, flat, flat)
}

// leakingCorner is the corner frequency, in sampling rates, above which leakage is
// nothing: the ends of the record are a small part of its relaxation times.
const leakingCorner = 0.1

// mostGaps is the share of missing samples above which the periodogram, which counts them as
// zero, no longer has the shape of the spectrum: the innovations are tested then.
const mostGaps = 0.01

// leakage returns the share by which the relaxing part of the periodogram exceeds the spectrum,
// given the ends of the record.
func (f *Fit) leakage(r *Record) float64 {
	if _, plain := f.Problem.Likelihood.(interface{ RelaxationProcess() }); !plain {
		return 0
	}
	if f.Corner*f.Interval > leakingCorner {
		return 0
	}
	p, sum := f.Process(), 0.0
	for _, e := range r.Ends {
		sum += p.ExcessOf(e)
	}
	return sum / float64(len(r.Ends)) / float64(r.Length)
}

func group(f *Fit, leakage float64) []Point {
	density := f.density()
	model := func(x float64) float64 { return density(x/f.Interval) / 2 / f.Interval }
	floor := f.Process().Floor()
	expected := model
	if leakage != 0 {
		expected = func(x float64) float64 {
			m := model(x)
			return m + leakage*(m-floor)
		}
	}
	return gather(f.Blocks, f.Interval, model, expected)
}

// gather groups blocks into points of the test; model and expected are the two-sided spectrum over the
// interval without and with what the ends of the record add, at a frequency in units of the sampling rate.
func gather(b relaxation.Blocks, interval float64, model, expected func(x float64) float64) []Point {
	first, last := b.Frequency[0], b.Frequency[len(b.Frequency)-1]
	growth := math.Pow(last/first*1.0001, 1.0/mostPoints)
	var points []Point
	var weight, freq, ratio float64
	bins := 0
	next := first * growth
	flush := func() {
		if weight == 0 {
			return
		}
		at := freq / weight
		r := ratio / weight
		// Wilson and Hilferty: cube root of chi-square over its 2 w degrees of freedom
		v := 1 / (9 * weight)
		z := (math.Cbrt(r) - (1 - v)) / math.Sqrt(v)
		rate := 1 / interval
		m := 2 * model(at) / rate
		points = append(points, Point{Frequency: at * rate, Power: r * m, Model: m,
			Standard: m / math.Sqrt(weight), Residual: z, Bins: bins})
		weight, freq, ratio, bins = 0, 0, 0, 0
	}
	for i, w := range b.Weight {
		if weight >= leastWeight && b.Frequency[i] >= next {
			flush()
			next = b.Frequency[i] * growth
		}
		weight += w
		freq += w * b.Frequency[i]
		ratio += w * b.Power[i] / expected(b.Frequency[i])
		bins += b.Bins[i]
	}
	if weight < leastWeight && len(points) > 0 { // too small a rest is not tested
		return points
	}
	flush()
	return points
}

// Spectrum returns the fitted one-sided spectrum [m2/Hz] at a frequency [Hz].
func (f *Fit) Spectrum(hz float64) float64 { return f.density()(hz) }

// density returns Spectrum as a function, for many frequencies.
func (f *Fit) density() func(hz float64) float64 {
	if s, ok := f.Problem.Likelihood.(interface {
		Density(p relaxation.Parameters, hz float64) float64
	}); ok {
		return func(hz float64) float64 { return s.Density(f.Maximum.At, hz) }
	}
	p := f.Process().SpectrumFunc()
	return func(hz float64) float64 { return 2 * p(hz) }
}

// SpectrumPoints returns the blocked spectrum over the whole band, kept frequencies
// and others, in at most about count blocks of equal width on a logarithmic scale.
func (f *Fit) SpectrumPoints(r *Record, count int) (points []Point, used []bool) {
	n := len(r.Power) - 1
	skip := r.skip(f.givenBand(r), f.Excluded)
	density := f.density()
	growth := math.Pow(float64(n), 1/float64(count))
	parts := max(1, r.Parts)
	scale := 2 / r.Rate / float64(r.Length)
	if r.Missing > 0 {
		scale *= float64(r.Samples) / float64(r.Observed())
	}
	for k := 1; k <= n; {
		end := min(n, max(k, int(float64(k)*growth)))
		var sum, freq [2]float64
		var bins [2]int
		for j := k; j <= end; j++ {
			which := 0
			if skip(j) {
				which = 1
			}
			hz := float64(j) * r.Rate / float64(r.Length)
			sum[which] += r.Power[j] * scale
			freq[which] += hz
			bins[which]++
		}
		for which, b := range bins {
			if b == 0 {
				continue
			}
			p := Point{Frequency: freq[which] / float64(b), Power: sum[which] / float64(b), Bins: b * parts}
			p.Model = density(p.Frequency)
			b *= parts
			p.Standard = p.Model / math.Sqrt(float64(b))
			v := 1 / (9 * float64(b))
			p.Residual = (math.Cbrt(p.Power/p.Model) - (1 - v)) / math.Sqrt(v)
			points = append(points, p)
			used = append(used, which == 0)
		}
		k = end + 1
	}
	return points, used
}

func (f *Fit) givenBand(r *Record) Range {
	if f.Band.Low <= r.Rate/float64(r.Length) && f.Band.High >= r.Rate/2 {
		return Range{}
	}
	return f.Band
}
