package psd

import (
	"errors"
	"fmt"
	"math"

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
	X       []float64 // positions [m]; NaN where missing
	Rate    float64   // sampling rate [Hz]
	Mean    float64   // [m], removed
	Slope   float64   // linear drift [m/s], removed
	Missing int       // samples that are NaN
	Lines   []Line    // removed, in order of frequency
	Power   []float64 // |X_k|^2 [m2], k = 0..Length/2, of the first Length samples; missing ones count as 0
	Length  int       // samples behind Power, an even 5-smooth number
}

// Line is a narrow line that was removed.
type Line struct {
	Frequency float64 // Hz
	Amplitude float64 // half of the peak-to-peak excursion [m]
	Low, High float64 // range that is left out of the fit [Hz]
}

// Prepare removes the least-squares straight line from the positions x [m], NaN
// where a sample is missing, sampled at rate [Hz]. It copies x. The error is
// ErrTooShort, or names the first sample that is infinite.
func Prepare(x []float64, rate float64) (*Record, error) {
	r := &Record{X: make([]float64, len(x)), Rate: rate}
	for i, v := range x {
		if math.Abs(v) > farthest {
			return nil, fmt.Errorf("sample %d is at %g m, where no position can be", i, v)
		}
		if math.IsNaN(v) {
			r.Missing++
		}
		r.X[i] = v
	}
	if len(x)-r.Missing < leastSamples {
		return nil, fmt.Errorf("%w: %d, at least %d are needed", ErrTooShort, len(x)-r.Missing, leastSamples)
	}
	r.removeLine()
	if err := r.transform(); err != nil {
		return nil, err
	}
	return r, nil
}

// removeLine subtracts the least-squares straight line in two passes, the second of
// which takes out what rounding left of a mean far from zero.
func (r *Record) removeLine() {
	for range 2 {
		var n, sum, moment, square float64
		mid := float64(len(r.X)-1) / 2
		for i, v := range r.X {
			if v == v {
				t := float64(i) - mid
				n++
				sum += v
				moment += t
				square += t * t
			}
		}
		mean, centre := sum/n, moment/n
		var product float64
		for i, v := range r.X {
			if v == v {
				product += (float64(i) - mid - centre) * (v - mean)
			}
		}
		slope := product / (square - n*centre*centre)
		for i := range r.X {
			r.X[i] -= mean + slope*(float64(i)-mid-centre)
		}
		r.Mean += mean
		r.Slope += slope * r.Rate
	}
}

// transform computes Power.
func (r *Record) transform() error {
	n := transform.GoodLength(len(r.X))
	plan, err := transform.NewPlan(n)
	if err != nil {
		return err
	}
	x := r.X[:n]
	if r.Missing > 0 {
		x = make([]float64, n)
		for i, v := range r.X[:n] {
			if v == v {
				x[i] = v
			}
		}
	}
	r.Power = plan.Power(r.Power, x)
	r.Length = n
	return nil
}

// Observed returns the number of samples that are not missing.
func (r *Record) Observed() int { return len(r.X) - r.Missing }

// Duration returns the length of the record [s].
func (r *Record) Duration() float64 { return float64(len(r.X)) / r.Rate }

// MeanSquare returns the mean square of what is left [m2].
func (r *Record) MeanSquare() float64 {
	var s, c float64 // Neumaier's compensation
	for _, v := range r.X {
		if v != v {
			continue
		}
		y := v * v
		t := s + y
		if s >= y {
			c += (s - t) + y
		} else {
			c += (y - t) + s
		}
		s = t
	}
	return (s + c) / float64(r.Observed())
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

// blocks returns the blocked periodogram of the kept frequencies.
func (r *Record) blocks(band Range, excluded []Range) relaxation.Blocks {
	b := relaxation.NewBlocks(r.Power, r.Length, true, r.skip(band, excluded))
	if r.Missing > 0 {
		scale := float64(len(r.X)) / float64(r.Observed())
		for i := range b.Power {
			b.Power[i] *= scale
		}
	}
	return b
}
