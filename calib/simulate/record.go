package simulate

import "math"

// Recording is a simulated recording. All columns have one length; a value that
// the detector has lost is NaN.
type Recording struct {
	Time      []float64   // time stamp of each sample [s], the start of its exposure
	Positions [][]float64 // positions of each axis [m]
	Stage     []float64   // position of the stage [m]; nil when it is at rest
}

// Record returns the positions [m] of each axis of the truth: Make without the
// other columns.
func Record(t Truth, seed uint64) [][]float64 {
	if t.Faults == (Faults{}) && t.Stage == nil {
		mustBeValid(t)
		return positions(t, seed)
	}
	return Make(t, seed).Positions
}

// Make returns the recording of a truth. It panics if the truth is not valid: call
// Validate first on anything that a user has typed. Equal arguments give equal recordings.
func Make(t Truth, seed uint64) Recording {
	mustBeValid(t)
	r := Recording{Time: make([]float64, t.Samples), Positions: positions(t, seed)}
	for i := range r.Time {
		r.Time[i] = float64(i) / t.Rate
	}
	if t.Stage != nil {
		var response []float64
		r.Stage, response = t.Stage.drive(t)
		t.release(r.Stage, response)
		for i, x := range response {
			r.Positions[t.Stage.Axis][i] += x
		}
	}
	t.Faults.spoil(&r, t, seed)
	return r
}

func mustBeValid(t Truth) {
	if err := t.Validate(); err != nil {
		panic("simulate: " + err.Error())
	}
}

// positions returns the positions [m] of all axes with the stage at rest and no fault.
func positions(t Truth, seed uint64) [][]float64 {
	all := make([][]float64, len(t.Axes))
	for i, a := range t.Axes {
		exact := !t.synthesised() && a.Quartic == 0
		noiseWithin := exact && !t.mixed()
		if !noiseWithin {
			a.Noise = 0
		}
		switch {
		case exact:
			all[i] = t.harmonic(a, i, seed)
		case t.synthesised():
			all[i] = t.synthesise(a, i, seed)
		default:
			all[i] = t.anharmonic(a, i, seed)
		}
		if a.Noise = t.Axes[i].Noise; !noiseWithin && !t.mixed() {
			addNoise(all[i], a.Noise, i, seed)
		}
	}
	if t.mixed() {
		t.mix(all)
		for i, a := range t.Axes {
			addNoise(all[i], a.Noise, i, seed)
		}
	}
	for i, a := range t.Axes {
		decorate(all[i], a, t.Rate)
	}
	return all
}

// start draws the position [m], relative to the mean, at which an axis begins: from
// equilibrium for a trapped bead, the mean itself for any other.
func start(a Axis, index int, seed uint64) float64 {
	z, _ := newDeviates(seed, index, origin).pair()
	return math.Sqrt(a.Variance) * z
}

// thermal fills x with the recorded motion of a bead that begins at position [m], and
// returns the position after the last sampling interval.
func thermal(x []float64, s step, position float64, random deviates) float64 {
	for i := range x {
		z, y := random.pair()
		x[i] = float64(s.held*position) + float64(s.shared*z) + float64(s.own*y)
		position = float64(s.decay*position) + float64(s.kick*z)
	}
	return position
}

// synthesise returns the motion [m] of an axis from its spectrum, without noise.
func (t Truth) synthesise(a Axis, index int, seed uint64) []float64 {
	density := func(f float64) float64 { return lorentzian(a, f) }
	if h := t.Hydrodynamics; h != nil {
		density = h.spectrum(a)
	}
	if p := t.Photodiode; p != nil {
		before := density
		density = func(f float64) float64 { return before(f) * p.power(f) }
	}
	s := Spectrum{Density: density, Rate: t.Rate, Exposure: t.Exposure, Memory: memory / a.Corner}
	return SpectralSynthesis(t.Samples, s, newDeviates(seed, index, motion).source)
}

// memory is the time, in units of 1/fc, after which a trapped bead has forgotten where it
// was: exp(-2 pi memory) is 1e-11.
const memory = 4

// mix turns the axes of the trap into those of the record, then lets them leak.
func (t Truth) mix(all [][]float64) {
	cosine, sine := math.Cos(t.Rotation), math.Sin(t.Rotation)
	moved := make([]float64, len(all))
	for i := range all[0] {
		if t.Rotation != 0 {
			x, y := all[0][i], all[1][i]
			all[0][i] = float64(cosine*x) - float64(sine*y)
			all[1][i] = float64(sine*x) + float64(cosine*y)
		}
		for j := range all {
			moved[j] = all[j][i]
		}
		for _, l := range t.Leaks {
			all[l.Into][i] += float64(l.Share * moved[l.From])
		}
	}
}

// addNoise adds white localisation noise of the standard deviation [m].
func addNoise(x []float64, noise float64, index int, seed uint64) {
	if noise == 0 {
		return
	}
	random := newDeviates(seed, index, localisation)
	for i := 0; i < len(x); i += 2 {
		z, y := random.pair()
		x[i] += float64(noise * z)
		if i+1 < len(x) {
			x[i+1] += float64(noise * y)
		}
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
