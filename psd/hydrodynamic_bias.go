package psd

import (
	"math"

	"beadwell/calib/relaxation"
)

// Design is what Bias needs to know of a recording.
type Design struct {
	Rate      float64 // sampling rate [Hz]
	Exposure  float64 // [s]
	Corner    float64 // true corner frequency [Hz]
	Noise     float64 // q/V, noise variance over that of the position
	NoiseFree bool    // the noise would be fitted
	Band      Range   // frequencies to fit; zero: from below Corner/1000 to half the rate
}

// Bias is by how much a fit with constant drag, seen by the same detector, is wrong, however long the record:
// estimate over truth, less 1.
type Bias struct {
	Corner    float64 // of fc, and so of the stiffness from drag
	Diffusion float64 // of D = 2 pi fc V
	Variance  float64 // of V; that of the stiffness from the amplitude is its negative
}

// Size returns the largest of the three, without sign.
func (b Bias) Size() float64 {
	return math.Max(math.Abs(b.Corner), math.Max(math.Abs(b.Diffusion), math.Abs(b.Variance)))
}

// biasBlocks is the number of blocks for which the expected fit is done, equally spaced
// in ln f: a spectrum that turns over a factor of two has 20 or more.
const biasBlocks = 400

// Bias returns the bias of a fit with constant drag, seen by the same photodiode, to the whole band of a
// recording whose true spectrum is h: the fit with the least expected Whittle deviance,
// that is, with the true spectrum in place of the periodogram. The error is
// relaxation.ErrNoMaximum when that fit has no solution, or of Check.
func (h Hydrodynamic) Bias(d Design) (Bias, error) {
	if err := h.Check(); err != nil {
		return Bias{}, err
	}
	b := d.blocks()
	truth := relaxation.Parameters{math.Log(d.Corner / d.Rate), 0, d.Noise}
	h.FitAlpha, h.FitF3dB = false, false
	w := newWhittle(h.lattice(b, d.Rate, d.Exposure), b, 1)
	e := w.expected(w.lattice.model(h.diode().power, h.diode().prompt()), d.Corner/d.Rate, false)
	for i, v := range e.value {
		b.Power[i] = v + d.Noise
	}
	problem := relaxation.Problem{Likelihood: relaxation.NewSpectral(b, nil, d.Exposure*d.Rate, 1)}
	if h.F3dB > 0 {
		problem.Likelihood = Hydrodynamic{Alpha: h.Alpha, F3dB: h.F3dB}.Form(d.Rate, d.Exposure)(b, 1)
	}
	if !d.NoiseFree {
		problem.Directions = []relaxation.Parameters{{1, 0, 0}, {0, 1, 0}}
	}
	m, err := problem.Maximise(truth)
	if err != nil {
		return Bias{}, err
	}
	corner, variance := m.At[0]-truth[0], m.At[1]
	return Bias{math.Expm1(corner), math.Expm1(corner + variance), math.Expm1(variance)}, nil
}

// biasSamples makes the weights of the blocks large: the search ends at a gain of the log-likelihood that is small against
// one. What a form with the leakage of a finite record owes to it is below 1e-4 from fc/fs = 1e-4 on.
const biasSamples = 1 << 26

// blocks returns the band in blocks without power.
func (d Design) blocks() relaxation.Blocks {
	// a power of two, so that recordings of nearly the same corner share a lattice
	low, high := math.Exp2(math.Floor(math.Log2(d.Corner/1000/d.Rate))), 0.5
	if d.Band.High > 0 {
		low, high = math.Max(low, d.Band.Low/d.Rate), math.Min(high, d.Band.High/d.Rate)
	}
	b := relaxation.Blocks{Samples: biasSamples, Power: make([]float64, biasBlocks)}
	growth := math.Pow(high/low, 1.0/biasBlocks)
	for from, i := low, 0; i < biasBlocks; i++ {
		width := from * (growth - 1)
		phi := from + width/2
		sine, cosine := math.Sincos(math.Pi * phi)
		spread := 8 * math.Pi * sine * cosine * width // of sigma over the block
		b.Frequency = append(b.Frequency, phi)
		b.Sigma = append(b.Sigma, 4*sine*sine)
		b.SigmaVar = append(b.SigmaVar, spread*spread/12)
		b.Weight = append(b.Weight, width*biasSamples)
		b.Bins = append(b.Bins, int(width*biasSamples))
		from += width
	}
	return b
}
