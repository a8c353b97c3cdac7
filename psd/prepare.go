package psd

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"sync"

	"beadwell/calib/relaxation"
	"beadwell/calib/transform"
)

// ErrTooShort tells that a record holds too few samples for a fit.
var ErrTooShort = errors.New("too few samples for a fit of the spectrum")

// leastSamples is the shortest record that is fitted: below it a mean, a drift and
// two or three parameters leave next to nothing.
const leastSamples = 16

// farthest is a position beyond which a value is no position [m], in any unit that a detector
// may have: a square of it, summed, still is a number.
const farthest = 1e100

// Record is a record made ready for estimation: mean, linear drift and narrow lines
// are taken out. It is shared by the estimators.
type Record struct {
	X       []float64         // positions [m]; NaN where missing; nil after Release
	Samples int               // N, the length of X
	Parts   int               // consecutive records of Length samples behind this one, whose mean periodogram Power is; 0: the record itself
	Rate    float64           // sampling rate [Hz]
	Mean    float64           // [m], removed
	Slope   float64           // linear drift [m/s], removed
	Missing int               // samples that are NaN
	Lines   []Line            // removed, in order of frequency
	Power   []float64         // |X_k|^2 [m2], k = 0..Length/2, of the first Length samples; missing ones count as 0; nil after Release
	Length  int               // samples behind Power, an even 5-smooth number
	Ends    []relaxation.Ends // of these samples

	source  []float64 // what PrepareIn was given
	unit    float64   // its unit [m]
	base    float64   // taken off the source first, so that a level far from zero costs no digits, and
	rest    straight  // then this
	waves   []wave    // taken off after that
	reshape bool      // other shapes were taken off too, so that X cannot be made again
	square  float64   // mean square of X [m2]
	blocked []blocked

	restoring sync.Mutex
}

// Line is a narrow line that was removed.
type Line struct {
	Frequency float64 // Hz
	Amplitude float64 // half of the peak-to-peak excursion [m]
	Low, High float64 // range that is left out of the fit [Hz]
}

// straight is a line of mean level and slope per sample about the sample in the middle of a record.
type straight struct{ level, slope float64 }

// Prepare removes the least-squares straight line from the positions x [m], NaN
// where a sample is missing, sampled at rate [Hz]. It copies x, and keeps it for
// Restore. The error is ErrTooShort, or names the first sample that is infinite.
func Prepare(x []float64, rate float64) (*Record, error) { return PrepareIn(x, 1, rate) }

// PrepareIn is Prepare for positions x in a unit [m].
func PrepareIn(x []float64, unit, rate float64) (*Record, error) {
	r := &Record{Samples: len(x), Rate: rate, source: x, unit: unit}
	if err := r.removeLine(); err != nil {
		return nil, err
	}
	if n := r.Observed(); n < leastSamples {
		return nil, fmt.Errorf("%w: %d, at least %d are needed", ErrTooShort, n, leastSamples)
	}
	if err := r.transform(); err != nil {
		return nil, err
	}
	return r, nil
}

// lineSums are the sums over a piece from which a straight line is fitted. Positions count
// from the reference, times from the middle of the record.
type lineSums struct {
	n, sum, moment, square, product float64
	far                             int // first sample where no position can be, or -1
}

// fitLine returns the least-squares line of the sums of pieces, its level from the reference.
func fitLine(pieces []lineSums) (line straight, observed int) {
	var all lineSums
	for _, p := range pieces {
		all.n += p.n
		all.sum += p.sum
		all.moment += p.moment
		all.square += p.square
		all.product += p.product
	}
	mean, centre := all.sum/all.n, all.moment/all.n
	line.slope = (all.product - all.n*centre*mean) / (all.square - all.n*centre*centre)
	line.level = mean - line.slope*centre
	return line, int(all.n)
}

// add counts one sample: v is the position from the reference, t the time.
func (s *lineSums) add(v, t float64) {
	s.n++
	s.sum += v
	s.moment += t
	s.square += t * t
	s.product += t * v
}

// removeLine finds the least-squares straight line of the source, from sums of positions about a reference among them.
func (r *Record) removeLine() error {
	pieces := make([]lineSums, transform.Pieces(r.Samples))
	mid := float64(r.Samples-1) / 2
	r.base = r.reference()
	transform.InPieces(r.Samples, func(piece, from, to int) {
		s := lineSums{far: -1}
		for i, v := range r.source[from:to] {
			v *= r.unit
			if math.Abs(v) > farthest && s.far < 0 {
				s.far = from + i
			}
			if v == v {
				s.add(v-r.base, float64(from+i)-mid)
			}
		}
		pieces[piece] = s
	})
	for _, p := range pieces {
		if p.far >= 0 {
			return fmt.Errorf("sample %d is at %g m, where no position can be", p.far, r.source[p.far]*r.unit)
		}
	}
	line, observed := fitLine(pieces)
	r.rest, r.Missing = line, r.Samples-observed
	r.Mean, r.Slope = r.base+line.level, line.slope*r.Rate
	return nil
}

// reference is the median of three samples that are not missing, the first from the beginning and from the middle and the last of
// all: one of them may be far from where the bead is.
func (r *Record) reference() float64 {
	var known []float64
	known = r.appendKnown(known, 0, 1)
	known = r.appendKnown(known, r.Samples/2, 1)
	known = r.appendKnown(known, r.Samples-1, -1)
	if len(known) == 0 {
		return 0
	}
	slices.Sort(known)
	return known[len(known)/2]
}

