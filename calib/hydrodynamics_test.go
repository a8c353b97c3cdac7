package calib

import (
	"fmt"
	"testing"
)

// A stated height that is far off makes the computed drag another one than the recording's. Which spectrum that drag would like better
// then has no say, so that the measured corner frequency stays what it is: heights from a stage with a hidden offset rest on it. The drag of the
// recordings is constant; with frequency-dependent drag chosen, the corner frequency would be 3 to 10 % off.
func TestWrongHeightLeavesTheCorner(t *testing.T) {
	s := usual()
	s.rate, s.samples, s.height = 20e3, 40000, 1e-6
	for seed := range uint64(4) {
		rec := s.record(t, 31+seed)
		for _, height := range []float64{0.55, 0.7, 3, 20} { // um, in place of 1
			wrong := s.with("chamber.height", fmt.Sprintf("%g um", height))
			constant, chosen := calibrated(t, rec, wrong), calibrated(t, rec, wrong.with("fit.drag", "auto"))
			if a, b := constant.Axes[0].Spectrum.Corner.Value, chosen.Axes[0].Spectrum.Corner.Value; a != b {
				t.Errorf("seed %d, %g um: the corner frequency moves from %g to %g Hz", seed, height, float64(a), float64(b))
			}
		}
	}
}
