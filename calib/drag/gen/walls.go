package main

import "math"

// walls are the no-slip planes z = 0 and z = depth; depth may be +Inf, then there
// is only the first one. Lengths are in units of the sphere's radius, the viscosity is 1.
type walls struct{ depth float64 }

// longitudinal is the part of the flow that the walls add, in the plane of the
// wave vector k and the normal, for a point force in that plane:
//
//	Z = (a + b k z) e^(-kz) + (c + d k (H-z)) e^(-k(H-z)),  k L = dZ/dz.
//
// Z and L are the normal and the longitudinal velocity; a phase of -i is taken out of
// the normal components of flow and force, which leaves everything real.
type longitudinal struct{ a, b, c, d float64 }

// bulk is the flow of a point force (along, normal) in unbounded fluid, a height
// zeta above it: the two-dimensional Fourier transform of the Stokes solution
// (Liron and Mochon, J. Eng. Math. 10 (1976) 287, Sect. 2).
func bulk(k, zeta, along, normal float64) (z, l float64) {
	decay := math.Exp(-k*math.Abs(zeta)) / (4 * k)
	z = decay * (k*zeta*along + (1+k*math.Abs(zeta))*normal)
	l = decay * ((1-k*math.Abs(zeta))*along - k*zeta*normal)
	return z, l
}

// reflect returns what the walls add to the flow of a force (along, normal) at height z0,
// from the four conditions of no slip.
func (w walls) reflect(k, z0, along, normal float64) longitudinal {
	z, l := bulk(k, -z0, along, normal)
	if math.IsInf(w.depth, 1) {
		return longitudinal{a: -z, b: -l - z}
	}
	far, farL := bulk(k, w.depth-z0, along, normal)
	n := k * w.depth
	e := math.Exp(-n)
	x := solve4([4][5]float64{
		{1, 0, e, n * e, -z},
		{-1, 1, e, (n - 1) * e, -l},
		{e, n * e, 1, 0, -far},
		{-e, (1 - n) * e, 1, -1, -farL},
	})
	return longitudinal{x[0], x[1], x[2], x[3]}
}

// at evaluates the added flow at height z.
func (w walls) at(r longitudinal, k, z float64) (normal, along float64) {
	near := math.Exp(-k * z)
	normal = (r.a + r.b*k*z) * near
	along = (r.b - r.a - r.b*k*z) * near
	if !math.IsInf(w.depth, 1) {
		y := k * (w.depth - z)
		far := math.Exp(-y)
		normal += (r.c + r.d*y) * far
		along += (r.c - r.d + r.d*y) * far
	}
	return normal, along
}

// transverse is the flow that the walls add along a unit force at right angles to
// the wave vector and to the normal, from height z0 to height z.
func (w walls) transverse(k, z0, z float64) float64 {
	if math.IsInf(w.depth, 1) {
		return -math.Exp(-k*(z+z0)) / (2 * k)
	}
	h := w.depth
	// Images of the bulk term e^(-k|z-z0|)/(2k), summed over both walls.
	sum := -math.Exp(-k*(z+z0)) - math.Exp(-k*(2*h-z-z0)) +
		math.Exp(-k*(2*h+z-z0)) + math.Exp(-k*(2*h-z+z0))
	return sum / (-2 * k * math.Expm1(-2*k*h))
}

// solve4 solves four linear equations by elimination with pivoting; the last
// column is the right-hand side.
func solve4(m [4][5]float64) [4]float64 {
	for i := range 4 {
		pivot := i
		for r := i + 1; r < 4; r++ {
			if math.Abs(m[r][i]) > math.Abs(m[pivot][i]) {
				pivot = r
			}
		}
		m[i], m[pivot] = m[pivot], m[i]
		for r := i + 1; r < 4; r++ {
			factor := m[r][i] / m[i][i]
			for c := i; c < 5; c++ {
				m[r][c] -= factor * m[i][c]
			}
		}
	}
	var x [4]float64
	for i := 3; i >= 0; i-- {
		x[i] = m[i][4]
		for c := i + 1; c < 4; c++ {
			x[i] -= m[i][c] * x[c]
		}
		x[i] /= m[i][i]
	}
	return x
}
