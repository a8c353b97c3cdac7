package drag

import "math"

// reaction returns F(x), x = (1-i) h/delta, the flow that a wall sends back to an
// oscillating point force at distance h, relative to the steady one; y = h/delta with
// delta the penetration depth. It is the exact solution of the linearised
// Navier-Stokes equations without slip on the wall (gen/reaction.go derives it), as used for
// beads near walls by Felderhof, J. Phys. Chem. B 109 (2005) 21406.
//
// F = 1 - c x at low frequency, c = 16/9 (parallel) and 8/9 (perpendicular), which cancels
// the square-root term of the drag in bulk; F = 1/(3 x^2) at high frequency, which is the
// added mass of potential flow. The table is right to 2e-5 of F, the expansions outside
// it to 1e-6 at low and to 5e-4 of F at high frequency, where F is below 2e-4.
func reaction(perpendicularly bool, y float64) complex128 {
	x := complex(y, -y)
	first, second, table := complex(16.0/9, 0), complex(2, 0), parallelReaction
	if perpendicularly {
		first, second, table = complex(8.0/9, 0), complex(1.0/3, 0), perpendicularReaction
	}
	switch {
	case y < reactionLow:
		return 1 - first*x + second*x*x
	case y > reactionHigh:
		return (1 + 3/x + 6/(x*x)) / (3 * x * x)
	}
	position := math.Log(y/reactionLow) / math.Log(reactionHigh/reactionLow) * float64(len(table))
	panel := min(int(position), len(table)-1)
	u := complex(2*(position-float64(panel))-1, 0)
	var b1, b2 complex128
	row := table[panel]
	for a := len(row) - 1; a > 0; a-- {
		b1, b2 = row[a]+2*u*b1-b2, b1
	}
	return (row[0] + u*b1 - b2) / (1 + first*x + 3*x*x)
}
