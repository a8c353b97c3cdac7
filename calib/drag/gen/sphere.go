package main

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/integrate/quad"
	"gonum.org/v1/gonum/mat"
)

// fineness says how many rings and nodes are laid. The nearer a wall, the nearer
// to the surface the forces must sit, and the more rings it takes: numbers of rings go
// with 1/(1 - sourceRadius).
type fineness struct {
	sources    float64 // rings of point forces, times 1 - sourceRadius
	azimuths   float64 // points along a ring in unbounded fluid, times 1 - sourceRadius
	panelNodes int     // Gauss nodes in each panel of wave number
}

// standard moves no drag factor by more than 2e-6 when it is made half as fine
// again (TestConverged). There are twice as many rings of matched points as of forces.
var standard = fineness{sources: 7, azimuths: 64, panelNodes: 16}

// ring is a circle about the axis normal to the walls, through the sphere's centre.
type ring struct{ radius, z, weight float64 }

// rings puts n rings on a sphere of the given radius about height h, at Gauss
// nodes of the cosine of the polar angle; weight is the share of the area.
func rings(n int, radius, h float64) []ring {
	nodes, weights := make([]float64, n), make([]float64, n)
	quad.Legendre{}.FixedLocations(nodes, weights, -1, 1)
	out := make([]ring, n)
	for i, c := range nodes {
		out[i] = ring{radius * math.Sqrt(1-c*c), h + radius*c, weights[i] / 2}
	}
	return out
}

// sourceRadius is where the forces sit: half-way between the surface and the
// point on which the repeated images of the centre in wall and sphere converge.
func sourceRadius(gapHeight float64) float64 {
	return (1 + gapHeight - math.Sqrt(gapHeight*gapHeight-1)) / 2
}

// sphere is a sphere of radius 1 between walls, centre at height h.
type sphere struct {
	walls
	h                   float64
	sources, collocated []ring
	azimuths            int
	waves, waveWeights  []float64 // nodes and weights of the integral over k
}

func newSphere(h, depth float64, fine fineness) sphere {
	nearest := math.Min(h, depth-h)
	inner := sourceRadius(nearest)
	count := int(math.Ceil(fine.sources / (1 - inner)))
	s := sphere{
		walls:      walls{depth},
		h:          h,
		sources:    rings(count, inner, h),
		collocated: rings(2*count, 1, h),
		azimuths:   int(math.Ceil(fine.azimuths / (1 - inner))),
	}
	// The slowest decay is from the lowest source over the wall to the lowest point.
	largest := 44 / (2*nearest - 1 - inner)
	scale := depth
	if math.IsInf(depth, 1) {
		scale = 100 * h
	}
	s.panels(largest, scale, fine.panelNodes)
	return s
}

// panels lays Gauss nodes on (0, 1/(4 scale)) and on octaves from there up to largest.
func (s *sphere) panels(largest, scale float64, nodes int) {
	x, w := make([]float64, nodes), make([]float64, nodes)
	for low, high := 0.0, 0.25/scale; low < largest; low, high = high, 2*high {
		quad.Legendre{}.FixedLocations(x, w, low, math.Min(high, largest))
		s.waves = append(s.waves, x...)
		s.waveWeights = append(s.waveWeights, w...)
	}
}

// parallel returns the drag factor for motion along x, parallel to the walls.
//
// Point forces lie on rings inside the sphere, with density S + D cos 2 phi along x,
// D sin 2 phi along y and C cos phi along z, the only dependence on azimuth that such a
// motion has. S, D and C are those that give no slip on the surface, in the sense of least
// squares; the drag is their total along x.
func (s sphere) parallel() (factor, residual float64, err error) {
	m := mat.NewDense(3*len(s.collocated), 3*len(s.sources), nil)
	for j, source := range s.sources {
		for i, point := range s.collocated {
			direct := directParallel(source, point, s.azimuths)
			for r := range 3 {
				for c := range 3 {
					m.Set(3*i+r, 3*j+c, direct[r][c])
				}
			}
		}
	}
	for q, k := range s.waves {
		weight := s.waveWeights[q] * k / (2 * math.Pi)
		bessel := besselAt(k, s.collocated)
		for j, source := range s.sources {
			ringWeight := 2 * math.Pi * source.radius
			j0, j1, j2 := math.J0(k*source.radius), math.J1(k*source.radius), math.Jn(2, k*source.radius)
			alongOnly := s.reflect(k, source.z, 1, 0)
			normalOnly := s.reflect(k, source.z, 0, 1)
			for i, point := range s.collocated {
				p0, p1, p2 := bessel[i][0], bessel[i][1], bessel[i][2]
				zAlong, lAlong := s.at(alongOnly, k, point.z)
				zNormal, lNormal := s.at(normalOnly, k, point.z)
				t := s.transverse(k, source.z, point.z)
				// Longitudinal and transverse flow for unit S, D and C.
				l := [3]float64{lAlong * j0, -lAlong * j2, lNormal * j1}
				tr := [3]float64{t * j0, t * j2, 0}
				z := [3]float64{zAlong * j0, -zAlong * j2, zNormal * j1}
				for c := range 3 {
					scale := weight * ringWeight
					add(m, 3*i, 3*j+c, scale*(l[c]+tr[c])/2*p0)
					add(m, 3*i+1, 3*j+c, -scale*(l[c]-tr[c])/2*p2)
					add(m, 3*i+2, 3*j+c, scale*z[c]*p1)
				}
			}
		}
	}
	return s.fit(m, 3, 0)
}

