package msd

import (
	"math"
	"testing"

	"beadwell/calib/relaxation"
)

// Chaudesaigues' displacements of gamboge grains of radius 0.212 um at 17 C, in Perrin, Ann.
// Chim. Phys. (8) 18 (1909), table of section 29, against 2 D t with D = kT/(6 pi eta R) and
// k of 2019. About 50 grains were followed in a series, so that a mean square is known to
// sqrt(2/50) = 20 %, and all eight, which share their grains within a series, to some 10 %;
// the viscosity and the radius that are printed add some 5 % each. Three and two of
// these standard uncertainties are allowed.
func TestPerrin(t *testing.T) {
	const k, temperature, radius = 1.380649e-23, 290.15, 0.212e-6 // J/K, K, m
	sum := 0.0
	rows := []struct{ seconds, viscosity, square float64 }{ // s, Pa s, m2
		{30, 1.1e-3, 50.2e-12}, {60, 1.1e-3, 113.5e-12}, {90, 1.1e-3, 128e-12}, {120, 1.1e-3, 144e-12},
		{30, 1.2e-3, 45e-12}, {60, 1.2e-3, 86.5e-12}, {90, 1.2e-3, 140e-12}, {120, 1.2e-3, 195e-12},
	}
	for _, r := range rows {
		gamma := 6 * math.Pi * r.viscosity * radius
		// a trap that is too weak to be felt: relaxation over a million years
		p := relaxation.Process{Corner: 1e-14, Interval: 30}
		p.Variance = k * temperature / (2 * math.Pi * p.Corner * gamma)
		want := p.MSD(int(r.seconds / 30))
		if math.Abs(r.square/want-1) > 0.6 {
			t.Errorf("%g s, %g mPa s: Perrin has %.3g m2, predicted %.3g m2", r.seconds, r.viscosity*1e3, r.square, want)
		}
		if free := k * temperature * r.seconds / (3 * math.Pi * r.viscosity * radius); math.Abs(want/free-1) > 1e-9 {
			t.Errorf("MSD = %.10g m2, want %.10g (2 D t)", want, free)
		}
		sum += r.square / want / float64(len(rows))
	}
	if math.Abs(sum-1) > 0.22 {
		t.Errorf("Perrin's mean squares are %.3f of the prediction on average, want 1", sum)
	}
}
