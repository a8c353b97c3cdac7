package relaxation

import "math"

// Offsets are distances from an estimate to the ends of its intervals, all
// positive: at a coverage of 68.27 % (one standard deviation of a normal) and of 95 %.
// An end that the likelihood does not bound is +Inf.
type Offsets struct {
	Low68, High68, Low95, High95 float64
}

// Normal are the offsets of a normal distribution of standard deviation sd.
func Normal(sd float64) Offsets {
	return Offsets{sd, sd, z95 * sd, z95 * sd}
}

const z95 = 1.959963984540054 // 97.5 % quantile of the standard normal

// Scaled multiplies all offsets.
func (o Offsets) Scaled(by float64) Offsets {
	return Offsets{o.Low68 * by, o.High68 * by, o.Low95 * by, o.High95 * by}
}

// Mirrored swaps the low and the high side, as for the negative of an estimate.
func (o Offsets) Mirrored() Offsets {
	return Offsets{o.High68, o.Low68, o.High95, o.Low95}
}

// Widened adds a normal uncertainty in quadrature to every side.
func (o Offsets) Widened(sd float64) Offsets {
	return Offsets{math.Hypot(o.Low68, sd), math.Hypot(o.High68, sd),
		math.Hypot(o.Low95, z95*sd), math.Hypot(o.High95, z95*sd)}
}

// Profile returns the profile-likelihood intervals of the linear combination
// weights . p about the maximum m of the problem, sd being its standard deviation by
// the information: the values at which twice the profiled log-likelihood falls by
// the squared normal quantile. Unlike estimate plus or minus z sd they do not
// depend on the scale in which the parameter is written, and they hold their
// coverage for short records (docs/method.md, Eq. 21).
func (pr Problem) Profile(m Maximum, weights Parameters, sd float64) Offsets {
	v := valley{problem: pr, top: m, weights: weights}
	v.problem.gain = profiled
	if total, _, err := pr.Covariance(m.Information); err == nil {
		if variance := total.Form(weights, weights); variance > 0 {
			for k := range v.course {
				v.course[k] = total.Form(allDirections[k], weights) / variance
			}
		}
	}
	return Offsets{Low68: v.side(sd, -1, 1), High68: v.side(sd, 1, 1), Low95: v.side(sd, -1, z95), High95: v.side(sd, 1, z95)}
}

// profiled is the gain in log-likelihood at which the search of a point of a profile ends: its root is right to as much.
const profiled = 1e-7

// valley is a profile: the likelihood at given values of weights . p, greatest over the rest.
type valley struct {
	problem Problem
	top     Maximum
	weights Parameters
	// course is by how much the parameters move with weights . p when the likelihood is a parabola; zero: not known.
	course Parameters
}

// side searches the distance at which the signed root of the profiled likelihood
// ratio is z, by secant steps on the root, which is nearly linear in the distance.
func (v *valley) side(sd, sign, z float64) float64 {
	at := v.top
	low, lowRoot := 0.0, 0.0
	high := math.Inf(1)
	d := z * sd
	for range 25 {
		root, next, ok := v.root(at, sign*d)
		if ok && math.Abs(root-z) < 2e-3 {
			return d * z / root
		}
		if ok && root < z {
			low, lowRoot, at = d, root, next
		} else {
			high = math.Min(high, d)
		}
		switch {
		case !ok:
			d = (low + d) / 2
		case math.IsInf(high, 1):
			d = math.Min(4*d, d*math.Max(1.1, z/math.Max(root, 1e-3)))
		default:
			guess := d * z / root
			if root > z && lowRoot > 0 {
				guess = low + (d-low)*(z-lowRoot)/(root-lowRoot)
			}
			if guess <= low || guess >= high {
				guess = (low + high) / 2
			}
			d = guess
		}
		if d > 30*z*sd && d > 8 { // eight e-folds: not bounded
			return math.Inf(1)
		}
	}
	return d
}

// root returns the signed root of twice the fall of the log-likelihood at a
// distance d of weights . p from the maximum, profiled over the rest.
func (v *valley) root(near Maximum, d float64) (float64, Maximum, bool) {
	value := v.weights.dot(v.top.At) + d
	sub, from, ok := v.problem.constrained(near.At, v.weights, value)
	if !ok {
		return 0, near, false
	}
	starts := []Parameters{from}
	if along := near.At; v.course != (Parameters{}) {
		for k := range along {
			along[k] += (value - v.weights.dot(near.At)) * v.course[k]
		}
		if along[2] >= 0 || !v.problem.NonNegative {
			starts = []Parameters{along, from}
		}
	}
	for _, start := range starts {
		if best, err := sub.Maximise(start); !(err != nil && (math.IsInf(best.Value, 0) || best.Value == 0)) {
			return math.Sqrt(math.Max(0, 2*(v.top.Value-best.Value))), best, true
		}
	}
	return 0, near, false
}

// constrained returns the problem within weights . p = value and a point there.
func (pr Problem) constrained(near, weights Parameters, value float64) (Problem, Parameters, bool) {
	u := pr.directions()
	along := -1
	for i := range u {
		if w := math.Abs(weights.dot(u[i])); w > 0 && (along < 0 || w > math.Abs(weights.dot(u[along]))) {
			along = i
		}
	}
	if along < 0 {
		return pr, near, false
	}
	wa := weights.dot(u[along])
	t := (value - weights.dot(near)) / wa
	from := near
	for k := range from {
		from[k] += t * u[along][k]
	}
	sub := Problem{Likelihood: pr.Likelihood, Priors: pr.Priors, Directions: []Parameters{}, NonNegative: pr.NonNegative, gain: pr.gain}
	for i := range u {
		if i == along {
			continue
		}
		r := weights.dot(u[i]) / wa
		v := u[i]
		for k := range v {
			v[k] -= r * u[along][k]
		}
		sub.Directions = append(sub.Directions, v)
	}
	return sub, from, true
}

// Ratio returns twice the fall of the log-likelihood from the maximum m to the best
// point with weights . p = value, the likelihood-ratio statistic of that statement,
// and that point.
func (pr Problem) Ratio(m Maximum, weights Parameters, value float64) (float64, Maximum, error) {
	sub, from, ok := pr.constrained(m.At, weights, value)
	if !ok {
		return math.NaN(), m, ErrNoMaximum
	}
	best, err := sub.Maximise(from)
	if err != nil {
		return math.NaN(), best, err
	}
	return math.Max(0, 2*(m.Value-best.Value)), best, nil
}

// Constrained returns the problem restricted to weights . p = value, with a point in
// it from which to search.
func (pr Problem) Constrained(near, weights Parameters, value float64) (Problem, Parameters, bool) {
	return pr.constrained(near, weights, value)
}
