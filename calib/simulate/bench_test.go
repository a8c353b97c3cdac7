package simulate

import "testing"

func BenchmarkRecord(b *testing.B) {
	t := Truth{Samples: 1 << 20, Rate: 50e3, Axes: []Axis{{Corner: 500, Variance: 1e-16, Noise: 1e-9}}}
	b.SetBytes(8 << 20)
	for b.Loop() {
		Record(t, 1)
	}
}
