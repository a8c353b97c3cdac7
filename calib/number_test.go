package calib

import (
	"encoding/json"
	"math"
	"math/rand/v2"
	"testing"
)

// Numbers stand in JSON as encoding/json writes a float64, and unknown ones as null.
func TestFloatIsWrittenAsFloat64(t *testing.T) {
	values := []float64{0, math.Copysign(0, -1), 1, -1.5, 1e-6, 9.99e-7, 1e-7, -1e-9, 1e-10, 1.5e-100, 1e20, 1e21, -1e21, 1e100,
		math.MaxFloat64, math.SmallestNonzeroFloat64, 0.1, 4.1e-9}
	random := rand.New(rand.NewPCG(1, 2))
	for range 10000 {
		values = append(values, random.NormFloat64()*math.Pow(10, 60*random.Float64()-30))
	}
	for _, v := range values {
		got, err := json.Marshal(Float(v))
		if want, wrong := json.Marshal(v); err != nil || wrong != nil || string(got) != string(want) {
			t.Fatalf("Float(%g) is %s (%v), want %s", v, got, err, want)
		}
	}
	for _, v := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		if got, err := json.Marshal(Float(v)); err != nil || string(got) != "null" {
			t.Errorf("Float(%g) is %s (%v), want null", v, got, err)
		}
	}
}
