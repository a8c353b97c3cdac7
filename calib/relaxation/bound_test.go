package relaxation

import (
	"math"
	"testing"
)

// dragFree are the standard deviations of ln fc, ln D and ln V by the information over blocks, with
// the noise known: ln D = ln fc + ln V + const.
func dragFree(t *testing.T, f Matrix) (corner, diffusion, variance float64) {
	t.Helper()
	pr := Problem{Directions: []Parameters{{1, 0, 0}, {0, 1, 0}}}
	total, data, err := pr.Covariance(f)
	if err != nil {
		t.Fatal(err)
	}
	if total != data { // no prior: all is due to the data
		for a := range total {
			for b := range total {
				if math.Abs(total[a][b]-data[a][b]) > 1e-12*math.Sqrt(total[a][a]*total[b][b]) {
					t.Errorf("covariance %v, of the data %v: want the same without priors", total, data)
				}
			}
		}
	}
	sd := func(w Parameters) float64 { return math.Sqrt(total.Form(w, w)) }
	return sd(Parameters{1, 0, 0}), sd(Parameters{1, 1, 0}), sd(Parameters{0, 1, 0})
}

// Cramer-Rao bounds of N samples of known mean: sd ln fc = sqrt((1-c^2)/N)/(c |ln c|), Var ln D =
// 2/N + ((1-c^2)/N) (1/(c ln c) + 2c/(1-c^2))^2, Var ln V = (2/N)(1+c^2)/(1-c^2), from the
// transition densities of the process; the values for N = 1000 were computed from the
// exact Gaussian information. The sum over frequencies leaves out k = 0, where d ln P is
// (-1, 1): that raises Var ln V by 2/(pi fc T) of itself, its root by half of that; the ends
// are of the same order, and 1.5/(pi fc T) covers both.
func TestCramerRao(t *testing.T) {
	for _, c := range []struct{ corner, dt, sdCorner, sdDiffusion, sdVariance float64 }{
		{100, 1e-3, 0.07980158518465987, 0.059963769205922016, 0.059904064160823174},
		{500, 1e-4, 0.0940676526724567, 0.0520062707134728, 0.08098932053033094},
		{500, 1e-3, 0.2328289756735052, 0.2344004555643049, 0.04480486840237773},
	} {
		const n = 1000
		b := NewBlocks(make([]float64, n/2+1), n, false, nil)
		fc, d, v := dragFree(t, fisher(b, 0, 1, Parameters{math.Log(c.corner * c.dt), 0, 0}))
		bound := 1.5/(math.Pi*c.corner*c.dt*n) + 2e-4 // and the block width
		for _, q := range []struct {
			what      string
			got, want float64
		}{{"ln fc", fc, c.sdCorner}, {"ln D", d, c.sdDiffusion}, {"ln V", v, c.sdVariance}} {
			if relativeGap(q.got, q.want) > bound {
				t.Errorf("fc = %g Hz, dt = %g s: sd(%s) = %.7f, want %.7f (Cramer-Rao)", c.corner, c.dt, q.what, q.got, q.want)
			}
		}
	}
	for _, x := range []float64{0.01, 0.1, 0.4} {
		const n = 1000000
		c := math.Exp(-2 * math.Pi * x)
		b := NewBlocks(make([]float64, n/2+1), n, true, nil)
		fc, d, v := dragFree(t, fisher(b, 0, 1, Parameters{math.Log(x), 0, 0}))
		wantFC := math.Sqrt((1-c*c)/n) / (c * math.Abs(math.Log(c)))
		lever := 1/(c*math.Log(c)) + 2*c/(1-c*c)
		wantD := math.Sqrt(2.0/n + (1-c*c)/n*lever*lever)
		wantV := math.Sqrt(2.0 / n * (1 + c*c) / (1 - c*c))
		for _, q := range []struct {
			what      string
			got, want float64
		}{{"ln fc", fc, wantFC}, {"ln D", d, wantD}, {"ln V", v, wantV}} {
			if relativeGap(q.got, q.want) > 3e-4 { // 0.008 % of information lost to blocks; ends 1/(pi fc T) < 1e-4
				t.Errorf("fc/fs = %g: sd(%s) = %.8g, want %.8g (closed form)", x, q.what, q.got, q.want)
			}
		}
	}
}

// Standard errors of a fit in a band without aliasing, from the continuum formulas of
// Berg-Sorensen and Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594 (recomputed); the discrete
// sum differs by half a frequency step at either end, and at 200 times the band's upper end the
// alias part of the spectrum is below 1e-4.
func TestBandStandardErrors(t *testing.T) {
	for _, c := range []struct{ corner, duration, low, high, sdCorner, sdDiffusion float64 }{
		{500, 10, 10, 5000, 0.009499506428415662, 0.005260384887797385},
		{500, 10, 110, 1000, 0.022968328112897982, 0.025310339768123396},
		{100, 1, 5, 1000, 0.06854044780033317, 0.03726095183706366},
		{2000, 10, 100, 8000, 0.0062643707033998115, 0.005388406281933427},
	} {
		rate := 40 * c.high
		n := int(c.duration * rate)
		b := NewBlocks(make([]float64, n/2+1), n, false, func(k int) bool {
			f := float64(k) / c.duration
			return f < c.low || f > c.high
		})
		fc, d, _ := dragFree(t, fisher(b, 0, 1, Parameters{math.Log(c.corner / rate), 0, 0}))
		// half a step of 1/T at either end, against a band that carries its information over fc
		bound := 1/(c.corner*c.duration) + 3e-3
		if relativeGap(fc, c.sdCorner) > bound || relativeGap(d, c.sdDiffusion) > bound {
			t.Errorf("fc = %g Hz, %g to %g Hz: sd(ln fc), sd(ln D) = %.6f, %.6f, want %.6f, %.6f", c.corner, c.low, c.high, fc, d, c.sdCorner, c.sdDiffusion)
		}
	}
}
