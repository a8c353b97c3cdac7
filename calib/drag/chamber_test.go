package drag

import (
	"math"
	"strings"
	"testing"
)

const micron = 1e-6

// TestOneWall checks that a chamber without a second wall is the one-wall factor.
func TestOneWall(t *testing.T) {
	for _, depth := range []float64{0, math.Inf(1)} {
		wall, err := Chamber{Radius: 0.5 * micron, Height: 1 * micron, Depth: depth}.Wall()
		if err != nil {
			t.Fatal(err)
		}
		want, _ := Parallel(2)
		if wall.Factor != want || wall.LogSlopeDepth != 0 || wall.LogSlopeRadius != -wall.LogSlopeHeight {
			t.Errorf("one wall: %+v, want factor %g", wall, want)
		}
		if math.Abs(wall.FaxenError-0.00244) > 1e-5 || !(wall.FactorU > 0 && wall.FactorU < 5e-4) {
			t.Errorf("one wall: error of Faxen %g, model uncertainty %g", wall.FaxenError, wall.FactorU)
		}
	}
	wall, err := Chamber{Radius: 0.5 * micron, Height: 1 * micron, Perpendicular: true}.Wall()
	want, _ := Perpendicular(2)
	if err != nil || wall.Factor != want || !math.IsNaN(wall.Faxen) || !math.IsNaN(wall.FaxenError) {
		t.Errorf("perpendicular: %+v, %v, want factor %g and no Faxen value", wall, err, want)
	}
	wall, err = Chamber{Radius: 0.5 * micron, Height: math.Inf(1)}.Wall()
	if err != nil || wall.Factor != 1 || wall.FactorU != 0 || wall.LogSlopeHeight != 0 || wall.LogSlopeRadius != 0 {
		t.Errorf("far from walls: %+v, %v", wall, err)
	}
}

// TestTwoWallsExact checks what holds exactly: mirror symmetry, dependence on ratios
// alone, slopes against differences, and the one-wall factor when the other is far.
func TestTwoWallsExact(t *testing.T) {
	for _, perpendicular := range []bool{false, true} {
		for _, at := range [][2]float64{{2.5, 11}, {1.3, 7}, {4, 30}, {3, 6}, {20, 200}} {
			c := Chamber{Radius: micron, Height: at[0] * micron, Depth: at[1] * micron, Perpendicular: perpendicular}
			wall, err := c.Wall()
			if err != nil {
				t.Fatal(err)
			}
			mirrored := c
			mirrored.Height = c.Depth - c.Height
			mirror, err := mirrored.Wall()
			// Rounding of depth - height, magnified by the slope.
			if err != nil || math.Abs(mirror.Factor/wall.Factor-1) > 1e-12 {
				t.Errorf("%v: factor %.12g, mirrored %.12g, %v", c, wall.Factor, mirror.Factor, err)
			}
			scaled, err := Chamber{Radius: 3 * c.Radius, Height: 3 * c.Height, Depth: 3 * c.Depth, Perpendicular: perpendicular}.Wall()
			if err != nil || math.Abs(scaled.Factor/wall.Factor-1) > 1e-12 {
				t.Errorf("%v: factor %.12g, scaled by 3 %.12g, %v", c, wall.Factor, scaled.Factor, err)
			}
			// A change of all three by 0.1 % of the gap, to second order in it.
			e := 1e-4
			moved := c
			moved.Radius *= 1 + e
			moved.Height *= 1 - e
			moved.Depth *= 1 + 2*e
			now, err := moved.Wall()
			if err != nil {
				t.Fatal(err)
			}
			want := e * (wall.LogSlopeRadius - wall.LogSlopeHeight + 2*wall.LogSlopeDepth)
			if got := math.Log(now.Factor / wall.Factor); math.Abs(got-want) > 3e-3*math.Abs(want)+1e-8 {
				t.Errorf("%v: ln factor moves by %.6g, slopes say %.6g", c, got, want)
			}
		}
		far, err := Chamber{Radius: micron, Height: 3 * micron, Depth: 1e5 * micron, Perpendicular: perpendicular}.Wall()
		one, err2 := Chamber{Radius: micron, Height: 3 * micron, Perpendicular: perpendicular}.Wall()
		// The far wall is worth at most 9/8 R/(H-h).
		if err != nil || err2 != nil || math.Abs(far.Factor/one.Factor-1) > 1.2e-5 {
			t.Errorf("second wall at 1e5 R: factor %.9g, one wall %.9g", far.Factor, one.Factor)
		}
	}
}

