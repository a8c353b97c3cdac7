package main

import (
	"bytes"
	"fmt"
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/mat"
)

// oscillating is a sphere of radius 1 near one wall that oscillates, with
// kappa = alpha = (1-i) R/delta; delta is the penetration depth. It is the sphere of this package with
// the linearised Navier-Stokes flow in place of the Stokes flow. It serves to measure
// how far approximate forms of the drag are off: see testdata/oscillating.csv.
type oscillating struct {
	sphere
	kappa complex128
}

// modes is the flow that the wall adds: Z = e^(-kz) (total - viscous p(z)), and
// k L = dZ/dz; p(z) = 1 - exp(-(q-k) z), q = sqrt(k^2 + kappa^2).
type modes struct{ total, viscous complex128 }

// reflect returns the flow that the wall adds to a force (along, normal) at height z0.
// Viscous and pressure modes are kept as differences, so that nothing cancels.
func (o oscillating) reflect(k, d complex128, z0 float64, along, normal complex128) modes {
	decay := cmplx.Exp(-k * complex(z0, 0))
	p := -expm1(-d * complex(z0, 0))
	n := decay / (2 * d * (2*k + d))
	return modes{
		total:   n*k*p*along - n*k*(d+k*p)/(k+d)*normal,
		viscous: -k/d*n*((2*k+d)*p-d)*along + n*k*k/d*(d+(2*k+d)*p)/(k+d)*normal,
	}
}

// at evaluates the added flow at height z.
func (m modes) at(k, d complex128, z float64) (normal, along complex128) {
	decay := cmplx.Exp(-k * complex(z, 0))
	p := -expm1(-d * complex(z, 0))
	return decay * (m.total - m.viscous*p), -decay * (m.total + m.viscous*(d/k-(1+d/k)*p))
}

// parallel returns g = gamma(f)/(6 pi eta R) for motion parallel to the wall.
func (o oscillating) parallel() (g complex128, residual float64, err error) {
	m := newComplexMatrix(3*len(o.collocated), 3*len(o.sources))
	for j, source := range o.sources {
		for i, point := range o.collocated {
			for n := range o.azimuths {
				sin, cos := math.Sincos(2 * math.Pi * (float64(n) + 0.5) / float64(o.azimuths))
				x, y := source.radius*cos, source.radius*sin
				weight := complex(2*math.Pi*source.radius/float64(o.azimuths), 0)
				for c, force := range [3][3]float64{{1, 0, 0}, {2*cos*cos - 1, 2 * sin * cos, 0}, {0, 0, cos}} {
					front := o.stokeslet([3]float64{point.radius - x, -y, point.z - source.z}, force)
					side := o.stokeslet([3]float64{-x, point.radius - y, point.z - source.z}, force)
					m.add(3*i, 3*j+c, weight*(front[0]+side[0])/2)
					m.add(3*i+1, 3*j+c, weight*(front[0]-side[0])/2)
					m.add(3*i+2, 3*j+c, weight*front[2])
				}
			}
		}
	}
	for index, wave := range o.waves {
		k := complex(wave, 0)
		q := cmplx.Sqrt(k*k + o.kappa*o.kappa)
		d := o.kappa * o.kappa / (q + k)
		bessel, inner := besselAt(wave, o.collocated), besselAt(wave, o.sources)
		for j, source := range o.sources {
			scale := complex(o.waveWeights[index]*wave*source.radius, 0)
			j0, j1, j2 := complex(inner[j][0], 0), complex(inner[j][1], 0), complex(inner[j][2], 0)
			alongOnly := o.reflect(k, d, source.z, 1, 0)
			normalOnly := o.reflect(k, d, source.z, 0, 1)
			for i, point := range o.collocated {
				p0, p1, p2 := complex(bessel[i][0], 0), complex(bessel[i][1], 0), complex(bessel[i][2], 0)
				zAlong, lAlong := alongOnly.at(k, d, point.z)
				zNormal, lNormal := normalOnly.at(k, d, point.z)
				t := -cmplx.Exp(-q*complex(point.z+source.z, 0)) / (2 * q)
				l := [3]complex128{lAlong * j0, -lAlong * j2, lNormal * j1}
				tr := [3]complex128{t * j0, t * j2, 0}
				z := [3]complex128{zAlong * j0, -zAlong * j2, zNormal * j1}
				for c := range 3 {
					m.add(3*i, 3*j+c, scale*(l[c]+tr[c])/2*p0)
					m.add(3*i+1, 3*j+c, -scale*(l[c]-tr[c])/2*p2)
					m.add(3*i+2, 3*j+c, scale*z[c]*p1)
				}
			}
		}
	}
	return o.fit(m, 3, 0)
}

