package relaxation

import (
	"errors"
	"fmt"
	"math"
)

// FreeOptions say how the motion of a free bead was recorded.
type FreeOptions struct {
	Interval   float64 // sampling interval dt [s]
	Exposure   float64 // of each sample, W [s], at most the interval
	NoiseKnown bool    // the localisation noise is stated; else it is fitted
	Noise      float64 // q, its variance [m2]
	NoiseU     float64 // standard uncertainty of q [m2]; 0 is exact
	Brief      bool    // leave FreeFit.Intervals out, which costs most of the time
}

// FreeFit is the outcome of FitFree, in SI units.
type FreeFit struct {
	Diffusion float64 // D [m2/s]
	Noise     float64 // q [m2]; negative values are possible when it was fitted
	NoiseSD   float64 // standard uncertainty of q [m2], prior knowledge of it included
	Speed     float64 // mean velocity v [m/s]
	SpeedSD   float64 // [m/s]
	LogSD     float64 // standard uncertainty of ln D by the record alone
	LogTotal  float64 // with that of a stated noise
	Intervals Offsets // of ln D, by the profile likelihood; stated noise and its uncertainty included
	Count     int     // displacements used
	Value     float64 // log-likelihood at the maximum, up to a constant of the record, prior knowledge of the noise included
}

// ErrFewDisplacements tells that a record holds too few displacements.
var ErrFewDisplacements = errors.New("too few displacements of neighbouring samples")

// leastDisplacements leaves a relative uncertainty of D of about 35 % at best.
const leastDisplacements = 16

// FitFree estimates the diffusion coefficient of a free bead from its positions x [m], NaN where missing.
//
// The displacements between neighbouring samples of a bead that diffuses and drifts with a constant velocity,
// averaged over an exposure W and with white localisation noise of variance q, are Gaussian with the covariance
//
//	r(0) = 2 D (dt - W/3) + 2 q,   r(1) = D W/3 - q,   r(n > 1) = 0
//
// (Berglund, Phys. Rev. E 82 (2010) 011917), which is the second difference of the mean-square displacement
// 2 D (t - W/3) + 2 q. Their exact likelihood, restricted to what does not depend on the velocity (Patterson and Thompson,
// Biometrika 58 (1971) 545), is computed by innovations and maximised over D and q by Fisher scoring. Each run of samples without a gap
// counts as a record of its own with the same velocity.
//
// The error is ErrFewDisplacements, or ErrNoMaximum when noise hides the motion.
func FitFree(x []float64, o FreeOptions) (FreeFit, error) {
	f := newFreeProblem(x, o)
	if f.count < leastDisplacements {
		return FreeFit{}, fmt.Errorf("%w: %d, at least %d are needed", ErrFewDisplacements, f.count, leastDisplacements)
	}
	if !(f.scale > 0) {
		return FreeFit{}, fmt.Errorf("%w: the position does not change", ErrNoMaximum)
	}
	at, state, err := f.search(f.start(), [2]bool{true, !f.fixed})
	if err != nil {
		return FreeFit{}, err
	}
	return f.result(at, state)
}

// freeProblem holds displacements in units of their rms. The parameters are the variance that
// diffusion adds in one interval, 2 D dt, and the noise q, both over scale.
type freeProblem struct {
	runs         [][]float64
	count        int
	scale        float64 // m2
	blur         float64 // W/dt
	fixed        bool
	prior, weigh float64 // of the noise, over scale; weigh is the inverse variance, 0 for none
	o            FreeOptions
}

func newFreeProblem(x []float64, o FreeOptions) *freeProblem {
	f := &freeProblem{o: o, blur: o.Exposure / o.Interval}
	var run []float64
	total := 0.0
	end := func() {
		if len(run) > 0 {
			f.runs = append(f.runs, run)
		}
		run = nil
	}
	for i := 1; i < len(x); i++ {
		d := x[i] - x[i-1]
		if d != d {
			end()
			continue
		}
		run = append(run, d)
		total += d * d
		f.count++
	}
	end()
	f.scale = total / math.Max(1, float64(f.count))
	for _, r := range f.runs {
		for i := range r {
			r[i] /= math.Sqrt(f.scale)
		}
	}
	if o.NoiseKnown {
		f.prior = o.Noise / f.scale
		if f.fixed = o.NoiseU == 0; !f.fixed {
			f.weigh = f.scale * f.scale / (o.NoiseU * o.NoiseU)
		}
	}
	return f
}

// covariance returns r(0) and r(1) at the parameters; both are linear in them.
func (f *freeProblem) covariance(p [2]float64) (r0, r1 float64) {
	s0, s1 := f.slopes()
	return s0[0]*p[0] + s0[1]*p[1], s1[0]*p[0] + s1[1]*p[1]
}

