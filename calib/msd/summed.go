package msd

import (
	"math"
	"slices"
)

// Summed are the mean-square displacements of a long record that was gone through in parts, of which each gives
// pairs of its own. The zero value is empty.
type Summed struct {
	Lags    []int     // samples, ascending
	Samples int       // of all parts
	Pairs   []int     // behind each lag
	Squares []float64 // sums of squared displacements [m2]
}

// Add adds a part x [m] of the record, its mean removed, without missing samples.
func (s *Summed) Add(x []float64) {
	values, pairs := Displacements(x, false, s.Lags, nil)
	one := Summed{Samples: len(x), Pairs: pairs, Squares: values}
	for i, n := range pairs {
		one.Squares[i] *= float64(n)
	}
	s.Join(&one)
}

// Join adds the sums of another part, at the same lags.
func (s *Summed) Join(o *Summed) {
	if s.Pairs == nil {
		s.Pairs, s.Squares = make([]int, len(o.Pairs)), make([]float64, len(o.Squares))
	}
	s.Samples += o.Samples
	for i, n := range o.Pairs {
		s.Pairs[i] += n
		s.Squares[i] += o.Squares[i]
	}
}

// Scaled returns the sums for positions times a factor.
func (s *Summed) Scaled(factor float64) *Summed {
	out := *s
	out.Squares = slices.Clone(s.Squares)
	for i := range out.Squares {
		out.Squares[i] *= factor * factor
	}
	return &out
}

// TakeOff takes the displacements of a sinusoid off: frequency in cycles a sample, mean square in m2.
func (s *Summed) TakeOff(frequency, square float64) {
	for i, lag := range s.Lags {
		s.Squares[i] -= float64(s.Pairs[i]) * 2 * square * (1 - math.Cos(2*math.Pi*frequency*float64(lag)))
	}
}

// from returns lags, mean-square displacements and pairs, without the lags below first.
func (s *Summed) from(first int) (lags []int, values []float64, pairs []int) {
	lags = from(s.Lags, first)
	skipped := len(s.Lags) - len(lags)
	pairs = slices.Clone(s.Pairs[skipped:])
	for i, n := range pairs {
		values = append(values, s.Squares[skipped+i]/float64(max(1, n)))
	}
	return slices.Clone(lags), values, pairs
}

// samples is the number of samples behind the estimate.
func (in *Input) samples() int {
	if in.Summed != nil {
		return in.Summed.Samples
	}
	return len(in.X)
}
