package relaxation

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// Moments of a record of 1000 samples of unit variance at 1 kHz; closed forms of the
// Gaussian process, checked by matrix trace and simulation where they were derived.
func TestSampleVarianceValues(t *testing.T) {
	for _, c := range []struct{ corner, ofMean, about, known, variance float64 }{
		{100, 0.003282233370355873, 0.9967177666296442, 0.0035891277421433664, 0.0035675671023348435},
		{10, 0.03133502062048886, 0.9686649793795111, 0.03161989561131925, 0.029641044638599054},
		{1, 0.26774511366856296, 0.7322548863314371, 0.29298420071734, 0.14333294382513392},
	} {
		p := Process{Corner: c.corner, Variance: 1, Interval: 1e-3}
		near := func(what string, got, want float64) {
			if relativeGap(got, want) > 1e-11 { // sums of 1e3 terms, cancelling by up to 20
				t.Errorf("fc = %g: %s = %.14g, want %.14g", c.corner, what, got, want)
			}
		}
		mean, variance := p.SampleVariance(1000, RemovedMean)
		near("expectation", mean, c.about)
		near("variance", variance, c.variance)
		near("variance of the mean", 1-mean, c.ofMean)
		mean, variance = p.SampleVariance(1000, RemovedNothing)
		near("expectation about the known mean", mean, 1)
		near("variance about the known mean", variance, c.known)
	}
}

// SampleVariance against tr(P C)/N and 2 tr(P C P C)/N^2 with dense matrices. The
// constant is even and the line odd about the middle, so that C does not mix them
// and the formula is exact for the line too.
func TestSampleVarianceIsTrace(t *testing.T) {
	const n = 90
	for i, p := range processes {
		c := mat.NewDense(n, n, nil)
		for j := range n {
			for k := range n {
				c.Set(j, k, p.Autocovariance(j-k))
			}
		}
		for removed := RemovedNothing; removed <= RemovedLine; removed++ {
			// the projection from the normal equations of 1 and t, not from direction
			proj := mat.NewDense(n, n, nil)
			for j := range n {
				proj.Set(j, j, 1)
			}
			if removed > RemovedNothing {
				reg := mat.NewDense(n, int(removed), nil)
				for j := range n {
					reg.Set(j, 0, 1)
					if removed == RemovedLine {
						reg.Set(j, 1, float64(j))
					}
				}
				var normal, inv, half, hat mat.Dense
				normal.Mul(reg.T(), reg)
				if err := inv.Inverse(&normal); err != nil {
					t.Fatal(err)
				}
				half.Mul(reg, &inv)
				hat.Mul(&half, reg.T())
				proj.Sub(proj, &hat)
			}
			var pc, pcpc mat.Dense
			pc.Mul(proj, c)
			pcpc.Mul(&pc, &pc)
			mean, variance := p.SampleVariance(n, removed)
			wantMean, want := mat.Trace(&pc)/n, 2*mat.Trace(&pcpc)/n/n
			// the inverse of the normal matrix of 1, t of 90 samples loses four digits
			if relativeGap(mean, wantMean) > 1e-11 || relativeGap(variance, want) > 1e-11 {
				t.Errorf("process %d, removed %d: %.13g, %.13g, want %.13g, %.13g (traces)", i, removed, mean, variance, wantMean, want)
			}
		}
	}
}

// Long records are coarse-grained; the documented bounds of that are 2e-4 of u'Cu below
// 1e4 relaxation times and 1e-3 above.
func TestLongRecordsAreCoarseGrained(t *testing.T) {
	const n = 1<<16 + 15 // in steps of 16, 15 are left over
	for _, c := range []struct{ corner, bound float64 }{
		{1e-6, 2e-4}, {1e-5, 2e-4}, {1e-4, 2e-4}, {1e-3, 2e-4}, {0.01, 2e-4}, {0.1, 1e-3},
	} {
		p := Process{Corner: c.corner, Variance: 1, Noise: 0.3, Interval: 1, Exposure: 0.5}
		b, _ := BlurCovariance(2 * math.Pi * p.Corner * p.Exposure)
		vb, white := p.Variance*b, p.RecordedVariance()-p.Variance*b
		for _, d := range []Removed{RemovedMean, RemovedLine} {
			got, got2 := p.project(d, n, vb, white)
			u := direction(d, n)
			cu := toeplitz(u, p.Decay(), vb, white)
			want, want2 := dot(u, cu), dot(cu, cu)
			if relativeGap(got, want) > c.bound || relativeGap(got2, want2) > 2*c.bound {
				t.Errorf("fc/fs = %g, removed %d: u'Cu, u'C^2u = %.9g, %.9g, want %.9g, %.9g (all samples)", c.corner, d, got, got2, want, want2)
			}
		}
	}
}

// A record of one value has nothing left; of white noise (1 - 1/N) q and 2 q^2 (N-1)/N^2.
func TestSampleVarianceLimits(t *testing.T) {
	p := Process{Corner: 5, Variance: 1e-300, Noise: 2, Interval: 1}
	mean, variance := p.SampleVariance(10, RemovedMean)
	if math.Abs(mean-1.8) > 1e-14 || math.Abs(variance-2*4*9.0/100) > 1e-14 {
		t.Errorf("white noise: %g, %g, want 1.8, 0.72", mean, variance)
	}
	p = processes[1]
	one, two := p, p
	two.Variance, two.Noise = 4*p.Variance, 4*p.Noise
	m1, v1 := one.SampleVariance(50, RemovedLine)
	m2, v2 := two.SampleVariance(50, RemovedLine)
	if relativeGap(m2, 4*m1) > 1e-14 || relativeGap(v2, 16*v1) > 1e-14 {
		t.Errorf("doubled positions: %g, %g, want %g, %g", m2, v2, 4*m1, 16*v1)
	}
}

// The closed form of the removed directions against the sums themselves, from the fewest relaxation times at which it is used.
// 1e-9: rounding of some thousand terms, times (1/fewestSpans)^-2 of cancellation.
func TestProjectIsTheSum(t *testing.T) {
	for _, n := range []int{31, 1000, 5000} {
		for _, spans := range []float64{fewestSpans, 60, 1000, 20000} {
			p := Process{Corner: 1, Interval: spans / float64(n) / (2 * math.Pi)}
			c := math.Exp(-spans / float64(n))
			for _, d := range []Removed{RemovedMean, RemovedLine} {
				for _, white := range []float64{0, 0.3} {
					u := direction(d, n)
					cu := toeplitz(u, c, 0.9, white)
					one, two := p.project(d, n, 0.9, white)
					if relativeGap(one, dot(u, cu)) > 1e-9 || relativeGap(two, dot(cu, cu)) > 1e-9 {
						t.Errorf("%v, %d samples, %g spans, white %g: %.12g and %.12g, want %.12g and %.12g", d, n, spans, white, one, two, dot(u, cu), dot(cu, cu))
					}
				}
			}
		}
	}
}