// perpendicular returns the drag factor for motion along z, normal to the walls:
// as parallel, with forces A along the radius and C along z and no dependence on azimuth.
func (s sphere) perpendicular() (factor, residual float64, err error) {
	m := mat.NewDense(2*len(s.collocated), 2*len(s.sources), nil)
	for j, source := range s.sources {
		for i, point := range s.collocated {
			direct := directPerpendicular(source, point, s.azimuths)
			for r := range 2 {
				for c := range 2 {
					m.Set(2*i+r, 2*j+c, direct[r][c])
				}
			}
		}
	}
	for q, k := range s.waves {
		weight := s.waveWeights[q] * k / (2 * math.Pi)
		bessel := besselAt(k, s.collocated)
		for j, source := range s.sources {
			ringWeight := 2 * math.Pi * source.radius
			radial := s.reflect(k, source.z, math.J1(k*source.radius), 0)
			normal := s.reflect(k, source.z, 0, -math.J0(k*source.radius))
			for i, point := range s.collocated {
				p0, p1 := bessel[i][0], bessel[i][1]
				for c, reflected := range []longitudinal{radial, normal} {
					z, l := s.at(reflected, k, point.z)
					add(m, 2*i, 2*j+c, weight*ringWeight*l*p1)
					add(m, 2*i+1, 2*j+c, -weight*ringWeight*z*p0)
				}
			}
		}
	}
	return s.fit(m, 2, 1)
}

// besselAt returns J0, J1 and J2 of k times the radius of each ring.
func besselAt(k float64, points []ring) [][3]float64 {
	out := make([][3]float64, len(points))
	for i, point := range points {
		x := k * point.radius
		out[i] = [3]float64{math.J0(x), math.J1(x), math.Jn(2, x)}
	}
	return out
}

// fit finds the forces for unit velocity in component moving (of per components) and returns
// the drag factor and the largest departure from no slip.
func (s sphere) fit(m *mat.Dense, per, moving int) (factor, residual float64, err error) {
	rows, columns := m.Dims()
	wanted := mat.NewDense(rows, 1, nil)
	weighted := mat.DenseCopyOf(m)
	target := mat.NewDense(rows, 1, nil)
	for i := range rows {
		w := math.Sqrt(s.collocated[i/per].weight)
		if i%per == moving {
			wanted.Set(i, 0, 1)
			target.Set(i, 0, w)
		}
		for c := range columns {
			weighted.Set(i, c, w*m.At(i, c))
		}
	}
	var decomposition mat.SVD
	if !decomposition.Factorize(weighted, mat.SVDThin) {
		return math.NaN(), math.NaN(), fmt.Errorf("h = %g, depth = %g: no singular values", s.h, s.depth)
	}
	// Singular values below 1e-13 of the largest are rounding.
	var forces, flow mat.Dense
	decomposition.SolveTo(&forces, target, decomposition.Rank(1e-13))
	flow.Mul(m, &forces)
	for i := range rows {
		residual = math.Max(residual, math.Abs(flow.At(i, 0)-wanted.At(i, 0)))
	}
	total := 0.0
	for j, source := range s.sources {
		total += 2 * math.Pi * source.radius * forces.At(per*j+moving, 0)
	}
	return total / (6 * math.Pi), residual, nil
}

func add(m *mat.Dense, i, j int, value float64) { m.Set(i, j, m.At(i, j)+value) }

// directParallel is the flow (S, D, C) at a point of the unit rings S, D and C in
// unbounded fluid, by the trapezoidal rule.
func directParallel(source, point ring, azimuths int) (out [3][3]float64) {
	for n := range azimuths {
		phi := 2 * math.Pi * (float64(n) + 0.5) / float64(azimuths)
		sin, cos := math.Sincos(phi)
		x, y := source.radius*cos, source.radius*sin
		forces := [3][3]float64{{1, 0, 0}, {2*cos*cos - 1, 2 * sin * cos, 0}, {0, 0, cos}}
		for c, force := range forces {
			front := stokeslet([3]float64{point.radius - x, -y, point.z - source.z}, force)
			side := stokeslet([3]float64{-x, point.radius - y, point.z - source.z}, force)
			weight := 2 * math.Pi * source.radius / float64(azimuths)
			out[0][c] += weight * (front[0] + side[0]) / 2
			out[1][c] += weight * (front[0] - side[0]) / 2
			out[2][c] += weight * front[2]
		}
	}
	return out
}

// directPerpendicular is the flow (radial, normal) of the unit rings A and C.
func directPerpendicular(source, point ring, azimuths int) (out [2][2]float64) {
	for n := range azimuths {
		phi := 2 * math.Pi * (float64(n) + 0.5) / float64(azimuths)
		sin, cos := math.Sincos(phi)
		for c, force := range [2][3]float64{{cos, sin, 0}, {0, 0, 1}} {
			u := stokeslet([3]float64{point.radius - source.radius*cos, -source.radius * sin, point.z - source.z}, force)
			weight := 2 * math.Pi * source.radius / float64(azimuths)
			out[0][c] += weight * u[0]
			out[1][c] += weight * u[2]
		}
	}
	return out
}

// stokeslet is the flow at r of a point force in unbounded fluid of viscosity 1.
func stokeslet(r, force [3]float64) (u [3]float64) {
	square := r[0]*r[0] + r[1]*r[1] + r[2]*r[2]
	distance := math.Sqrt(square)
	along := (r[0]*force[0] + r[1]*force[1] + r[2]*force[2]) / square
	for i := range u {
		u[i] = (force[i] + r[i]*along) / (8 * math.Pi * distance)
	}
	return u
}
