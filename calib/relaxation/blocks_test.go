package relaxation

import (
	"math"
	"testing"
)

// All frequencies but zero are in one block each, and the weights add up to half of
// the N - 2 degrees of freedom that mean and line leave: sum over all k of 3/(pi^2 k^2) is
// 1/2, of which 3/pi^2 x 2/N lies beyond N/2, and 3/pi^2 x 1e-3 beyond k = 1000, from where on the
// line may be neglected.
func TestBlocksCount(t *testing.T) {
	for _, n := range []int{16, 100, 101, 1000, 4097} {
		flat := make([]float64, n/2+1)
		for _, line := range []bool{false, true} {
			b := NewBlocks(flat, n, line, nil)
			bins, weight := 0, 0.0
			for i := range b.Bins {
				bins += b.Bins[i]
				weight += b.Weight[i]
			}
			want := float64(n-1) / 2
			if line {
				want -= 0.5
			}
			if bins != n/2 || math.Abs(weight-want) > 7/(math.Pi*math.Pi*float64(n))+3e-3/(math.Pi*math.Pi) {
				t.Errorf("n = %d, line %v: %d bins of weight %.5f, want %d of %.5f", n, line, bins, weight, n/2, want)
			}
		}
	}
}

// White noise of variance q without its line has E|X_k|^2/N = q (1 - 3/(N^2 sin^2(pi k/N)))
// up to 1/N^2 (the transform of a ramp), so that every block has the power q.
func TestBlocksOfWhiteNoise(t *testing.T) {
	const n, q = 1000, 0.7
	power := make([]float64, n/2+1)
	for k := 1; k <= n/2; k++ {
		s := math.Sin(math.Pi * float64(k) / n)
		power[k] = n * q * (1 - 3/(n*n*s*s))
	}
	b := NewBlocks(power, n, true, nil)
	for i, p := range b.Power {
		if relativeGap(p, q) > 6.0/(n*n)*2 { // 3/N^2 between the sine and its argument, and 1/N^2
			t.Errorf("block at %g: power %.10g, want %g", b.Frequency[i], p, q)
		}
	}
}

func TestBlocksSkip(t *testing.T) {
	const n = 400
	power := make([]float64, n/2+1)
	for k := range power {
		power[k] = n
	}
	for k := 60; k <= 80; k++ {
		power[k] = 1e9
	}
	b := NewBlocks(power, n, false, func(k int) bool { return k >= 60 && k <= 80 || k == 1 })
	bins := 0
	for i, p := range b.Power {
		bins += b.Bins[i]
		if math.Abs(p-1) > 1e-14 {
			t.Errorf("block at %g holds power %g of a frequency that is left out", b.Frequency[i], p)
		}
	}
	if bins != n/2-22 {
		t.Errorf("%d bins, want %d", bins, n/2-22)
	}
	// Each frequency takes its own share of the line along when it is left out, 81
	// from within the block of 81 and 82.
	total := 0.0
	for _, w := range NewBlocks(power, n, true, nil).Weight {
		total += w
	}
	for _, w := range NewBlocks(power, n, true, func(k int) bool { return k >= 60 && k <= 81 }).Weight {
		total -= w
	}
	for k := 60; k <= 81; k++ {
		total -= 1 - 3/(math.Pi*math.Pi*float64(k)*float64(k))
	}
	if math.Abs(total) > 1e-11 { // 200 roundings
		t.Errorf("weights with and without 22 frequencies differ by %g more than the weights of those", total)
	}
	if b := NewBlocks(power, n, false, func(int) bool { return true }); len(b.Weight) != 0 {
		t.Errorf("%d blocks with everything left out, want none", len(b.Weight))
	}
}

// The mean of the model over a block, to second order: the exact mean over the bins
// differs by the fourth order of the width, (1.5 %)^4 times the steepness, and by nothing
// in the first.
func TestBlockAverage(t *testing.T) {
	const n = 100000
	flat := make([]float64, n/2+1)
	b := NewBlocks(flat, n, false, nil)
	p := Process{Corner: 0.01, Variance: 1, Noise: 0.01, Interval: 1, Exposure: 0.7}
	sh := newShape(p.Corner, p.Exposure)
	k := 1
	for i, bins := range b.Bins {
		mean, weight := 0.0, 0.0
		for range bins {
			w := 1.0
			if 2*k == n {
				w = 0.5
			}
			mean += w * p.Spectrum(float64(k)/n)
			weight += w
			k++
		}
		got := sh.at(p.Variance, p.Noise, b.Sigma[i], b.SigmaVar[i])
		if relativeGap(got, mean/weight) > 1e-6 {
			t.Errorf("block %d at %g: model %.10g, want %.10g (mean over its bins)", i, b.Frequency[i], got, mean/weight)
		}
	}
}

// The derivatives of the model against central differences, blur and block width included.
func TestModelDerivatives(t *testing.T) {
	for _, x := range []float64{0.003, 0.1, 0.7} {
		for _, w := range []float64{0, 0.4, 1} {
			for _, sigma := range []float64{1e-4, 0.3, 3.9} {
				const v, q, h = 1.3, 0.2, 1e-5
				width := 1e-4 * sigma * sigma
				_, dphi, dv := newShape(x, w).grad(v, q, sigma, width)
				up, down := newShape(x*math.Exp(h), w).at(v, q, sigma, width), newShape(x*math.Exp(-h), w).at(v, q, sigma, width)
				at := newShape(x, w).at(v, q, sigma, width)
				// h^2 of the third derivative and rounding 1e-16/h, of numbers up to B = 4 V larger than P
				if want := (up - down) / (2 * h); math.Abs(dphi-want) > 1e-8*(at+4*v) {
					t.Errorf("fc/fs = %g, W/dt = %g, sigma = %g: dP/d ln fc = %.10g, want %.10g (difference)", x, w, sigma, dphi, want)
				}
				if math.Abs(dv-(at-q)) > 1e-14*(at+q) {
					t.Errorf("dP/d ln V = %.12g, want %.12g", dv, at-q)
				}
			}
		}
	}
}