func (f *freeProblem) slopes() (s0, s1 [2]float64) {
	return [2]float64{1 - f.blur/3, 2}, [2]float64{f.blur / 6, -1}
}

// inside tells that the spectrum r(0) + 2 r(1) cos is positive at both of its ends.
func (f *freeProblem) inside(p [2]float64) bool {
	r0, r1 := f.covariance(p)
	return p[0] > 0 && r0+2*r1 > 0 && r0-2*r1 > 0
}

func (f *freeProblem) start() [2]float64 {
	if f.o.NoiseKnown {
		d := (1 - 2*f.prior) / (1 - f.blur/3)
		return [2]float64{math.Max(d, 0.05), f.prior}
	}
	// the moments of the displacements, if they are possible
	c0, c1, n1 := 0.0, 0.0, 0
	for _, r := range f.runs {
		for i, v := range r {
			c0 += v * v
			if i > 0 {
				c1 += v * r[i-1]
				n1++
			}
		}
	}
	c0 /= float64(f.count)
	c1 /= math.Max(1, float64(n1))
	d := c0 + 2*c1
	p := [2]float64{d, d*f.blur/6 - c1}
	if p[0] < 0.02 || !f.inside(p) {
		p = [2]float64{0.5, 0.25}
	}
	return p
}

// freeState is the likelihood at a point.
type freeState struct {
	value    float64
	gradient [2]float64
	velocity float64 // mean displacement, in units of the root of scale
	weight   float64 // its inverse variance
}

// logEvery is the number of innovation variances whose product is taken before its logarithm, which costs more than all the
// rest: they are of order one, and far from what overflows at this power.
const logEvery = 16

// evaluate runs the innovations of the displacements and of a constant through the same filter.
func (f *freeProblem) evaluate(p [2]float64) freeState {
	r0, r1 := f.covariance(p)
	s0, s1 := f.slopes()
	var a, b, c, log float64 // e_d^2/v, e_d e_u/v, e_u^2/v, ln v
	var da, db, dc, dlog [2]float64
	for _, run := range f.runs {
		v, ed, eu := r0, 0.0, 0.0
		product := 1.0 // of the variances since the last logarithm
		dv, ded, deu := s0, [2]float64{}, [2]float64{}
		for i, d := range run {
			gain := 0.0
			var dgain [2]float64
			if i > 0 {
				gain = r1 / v
				for k := range dgain {
					dgain[k] = (s1[k] - gain*dv[k]) / v
					dv[k] = s0[k] - s1[k]*gain - r1*dgain[k]
					ded[k] = -dgain[k]*ed - gain*ded[k]
					deu[k] = -dgain[k]*eu - gain*deu[k]
				}
				v = r0 - r1*gain
			}
			ed, eu = d-gain*ed, 1-gain*eu
			a += ed * ed / v
			b += ed * eu / v
			c += eu * eu / v
			if !(v > 0) { // no covariance
				log = math.NaN()
			}
			if product *= v; i%logEvery == 0 {
				log, product = log+math.Log(product), 1
			}
			for k := range dv {
				da[k] += (2*ed*ded[k] - ed*ed*dv[k]/v) / v
				db[k] += (ded[k]*eu + ed*deu[k] - ed*eu*dv[k]/v) / v
				dc[k] += (2*eu*deu[k] - eu*eu*dv[k]/v) / v
				dlog[k] += dv[k] / v
			}
		}
		log += math.Log(product)
	}
	s := freeState{velocity: b / c, weight: c, value: -(log + math.Log(c) + a - b*b/c) / 2}
	for k := range s.gradient {
		s.gradient[k] = -(dlog[k] + dc[k]/c + da[k] - 2*b/c*db[k] + b*b/(c*c)*dc[k]) / 2
	}
	if f.weigh > 0 {
		d := p[1] - f.prior
		s.value -= d * d * f.weigh / 2
		s.gradient[1] -= d * f.weigh
	}
	return s
}

// information is the Fisher information of the displacements, by the eigenvalues r(0) + 2 r(1) cos(k pi/(n+1)) of
// each run's covariance matrix, less the share of one for the velocity.
func (f *freeProblem) information(p [2]float64) (m [2][2]float64) {
	r0, r1 := f.covariance(p)
	s0, s1 := f.slopes()
	for _, run := range f.runs {
		n := len(run)
		for k := 1; k <= n; k++ {
			c := 2 * math.Cos(float64(k)*math.Pi/float64(n+1))
			lambda := r0 + c*r1
			g := [2]float64{(s0[0] + c*s1[0]) / lambda, (s0[1] + c*s1[1]) / lambda}
			for i := range g {
				for j := range g {
					m[i][j] += g[i] * g[j] / 2
				}
			}
		}
	}
	share := float64(f.count-1) / float64(f.count)
	for i := range m {
		for j := range m {
			m[i][j] *= share
		}
	}
	return m
}
