package calib

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"beadwell/calib/simulate"
)

// triangles are recordings of one trap whose stage moves at several speeds.
func triangles(t *testing.T, s scene, seed uint64, kappa ...float64) []*Result {
	t.Helper()
	var list []*Result
	for i, amplitude := range []string{"3 um", "5 um", "8 um"} {
		one := s.driving("triangle", amplitude, "5 Hz")
		if len(kappa) > i {
			one.kappa = kappa[i]
		}
		metres := []float64{3e-6, 5e-6, 8e-6}[i]
		stage := simulate.Stage{Phase: 0.4 * float64(i), Parts: []simulate.Drive{{Waveform: simulate.Triangle, Amplitude: metres, Frequency: 5}}}
		r := calibrated(t, one.driven(t, seed+uint64(i), stage, true), one)
		r.Input.Name = amplitude
		list = append(list, r)
	}
	return list
}

func joined(list []*Result) []FlowJoin {
	var parts []FlowPart
	for _, r := range list {
		parts = append(parts, FlowParts(r)...)
	}
	return JoinFlow(parts)
}

// Three speeds in three files make one line: the weighted least-squares fit through all strokes, with an intercept of
// each file, done here by the normal equations.
func TestJoinFlow(t *testing.T) {
	s := usual()
	list := triangles(t, s, 70)
	lines := joined(list)
	if len(lines) != 1 || lines[0].Axis != "x" || len(lines[0].Parts) != 3 {
		t.Fatalf("%+v", lines)
	}
	j := lines[0]
	normal, right := mat.NewSymDense(4, nil), mat.NewVecDense(4, nil) // slope, three intercepts
	for i, r := range list {
		for _, p := range r.Axes[0].Driven.Flow.Points {
			row := [4]float64{float64(p.Speed)}
			row[1+i] = 1
			w := 1 / float64(p.Standard*p.Standard)
			for a := range row {
				right.SetVec(a, right.AtVec(a)+w*row[a]*float64(p.Displacement))
				for b := a; b < 4; b++ {
					normal.SetSym(a, b, normal.At(a, b)+w*row[a]*row[b])
				}
			}
		}
	}
	scale := []float64{1e4, 1, 1, 1} // speeds near one
	for a := range 4 {
		right.SetVec(a, right.AtVec(a)*scale[a])
		for b := a; b < 4; b++ {
			normal.SetSym(a, b, normal.At(a, b)*scale[a]*scale[b])
		}
	}
	var solution mat.VecDense
	if err := solution.SolveVec(normal, right); err != nil {
		t.Fatal(err)
	}
	// the drift of each file is taken off the points beforehand; with it free the slopes' weights change in the third digit
	if want := solution.AtVec(0) * scale[0]; math.Abs(float64(j.Slope.Value)/want-1) > 1e-4 {
		t.Errorf("slope %.8g s, a fit through all strokes gives %.8g", float64(j.Slope.Value), want)
	}
	for name, q := range map[string]Quantity{"Stokes": j.Stiffness, "without viscosity": j.Driven} {
		if d := math.Abs(float64(q.Value) - s.kappa); d > 4*float64(q.Combined.Standard) || float64(q.Combined.Standard) > 0.06*s.kappa {
			t.Errorf("%s: stiffness %v, want %g", name, q, s.kappa)
		}
	}
	one := list[0].Axes[0].leg(LegFlow)
	if !(j.Stiffness.Statistical.Standard < one.Statistical.Standard) {
		t.Errorf("joined %v is not better than one file %v", j.Stiffness.Statistical, one.Statistical)
	}
	strokes := 0
	for _, p := range j.Parts {
		strokes += p.Strokes
	}
	// a slope, three intercepts and three drifts
	if p := float64(j.Goodness.PValue); !(p > 1e-3) || j.Goodness.DegreesOfFreedom != strokes-7 {
		t.Errorf("goodness of fit %+v", j.Goodness)
	}
}

// Files of a trap that was changed in between have no common line, and files of different traps are not joined.
func TestJoinFlowRefuses(t *testing.T) {
	s := usual()
	j := joined(triangles(t, s, 80, s.kappa, s.kappa, 1.1*s.kappa))[0]
	if j.Stiffness.Known() || j.Driven.Known() || j.Stiffness.Reason == "" || !(j.Between.PValue < flowLevel) {
		t.Errorf("a stiffness of %v from traps that differ by 10 %%", j.Stiffness)
	}
	list := triangles(t, s, 90)[:1]
	list = append(list, triangles(t, s.with("laser.power", "50 mW"), 90)[1])
	if lines := joined(list); len(lines) != 0 {
		t.Errorf("traps of different power are joined: %+v", lines)
	}
}

// The joined interval covers: of 30 intervals at 95 % at most 6 miss (chance 0.1 %), and the mean of z lies within
// 4/sqrt(30) of zero.
func TestJoinFlowCoverage(t *testing.T) {
	const records, mostMisses = 30, 6
	s := usual()
	s.samples = 8192
	mean, misses := 0.0, 0
	for i := range uint64(records) {
		q := joined(triangles(t, s, 5000+10*i))[0].Stiffness
		mean += math.Log(float64(q.Value)/s.kappa) * float64(q.Value) / float64(q.Statistical.Standard) / records
		if in := q.Statistical.Interval95; s.kappa < float64(in[0]) || s.kappa > float64(in[1]) {
			misses++
		}
	}
	if misses > mostMisses || math.Abs(mean) > 4/math.Sqrt(records) {
		t.Errorf("%d of %d intervals miss, mean of z %.2f", misses, records, mean)
	}
}
