package batch

import (
	"testing"

	"beadwell/calib"
	"beadwell/calib/drag"
)

// heightSummary is a folder of seven heights that are all stated 0.3 um too high.
func heightSummary(t *testing.T) *Summary {
	t.Helper()
	const radius, viscosity = 0.5e-6, 0.9e-3 // m, Pa s
	s := &Summary{}
	for _, h := range []float64{0.7e-6, 0.9e-6, 1.2e-6, 1.7e-6, 2.5e-6, 4e-6, 8e-6} {
		factor, err := drag.Parallel(h / radius)
		if err != nil {
			t.Fatal(err)
		}
		row := emptyRow("run.csv", calib.Consistent, "")
		row.Diameter.Value, row.Height.Value, row.Viscosity.Value = 2*radius, calib.Float(h+0.3e-6), viscosity
		g := calib.Float(drag.Stokes(viscosity, radius) * factor)
		row.Axes = []RowAxis{{Axis: "x", Stiffness: unknown, Corner: unknown, DragRatio: unknown, Sensitivity: unknown, WallFactor: unknown,
			Drag: Number{Value: g, Statistical: 0.005 * g, Combined: unknown.Value}}}
		s.Rows = append(s.Rows, row)
	}
	return s
}
