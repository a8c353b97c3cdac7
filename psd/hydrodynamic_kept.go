package psd

import (
	"math"

	"beadwell/calib/relaxation"

	"gonum.org/v1/gonum/integrate/quad"
)

// keptOctaves is how far from the corner frequency, to both sides, the integral of Kept goes: what lies beyond
// is a part 2^-20, 1e-6, of the variance.
const keptOctaves = 20

// Kept returns the share of the variance V that recorded positions have, localisation noise apart, for a corner
// frequency [Hz] and an exposure [s], and its derivative with respect to ln fc: the integral of the spectrum seen through
// photodiode and exposure over V. Sampling does not change a variance. Without photodiode it is S(a) of the
// exposure, up to what the inertia of the liquid changes of that.
func (h Hydrodynamic) Kept(corner, exposure float64) (share, slope float64) {
	d := h.diode()
	a := 2 * math.Pi * corner * exposure
	s, ds := relaxation.BlurVariance(a)
	share, slope = d.prompt()*s, d.prompt()*a*ds
	l := &lattice{source: h, rate: 1, exposure: exposure}
	m := &model{lattice: l, prompt: d.prompt(), power: d.power}
	nodes, weights := make([]float64, tailNodes), make([]float64, tailNodes)
	quad.Legendre{}.FixedLocations(nodes, weights, 0, 1)
	for i := -keptOctaves; i < keptOctaves; i++ {
		start := corner * math.Exp2(float64(i))
		for k, t := range nodes {
			f := start * math.Exp2(t)
			part := m.term(l.at(f, start*exposure > tailTurns, 2*weights[k]*f*math.Ln2))
			v, dv := part.at(corner)
			share += v
			slope += dv
		}
	}
	return share, slope
}

// Seen returns the spectrum with the photodiode that a fit of it found, and nothing left to be fitted.
func (h Hydrodynamic) Seen(f *Fit) Hydrodynamic {
	if d, ok := f.Diode(); ok {
		h.Alpha, h.F3dB = d.Alpha, d.F3dB
	}
	h.FitAlpha, h.FitF3dB = false, false
	return h
}
