package relaxation

import (
	"math"
	"testing"
)

func exactFit(t *testing.T, x []float64, exposure, scale float64) Maximum {
	t.Helper()
	pr := Problem{Likelihood: NewExact(x, RemovedLine, true, exposure, scale)}
	m, err := pr.Maximise(pr.Start(0, true))
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// The log-likelihood of s x + a + b t, with the scale s^2, differs from that of x by nothing
// for any parameters; backwards in time it is the same. Tolerances: N = 300 terms of order
// one and the rounding of the shifted positions, 1e-16 times the shift in units of the rms, twice.
func TestExactProperties(t *testing.T) {
	p := processes[1]
	x := record(p, 300, 5)
	at := parameters(p, 0.3)
	base := NewExact(x, RemovedLine, true, 0, 0.3).Value(at)
	scaled, moved, back := make([]float64, 300), make([]float64, 300), make([]float64, 300)
	for i, v := range x {
		scaled[i] = 1e-9 * v
		moved[i] = v + 500 - 2*float64(i)
		back[299-i] = v
	}
	for _, c := range []struct {
		what  string
		value float64
		bound float64
	}{
		{"scaled by 1e-9", NewExact(scaled, RemovedLine, true, 0, 0.3e-18).Value(at), 1e-9},
		{"shifted and drifting", NewExact(moved, RemovedLine, true, 0, 0.3).Value(at), 1e-6},
		{"backwards", NewExact(back, RemovedLine, true, 0, 0.3).Value(at), 1e-9},
	} {
		if math.Abs(c.value-base) > c.bound {
			t.Errorf("%s: log-likelihood = %.10f, want %.10f, gap %.1e", c.what, c.value, base, c.value-base)
		}
	}
}

// Missing samples at the ends are the same as a shorter record.
func TestExactMissingAtEnds(t *testing.T) {
	p := processes[3]
	x := record(p, 200, 9)
	y := make([]float64, 0, 220)
	for range 10 {
		y = append(y, math.NaN())
	}
	y = append(y, x...)
	for range 10 {
		y = append(y, math.NaN())
	}
	at := parameters(p, 1)
	for removed := RemovedNothing; removed <= RemovedMean; removed++ {
		got, want := NewExact(y, removed, true, 1, 1).Value(at), NewExact(x, removed, true, 1, 1).Value(at)
		if math.Abs(got-want) > 1e-9 {
			t.Errorf("removed %d: log-likelihood = %.10f, want %.10f (shorter record)", removed, got, want)
		}
	}
}

// The scale is a unit: what is fitted does not depend on it.
func TestExactScale(t *testing.T) {
	p := processes[1]
	x := record(p, 600, 6)
	one, other := exactFit(t, x, 0, 0.35), exactFit(t, x, 0, 3.5e-3)
	// settled leaves 2e-5 standard errors of about 0.2 in a logarithm
	if gap := math.Abs(one.At[0] - other.At[0]); gap > 1e-5 {
		t.Errorf("ln fc differs by %.1e between scales", gap)
	}
	if gap := math.Abs(one.At[1] + math.Log(0.35) - other.At[1] - math.Log(3.5e-3)); gap > 1e-5 {
		t.Errorf("ln V differs by %.1e between scales", gap)
	}
	if gap := math.Abs(one.At[2]*0.35-other.At[2]*3.5e-3) / 0.35; gap > 1e-5 {
		t.Errorf("q differs by %.1e V between scales", gap)
	}
}

// The gradient of either form against central differences of its value.
func TestScoreIsGradient(t *testing.T) {
	for i, p := range processes {
		x := record(p, 500, uint64(20+i))
		for name, l := range map[string]Likelihood{"exact": NewExact(x, RemovedLine, true, p.Exposure, 1), "spectral": spectralOf(x, p.Exposure, 1)} {
			at := parameters(p, 1)
			at[0] += 0.1
			value, g, f := l.Score(at)
			if math.Abs(value-l.Value(at)) > 1e-9*math.Abs(value) {
				t.Errorf("process %d, %s: Score and Value give %.10g and %.10g", i, name, value, l.Value(at))
			}
			sameMatrix(t, name+" information", f, fisher(NewBlocks(make([]float64, 251), 500, true, nil), p.Exposure, 1, at))
			for k := range at {
				const h = 1e-4
				up, down := at, at
				up[k] += h
				down[k] -= h
				want := (l.Value(up) - l.Value(down)) / (2 * h)
				// h^2/6 of a third derivative of the order of the information
				if math.Abs(g[k]-want) > 1e-6*(f[k][k]+math.Abs(want))+1e-5 {
					t.Errorf("process %d, %s: gradient %d = %.8g, want %.8g (difference)", i, name, k, g[k], want)
				}
			}
		}
	}
}
