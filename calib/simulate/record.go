package simulate

import "math"

// Record returns the positions [m] of each axis of the truth. It panics if the
// truth is not valid: call Validate first on anything that a user has typed.
func Record(t Truth, seed uint64) [][]float64 {
	if err := t.Validate(); err != nil {
		panic("simulate: " + err.Error())
	}
	positions := make([][]float64, len(t.Axes))
	for i, axis := range t.Axes {
		positions[i] = make([]float64, t.Samples)
		thermal(positions[i], newStep(axis, 1/t.Rate, t.Exposure), start(axis, i, seed), newDeviates(seed, i, motion))
		decorate(positions[i], axis, t.Rate)
	}
	return positions
}

// start draws the position [m], relative to the mean, at which an axis begins:
// from equilibrium for a trapped bead, the mean itself for a free one.
func start(a Axis, index int, seed uint64) float64 {
	z, _ := newDeviates(seed, index, origin).pair()
	return math.Sqrt(a.Variance) * z
}

// thermal fills x with the recorded motion of a bead that begins at position [m].
func thermal(x []float64, s step, position float64, random deviates) {
	for i := range x {
		z, y := random.pair()
		x[i] = float64(s.held*position) + float64(s.shared*z) + float64(s.own*y)
		position = float64(s.decay*position) + float64(s.kick*z)
	}
}

// decorate adds the mean, the drift and the lines of an axis to the positions x [m].
func decorate(x []float64, a Axis, rate float64) {
	slope := 0.0
	if len(x) > 1 {
		slope = a.Drift / float64(len(x)-1)
	}
	middle := float64(len(x)-1) / 2
	for i := range x {
		x[i] += a.Mean + float64(slope*(float64(i)-middle))
	}
	for _, line := range a.Lines {
		cycles := line.Frequency / rate
		for i := range x {
			// Whole cycles are dropped before the sine, which keeps its argument small.
			turn := float64(cycles * float64(i))
			turn -= math.Floor(turn)
			x[i] += float64(line.Amplitude * math.Sin(float64(2*math.Pi*turn)+line.Phase))
		}
	}
}
