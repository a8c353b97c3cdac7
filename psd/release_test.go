package psd

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// After Release the samples come back to the last bit, with a mean far from zero, a drift and
// two narrow lines taken out, and parts of them come within rounding of the waves.
func TestRestore(t *testing.T) {
	const n = 100_003
	random := rand.New(rand.NewPCG(11, 5))
	x := make([]float64, n)
	state := 0.0
	for i := range x {
		state = 0.9*state + random.NormFloat64()
		x[i] = 1e4 + 1e-4*float64(i) + state + 2*math.Sin(0.731*float64(i)) + math.Cos(1.9*float64(i)+1)
	}
	r, err := Prepare(x, 1000)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := Estimate(r, Options{}); err != nil {
		t.Fatal(err)
	}
	if len(r.waves) < 2 {
		t.Fatalf("%d waves were removed, want two", len(r.waves))
	}
	want, square := slices.Clone(r.X), r.MeanSquare()
	r.Release()
	if r.X != nil || r.Power != nil || r.MeanSquare() != square || r.Observed() != n {
		t.Fatal("Release keeps the samples, or loses their mean square")
	}
	for _, from := range []int{0, 1, 4096, n - 777} {
		part := make([]float64, 777)
		r.Part(part, from)
		for i, v := range part {
			if math.Abs(v-want[from+i]) > 1e-10 { // the rounding of a phase of 3e4 turns is 4e-11
				t.Fatalf("Part(%d)[%d] = %.15g, want %.15g", from, i, v, want[from+i])
			}
		}
	}
	if r.Restore(); !slices.Equal(r.X, want) {
		t.Error("Restore does not bring the samples back to the last bit")
	}
}

// A record from which other shapes were taken cannot be made again, and is kept.
func TestReleaseKeepsOtherShapes(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	x := make([]float64, 5000)
	for i := range x {
		x[i] = random.NormFloat64() + math.Sin(0.1*float64(i))
	}
	r, err := Prepare(x, 1000)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := r.TakeSinusoid(1000 * 0.1 / (2 * math.Pi)); err != nil {
		t.Fatal(err)
	}
	if r.Release(); r.X == nil {
		t.Error("Release let go of samples that Restore cannot make again")
	}
}
