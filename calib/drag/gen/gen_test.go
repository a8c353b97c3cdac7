package main

import (
	"math"
	"math/cmplx"
	"testing"
)

// TestOneWall compares with the exact series for one wall: O'Neill 1964 (parallel), Brenner
// 1961 (perpendicular), recomputed to all digits shown. Tolerances: 1e-9 where the flow
// is smooth, 1e-5 at a gap of a twentieth of the radius.
func TestOneWall(t *testing.T) {
	for _, row := range []struct{ h, parallel, perpendicular, tolerance float64 }{
		{1.05, 2.5989632789810746, 21.585820436986122, 1e-5},
		{1.5, 1.5957066189809057, 3.2053903153526253, 1e-9},
		{2, 1.3827523824112231, 2.1255355667600386, 1e-9},
		{5, 1.1258610645109948, 1.2850865628620098, 1e-9},
		{20, 1.0289235452843544, 1.0595362120132048, 1e-9},
	} {
		s := newSphere(row.h, math.Inf(1), standard)
		check(t, s, sphere.parallel, row.parallel, row.tolerance)
		check(t, s, sphere.perpendicular, row.perpendicular, row.tolerance)
	}
}

// TestTwoWalls compares with an independent computation (fundamental solutions with the
// Green tensor of two walls, residual of the no-slip condition below 1.2e-5), motion
// parallel; the last two rows are coarser.
func TestTwoWalls(t *testing.T) {
	for _, row := range []struct{ h, depth, want, tolerance float64 }{
		{5, 10, 1.2461935, 1e-6},
		{10.0 / 3, 20.0 / 3, 1.4096006, 1e-6},
		{2.5, 5, 1.6068074, 1e-6},
		{2, 4, 1.8457557, 1e-6},
		{1 / 0.6, 2 / 0.6, 2.1394964768, 3e-4},
		{1 / 0.7, 2 / 0.7, 2.5124049510, 2e-3},
	} {
		check(t, newSphere(row.h, row.depth, standard), sphere.parallel, row.want, row.tolerance)
	}
}

// TestFirstOrder checks the coefficient of R/h, h to the nearer wall, in 1 - 1/lambda:
// 1.004121 at mid-plane and 0.652625 at a quarter (Faxen 1922; Happel and Brenner, Eqs 7-4.24 and
// 7-4.25 print 1.004 and 0.6526). The next term is of order 0.4 (R/h)^3.
func TestFirstOrder(t *testing.T) {
	const h = 400
	for depth, want := range map[float64]float64{2 * h: 1.004121, 4 * h: 0.652625} {
		lambda, _, err := newSphere(h, depth, standard).parallel()
		if err != nil {
			t.Fatal(err)
		}
		if got := h * (1 - 1/lambda); math.Abs(got-want) > 1e-5 {
			t.Errorf("coefficient at H/h = %g is %.7g, want %.7g", depth/h, got, want)
		}
	}
}

// TestConverged checks that half as many rings and nodes again move nothing that the
// table could hold.
func TestConverged(t *testing.T) {
	finer := fineness{sources: 10, azimuths: 96, panelNodes: 24}
	for _, at := range [][2]float64{{1.2, 6}, {2, 5}} {
		coarse, fine := newSphere(at[0], at[1], standard), newSphere(at[0], at[1], finer)
		for _, factor := range []func(sphere) (float64, float64, error){sphere.parallel, sphere.perpendicular} {
			want, _, err := factor(fine)
			if err != nil {
				t.Fatal(err)
			}
			check(t, coarse, factor, want, 1e-7)
		}
	}
}

// TestMirror checks the symmetry about mid-plane: rounding of the least squares.
func TestMirror(t *testing.T) {
	for _, factor := range []func(sphere) (float64, float64, error){sphere.parallel, sphere.perpendicular} {
		want, _, err := factor(newSphere(2.5, 8, standard))
		if err != nil {
			t.Fatal(err)
		}
		check(t, newSphere(5.5, 8, standard), factor, want, 1e-9)
	}
}

