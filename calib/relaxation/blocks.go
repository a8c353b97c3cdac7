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
// k-th frequency (the squared sine coefficients of a ramp), which Weight accounts for
// (docs/method.md, Eq. 13).
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

// Times returns the blocks of the mean of a number of periodograms.
func (b Blocks) Times(records int) Blocks {
	if records == 1 {
		return b
	}
	weight, bins := make([]float64, len(b.Weight)), make([]int, len(b.Bins))
	for i, w := range b.Weight {
		weight[i], bins[i] = w*float64(records), b.Bins[i]*records
	}
	b.Weight, b.Bins = weight, bins
	return b
}

// add appends the block of the frequencies from..to. Within a block the weights differ by
// less than 1e-4 (the first blocks hold one frequency each), so that the mean and
// the variance of sigma are those of equally weighted frequencies.
func (b *Blocks) add(power []float64, n, from, to int, line bool, skip func(int) bool) {
	if skip != nil {
		for k := from; k <= to; k++ {
			if skip(k) {
				b.addKept(power, n, from, to, line, skip)
				return
			}
		}
	}
	bins := to - from + 1
	weight, sum := 0.0, 0.0
	for _, p := range power[from : to+1] {
		sum += p
	}
	weight = float64(bins)
	if line {
		weight -= lineShare(from, to)
	}
	if 2*to == n {
		weight -= 0.5
		sum -= power[to] / 2
	}
	mid := float64(from+to) / 2
	mean, variance := sigmaOf(mid, bins, n)
	b.append(mid/float64(n), mean, variance, sum/weight/float64(n), weight, bins)
}

// lineShare returns the sum of 3/(pi^2 k^2) over k = from..to: term by term for a short
// range, as the integral from half a step before to half a step behind for a long
// one, which is right to 1/(12 from^2) of itself.
func lineShare(from, to int) float64 {
	const c = 3 / (math.Pi * math.Pi)
	if from >= 1000 {
		return c * (1/(float64(from)-0.5) - 1/(float64(to)+0.5))
	}
	s := 0.0
	for k := from; k <= to; k++ {
		s += c / (float64(k) * float64(k))
	}
	return s
}

// sigmaOf returns the mean and the variance of sigma = 2 - 2 cos(2 pi k/n) over bins
// neighbouring k about mid: the mean is 2 - 2 D cos(mid) with Dirichlet's D.
func sigmaOf(mid float64, bins, n int) (mean, variance float64) {
	step := 2 * math.Pi / float64(n)
	h := math.Sin(step * mid / 2)
	centre := 4 * h * h
	if bins == 1 {
		return centre, 0
	}
	m := float64(bins)
	lost := (m*m - 1) * step * step / 24 // 1 - D to second order; the next is below 1e-9
	slope := 2 * math.Sin(step*mid) * step
	return centre*(1-lost) + 2*lost, slope * slope * (m*m - 1) / 12
}

func (b *Blocks) append(f, sigma, variance, power, weight float64, bins int) {
	b.Frequency = append(b.Frequency, f)
	b.Sigma = append(b.Sigma, sigma)
	b.SigmaVar = append(b.SigmaVar, variance)
	b.Power = append(b.Power, power)
	b.Weight = append(b.Weight, weight)
	b.Bins = append(b.Bins, bins)
}

// addKept appends a block of which some frequencies are left out.
func (b *Blocks) addKept(power []float64, n, from, to int, line bool, skip func(int) bool) {
	var weight, sum, f, sigma, sigma2 float64
	bins := 0
	for k := from; k <= to; k++ {
		if skip(k) {
			continue
		}
		w, share := 1.0, 1.0
		if line {
			w -= 3 / (math.Pi * math.Pi * float64(k) * float64(k))
		}
		if 2*k == n {
			w, share = w/2, 0.5
		}
		s, _ := sigmaOf(float64(k), 1, n)
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
	b.append(f/weight/float64(n), mean, math.Max(0, sigma2/weight-mean*mean), sum/weight/float64(n), weight, bins)
}

// thinned returns about count blocks, each a weighted mean of neighbouring ones.
func (b Blocks) thinned(count int) Blocks {
	each := (len(b.Weight) + count - 1) / count
	if each <= 1 {
		return b
	}
	out := Blocks{Samples: b.Samples}
	for i := 0; i < len(b.Weight); i += each {
		var w, f, s, p float64
		bins := 0
		for j := i; j < min(i+each, len(b.Weight)); j++ {
			w += b.Weight[j]
			f += b.Weight[j] * b.Frequency[j]
			s += b.Weight[j] * b.Sigma[j]
			p += b.Weight[j] * b.Power[j]
			bins += b.Bins[j]
		}
		out.append(f/w, s/w, 0, p/w, w, bins)
	}
	return out
}