// appendKnown appends the first sample that is not missing, going one way from one on.
func (r *Record) appendKnown(known []float64, from, step int) []float64 {
	for i := from; i >= 0 && i < r.Samples; i += step {
		if v := r.source[i] * r.unit; v == v && math.Abs(v) <= farthest {
			return append(known, v)
		}
	}
	return known
}

// Release lets go of X and Power, the large parts of a long record, when Restore can make X again.
func (r *Record) Release() {
	if !r.reshape && r.Parts <= 1 {
		r.X, r.Power = nil, nil
	}
}

// Restore makes X again after Release, to the last bit.
func (r *Record) Restore() {
	r.restoring.Lock()
	defer r.restoring.Unlock()
	if r.X != nil || r.Parts > 1 {
		return
	}
	r.levelAll(make([]float64, r.Samples))
}

// levelAll makes X in x.
func (r *Record) levelAll(x []float64) {
	transform.InPieces(r.Samples, func(_, from, to int) { r.level(x[from:to], from) })
	for _, w := range r.waves {
		w.takeOff(x, 0)
	}
	r.X = x
}

// Part sets dst to the samples of X from one on, also after Release.
func (r *Record) Part(dst []float64, from int) {
	r.restoring.Lock()
	x := r.X
	r.restoring.Unlock()
	if x != nil {
		copy(dst, x[from:])
		return
	}
	r.level(dst, from)
	for _, w := range r.waves {
		w.takeOff(dst, from)
	}
}

// level sets x to the samples of the source from one on, without mean and line.
func (r *Record) level(x []float64, from int) {
	mid := float64(r.Samples-1) / 2
	for i := range x {
		t := float64(from+i) - mid
		x[i] = r.source[from+i]*r.unit - r.base - (r.rest.level + r.rest.slope*t)
	}
}

// shortRecord is the number of samples up to which room for a second copy counts for nothing.
const shortRecord = 1 << 20

// transform computes Power, and X where it is not there yet. The first transform of a long record comes before X and works in
// its room, so that it needs no more.
func (r *Record) transform() error {
	n := transform.GoodLength(r.Samples)
	plan, err := transform.NewPlan(n)
	if err != nil {
		return err
	}
	var room []float64
	switch {
	case r.X == nil && r.Samples <= shortRecord:
		r.levelAll(make([]float64, r.Samples))
	case r.X == nil:
		room = make([]float64, r.Samples)
	}
	r.Power = plan.PowerOf(r.Power, room[:min(n, len(room))], func(x []float64, from int) {
		r.Part(x, from)
		if r.Missing > 0 {
			for i, v := range x {
				if v != v {
					x[i] = 0
				}
			}
		}
	})
	if r.X == nil {
		r.levelAll(room)
	}
	r.Length = n
	r.Ends = []relaxation.Ends{relaxation.NewEnds(r.X[:n])}
	r.blocked = nil
	r.square = meanSquare(r.X, r.Observed())
	return nil
}

// Observed returns the number of samples that are not missing.
func (r *Record) Observed() int { return r.Samples - r.Missing }

// Duration returns the length of the record [s].
func (r *Record) Duration() float64 { return float64(r.Samples) / r.Rate }

// MeanSquare returns the mean square of what is left [m2].
func (r *Record) MeanSquare() float64 { return r.square }

// meanSquare returns the mean square of the samples that are not missing.
func meanSquare(x []float64, observed int) float64 {
	sums := make([]float64, transform.Pieces(len(x)))
	transform.InPieces(len(x), func(piece, from, to int) {
		var s0, s1 float64
		for i, v := range x[from:to] {
			switch {
			case v != v:
			case i&1 == 0:
				s0 += v * v
			default:
				s1 += v * v
			}
		}
		sums[piece] = s0 + s1
	})
	var s, c float64 // Neumaier's compensation
	for _, y := range sums {
		t := s + y
		if s >= y {
			c += (s - t) + y
		} else {
			c += (y - t) + s
		}
		s = t
	}
	return (s + c) / float64(observed)
}

// skip tells whether the k-th frequency of Power is outside the band or inside a range
// that is left out.
func (r *Record) skip(band Range, excluded []Range) func(k int) bool {
	step := r.Rate / float64(r.Length)
	inner := band.High > 0
	return func(k int) bool {
		f := float64(k) * step
		if inner && (f < band.Low || f > band.High) {
			return true
		}
		for _, l := range r.Lines {
			if f >= l.Low && f <= l.High {
				return true
			}
		}
		for _, e := range excluded {
			if f >= e.Low && f <= e.High {
				return true
			}
		}
		return false
	}
}

// blocked is a blocked periodogram with what was left out of it.
type blocked struct {
	band     Range
	excluded []Range
	blocks   relaxation.Blocks
}

// blocks returns the blocked periodogram of the kept frequencies. Those of earlier calls are kept,
// so that a fit of another shape needs no Power.
func (r *Record) blocks(band Range, excluded []Range) relaxation.Blocks {
	for _, known := range r.blocked {
		if known.band == band && slices.Equal(known.excluded, excluded) {
			return known.blocks
		}
	}
	b := relaxation.NewBlocks(r.Power, r.Length, true, r.skip(band, excluded)).Times(max(1, r.Parts))
	if r.Missing > 0 {
		scale := float64(r.Samples) / float64(r.Observed())
		for i := range b.Power {
			b.Power[i] *= scale
		}
	}
	r.blocked = append(r.blocked, blocked{band, slices.Clone(excluded), b})
	return b
}
