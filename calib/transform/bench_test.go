package transform

import (
	"fmt"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// benchmarkLengths run from one block of an averaged spectrum to a long record.
var benchmarkLengths = []int{1 << 10, 1 << 14, 100_000, 1_000_000, 1 << 22, 10_000_000}

func BenchmarkPower(b *testing.B) {
	for _, n := range benchmarkLengths {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			p, err := NewPlan(n)
			if err != nil {
				b.Fatal(err)
			}
			x, dst := noise(1, n), make([]float64, n/2+1)
			b.SetBytes(int64(8 * n))
			for b.Loop() {
				p.Power(dst, x)
			}
		})
	}
}

func BenchmarkPowerGonum(b *testing.B) {
	for _, n := range benchmarkLengths {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			p := fourier.NewFFT(n)
			x, dst, power := noise(1, n), make([]complex128, n/2+1), make([]float64, n/2+1)
			b.SetBytes(int64(8 * n))
			for b.Loop() {
				for k, z := range p.Coefficients(dst, x) {
					power[k] = square(z)
				}
			}
		})
	}
}

// BenchmarkAutocovariance takes the direct sums, the blocks and the whole.
func BenchmarkAutocovariance(b *testing.B) {
	const n = 1_000_000
	x := noise(1, n)
	for _, maxLag := range []int{16, 200, 5000, n - 1} {
		b.Run(fmt.Sprint(maxLag), func(b *testing.B) {
			b.SetBytes(8 * n)
			for b.Loop() {
				Autocovariance(x, maxLag)
			}
		})
	}
}