// TestTwoWallsPatches checks that the two patches of the table agree on h/R = 2: both
// resolve the correction to 1e-5.
func TestTwoWallsPatches(t *testing.T) {
	for depth := 6.0; depth < 1000; depth *= 1.2 {
		for _, perpendicularly := range []bool{false, true} {
			below, above := twoWalls(perpendicularly, 2-1e-9, depth), twoWalls(perpendicularly, 2+1e-9, depth)
			if gap := below/above - 1; math.Abs(gap) > 1e-5 {
				t.Errorf("H/R = %g: the factor jumps by %g at h/R = 2", depth, gap)
			}
		}
	}
}

// TestSuperposition records how far superposition alone is from the computed factor,
// which is why the correction is there: within 2.3 % for parallel motion, 12 %
// high at mid-plane of H/R = 10 for perpendicular motion.
func TestSuperposition(t *testing.T) {
	worst := 0.0
	for _, h := range []float64{1.06, 1.5, 2, 3, 5, 10, 20, 50} {
		for _, depth := range []float64{6, 10, 20, 50, 100} {
			if depth-h >= h {
				worst = math.Max(worst, math.Abs(superposition(parallel, h, depth)/twoWalls(false, h, depth)-1))
			}
		}
	}
	if !(worst > 0.02 && worst < 0.025) {
		t.Errorf("superposition is off by %.4f at most for parallel motion, want 0.02 to 0.025", worst)
	}
	if got := superposition(perpendicular, 5, 10)/twoWalls(true, 5, 10) - 1; math.Abs(got-0.124) > 0.001 {
		t.Errorf("superposition is off by %.4f for perpendicular motion at mid-plane of H/R = 10, want 0.124", got)
	}
}

// TestModelUncertainty checks which uncertainty is stated where.
func TestModelUncertainty(t *testing.T) {
	for _, row := range []struct {
		h, depth      float64
		perpendicular bool
		low, high     float64
	}{
		{2, 10, false, 1e-4, 0.01},
		{50, 110, false, 1e-4, 0.01},
		{8, 10, false, 1e-4, 0.01},
		{1.9, 10, false, 0.03, 0.1},
		{2, 9.9, false, 0.03, 0.1},
		{3, 6, false, 0.03, 0.1},
		{5, 20, true, 0.03, 0.1},
		{18.5, 20, false, 0.03, 0.1},
		{5, 1000, true, 5e-4, 0.003},
		{1.5, 1000, false, 2e-4, 0.003},
	} {
		wall, err := Chamber{Radius: 0.5 * micron, Height: row.h * 0.5 * micron, Depth: row.depth * 0.5 * micron, Perpendicular: row.perpendicular}.Wall()
		if err != nil || !(wall.FactorU >= row.low && wall.FactorU <= row.high) {
			t.Errorf("%+v: model uncertainty %g, %v", row, wall.FactorU, err)
		}
	}
}

func TestChamberRefuses(t *testing.T) {
	inf, nan := math.Inf(1), math.NaN()
	for _, row := range []struct {
		c    Chamber
		want string
	}{
		{Chamber{}, "radius 0 m"},
		{Chamber{Radius: -1, Height: 2}, "radius -1 m"},
		{Chamber{Radius: nan, Height: 2}, "radius NaN m"},
		{Chamber{Radius: inf, Height: inf}, "radius +Inf m"},
		{Chamber{Radius: 1, Height: 1}, "height 1 m of the centre is not above the radius 1 m"},
		{Chamber{Radius: 0.5e-6, Height: 0.2e-6}, "height 0.2 um of the centre is not above the radius 0.5 um"},
		{Chamber{Radius: 1}, "height 0 m of the centre is not above the radius 1 m"},
		{Chamber{Radius: 1, Height: nan}, "height NaN m"},
		{Chamber{Radius: 1, Height: 3, Depth: nan}, "depth NaN m"},
		{Chamber{Radius: 1, Height: 3, Depth: -8}, "depth -8 m"},
		{Chamber{Radius: 1, Height: inf, Depth: 8}, "without a height"},
		{Chamber{Radius: 1, Height: 9.5, Depth: 10}, "leaves 0.5 m to the second wall at depth 10 m"},
		{Chamber{Radius: 1, Height: 11, Depth: 10}, "would touch"},
		{Chamber{Radius: 1, Height: 2, Depth: 5.9}, "5.9 times the radius 1 m: drag between two walls is known here from 6 times"},
	} {
		wall, err := row.c.Wall()
		if err == nil || !strings.Contains(err.Error(), row.want) {
			t.Errorf("%+v: %+v, %v; want an error with %q", row.c, wall, err, row.want)
		}
	}
	// A ratio of exactly 6 survives the rounding of lengths in metres.
	if _, err := (Chamber{Radius: 0.35e-6, Height: 1.05e-6, Depth: 2.1e-6}).Wall(); err != nil {
		t.Error(err)
	}
}
