package transform

import (
	"math"
	"runtime"
	"slices"
	"sync"
	"testing"
)

// identityLengths are done in one piece, or (above 131072) as a matrix with an even and an
// odd number of rows.
var identityLengths = []int{2, 4, 6, 10, 30, 250, 1024, 13_122, 100_000, 1 << 18, 354_294, 400_000}

func plan(t *testing.T, n int) *Plan {
	t.Helper()
	p, err := NewPlan(n)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// rounding is a bound on errors relative to the root mean square: ten times that of
// TestRoundingError, for it is applied to the largest error of many, not to the mean.
func rounding(n int) float64 { return 7 * epsilon * math.Sqrt(math.Log2(float64(max(n, 2)))) }

// A unit pulse at j has the bins exp(-2 pi i j k/n): absolute scale, sign and order.
func TestForwardDelta(t *testing.T) {
	for _, n := range identityLengths {
		p := plan(t, n)
		for _, j := range []int{0, 1, n / 2, n - 1} {
			x := make([]float64, n)
			x[j] = 1
			for k, z := range p.Forward(nil, x) {
				if e := math.Sqrt(square(z - root(j*k%n, n))); e > rounding(n) {
					t.Fatalf("length %d: bin %d of a pulse at %d = %v, want %v", n, k, j, z, root(j*k%n, n))
				}
			}
		}
	}
}

// A cos(2 pi m j/n) + B sin(2 pi m j/n) has A n/2 - i B n/2 in bin m and nothing elsewhere;
// a constant C has C n in bin 0, an alternating one in bin n/2.
func TestForwardCosine(t *testing.T) {
	for _, n := range identityLengths[3:] {
		p := plan(t, n)
		m := n/3 + 1
		x := make([]float64, n)
		for j := range x {
			w := root(m*(j%n)%n, n)
			x[j] = 3*real(w) + 2*-imag(w) + 0.25 + 0.125*float64(1-2*(j%2))
		}
		half := float64(n) / 2
		for k, z := range p.Forward(nil, x) {
			var want complex128
			switch k {
			case 0:
				want = complex(0.25*2*half, 0)
			case m:
				want = complex(3*half, -2*half)
			case n / 2:
				want = complex(0.125*2*half, 0)
			}
			// The points, of up to 4, are rounded to within 2 eps each, and their roundings
			// repeat with the period of the sines: in some bins they all add up.
			if e := math.Sqrt(square(z - want)); e > 2*epsilon*float64(n)+2.6*rounding(n)*math.Sqrt(float64(n)) {
				t.Fatalf("length %d: bin %d of sines at 0, %d and %d = %v, want %v", n, k, m, n/2, z, want)
			}
		}
	}
}

// sum of |X_k|^2 over all n bins = n sum of x_j^2 (Parseval).
func TestPowerParseval(t *testing.T) {
	for _, n := range identityLengths {
		x := noise(uint64(n), n)
		power := plan(t, n).Power(nil, x)
		total, want := power[0]+power[n/2], 0.0
		for _, v := range power[1 : n/2] {
			total += 2 * v
		}
		for _, v := range x {
			want += v * v
		}
		want *= float64(n)
		// The two sums have n terms one after the other: a random walk of sqrt(n) roundings.
		if e := math.Abs(total/want - 1); e > epsilon*(4+math.Sqrt(float64(n))) {
			t.Errorf("length %d: sum of powers = %g, n times sum of squares = %g", n, total, want)
		}
	}
}

// Turning the series round by s multiplies bin k by exp(-2 pi i s k/n).
func TestForwardShift(t *testing.T) {
	for _, n := range identityLengths {
		p := plan(t, n)
		x := noise(uint64(n), n)
		s := n/3 + 1
		want, got := p.Forward(nil, x), p.Forward(nil, slices.Concat(x[n-s:], x[:n-s]))
		for k := range want {
			want[k] *= root(s*k%n, n)
		}
		if d := distance(got, want); d > rounding(n) {
			t.Errorf("length %d: shift by %d is off by %.1e", n, s, d)
		}
	}
}

func TestForwardLinear(t *testing.T) {
	for _, n := range identityLengths {
		p := plan(t, n)
		x, y := noise(1, n), noise(2, n)
		a, b := p.Forward(nil, x), p.Forward(nil, y)
		for j := range x {
			x[j] = 3*x[j] - 0.5*y[j]
		}
		got := p.Forward(nil, x)
		for k := range a {
			a[k] = 3*a[k] - 0.5*b[k]
		}
		if d := distance(got, a); d > rounding(n) {
			t.Errorf("length %d: transform of a sum is off by %.1e", n, d)
		}
	}
}

// A series shorter than the plan is one with zeros after it, bit by bit; buffers with old
// contents and enough room are used and overwritten; the input is kept.
func TestPaddingAndBuffers(t *testing.T) {
	for _, n := range identityLengths {
		p := plan(t, n)
		for _, length := range []int{0, 1, n / 2, n/2 + 1, n - 1, n} {
			x := noise(uint64(n), length)
			kept := slices.Clone(x)
			padded := append(slices.Clone(x), make([]float64, n-length)...)
			power, bins, back := make([]float64, n), make([]complex128, n), make([]float64, n+1)
			for k := range power {
				power[k], bins[k], back[k] = math.NaN(), complex(math.NaN(), 0), math.NaN()
			}
			gotPower, gotBins := p.Power(power, x), p.Forward(bins, x)
			if n > 2 && (&gotPower[0] != &power[0] || &gotBins[0] != &bins[0]) {
				t.Fatalf("length %d: a buffer with room was not used", n)
			}
			if !slices.Equal(gotPower, p.Power(nil, padded)) || !slices.Equal(gotBins, p.Forward(nil, padded)) {
				t.Fatalf("length %d: %d points give other bins than the same with zeros", n, length)
			}
			keptBins := slices.Clone(gotBins)
			if !slices.Equal(p.Inverse(back, gotBins), p.Inverse(nil, gotBins)) || !slices.Equal(keptBins, gotBins) {
				t.Fatalf("length %d: Inverse depends on its buffer or changes its input", n)
			}
			if !slices.Equal(x, kept) {
				t.Fatalf("length %d: the series was changed", n)
			}
		}
	}
}

// Inverse takes only the real parts of the first and the last bin.
func TestInverseIgnoresImaginaryEnds(t *testing.T) {
	p := plan(t, 10)
	c := p.Forward(nil, noise(1, 10))
	want := p.Inverse(nil, c)
	c[0] += 5i
	c[5] -= 3i
	if got := p.Inverse(nil, c); !slices.Equal(got, want) {
		t.Errorf("Inverse with imaginary ends = %v, want %v", got, want)
	}
}

// All results are the same to the last bit for any number of processors and with several
// callers at a time.
func TestDeterministic(t *testing.T) {
	const n = 300_000
	type results struct {
		power, sums, few, some, all []float64
	}
	x := noise(1, n)
	compute := func() (r results) {
		r.power, r.sums, _ = PowerAndAutocovariance(x)
		r.few, r.some, r.all = Autocovariance(x, 10), Autocovariance(x, 1000), Autocovariance(x, n-1)
		return r
	}
	equal := func(a, b results) bool {
		return slices.Equal(a.power, b.power) && slices.Equal(a.sums, b.sums) && slices.Equal(a.few, b.few) &&
			slices.Equal(a.some, b.some) && slices.Equal(a.all, b.all)
	}
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(1))
	want := compute()
	for _, processors := range []int{2, 3, 7} {
		runtime.GOMAXPROCS(processors)
		if !equal(compute(), want) {
			t.Errorf("results on %d processors differ from those on one", processors)
		}
	}
	var group sync.WaitGroup
	for range 3 {
		group.Go(func() {
			if !equal(compute(), want) {
				t.Error("results of callers at the same time differ")
			}
		})
	}
	group.Wait()
}
