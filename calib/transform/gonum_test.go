package transform

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// TestForwardGonum compares lengths around and above the one from which the transform
// is laid out as a matrix with an independent implementation. Both are good to a
// small multiple of eps log2(n), which is below 6e-15 here.
func TestForwardGonum(t *testing.T) {
	lengths := []int{8192, GoodLengthAbove(8193), 10000, 2 * 3 * 3125, 1 << 14, 2 * 6561, 2 * 15625,
		1 << 15, 1 << 16, 2 * 59049, 2 * 78125, 100_000, 1 << 17, 1 << 18, 1_000_000,
		1_166_400, 2 * 5 * 59049, 2 * 390625}
	for _, n := range lengths {
		p, err := NewPlan(n)
		if err != nil {
			t.Fatal(err)
		}
		x := noise(uint64(n), n)
		want := fourier.NewFFT(n).Coefficients(nil, x)
		got := p.Forward(nil, x)
		if d := distance(got, want); d > 4e-15 {
			t.Errorf("Forward of length %d (%d rows) differs from gonum by %.1e of its size", n, p.rows, d)
		}
		for k, v := range p.Power(nil, x) {
			if e := math.Abs(v - square(got[k])); e > 4e-15*square(got[k]) {
				t.Fatalf("length %d: Power[%d] = %g, |Forward|^2 = %g", n, k, v, square(got[k]))
			}
		}
		for j, v := range p.Inverse(nil, got) {
			if e := math.Abs(v - x[j]); e > 2e-14 {
				t.Fatalf("length %d: Inverse(Forward(x))[%d] = %g, want %g", n, j, v, x[j])
			}
		}
	}
}