// perpendicular returns g for motion normal to the wall.
func (o oscillating) perpendicular() (g complex128, residual float64, err error) {
	m := newComplexMatrix(2*len(o.collocated), 2*len(o.sources))
	for j, source := range o.sources {
		for i, point := range o.collocated {
			for n := range o.azimuths {
				sin, cos := math.Sincos(2 * math.Pi * (float64(n) + 0.5) / float64(o.azimuths))
				weight := complex(2*math.Pi*source.radius/float64(o.azimuths), 0)
				for c, force := range [2][3]float64{{cos, sin, 0}, {0, 0, 1}} {
					u := o.stokeslet([3]float64{point.radius - source.radius*cos, -source.radius * sin, point.z - source.z}, force)
					m.add(2*i, 2*j+c, weight*u[0])
					m.add(2*i+1, 2*j+c, weight*u[2])
				}
			}
		}
	}
	for index, wave := range o.waves {
		k := complex(wave, 0)
		d := o.kappa * o.kappa / (cmplx.Sqrt(k*k+o.kappa*o.kappa) + k)
		bessel, inner := besselAt(wave, o.collocated), besselAt(wave, o.sources)
		for j, source := range o.sources {
			scale := complex(o.waveWeights[index]*wave*source.radius, 0)
			radial := o.reflect(k, d, source.z, complex(inner[j][1], 0), 0)
			normal := o.reflect(k, d, source.z, 0, complex(-inner[j][0], 0))
			for i, point := range o.collocated {
				for c, reflected := range []modes{radial, normal} {
					z, l := reflected.at(k, d, point.z)
					m.add(2*i, 2*j+c, scale*l*complex(bessel[i][1], 0))
					m.add(2*i+1, 2*j+c, -scale*z*complex(bessel[i][0], 0))
				}
			}
		}
	}
	return o.fit(m, 2, 1)
}

// stokeslet is the flow at r of an oscillating point force in unbounded fluid of
// viscosity 1 (Kim and Karrila, Microhydrodynamics, Sect. 6.2).
func (o oscillating) stokeslet(r, force [3]float64) (u [3]complex128) {
	square := r[0]*r[0] + r[1]*r[1] + r[2]*r[2]
	distance := math.Sqrt(square)
	s := o.kappa * complex(distance, 0)
	decay := cmplx.Exp(-s)
	isotropic := 2 * ((1+1/s+1/(s*s))*decay - 1/(s*s))
	radial := 2 * (3/(s*s) - (1+3/s+3/(s*s))*decay)
	along := (r[0]*force[0] + r[1]*force[1] + r[2]*force[2]) / square
	for i := range u {
		u[i] = (complex(force[i], 0)*isotropic + complex(r[i]*along, 0)*radial) / complex(8*math.Pi*distance, 0)
	}
	return u
}

// complexMatrix is a complex matrix C as the real [Re C, -Im C; Im C, Re C].
type complexMatrix struct {
	*mat.Dense
	rows, columns int
}

func newComplexMatrix(rows, columns int) complexMatrix {
	return complexMatrix{mat.NewDense(2*rows, 2*columns, nil), rows, columns}
}

func (m complexMatrix) add(i, j int, value complex128) {
	add(m.Dense, i, j, real(value))
	add(m.Dense, i+m.rows, j+m.columns, real(value))
	add(m.Dense, i+m.rows, j, imag(value))
	add(m.Dense, i, j+m.columns, -imag(value))
}

// fit finds the forces for unit velocity in component moving (of per components). The
// drag is their total without the inertia of the fluid that the sphere displaces,
// (2/9) alpha^2, which the point forces accelerate too.
func (o oscillating) fit(m complexMatrix, per, moving int) (g complex128, residual float64, err error) {
	target := mat.NewDense(2*m.rows, 1, nil)
	for i := moving; i < m.rows; i += per {
		target.Set(i, 0, 1)
	}
	var decomposition mat.SVD
	if !decomposition.Factorize(m.Dense, mat.SVDThin) {
		return cmplx.NaN(), math.NaN(), fmt.Errorf("h = %g, kappa = %g: no singular values", o.h, o.kappa)
	}
	var forces, flow mat.Dense
	decomposition.SolveTo(&forces, target, decomposition.Rank(1e-13))
	flow.Mul(m.Dense, &forces)
	for i := range 2 * m.rows {
		residual = math.Max(residual, math.Abs(flow.At(i, 0)-target.At(i, 0)))
	}
	var total complex128
	for j, source := range o.sources {
		force := complex(forces.At(per*j+moving, 0), forces.At(per*j+moving+m.columns, 0))
		total += complex(2*math.Pi*source.radius, 0) * force
	}
	return total/(6*math.Pi) - 2*o.kappa*o.kappa/9, residual, nil
}

// oscillatingTable writes the drag of an oscillating sphere near one wall as the
// CSV file against which the package tests its approximate forms.
func oscillatingTable() (string, error) {
	var text bytes.Buffer
	fmt.Fprintln(&text, "# Computed by go run ./gen (oscillating.go); slip on the sphere below 2e-5.")
	fmt.Fprintln(&text, "h_over_R,R_over_delta,parallel_re,parallel_im,perpendicular_re,perpendicular_im")
	for _, h := range []float64{1.5, 2, 3, 5, 20} {
		for _, ratio := range []float64{0.01, 0.03, 0.1, 0.3, 1, 3} {
			o := oscillating{newSphere(h, math.Inf(1), standard), complex(ratio, -ratio)}
			along, slip, err := o.parallel()
			if err != nil {
				return "", err
			}
			normal, otherSlip, err := o.perpendicular()
			if err != nil {
				return "", err
			}
			if slip = math.Max(slip, otherSlip); !(slip < 2e-5) {
				return "", fmt.Errorf("h = %g, R/delta = %g: slip of %g on the sphere", h, ratio, slip)
			}
			fmt.Fprintf(&text, "%g,%g,%.7f,%.7f,%.7f,%.7f\n", h, ratio, real(along), imag(along), real(normal), imag(normal))
		}
	}
	return text.String(), nil
}
