package transform

import (
	"math"
	"math/big"
	"slices"
	"testing"
)

// exactSums are the sums of Autocovariance in 200-bit arithmetic, rounded once.
func exactSums(x []float64, maxLag int) []float64 {
	sums := make([]float64, maxLag+1)
	for k := range sums {
		total := new(big.Float).SetPrec(200)
		for j := 0; j+k < len(x); j++ {
			a, b := new(big.Float).SetPrec(200).SetFloat64(x[j]), new(big.Float).SetFloat64(x[j+k])
			total.Add(total, a.Mul(a, b))
		}
		sums[k], _ = total.Float64()
	}
	return sums
}

// oneSum is the sum at lag k, rounded about once.
func oneSum(x []float64, k int) float64 {
	var sum compensated
	for j := range x[k:] {
		product := x[j] * x[j+k]
		sum.add(product)
		sum.add(math.FMA(x[j], x[j+k], -product))
	}
	return sum.sum + sum.rest
}

// The three ways agree with exact sums. The error of direct sums of up to 1030 products is a
// random walk of as many steps, each at most eps/2 of the sum at lag 0: sqrt(1030)/2 = 16 eps.
// 4e-15 is 18 eps; transforms stay far below.
func TestAutocovarianceExact(t *testing.T) {
	ways := map[string]func(sums, x []float64){
		"direct": directSums,
		"blocks": func(sums, x []float64) { blockSums(sums, x, 64) },
		"whole":  wholeSums,
	}
	for _, n := range []int{1, 2, 3, 5, 63, 64, 65, 127, 128, 129, 130, 500, 1023, 1030} {
		x := noise(uint64(n), n)
		for _, lags := range []int{1, 2, 3, 4, 5, 8, 11, 63, 64, 65} {
			if lags > n {
				break
			}
			want := exactSums(x, lags-1)
			for name, way := range ways {
				got := make([]float64, lags)
				way(got, x)
				for k := range got {
					if e := math.Abs(got[k] - want[k]); e > 4e-15*want[0] {
						t.Errorf("%s: sum at lag %d of %d lags, %d points = %g, want %g", name, k, lags, n, got[k], want[k])
					}
				}
			}
		}
	}
}

// Sums of small whole numbers are exact, so that a wrong or missing product at any
// boundary of a chunk or segment shows whole.
func TestAutocovarianceDirectWholeNumbers(t *testing.T) {
	for _, n := range []int{chunkLength - 1, chunkLength, chunkLength + 1, 2*chunkLength + 7, segmentLength, segmentLength + 3} {
		x := noise(1, n)
		for j := range x {
			x[j] = math.Round(3 * x[j])
		}
		got := Autocovariance(x, directLags-1)
		for k := range got {
			want := 0.0
			for j := 0; j+k < n; j++ {
				want += x[j] * x[j+k]
			}
			if got[k] != want {
				t.Errorf("%d points: sum at lag %d = %g, want %g", n, k, got[k], want)
			}
		}
	}
}

func TestAutocovarianceDegenerate(t *testing.T) {
	for _, c := range []struct {
		x      []float64
		maxLag int
		want   []float64
	}{
		{nil, -1, nil},
		{nil, 2, []float64{0, 0, 0}},
		{[]float64{3}, 0, []float64{9}},
		{[]float64{3}, 2, []float64{9, 0, 0}},
		{[]float64{1, 2}, 3, []float64{5, 2, 0, 0}},
		{[]float64{1, 2, 3}, -5, nil},
	} {
		if got := Autocovariance(c.x, c.maxLag); !slices.Equal(got, c.want) {
			t.Errorf("Autocovariance(%v, %d) = %v, want %v", c.x, c.maxLag, got, c.want)
		}
	}
}

// Through the exported functions, around each change of the way that is taken.
func TestAutocovarianceWays(t *testing.T) {
	for _, c := range []struct{ n, maxLag int }{
		{directLength, directLength - 1}, {directLength + 1, directLength}, {500, 499}, {4 * minimumBlock, directLags - 1},
		{4 * minimumBlock, directLags}, {4*minimumBlock - 1, directLags}, {4 * minimumBlock, minimumBlock},
		{4 * minimumBlock, minimumBlock + 1}, {70_001, 3000}, {70_001, 40_000},
	} {
		x := noise(9, c.n)
		got := Autocovariance(x, c.maxLag)
		if len(got) != c.maxLag+1 {
			t.Fatalf("%d points, %d lags: %d sums", c.n, c.maxLag, len(got))
		}
		for k := 0; k <= c.maxLag; k += 1 + c.maxLag/37 {
			// 0.2 eps log2(n) is the root mean square of the errors; the largest gets five times that.
			if want := oneSum(x, k); math.Abs(got[k]-want) > epsilon*math.Log2(float64(c.n))*got[0] {
				t.Errorf("%d points: sum at lag %d of %d = %g, want %g", c.n, k, c.maxLag, got[k], want)
			}
		}
	}
}

func TestPowerAndAutocovariance(t *testing.T) {
	for _, n := range []int{2, 4, 6, 10, 162, 1000, 4096, 50_000, 100_000, 200_000} {
		x := noise(uint64(n), n)
		power, sums, err := PowerAndAutocovariance(x)
		if err != nil || len(power) != n/2+1 || len(sums) != n {
			t.Fatalf("length %d: %d powers, %d sums, error %v", n, len(power), len(sums), err)
		}
		if !slices.Equal(power, plan(t, n).Power(nil, x)) {
			t.Fatalf("length %d: powers differ from those of Power", n)
		}
		for k := 0; k < n; k += 1 + n/37 {
			if want := oneSum(x, k); math.Abs(sums[k]-want) > epsilon*(1+math.Log2(float64(n)))*sums[0] {
				t.Errorf("length %d: sum at lag %d = %g, want %g", n, k, sums[k], want)
			}
		}
	}
}

// One number that is not finite spoils sums of transforms as a whole, never a part of them.
func TestAutocovarianceNotFinite(t *testing.T) {
	x := noise(1, 10_000)
	x[5000] = math.NaN()
	for _, maxLag := range []int{100, 9999} {
		for k, v := range Autocovariance(x, maxLag) {
			if !math.IsNaN(v) {
				t.Fatalf("sum at lag %d of %d with a NaN in the series = %g", k, maxLag, v)
			}
		}
	}
}
