package calib

import (
	"math"
	"sync"

	"beadwell/calib/transform"
	"beadwell/psd"
)

// pairSums are sums over the samples of two axes at equal times, and over their spectra.
type pairSums struct {
	n       int     // samples that are there on both
	product float64 // of the positions [m2]
	// over the frequencies between the two corners' multiples, of all segments [m2]
	bins                   int
	fastXY, fastXX, fastYY float64
}

const (
	// leastSegment is the shortest stretch that is transformed, when the record is as long.
	leastSegment = 1 << 12
	// segmentCorners is the least length of a stretch times the corner frequency: what the slow motion leaks into
	// higher frequencies is about the inverse of it.
	segmentCorners = 256
)

// pairBand are the frequencies [1/samples] of two axes at which their correlation is fast.
type pairBand struct{ low, high float64 }

// bandOf returns the band of two corner frequencies in units of the sampling rate.
func bandOf(a, b float64) pairBand {
	corner := math.Max(a, b)
	return pairBand{2 * corner, math.Min(fastBand*corner, 0.5)}
}

// segmentOf returns the length of the stretches of n samples that are transformed, for the smallest corner
// frequency of the axes in units of the sampling rate.
func segmentOf(n int, corner float64) int {
	return transform.GoodLength(int(math.Min(float64(n), math.Max(leastSegment, segmentCorners/corner))))
}

// sumPairs adds up the pairs of axes, (0, 1), (0, 2) .. (1, 2) .., of records of equal length. Spectra are
// those of consecutive stretches of a good length; none are taken when whole is false.
func sumPairs(records []*psd.Record, whole bool, segment int, bands []pairBand) []pairSums {
	n := records[0].Samples
	count := (n + segment - 1) / segment
	parts := make([][]pairSums, count)
	plan, err := transform.NewPlan(segment)
	transform.Each(count, func(next func() (int, bool)) {
		x, spectra := make([][]float64, len(records)), make([][]complex128, len(records))
		for i := range x {
			x[i] = make([]float64, segment)
		}
		for s, ok := next(); ok; s, ok = next() {
			from, to := s*segment, min((s+1)*segment, n)
			sums := make([]pairSums, len(bands))
			full := whole && err == nil && to-from == segment
			for i, r := range records {
				x[i] = x[i][:to-from]
				r.Part(x[i], from)
				if full {
					spectra[i] = plan.Forward(spectra[i], x[i])
				}
			}
			pair := 0
			for i := range x {
				for j := i + 1; j < len(x); j++ {
					sums[pair].addSamples(x[i], x[j])
					if full {
						sums[pair].addSpectra(spectra[i], spectra[j], segment, bands[pair])
					}
					pair++
				}
			}
			parts[s] = sums
		}
	})
	out := make([]pairSums, len(bands))
	for _, p := range parts {
		addPairs(out, p)
	}
	return out
}

// addPairs adds the sums of more samples.
func addPairs(to, more []pairSums) {
	for i := range to {
		to[i].n += more[i].n
		to[i].product += more[i].product
		to[i].bins += more[i].bins
		to[i].fastXY += more[i].fastXY
		to[i].fastXX += more[i].fastXX
		to[i].fastYY += more[i].fastYY
	}
}

func (s *pairSums) addSamples(x, y []float64) {
	for i, a := range x {
		if p := a * y[i]; p == p {
			s.product += p
			s.n++
		}
	}
}

func (s *pairSums) addSpectra(x, y []complex128, n int, band pairBand) {
	low, high := int(math.Ceil(band.low*float64(n))), int(math.Ceil(band.high*float64(n)))
	for k := max(low, 1); k < min(high, len(x)); k++ {
		a, b := x[k], y[k]
		s.fastXY += real(a)*real(b) + imag(a)*imag(b)
		s.fastXX += real(a)*real(a) + imag(a)*imag(a)
		s.fastYY += real(b)*real(b) + imag(b)*imag(b)
		s.bins++
	}
}

// fast is the real part of the coherency of two axes between the larger corner frequency and eight times that: for a
// tilted trap it tends to zero, for the bead diffuses alike in all directions, and cross-talk of the detector stays.
func (s pairSums) fast(missing bool) Quantity {
	switch {
	case missing:
		return Withheld("1", "samples are missing")
	case s.bins < 16:
		return Withheld("1", "too few frequencies above the corner frequencies")
	}
	return around(s.fastXY/math.Sqrt(s.fastXX*s.fastYY), 1/math.Sqrt(2*float64(s.bins)), "1")
}

// startPairs begins to add up the pairs of the axes of a recording, and returns what waits for the sums: nil where axes cannot be
// compared. The checks go through each axis at the same time.
func startPairs(works []*work, gathered *Gatherer) (wait func() []pairSums) {
	if !sameSamples(works) {
		return func() []pairSums { return nil }
	}
	var sums []pairSums
	var failure any // a panic belongs to who waits
	var group sync.WaitGroup
	group.Go(func() {
		defer func() { failure = recover() }()
		sums = commonSums(works, gathered)
	})
	return func() []pairSums {
		group.Wait()
		if failure != nil {
			panic(failure)
		}
		return sums
	}
}

// sameSamples tells that all axes were fitted, over the same samples, and that there are two at least.
func sameSamples(works []*work) bool {
	for _, w := range works {
		if w.fitErr != nil || w.record.Samples != works[0].record.Samples {
			return false
		}
	}
	return len(works) > 1
}

// commonSums adds up the pairs of the axes of a recording.
func commonSums(works []*work, gathered *Gatherer) []pairSums {
	if gathered != nil {
		return gathered.pairsOf(works)
	}
	corner, missing := math.Inf(1), 0
	var bands []pairBand
	records := make([]*psd.Record, len(works))
	for i, w := range works {
		records[i] = w.record
		missing += w.record.Missing
		corner = math.Min(corner, w.fit.Corner/w.rate)
		for _, o := range works[i+1:] {
			bands = append(bands, bandOf(w.fit.Corner/w.rate, o.fit.Corner/o.rate))
		}
	}
	return sumPairs(records, missing == 0, segmentOf(works[0].record.Length, corner), bands)
}