func check(t *testing.T, s sphere, factor func(sphere) (float64, float64, error), want, tolerance float64) {
	t.Helper()
	got, _, err := factor(s)
	if err != nil {
		t.Fatal(err)
	}
	if gap := got/want - 1; !(math.Abs(gap) <= tolerance) {
		t.Errorf("h = %g, H = %g: factor %.10g, want %.10g within %.0e: gap %.2e", s.h, s.depth, got, want, tolerance, gap)
	}
}

// TestChebyshev checks that coefficients of a known sum come back.
func TestChebyshev(t *testing.T) {
	// A polynomial of degree 2 in each variable comes back as its coefficients.
	values := matrix(3, 3)
	for i := range 3 {
		for j := range 3 {
			u, v := chebyshevNode(i, 3), chebyshevNode(j, 3)
			values[i][j] = 1 + 2*u + 3*(2*v*v-1) + 4*u*v
		}
	}
	got := chebyshev(values)
	want := [][]float64{{1, 0, 3}, {2, 4, 0}, {0, 0, 0}}
	for a := range 3 {
		for b := range 3 {
			if math.Abs(got[a][b]-want[a][b]) > 1e-14 {
				t.Errorf("coefficient %d %d = %g, want %g", a, b, got[a][b], want[a][b])
			}
		}
	}
}

// TestOscillatingBulk checks the oscillating sphere far from the wall against the exact
// 1 + alpha + alpha^2/9 (Stokes 1851); the wall, (9/16) (R/h) times a reaction of 2e-5, is worth 1e-7 there.
func TestOscillatingBulk(t *testing.T) {
	alpha := complex(0.3, -0.3)
	o := oscillating{newSphere(300, math.Inf(1), standard), alpha}
	want := 1 + alpha + alpha*alpha/9
	for _, factor := range []func(oscillating) (complex128, float64, error){oscillating.parallel, oscillating.perpendicular} {
		got, _, err := factor(o)
		if err != nil || cmplx.Abs(got-want) > 3e-7 {
			t.Errorf("oscillating sphere in bulk: %.9g, %v, want %.9g", got, err, want)
		}
	}
}

// TestOscillatingStatic checks the limit of low frequency near a wall against the exact
// series (O'Neill 1964, Brenner 1961): what is left is of order alpha^2 = 2e-6.
func TestOscillatingStatic(t *testing.T) {
	o := oscillating{newSphere(2, math.Inf(1), standard), complex(1e-3, -1e-3)}
	for _, row := range []struct {
		factor func(oscillating) (complex128, float64, error)
		want   complex128
	}{{oscillating.parallel, 1.3827523824}, {oscillating.perpendicular, 2.1255355668}} {
		got, _, err := row.factor(o)
		if err != nil || cmplx.Abs(got-row.want) > 2e-5 {
			t.Errorf("oscillating sphere at low frequency: %.9g, %v, want %.9g", got, err, row.want)
		}
	}
}

// TestReactions compares with an independent Hankel integral of the unsteady flow of a point
// force parallel to a wall, and with the steady limit 1 of both directions.
func TestReactions(t *testing.T) {
	for y, want := range map[float64]complex128{
		1.0 / 30: complex(0.9408630016634141, 0.05494518575673992),
		1.0 / 3:  complex(0.4848345652737712, 0.26528478282193924),
		2:        complex(0.042369874196558834, 0.09242076322672572),
	} {
		if got, _ := reactions(y); cmplx.Abs(got-want) > 1e-9 {
			t.Errorf("parallel reaction at h/delta = %g = %.10g, want %.10g", y, got, want)
		}
	}
	parallel, perpendicular := reactions(1e-9)
	if cmplx.Abs(parallel-1) > 1e-8 || cmplx.Abs(perpendicular-1) > 1e-8 {
		t.Errorf("steady reactions %v and %v, want 1", parallel, perpendicular)
	}
}
