package calib

import (
	"context"
	"testing"
)

// BenchmarkCalibrate calibrates one axis of a detector recording of 150000 samples.
func BenchmarkCalibrate(b *testing.B) {
	s := usual()
	s.rate, s.samples = 250e3, 150000
	t := &testing.T{}
	rec, set := s.record(t, 1), s.set(t)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Calibrate(context.Background(), rec, set, Options{}); err != nil {
			b.Fatal(err)
		}
	}
}
