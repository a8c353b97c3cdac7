package health

import (
	"math"
	"testing"

	"beadwell/calib/simulate"
)

// TestPattern locks positions towards the centres of pixels of half an rms: x + b sin(2 pi x/p)
// has the size b pi/p for small b.
func TestPattern(t *testing.T) {
	const pixel, b = 0.5, 0.02 // rms
	x := simulate.Record(detector.truth(1), 3)[0]
	in := Input{Axes: []Axis{{Name: "x", X: x, Known: true}}, Rate: detector.rate()}
	in.Axes[0].Process, _ = fit(x, in.Rate, 0)
	if c := find(t, Run(in), "coarse-steps", "x"); c.Level != OK {
		t.Errorf("smooth positions: %s", c.Text)
	}
	for i, v := range x {
		x[i] += b * rms * math.Sin(2*math.Pi*v/(pixel*rms))
	}
	c := find(t, Run(in), "coarse-steps", "x")
	want := b * math.Pi / pixel
	// the waves of the histogram are whole fractions of ten standard deviations, here 10/20; the
	// standard deviation is known to 2 %, which loses up to a third of the size at the 20th
	if c.Level != Doubtful || c.Value < 0.6*want || c.Value > 1.1*want {
		t.Errorf("locked positions: %v %v, want doubtful %v", c.Level, c.Value, want)
	}
}
