package health

import "testing"

// BenchmarkRun checks one axis of a million samples; the bound is 60 ms.
func BenchmarkRun(b *testing.B) {
	r := regime{ratio: 0.01, periods: 10000, noise: 0.1}
	in, _ := trial{regime: r}.run(1, 1)
	b.ReportAllocs()
	for b.Loop() {
		Run(in)
	}
}
