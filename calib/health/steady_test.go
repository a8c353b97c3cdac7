package health

import (
	"math"
	"testing"
)

// The range of ordinary ratios ends where the deviate reaches the limit, to the margin.
func TestOrdinaryRatio(t *testing.T) {
	for _, freedom := range [][2]float64{{3, 400}, {50, 50}, {1000, 20}, {1, 1}} {
		a, b := meanLoss{freedom: freedom[0]}, meanLoss{freedom: freedom[1]}
		for _, limit := range []float64{0.5, 2, 4, 9} {
			var o ordinaryRatio
			inside := 0
			for log := -12.0; log < 12; log += 0.01 {
				ratio := math.Exp(log)
				held, z := o.holds(ratio, a, b, limit), math.Abs(deviate(ratio, a, b))
				if held && z > limit {
					t.Fatalf("freedoms %v, limit %g: ratio %g is held for ordinary, deviate %g", freedom, limit, ratio, z)
				}
				if held {
					inside++
				}
			}
			// with so few degrees of freedom that the limit is beyond the cube root's range, none is
			if most := limit*limit*2/(9*freedom[1]) < (1-2/(9*freedom[1]))*(1-2/(9*freedom[1])); most && inside == 0 {
				t.Errorf("freedoms %v, limit %g: no ratio is ordinary", freedom, limit)
			}
		}
	}
}
