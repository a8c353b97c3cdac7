package figure

import (
	"bytes"
	"math"
	"testing"

	"beadwell/calib"
)

var everyFormat = []Format{SVG, PNG, PDF}

// rendersAll draws a figure in every format, each below 150 kB.
func rendersAll(t *testing.T, f Figure) {
	t.Helper()
	for _, format := range everyFormat {
		out, err := Render(f, format, Light)
		if err != nil || len(out) == 0 || len(out) > 150_000 {
			t.Errorf("%s as %s: %d bytes, %v", f.Name, format, len(out), err)
		}
	}
}

func planRoutes(u float64) calib.PlanRoutes {
	one := calib.PlanUncertainty{Statistical: calib.Float(u / 2), Combined: calib.Float(u)}
	return calib.PlanRoutes{Drag: one, Amplitude: one, Both: one}
}

// A plan is drawn as it is: what its CSV holds are its numbers; and without numbers it is a frame with the reason.
func TestPlanFigure(t *testing.T) {
	nan := math.NaN()
	p := &calib.Plan{Axis: "x", Rate: 1000, Enough: calib.Exact(20, "s"), Wanted: &calib.PlanWanted{Uncertainty: 0.02}}
	for i, u := range []float64{0.3, 0.1, nan, 0.03} {
		p.Times = append(p.Times, calib.PlanTime{Duration: calib.Float(math.Pow(10, float64(i))), Routes: planRoutes(u)})
		p.Rates.Rows = append(p.Rates.Rows, calib.PlanRate{Rate: calib.Float(math.Pow(10, float64(i))), Routes: planRoutes(u)})
	}
	f := Plan(p)
	if f.Reason != "" || len(f.panels) != 2 {
		t.Fatalf("not drawn: %q", f.Reason)
	}
	table, err := Data(f)
	if err != nil || !bytes.Contains(table, []byte(`duration,"drag, combined",1000,s,,,,,0.03,1,,`)) || !bytes.Contains(table, []byte("wanted")) {
		t.Errorf("%v, the data lack a point:\n%s", err, table)
	}
	rendersAll(t, f)
	for _, row := range [][]calib.PlanTime{nil, {{Duration: 1, Routes: planRoutes(nan)}}, {{Duration: calib.Float(nan), Routes: planRoutes(0.1)}}} {
		f := Plan(&calib.Plan{Axis: "x", Times: row, Rate: calib.Float(nan), Enough: calib.Withheld("s", "no")})
		if f.Reason == "" {
			t.Errorf("%v is drawn", row)
		}
		rendersAll(t, f)
	}
	rendersAll(t, Plan(&calib.Plan{Axis: "x", Times: p.Times[:1], Rate: 1000, Enough: calib.Withheld("s", "no")})) // one point
}

// A trace is drawn whatever is in it: the range and mean of 500 stretches at the most.
func TestForceFigure(t *testing.T) {
	trace := calib.ForceTrace{Trap: calib.Trap{Axis: "x", Stiffness: calib.Exact(50e-6, "N/m"), Linear: calib.Linear{Low: -30e-9, High: 30e-9}}, Rate: 1000}
	for i := range 20_000 {
		x := 60e-9 * math.Sin(float64(i)/700)
		if i%7 == 3 {
			x = math.NaN()
		}
		trace.Positions = append(trace.Positions, x)
	}
	f := Force(&trace, 5)
	s := f.panels[0].series
	if len(s[0].x) != maxPoints || len(s) != 4 {
		t.Errorf("%d stretches and %d series, want %d and 4 (range, mean, both ends of the linear range)", len(s[0].x), len(s), maxPoints)
	}
	highest := 0.0
	for _, v := range s[0].high {
		highest = math.Max(highest, v)
	}
	if want := 50e-6 * 60e-9; math.Abs(highest/want-1) > 1e-3 { // the sine is sampled 4400 times a period
		t.Errorf("highest force %g N, want %g", highest, want)
	}
	rendersAll(t, f)
	for _, positions := range [][]float64{nil, {math.NaN()}, {0}, {1e-9, 1e-9}, {1e200, -1e200}} {
		trace.Positions = positions
		rendersAll(t, Force(&trace, math.Inf(-1)))
		rendersAll(t, Force(&trace, 0))
	}
}
