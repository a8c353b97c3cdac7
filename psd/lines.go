package psd

import (
	"math"
	"math/cmplx"
	"slices"
)

// chanceOfLine is the probability that the search finds a line anywhere in a record
// that has none.
const chanceOfLine = 1e-3

// mostLines bounds the number of lines that are removed from a record: mains with
// its harmonics and a few more.
const mostLines = 24

// halfGap is the number of Fourier frequencies to either side of a removed line that
// the fit leaves out: removal by least squares takes power out of the nearest two.
const halfGap = 2

// RemoveLines looks for periodogram values that are too high for the given two-sided
// spectrum in units of its mean, model(k) = P(f_k)/dt [m2], and takes the sinusoids out of the record by
// least squares. It returns whether it found any.
//
// For a Gaussian record the ratio of the periodogram to the spectrum has an exponential
// distribution, so that the largest of n values exceeds ln(n/p) with probability p
// (Fisher, Proc. R. Soc. A 125 (1929) 54; docs/method.md, Eq. 23). Around a removed line the search goes on
// until what is left, of a line that wanders, is below that limit too; those frequencies
// are left out of the fit.
func (r *Record) RemoveLines(model func(k int) float64) bool {
	if r.Missing > 0 {
		return false
	}
	limit := r.beyond()
	if r.Parts > 1 {
		model = r.nearby(model)
	}
	found := false
	for range mostLines {
		k := r.tallest(model, limit)
		if k == 0 {
			break
		}
		if r.Parts > 1 {
			r.removeExcess(k, model)
		} else {
			r.removeSinusoid(k)
		}
		found = true
	}
	if found {
		slices.SortFunc(r.Lines, func(a, b Line) int {
			if a.Frequency < b.Frequency {
				return -1
			}
			return 1
		})
	}
	return found
}

// tallest returns the frequency index of the largest ratio above the limit, outside
// the ranges that are left out already, or 0. The lowest three frequencies belong to
// drift, not to lines.
func (r *Record) tallest(model func(int) float64, limit float64) int {
	best, at := limit, 0
	skip := r.skip(Range{}, nil)
	last := len(r.Power) - 2
	for from := 4; from <= last; {
		to := min(last, from+from/64)
		// a spectrum that falls or rises within a block is least at one of its ends; the
		// factor leaves room for one that does neither
		least := 0.9 * math.Min(model(from), model(to)) * float64(r.Length)
		for k := from; k <= to; k++ {
			if r.Power[k] < best*least || skip(k) {
				continue
			}
			if ratio := r.Power[k] / float64(r.Length) / model(k); ratio > best {
				best, at = ratio, k
			}
		}
		from = to + 1
	}
	return at
}

// removeSinusoid fits a sinusoid near the k-th frequency to the record, subtracts it
// and marks the range around it.
func (r *Record) removeSinusoid(k int) {
	segments := demodulate(r.X[:r.Length], float64(k)/float64(r.Length))
	offset := refine(segments)
	f := float64(k)/float64(r.Length) + offset
	a, b := fitSinusoid(r.X, f)
	w := wave{f, a, b}
	w.takeOff(r.X, 0)
	r.waves = append(r.waves, w)
	step := r.Rate / float64(r.Length)
	line := Line{Frequency: f * r.Rate, Amplitude: math.Hypot(a, b),
		Low: (float64(k) - halfGap - 0.25) * step, High: (float64(k) + halfGap + 0.25) * step}
	r.addLine(line)
	_ = r.transform()
}

// wave is a sinusoid a cos(2 pi f i) + b sin(2 pi f i) over samples i.
type wave struct{ f, a, b float64 }

// takeOff subtracts the wave from x, which begins at a sample of the record.
func (w wave) takeOff(x []float64, from int) {
	_, turns := math.Modf(w.f * float64(from))
	sine, cosine := math.Sincos(2 * math.Pi * turns)
	a, b := w.a*cosine+w.b*sine, w.b*cosine-w.a*sine
	rotate(w.f, len(x), func(i int, c, s float64) { x[i] -= a*c + b*s })
}

// segmentCount is the number of pieces over which a record is summed before the
// frequency is refined: a line within half a Fourier frequency of the guess turns by
// less than pi over the record, which 256 pieces follow to 1e-5.
const segmentCount = 256

// demodulate returns the sums of x exp(-2 pi i f t) over pieces, f in cycles a sample.
func demodulate(x []float64, f float64) []complex128 {
	n := min(segmentCount, len(x))
	sums := make([]complex128, n)
	rotate(f, len(x), func(i int, c, s float64) {
		sums[i*n/len(x)] += complex(x[i]*c, -x[i]*s)
	})
	for i := range sums {
		sums[i] *= complex(float64(n)/float64(len(x)), 0)
	}
	return append(sums, complex(float64(len(x)), 0)) // the last entry carries the length
}

// refine returns the offset, in cycles a sample and within one Fourier frequency,
// that maximises the power of the pieces: golden-section search of a smooth peak.
func refine(pieces []complex128) float64 {
	n := real(pieces[len(pieces)-1])
	pieces = pieces[:len(pieces)-1]
	power := func(d float64) float64 { // d in Fourier frequencies
		var z complex128
		for i, v := range pieces {
			z += v * cmplx.Rect(1, -2*math.Pi*d*(float64(i)+0.5)/float64(len(pieces)))
		}
		return real(z)*real(z) + imag(z)*imag(z)
	}
	const golden = 0.6180339887498949
	low, high := -1.0, 1.0
	for range 40 {
		a, b := high-golden*(high-low), low+golden*(high-low)
		if power(a) > power(b) {
			high = b
		} else {
			low = a
		}
	}
	return (low + high) / 2 / n
}

// fitSinusoid returns the least-squares coefficients of cos and sin.
func fitSinusoid(x []float64, f float64) (a, b float64) {
	var cc, cs, ss, xc, xs float64
	rotate(f, len(x), func(i int, c, s float64) {
		cc += c * c
		cs += c * s
		ss += s * s
		xc += x[i] * c
		xs += x[i] * s
	})
	det := cc*ss - cs*cs
	return (xc*ss - xs*cs) / det, (xs*cc - xc*cs) / det
}

// rotate calls do with the cosine and sine of 2 pi f i for i = 0..n-1. A recurrence,
// restarted every 64 steps, keeps the error of both below 1e-14.
func rotate(f float64, n int, do func(i int, c, s float64)) {
	sd, cd := math.Sincos(2 * math.Pi * f)
	for i := 0; i < n; i += 64 {
		_, frac := math.Modf(f * float64(i))
		s, c := math.Sincos(2 * math.Pi * frac)
		for j := i; j < min(i+64, n); j++ {
			do(j, c, s)
			c, s = c*cd-s*sd, s*cd+c*sd
		}
	}
}
