package drag

import "math"

// twoWallPatch is a rectangle of s = R/h and x = h/H (h to the nearer wall) on which
// (lambda/superposition - 1)/(s x) is a sum of Chebyshev polynomials. The program
// in gen computes the coefficients.
type twoWallPatch struct {
	lowS, highS, highX      float64
	parallel, perpendicular [][]float64
}

// superposition is what each wall adds by itself, summed: lambda(h) + lambda(H-h) - 1,
// for heights in units of the radius.
func superposition(one func(ratio float64) float64, h, depth float64) float64 {
	return one(h) + one(depth-h) - 1
}

// twoWalls is the drag factor between two walls, h and depth in units of the radius:
// superposition times the correction of the table. It is symmetric about mid-plane.
// Above h/R = 1/0.95 the table is right to 1e-5; nearer to a wall its polynomials are
// continued, which is within 0.1 % at h/R = 1.02 and some 0.2 % at 1.001.
func twoWalls(perpendicularly bool, h, depth float64) float64 {
	one, h := parallel, math.Min(h, depth-h)
	if perpendicularly {
		one = perpendicular
	}
	s, x := 1/h, h/depth
	patch := &twoWallPatches[0]
	if s > patch.highS {
		patch = &twoWallPatches[1]
	}
	coefficients := patch.parallel
	if perpendicularly {
		coefficients = patch.perpendicular
	}
	u := 2*(s-patch.lowS)/(patch.highS-patch.lowS) - 1
	v := 2*x/patch.highX - 1
	return superposition(one, h, depth) * (1 + s*x*chebyshevSum(coefficients, u, v))
}

// chebyshevSum is sum c[a][b] T_a(u) T_b(v).
func chebyshevSum(c [][]float64, u, v float64) float64 {
	inner := make([]float64, len(c))
	for a, row := range c {
		inner[a] = clenshaw(row, v)
	}
	return clenshaw(inner, u)
}

// clenshaw is sum c[a] T_a(u), by Clenshaw's recurrence.
func clenshaw(c []float64, u float64) float64 {
	var b1, b2 float64
	for a := len(c) - 1; a > 0; a-- {
		b1, b2 = c[a]+2*u*b1-b2, b1
	}
	return c[0] + u*b1 - b2
}
