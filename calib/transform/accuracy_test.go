package transform

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// epsilon is the spacing of numbers at 1.
const epsilon = 0x1p-52

// compensated adds up numbers with the error of one rounding (Neumaier, Z. Angew. Math.
// Mech. 54 (1974) 39).
type compensated struct{ sum, rest float64 }

func (c *compensated) add(v float64) {
	t := c.sum + v
	if math.Abs(c.sum) >= math.Abs(v) {
		c.rest += (c.sum - t) + v
	} else {
		c.rest += (v - t) + c.sum
	}
	c.sum = t
}

// oneBin is X_k from its definition. The n products are rounded once and their roots are
// good to half a unit in the last place or so; of n independent errors of 0.4 eps, the root
// mean square relative to that of a bin is again 0.4 eps, whatever n is.
func oneBin(x []float64, k int) complex128 {
	var re, im compensated
	for j, v := range x {
		w := root(j*k%len(x), len(x))
		re.add(v * real(w))
		im.add(v * imag(w))
	}
	return complex(re.sum+re.rest, im.sum+im.rest)
}

// TestRoundingError measures the error of Forward and of Forward followed by Inverse.
//
// Each level of the transform rounds sums of equal size once more, so that the variances
// of the errors add up and the root mean square grows as eps sqrt(log2 n) (Schatzman,
// SIAM J. Sci. Comput. 17 (1996) 1150). Factors of 0.29 to 0.53 are seen for one way and
// of 0.31 to 0.71 for two, the largest for powers of three.
func TestRoundingError(t *testing.T) {
	const forwardBound, backBound = 0.7, 1.0
	for _, n := range []int{16, 128, 1000, 1024, 6250, 8192, 100_000, 1 << 17, 1 << 18, 354_294, 1_000_000} {
		p, err := NewPlan(n)
		if err != nil {
			t.Fatal(err)
		}
		x := noise(7, n)
		c := p.Forward(nil, x)
		rng := rand.New(rand.NewPCG(uint64(n), 2))
		var got, want []complex128
		for range 24 {
			k := rng.IntN(n/2 + 1)
			got, want = append(got, c[k]), append(want, oneBin(x, k))
		}
		scale := epsilon * math.Sqrt(math.Log2(float64(n)))
		forward := distance(got, want) / scale
		var difference, size float64
		for j, v := range p.Inverse(nil, c) {
			difference += (v - x[j]) * (v - x[j])
			size += x[j] * x[j]
		}
		back := math.Sqrt(difference/size) / scale
		t.Logf("length %7d: forward %.2f, there and back %.2f eps sqrt(log2 n)", n, forward, back)
		if forward > forwardBound || back > backBound {
			t.Errorf("length %d: error of Forward is %.2f, there and back %.2f, want below %g and %g eps sqrt(log2 n)",
				n, forward, back, forwardBound, backBound)
		}
	}
}

// The roots are good to 1.5 units in the last place of 1: the angle is rounded twice and
// sine and cosine are good to one unit. The tables of two levels add three roundings.
func TestRoots(t *testing.T) {
	for _, n := range []int{1, 2, 3, 4, 5, 8, 10, 12, 360, 1000, 4096, 1_000_000} {
		table := newRoots(n)
		for k := 0; k < n; k += 1 + n/977 {
			z := root(k, n)
			if e := math.Abs(square(z) - 1); e > 3*epsilon {
				t.Errorf("|root(%d, %d)|^2 - 1 = %.1e", k, n, e)
			}
			if d := distance([]complex128{table.at(k)}, []complex128{z}); d > 2*epsilon {
				t.Errorf("table of %d: root %d is off by %.1e", n, k, d)
			}
			if mirrored := root(n-k, n); real(mirrored) != real(z) || imag(mirrored) != -imag(z) {
				t.Errorf("root(%d, %d) = %v is not the conjugate of root(%d, %d) = %v", n-k, n, mirrored, k, n, z)
			}
		}
	}
	for k, want := range []complex128{1, -1i, -1, 1i} {
		if got := root(k, 4); got != want {
			t.Errorf("root(%d, 4) = %v, want %v", k, got, want)
		}
	}
	for k, want := range []complex128{ // 40 digits of sqrt(1/2) and of sqrt(3)/2
		1, complex(0.8660254037844386467637231707529361834714, -0.5),
		complex(0.5, -0.8660254037844386467637231707529361834714),
	} {
		if d := distance([]complex128{root(k, 12)}, []complex128{want}); d > epsilon {
			t.Errorf("root(%d, 12) = %v, want %v", k, root(k, 12), want)
		}
	}
}

// TestAutocovarianceAccuracy measures the errors of sums from transforms, relative to the
// sum at lag 0. A power carries twice the relative error of its bin. In white noise these
// errors average out over the bins; in a walk a few bins are all there is, and their error
// of some eps sqrt(log2 n) is that of every sum: 0.05 eps log2(n) is the largest seen.
func TestAutocovarianceAccuracy(t *testing.T) {
	for _, c := range []struct{ n, lags int }{{1000, 1000}, {20_000, 20_000}, {30_000, 200}} {
		for _, kind := range []string{"white", "walk"} {
			x := noise(3, c.n)
			if kind == "walk" {
				for j := range x[1:] {
					x[j+1] += 0.999 * x[j]
				}
			}
			got := Autocovariance(x, c.lags-1)
			var difference float64
			count := 0
			for k := 0; k < c.lags; k += 1 + c.lags/100 {
				e := got[k] - oneSum(x, k)
				difference += e * e
				count++
			}
			e := math.Sqrt(difference/float64(count)) / got[0] / epsilon / math.Log2(float64(c.n))
			t.Logf("%s, %d points, %d lags: error %.3f eps log2(n) of lag 0", kind, c.n, c.lags, e)
			if e > 0.2 {
				t.Errorf("%s, %d points, %d lags: error of the sums is %.3f eps log2(n) of lag 0, want below 0.2",
					kind, c.n, c.lags, e)
			}
		}
	}
}

func ExampleGoodLength() {
	fmt.Println(GoodLength(100_003), GoodLengthAbove(100_003))
	// Output: 100000 101250
}
