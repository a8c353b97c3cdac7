package simulate

import (
	"math"
	"testing"
)

// Moments of the deviates: mean 0 (sd 1/sqrt n), variance 1 (sd sqrt(2/n)), third moment 0
// (sd sqrt(15/n)), fourth 3 (sd sqrt(96/n)), and no correlation within or between pairs.
func TestDeviatesMoments(t *testing.T) {
	const n = 1_000_000
	var first, second, third, fourth, within, between, last float64
	random := newDeviates(7, 0, motion)
	for range n / 2 {
		z, y := random.pair()
		for _, v := range []float64{z, y} {
			first += v
			second += v * v
			third += v * v * v
			fourth += v * v * v * v
		}
		within += z * y
		between += last * z
		last = y
	}
	for _, row := range []struct {
		name           string
		sum, want, sd2 float64
		count          float64
	}{
		{"mean", first, 0, 1, n}, {"variance", second, 1, 2, n}, {"third moment", third, 0, 15, n},
		{"fourth moment", fourth, 3, 96, n}, {"within pairs", within, 0, 1, n / 2}, {"between pairs", between, 0, 1, n / 2},
	} {
		if z := (row.sum/row.count - row.want) / math.Sqrt(row.sd2/row.count); !(math.Abs(z) <= limit) {
			t.Errorf("%s: %v, want %v (%.1f standard deviations off)", row.name, row.sum/row.count, row.want, z)
		}
	}
}

// Shares of deviates beyond k standard deviations against erfc(k/sqrt 2), binomial scatter.
func TestDeviatesTails(t *testing.T) {
	const n = 2_000_000
	random := newDeviates(8, 1, motion)
	counts := make([]int, 5)
	for range n / 2 {
		z, y := random.pair()
		for k := range counts {
			for _, v := range []float64{z, y} {
				if !(math.Abs(v) <= float64(k)) {
					counts[k]++
				}
			}
		}
	}
	for k := 1; k < len(counts); k++ {
		p := math.Erfc(float64(k) / math.Sqrt2)
		sd := math.Sqrt(n * p * (1 - p))
		if !(math.Abs(float64(counts[k])-n*p) <= limit*sd) {
			t.Errorf("beyond %d: %d of %d, want %.0f within %.0f", k, counts[k], n, n*p, limit*sd)
		}
	}
}

// mix is a bijection, so streams of different seeds, axes or purposes never coincide;
// and one flipped bit flips about half of the output (binomial: 32 of 64, sd 4, over 64 tries).
func TestMixAvalanche(t *testing.T) {
	total := 0
	for bit := range 64 {
		difference := mix(12345) ^ mix(12345^(1<<bit))
		for ; difference != 0; difference &= difference - 1 {
			total++
		}
	}
	if !(math.Abs(float64(total)-64*32) <= limit*4*8) {
		t.Errorf("flipped bits %d of %d, want half", total, 64*64)
	}
}
