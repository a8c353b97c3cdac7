package msd

import (
	"math"

	"beadwell/calib/transform"
)

// Choice of lags. The longest lag sets the efficiency of the plateau: 0.75, 0.90 and
// 0.96 of the Cramer-Rao bound at 6, 20 and 60 relaxation times (computed with
// Covariance). A quarter of the record is the limit beyond which the ends of
// the record matter to the covariance.
const (
	longestRelaxations = 60
	longestShare       = 0.25
	shortestRelaxation = 0.002 // first lag, in relaxation times; 1 sample if that is longer
	perDecade          = 14
	fewestLags         = 24
)

// Lags returns the lags [samples], ascending, at which a record of n samples with the
// relaxation time tau [samples] is fitted.
func Lags(n int, tau float64) []int {
	last := int(math.Min(longestShare*float64(n), math.Max(longestRelaxations*tau, fewestLags)))
	last = max(last, min(3, n-1))
	first := max(1, int(shortestRelaxation*tau))
	lags := []int{}
	if first > 1 {
		lags = append(lags, 1)
	}
	growth := math.Pow(10, 1.0/perDecade)
	if ratio := float64(last) / float64(first); math.Log(ratio)/math.Log(growth) < fewestLags && ratio > 1 {
		growth = math.Pow(ratio, 1.0/fewestLags)
	}
	next := float64(first)
	for lag := first; lag <= last; {
		lags = append(lags, lag)
		next = math.Max(next*growth, float64(lag+1))
		lag = int(math.Round(next))
	}
	if lags[len(lags)-1] < last {
		lags = append(lags, last)
	}
	return lags
}

// Displacements returns the mean-square displacements [m2] of x [m] (mean removed, NaN
// where missing) at the lags, and the number of pairs behind each.
//
// A spectrum that is at hand saves the transforms; nil takes them.
func Displacements(x []float64, missing bool, lags []int, known *Spectrum) (msd []float64, pairs []int) {
	msd, pairs = make([]float64, len(lags)), make([]int, len(lags))
	if missing {
		for i, lag := range lags {
			msd[i], pairs[i] = direct(x, lag)
		}
		return msd, pairs
	}
	// A lag is worth a pass of its own while the increments are small against the
	// positions: there the sums of products would cancel. All others come from
	// one set of autocovariance sums.
	last := lags[len(lags)-1]
	var products func(lag int) float64
	head := prefixSquares(x, last)
	tail := suffixSquares(x, last)
	total := head.total
	for i, lag := range lags {
		pairs[i] = len(x) - lag
		if lag <= closeLag {
			msd[i], _ = direct(x, lag)
			continue
		}
		if products == nil {
			products = productsOf(x, last, known)
		}
		msd[i] = (2*total - head.at(lag) - tail.at(lag) - 2*products(lag)) / float64(pairs[i])
	}
	return msd, pairs
}

// Spectrum is the periodogram |X_k|^2 [m2], k = 0 .. Length/2, of the first Length samples of a record.
type Spectrum struct {
	Power  []float64
	Length int // a good length, even
}

const (
	fewestByRing = 40      // lags up to which sums of products are fast anyway
	mostByRing   = 1 << 18 // samples beyond which a transform of the whole leaves the caches, and takes memory that blocks do not
)

// productsOf returns the sums of x_j x_{j+k} over j, for lags k up to the last. From a periodogram come the sums around
// the ring of its samples; what that adds across the seam is taken off, and samples beyond it are added: both are a few products for each lag.
func productsOf(x []float64, last int, known *Spectrum) func(lag int) float64 {
	var ring []float64
	if known != nil && last > fewestByRing && known.Length <= mostByRing {
		ring = transform.Ring(known.Power, known.Length)
	}
	if ring == nil {
		sums := transform.Autocovariance(x, last)
		return func(lag int) float64 { return sums[lag] }
	}
	n := known.Length
	return func(lag int) float64 {
		return ring[lag] - dot(x[n-lag:n], x[:lag]) + dot(x[n-lag:len(x)-lag], x[n:])
	}
}

// closeLag is the longest lag that is summed pair by pair.
const closeLag = 3

// direct returns the mean-square displacement at one lag, summed pair by pair, and the number of pairs.
func direct(x []float64, lag int) (float64, int) {
	type sums struct {
		square float64
		n      int
	}
	pairs := max(len(x)-lag, 0)
	pieces := make([]sums, transform.Pieces(pairs))
	transform.InPieces(pairs, func(piece, from, to int) {
		var s0, s1 float64
		n := 0
		a, b := x[from:to], x[from+lag:]
		for i, v := range a {
			d := b[i] - v
			if d != d {
				continue
			}
			n++
			if i&1 == 0 {
				s0 += d * d
			} else {
				s1 += d * d
			}
		}
		pieces[piece] = sums{s0 + s1, n}
	})
	var all sums
	for _, p := range pieces {
		all.square += p.square
		all.n += p.n
	}
	return all.square / float64(max(all.n, 1)), all.n
}

// squares holds cumulated squares of the first samples from one end.
type squares struct {
	sums  []float64
	total float64
}

func (s squares) at(n int) float64 { return s.sums[n] }

func prefixSquares(x []float64, last int) squares {
	s := squares{sums: make([]float64, last+1)}
	sum := 0.0
	for i, v := range x[:last] {
		s.sums[i] = sum
		sum += v * v
	}
	s.sums[last] = sum
	pieces := make([]float64, transform.Pieces(len(x)))
	transform.InPieces(len(x), func(piece, from, to int) {
		var s0, s1 float64
		for i, v := range x[from:to] {
			if i&1 == 0 {
				s0 += v * v
			} else {
				s1 += v * v
			}
		}
		pieces[piece] = s0 + s1
	})
	for _, p := range pieces {
		s.total += p
	}
	return s
}

func suffixSquares(x []float64, last int) squares {
	s := squares{sums: make([]float64, last+1)}
	for k := 1; k <= last; k++ {
		v := x[len(x)-k]
		s.sums[k] = s.sums[k-1] + v*v
	}
	return s
}
