package relaxation

import "math"

// freeIterations is far above the handful that a regular record takes.
const freeIterations = 100

// search is Fisher scoring with step halving over the free parameters.
func (f *freeProblem) search(p [2]float64, free [2]bool) ([2]float64, freeState, error) {
	s := f.evaluate(p)
	for range freeIterations {
		m := f.information(p)
		m[1][1] += f.weigh
		step := solveTwo(m, s.gradient, free)
		gain := step[0]*s.gradient[0] + step[1]*s.gradient[1]
		if math.Abs(gain) < settled {
			return p, s, nil
		}
		moved := false
		for shrink := 1.0; shrink > 1e-6; shrink /= 2 {
			q := [2]float64{p[0] + shrink*step[0], p[1] + shrink*step[1]}
			if !f.inside(q) {
				continue
			}
			if next := f.evaluate(q); next.value >= s.value {
				p, s, moved = q, next, true
				break
			}
		}
		if !moved {
			if math.Abs(gain) < 1e-6 { // rounding of the likelihood of a long record
				return p, s, nil
			}
			return p, s, ErrNoMaximum
		}
	}
	return p, s, ErrNoMaximum
}

// solveTwo solves m step = g for the free parameters; the others stay.
func solveTwo(m [2][2]float64, g [2]float64, free [2]bool) [2]float64 {
	switch {
	case free[0] && free[1]:
		det := m[0][0]*m[1][1] - m[0][1]*m[1][0]
		return [2]float64{(g[0]*m[1][1] - g[1]*m[0][1]) / det, (g[1]*m[0][0] - g[0]*m[1][0]) / det}
	case free[0]:
		return [2]float64{g[0] / m[0][0], 0}
	}
	return [2]float64{0, g[1] / m[1][1]}
}

// result evaluates the maximum.
func (f *freeProblem) result(p [2]float64, s freeState) (FreeFit, error) {
	m := f.information(p)
	m[1][1] += f.weigh
	var total, q float64
	data := 0.0
	if f.fixed {
		total = 1 / m[0][0]
		data = total
	} else {
		det := m[0][0]*m[1][1] - m[0][1]*m[1][0]
		if !(det > 0) {
			return FreeFit{}, ErrNoMaximum
		}
		total, q = m[1][1]/det, m[0][0]/det
		moved := m[0][1] / det // covariance of D and q, without its sign
		data = total - moved*moved*f.weigh
	}
	dt := f.o.Interval
	r := FreeFit{Diffusion: p[0] * f.scale / (2 * dt), Noise: p[1] * f.scale, NoiseSD: math.Sqrt(q) * f.scale, Count: f.count, Value: s.value,
		Speed: s.velocity * math.Sqrt(f.scale) / dt, SpeedSD: math.Sqrt(f.scale/s.weight) / dt,
		LogSD: math.Sqrt(math.Max(0, data)) / p[0], LogTotal: math.Sqrt(total) / p[0]}
	if !f.o.Brief {
		r.Intervals = f.profile(p, s.value, r.LogTotal)
	}
	return r, nil
}

// normalEnough is the relative uncertainty of D below which its logarithm is taken as normal: the ends of the
// interval then move by about its square.
const normalEnough = 0.01

// profile returns the intervals of ln D by the profile likelihood.
func (f *freeProblem) profile(p [2]float64, top, sd float64) Offsets {
	if sd < normalEnough {
		return Normal(sd)
	}
	end := func(sign, z float64) float64 {
		fall := func(offset float64) float64 {
			q := [2]float64{p[0] * math.Exp(sign*offset), p[1]}
			if !f.fixed && !f.inside(q) {
				q[1] = f.insideNoise(q[0])
			}
			if !f.inside(q) {
				return math.Inf(1)
			}
			if f.fixed {
				return 2 * (top - f.evaluate(q).value)
			}
			_, s, _ := f.search(q, [2]bool{false, true})
			return 2 * (top - s.value)
		}
		return crossing(fall, z*sd, z*z)
	}
	const z95 = 1.959963984540054
	return Offsets{Low68: end(-1, 1), High68: end(1, 1), Low95: end(-1, z95), High95: end(1, z95)}
}

// insideNoise returns a noise that is possible beside a diffusion: somewhat above the least.
func (f *freeProblem) insideNoise(diffusion float64) float64 {
	return diffusion * (2*f.blur/3 - 1 + 0.1) / 4
}

// crossing returns the offset at which a rising function reaches a level, near a guess; +Inf when it does not
// within eight times the guess.
func crossing(fall func(float64) float64, guess, level float64) float64 {
	low, high := 0.0, guess
	for fall(high) < level {
		low, high = high, high*1.5
		if high > 8*guess {
			return math.Inf(1)
		}
	}
	for range 40 {
		middle := (low + high) / 2
		if fall(middle) < level {
			low = middle
		} else {
			high = middle
		}
		if high-low < 1e-4*guess {
			break
		}
	}
	return (low + high) / 2
}
