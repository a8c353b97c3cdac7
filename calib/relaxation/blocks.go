package relaxation

import "math"

// Blocks are the sufficient statistics of a spectral fit: averages of the
// periodogram over narrow blocks of neighbouring frequencies.
//
// All slices are parallel. Power is |X_k|^2/N [m2], X_k the unscaled discrete
// Fourier sum, averaged over the block and divided by the share of the degrees of
// freedom that the removal of a straight line leaves; its expectation is P(f)/dt.
type Blocks struct {
	Samples   int       // N
	Frequency []float64 // centre, in units of the sampling rate
	Sigma     []float64 // mean of 4 sin^2(pi f dt)
	SigmaVar  []float64 // variance of the same within the block
	Power     []float64
	Weight    []float64 // half the number of real degrees of freedom
	Bins      []int     // Fourier frequencies in the block
}

// blockWidth is the width of a block relative to its frequency. Within a block the
// steepest spectrum, 1/f^2, changes by 2 x 1.5 %, so that averaging loses less
// than 0.03^2/12 = 0.008 % of the information (Fisher information of a scale).
const blockWidth = 0.015

// NewBlocks averages power = |X_k|^2 [m2], k = 0..N/2, of a record of n samples
// from which the mean and, if line is true, the least-squares straight line were
// removed. Frequencies for which skip returns true are left out; skip may be nil.
// The zero frequency is always left out.
//
// The straight line takes 6/(pi^2 k^2) of the two real degrees of freedom at the
// k-th frequency (the squared sine coefficients of a ramp), which Weight accounts for.
func NewBlocks(power []float64, n int, line bool, skip func(k int) bool) Blocks {
	b := Blocks{Samples: n}
	last := n / 2
	for k := 1; k <= last; {
		end := k + int(blockWidth*float64(k))
		if end < k {
			end = k
		}
		if end > last {
			end = last
		}
		b.add(power, n, k, end, line, skip)
		k = end + 1
	}
	return b
}

func (b *Blocks) add(power []float64, n, from, to int, line bool, skip func(int) bool) {
	var weight, sum, f, sigma, sigma2 float64
	bins := 0
	for k := from; k <= to; k++ {
		if skip != nil && skip(k) {
			continue
		}
		w, share := 1.0, 1.0
		if line {
			w -= 3 / (math.Pi * math.Pi * float64(k) * float64(k))
		}
		if 2*k == n {
			w, share = w/2, 0.5
		}
		h := math.Sin(math.Pi * float64(k) / float64(n))
		s := 4 * h * h
		weight += w
		sum += share * power[k]
		f += w * float64(k)
		sigma += w * s
		sigma2 += w * s * s
		bins++
	}
	if bins == 0 {
		return
	}
	mean := sigma / weight
	b.Frequency = append(b.Frequency, f/weight/float64(n))
	b.Sigma = append(b.Sigma, mean)
	b.SigmaVar = append(b.SigmaVar, math.Max(0, sigma2/weight-mean*mean))
	b.Power = append(b.Power, sum/weight/float64(n))
	b.Weight = append(b.Weight, weight)
	b.Bins = append(b.Bins, bins)
}
