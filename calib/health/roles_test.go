package health

import (
	"math"
	"math/rand/v2"
	"testing"
)

// walk makes a free bead seen with noise; background is the noise alone.
func walk(seed uint64, n int, step, noise float64) []float64 {
	rng := rand.New(rand.NewPCG(seed, 7))
	x, at := make([]float64, n), 0.0
	for i := range x {
		at += step * rng.NormFloat64()
		x[i] = at + noise*rng.NormFloat64()
	}
	return x
}

// alarms counts the checks that are not in order.
func alarms(checks []Check) (codes []string) {
	for _, c := range checks {
		if c.Level != OK {
			codes = append(codes, c.Code)
		}
	}
	return codes
}

// On clean recordings of a free bead and of a background the checks together alarm in under 5 %: of 200 recordings each, more than 18
// alarms have a chance of 1 %.
func TestRolesLevel(t *testing.T) {
	const records, most = 200, 18
	for name, c := range map[string]struct {
		step, noise float64
		run         func(Input) []Check
	}{"free": {20e-9, 0, RunFree}, "free, noisy": {20e-9, 30e-9, RunFree}, "background": {0, 5e-9, RunBackground}} {
		count := 0
		for seed := range uint64(records) {
			in := Input{Rate: 1000, JitterRMS: math.NaN(), Axes: []Axis{{Name: "x", X: walk(seed, 8000, c.step, c.noise)}}}
			if codes := alarms(c.run(in)); len(codes) > 0 {
				count++
			}
		}
		if count > most {
			t.Errorf("%s: %d of %d clean recordings alarm", name, count, records)
		}
	}
}

// What spoils such recordings is found.
func TestRolesFaults(t *testing.T) {
	clean := func(free bool) []float64 {
		if free {
			return walk(3, 8000, 20e-9, 5e-9)
		}
		return walk(3, 8000, 0, 5e-9)
	}
	for name, c := range map[string]struct {
		free  bool
		code  string
		spoil func(x []float64)
	}{
		"stuck half way": {true, "held-bead", func(x []float64) {
			noise := walk(9, len(x), 0, 5e-9)
			for i := len(x) / 2; i < len(x); i++ {
				x[i] = x[len(x)/2-1] + noise[i]
			}
		}},
		"lost steps": {true, "rough-steps", func(x []float64) {
			for i := range x {
				x[i] += 400e-9 * float64(i/500)
			}
		}},
		"clipped": {false, "rail", func(x []float64) {
			for i := range x {
				x[i] = math.Max(-8e-9, math.Min(8e-9, x[i]))
			}
		}},
		"jump": {false, "jump", func(x []float64) {
			for i := len(x) / 3; i < len(x); i++ {
				x[i] += 20e-9
			}
		}},
	} {
		x := clean(c.free)
		c.spoil(x)
		run := RunBackground
		if c.free {
			run = RunFree
		}
		found := false
		codes := alarms(run(Input{Rate: 1000, JitterRMS: math.NaN(), Axes: []Axis{{Name: "x", X: x}}}))
		for _, code := range codes {
			found = found || code == c.code
		}
		if !found {
			t.Errorf("%s: alarms %v, want %s", name, codes, c.code)
		}
	}
}
