package simulate

import "math"

// stride is the longest step of the anharmonic integration, in relaxation times. The
// error of the split is of order Quartic stride²/12: 2e-4 of the thermal variance at Quartic = 1,
// and below 2e-6 for the |Quartic| <= 0.01 of a real trap.
const stride = 0.05

// anharmonic returns the motion [m] of an axis whose potential has a quartic term,
// without noise. Steps of the exact harmonic update alternate with half steps of the
// cubic force, whose flow is known in closed form (Strang, SIAM J. Numer. Anal. 5 (1968) 506);
// the exposure is the mean of the exact means over its steps.
func (t Truth) anharmonic(a Axis, index int, seed uint64) []float64 {
	relaxations := 2 * math.Pi * a.Corner
	exposed := newSplit(a, relaxations*t.Exposure)
	dark := newSplit(a, relaxations*math.Max(1/t.Rate-t.Exposure, 0))
	random := newDeviates(seed, index, motion)
	position := start(a, index, seed)
	// The harmonic start is not quite in equilibrium: let it settle.
	settle := newSplit(a, settling)
	_, position = settle.advance(position, random)
	x := make([]float64, t.Samples)
	for i := range x {
		x[i], position = exposed.advance(position, random)
		_, position = dark.advance(position, random)
	}
	return x
}

// settling is the time in relaxation times that an anharmonic bead is given before the record.
const settling = 30

// split holds the steps of one stretch of time.
type split struct {
	steps  int
	linear step
	cubic  float64 // strength of the cubic force over half a step [1/m²]
}

func newSplit(a Axis, duration float64) split {
	steps := int(math.Ceil(duration / stride))
	if steps == 0 {
		return split{}
	}
	length := duration / float64(steps)
	return split{steps: steps, linear: trappedStep(a.Variance, 0, length, length), cubic: a.Quartic / a.Variance * length}
}

// advance returns the mean position [m] over the stretch and the position [m] at its end.
func (s split) advance(position float64, random deviates) (mean, end float64) {
	if s.steps == 0 {
		return position, position
	}
	sum := 0.0
	for range s.steps {
		z, y := random.pair()
		position = s.flow(position)
		sum += float64(s.linear.held*position) + float64(s.linear.shared*z) + float64(s.linear.own*y)
		position = s.flow(float64(s.linear.decay*position) + float64(s.linear.kick*z))
	}
	return sum / float64(s.steps), position
}

// flow moves a position [m] for half a step by the cubic force alone: the solution
// x/sqrt(1 + 2 k x² t) of dx/dt = -k x³. The floor of 1/2 is beyond 30 thermal rms.
func (s split) flow(x float64) float64 {
	return x / math.Sqrt(math.Max(1+float64(s.cubic*x)*x, 0.5))
}
