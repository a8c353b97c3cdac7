package main

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// checkLevel is the level of the ideal test of a fault of a recording: the false alarms that are promised of one check.
const checkLevel = 0.01

// powerAt is the power of a one-sided test of a normal deviate about the root of a noncentrality at a level.
func powerAt(lambda, level float64) float64 {
	return distuv.UnitNormal.CDF(math.Sqrt(lambda) - distuv.UnitNormal.Quantile(1-level))
}

// checked is what theory allows a check of the recording: Known is false for faults that leave marks which chance does
// not make at all, such as a value at which samples pile up, a gap between time stamps, or a bead that is gone.
func (c trialCell) checked() Ideal {
	truth, _ := c.scenes()
	lambda, level := 0.0, checkLevel
	switch c.fault.shape {
	case straightDrift:
		for _, s := range sightsOf(truth) {
			// the variance of a straight line's rise over a record of length T is 12 S(0)/T, S two-sided
			duration := float64(truth.samples) / truth.rate
			drift := thermal(truth.soft[s.axis])
			lambda += drift * drift * duration / (12 * s.process.Spectrum(0))
		}
	case wanderingDrift:
		b, ok := newIdealBench(truth, truth, nil)
		if !ok {
			return Ideal{}
		}
		lambda = 2 * b.self()
		for _, f := range b.fits(truth) {
			lambda -= 2 * f.value
		}
	case narrowLine:
		for _, s := range sightsOf(truth) {
			// the energy A^2 T/2 of a sinusoid over the two-sided spectrum; all frequencies are tried
			amplitude := lineShare * math.Sqrt2 * thermal(truth.soft[s.axis])
			lambda += amplitude * amplitude * float64(truth.samples) / truth.rate / 2 / s.process.Spectrum(lineHz)
		}
		level /= float64(truth.samples / 2)
	case lostFrames:
		lambda = 2 * float64(truth.samples) * lossInformation(truth, lostShare)
	default:
		return Ideal{}
	}
	return Ideal{Known: true, Noncentrality: lambda, Power: powerAt(lambda, level)}
}

// sightsOf are the axes of a recording with their processes.
func sightsOf(t scene) []sight {
	var list []sight
	for i, name := range t.axes {
		s := sight{axis: i, name: name}
		if s.see(t) {
			list = append(list, s)
		}
	}
	return list
}

// lossInformation is the information per sample that tells a record of one axis from which a share of the samples was lost, no trace left,
// from a whole one: the divergence of Kullback and Leibler (Ann. Math. Stat. 22 (1951) 79) of the next sample y given the last one x.
// It is (1-p) N(c x, 1-c^2) + p N(c^2 x, 1-c^4) in units of the variance, c the correlation of neighbours; of the whole record that
// comes nearest, N(c' x, 1-c'^2) with c' = (1-p) c + p c^2. Noise and blur are left out.
func lossInformation(t scene, p float64) float64 {
	_, gamma, _, err := t.process('x')
	if err != nil {
		return math.NaN()
	}
	kappa := stiffness(t.soft[0])
	c := math.Exp(-kappa / gamma / t.rate)
	nearest := (1-p)*c + p*c*c
	one, two, whole := 1-c*c, 1-math.Pow(c, 4), 1-nearest*nearest
	normal := func(d, v float64) float64 { return math.Exp(-d*d/(2*v)) / math.Sqrt(2*math.Pi*v) }
	const across, along, reach = 120, 800, 8.0 // points of the sums, whose ends are beyond 8 standard deviations
	sum := 0.0
	for i := range across + 1 {
		x := reach * (2*float64(i)/across - 1)
		dx := 2 * reach / across
		for j := range along + 1 {
			d := reach * math.Sqrt(two) * (2*float64(j)/along - 1)
			dy := 2 * reach * math.Sqrt(two) / along
			y := c*x + d
			f := (1-p)*normal(d, one) + p*normal(y-c*c*x, two)
			if f > 0 {
				e := y - nearest*x
				sum += normal(x, 1) * dx * f * dy * (math.Log(f) + e*e/(2*whole) + math.Log(2*math.Pi*whole)/2)
			}
		}
	}
	return sum
}
