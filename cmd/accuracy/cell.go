package main

import (
	"context"
	"errors"
	"fmt"
	"hash/fnv"
	"math"
	"math/rand/v2"

	"beadwell/calib"
	"beadwell/calib/drag"
	"beadwell/calib/medium"
	"beadwell/calib/relaxation"
	"beadwell/calib/session"
	"beadwell/calib/simulate"
	"beadwell/calib/track"
)

// Cell is one regime of the study.
type Cell struct {
	Ratio    float64 // corner frequency over sampling rate
	Periods  float64 // T fc, duration in units of 1/fc
	Exposure float64 // share of the sampling interval
	Noise    float64 // localisation noise in units of the thermal rms
	Unknown  bool    // the noise is not stated
	Drawn    bool    // true inputs are drawn from their stated uncertainties
	Drift    float64 // linear drift over the record in units of the thermal rms
	Line     float64 // rms of a line at a tenth of the sampling rate, in units of the thermal rms
	Gaps     float64 // share of samples that are missing
}

// String names the cell.
func (c Cell) String() string {
	s := fmt.Sprintf("fc/fs %g, T fc %g, exposure %g, noise %g", c.Ratio, c.Periods, c.Exposure, c.Noise)
	if c.Unknown {
		s += " unknown"
	}
	if c.Drawn {
		s += ", inputs drawn"
	}
	if c.Drift > 0 {
		s += fmt.Sprintf(", drift %g", c.Drift)
	}
	if c.Line > 0 {
		s += fmt.Sprintf(", line %g", c.Line)
	}
	if c.Gaps > 0 {
		s += fmt.Sprintf(", gaps %g %%", 100*c.Gaps)
	}
	return s
}

// The bead of the study and what is stated of it. The corner frequency is 500 Hz in every cell; the sampling rate follows from the cell.
const (
	statedDiameter = 1e-6   // m
	statedKelvin   = 298.15 // K
	statedHeight   = 5e-6   // m
	statedPixel    = 100e-9 // m
	corner         = 500.0  // Hz

	// Standard uncertainties of the drawn inputs, of the size that labs state.
	diameterU = 0.02 // relative
	kelvinU   = 0.5  // K
	heightU   = 0.5e-6
	pixelU    = 0.01 // relative
	noiseU    = 0.1  // relative
)

// world is the truth of one recording.
type world struct {
	kT, gamma, kappa, pixel, noise, variance, corner float64
}

// draw returns the truth of a recording and the noise that is stated of it [m].
func (c Cell) draw(rng *rand.Rand) (world, float64, error) {
	diameter, kelvin, height, pixel, noise := statedDiameter, statedKelvin, statedHeight, statedPixel, 1.0
	if c.Drawn {
		diameter *= 1 + diameterU*rng.NormFloat64()
		kelvin += kelvinU * rng.NormFloat64()
		height += heightU * rng.NormFloat64()
		pixel *= 1 + pixelU*rng.NormFloat64()
		noise += noiseU * rng.NormFloat64()
	}
	var w world
	liquid, err := medium.ParseFluid("water")
	if err != nil {
		return w, 0, err
	}
	stated, err := computed(liquid, statedDiameter, statedKelvin, statedHeight)
	if err != nil {
		return w, 0, err
	}
	w, err = computed(liquid, diameter, kelvin, height)
	if err != nil {
		return w, 0, err
	}
	w.kappa = 2 * math.Pi * stated.gamma * corner
	if c.Drawn { // the correlation of the viscosity has an uncertainty of its own
		p, err := liquid.At(kelvin)
		if err != nil {
			return w, 0, err
		}
		w.gamma *= 1 + p.ViscosityU*rng.NormFloat64()
	}
	w.variance, w.corner = w.kT/w.kappa, w.kappa/(2*math.Pi*w.gamma)
	rms := math.Sqrt(stated.kT / w.kappa)
	w.pixel, w.noise = pixel, math.Abs(noise)*c.Noise*rms
	return w, c.Noise * rms, nil
}

func computed(liquid medium.Fluid, diameter, kelvin, height float64) (world, error) {
	p, err := liquid.At(kelvin)
	if err != nil {
		return world{}, err
	}
	wall, err := drag.Chamber{Radius: diameter / 2, Height: height}.Wall()
	if err != nil {
		return world{}, err
	}
	return world{kT: medium.Boltzmann * kelvin, gamma: drag.Stokes(p.Viscosity, diameter/2) * wall.Factor}, nil
}

func (c Cell) rate() float64 { return corner / c.Ratio }

func (c Cell) samples() int { return int(math.Round(c.Periods / c.Ratio)) }

// recording simulates one recording in pixels.
func (c Cell) recording(w world, seed uint64) *track.Recording {
	fs := c.rate()
	rms := math.Sqrt(w.variance)
	axis := simulate.Axis{Name: "x", Corner: w.corner, Variance: w.variance, Noise: w.noise, Mean: 37 * rms, Drift: c.Drift * rms}
	if c.Line > 0 {
		axis.Lines = []simulate.Line{{Frequency: fs / 10.03, Amplitude: c.Line * rms * math.Sqrt2, Phase: float64(seed % 7)}}
	}
	x := simulate.Record(simulate.Truth{Samples: c.samples(), Rate: fs, Exposure: c.Exposure / fs, Axes: []simulate.Axis{axis}}, seed)[0]
	missing := 0
	rng := rand.New(rand.NewPCG(seed, 3))
	for i := range x {
		x[i] /= w.pixel
		if c.Gaps > 0 && i > 0 && i < len(x)-1 && rng.Float64() < c.Gaps {
			x[i] = math.NaN()
			missing++
		}
	}
	nan := math.NaN()
	return &track.Recording{Name: "simulated", Rate: fs, RateU: nan, RateOrigin: "setting", Samples: len(x), Missing: missing, JitterRMS: nan, JitterMax: nan,
		Axes: []track.Axis{{Name: "x", Header: "x", Unit: "px", ToMetre: nan, Values: x, Missing: missing}}}
}

// settings states what is known.
func (c Cell) settings(noise float64) (*session.Settings, error) {
	text := map[string]string{
		"bead.diameter":      fmt.Sprintf("%g m", statedDiameter),
		"medium.temperature": fmt.Sprintf("%g K", statedKelvin),
		"chamber.height":     fmt.Sprintf("%g m", statedHeight),
		"recording.pixel":    fmt.Sprintf("%g m", statedPixel),
		"recording.exposure": fmt.Sprintf("%.15g s", c.Exposure/c.rate()),
		"medium.fluid":       "water",
		"fit.drag":           "constant",
	}
	if !c.Unknown {
		text["recording.noise"] = fmt.Sprintf("%.15g m", noise)
	}
	if c.Drawn {
		text["bead.diameter"] += fmt.Sprintf(" +- %g m", diameterU*statedDiameter)
		text["medium.temperature"] += fmt.Sprintf(" +- %g K", kelvinU)
		text["chamber.height"] += fmt.Sprintf(" +- %g m", heightU)
		text["recording.pixel"] += fmt.Sprintf(" +- %g m", pixelU*statedPixel)
		if !c.Unknown && noise > 0 {
			text["recording.noise"] += fmt.Sprintf(" +- %.15g m", noiseU*noise)
		}
	}
	flags := &session.Settings{}
	for key, t := range text {
		if err := flags.Set(key, "", t, session.FromFlag, key); err != nil {
			return nil, err
		}
	}
	return session.ForTrack(session.Sources{Flags: flags})
}

// seed returns the seed of a recording of the cell. It hangs on the cell's name, so that no two
// cells share their random numbers and an average over cells gains by each of them.
func (c Cell) seed(recording int) uint64 {
	return seedOf(c.String(), recording)
}

// seedOf returns the seed of a recording of a cell of some name.
func seedOf(cell string, recording int) uint64 {
	h := fnv.New64a()
	fmt.Fprintf(h, "%s, recording %d", cell, recording)
	return h.Sum64()
}

// calibrate simulates and calibrates the recording of a seed.
func (c Cell) calibrate(ctx context.Context, seed uint64) (*calib.Result, world, *track.Recording, error) {
	w, noise, err := c.draw(rand.New(rand.NewPCG(seed, 2)))
	if err != nil {
		return nil, w, nil, err
	}
	set, err := c.settings(noise)
	if err != nil {
		return nil, w, nil, err
	}
	rec := c.recording(w, seed)
	r, err := calib.Calibrate(ctx, rec, set, calib.Options{})
	return r, w, rec, err
}

// hopeless stands for a singular information matrix.
const hopeless = 1e9

// Bounds are Cramer-Rao bounds of ln kappa for three states of knowledge, with the
// uncertainties from which the inputs of the cell are drawn.
type Bounds struct{ Drag, Amplitude, Both float64 }

// bounds computes the Cramer-Rao bounds of the cell from the Fisher information of the
// sampled process with known mean (Whittle's sum over the Fourier frequencies), to which the
// drawn inputs add what they are stated to be known to: the bound of a problem with priors
// (Van Trees, Detection, Estimation and Modulation Theory I, 1968, section 2.4).
func (c Cell) bounds() (Bounds, error) {
	n := c.samples() / 2 * 2
	b := relaxation.NewBlocks(make([]float64, n/2+1), n, false, nil)
	l := relaxation.NewSpectral(b, nil, c.Exposure, 1)
	q := c.Noise * c.Noise
	_, _, info := l.Score(relaxation.Parameters{math.Log(c.Ratio), 0, q})
	pr := relaxation.Problem{Likelihood: l}
	switch {
	case c.Drawn && !c.Unknown && q > 0:
		pr.Priors = []relaxation.Prior{{Weights: relaxation.Parameters{0, 0, 1}, Mean: q, SD: 2 * noiseU * q}}
	case !c.Unknown:
		pr.Directions = []relaxation.Parameters{{1, 0, 0}, {0, 1, 0}}
	}
	var drags, amplitudes, mixed float64 // systematic variances of both routes, their covariance
	if c.Drawn {
		var err error
		if drags, amplitudes, mixed, err = systematics(); err != nil {
			return Bounds{}, err
		}
	}
	out := Bounds{hopeless, hopeless, hopeless}
	if cov, _, err := pr.Covariance(info); err == nil {
		out.Drag, out.Amplitude = math.Sqrt(cov[0][0]+drags), math.Sqrt(cov[1][1]+amplitudes)
	}
	// ln fc + ln gamma and ln kT - ln V are two estimates of ln kappa; what ties them is a prior
	// on ln fc + ln V, as narrow as the inputs are known.
	u := math.Sqrt(drags + amplitudes - 2*mixed)
	along := 0.0
	if u > 0 {
		along = (mixed - drags) / (u * u)
		pr.Priors = append(pr.Priors, relaxation.Prior{Weights: relaxation.Parameters{1, 1, 0}, SD: u})
	} else if pr.Directions = []relaxation.Parameters{{1, -1, 0}}; c.Unknown {
		pr.Directions = append(pr.Directions, relaxation.Parameters{0, 0, 1})
	}
	if cov, _, err := pr.Covariance(info); err == nil {
		w := relaxation.Parameters{1 + along, along, 0}
		rest := (1+along)*(1+along)*drags + along*along*amplitudes - 2*along*(1+along)*mixed
		out.Both = math.Sqrt(cov.Form(w, w) + math.Max(0, rest))
	}
	return out, nil
}

// systematics returns the variances of ln gamma and of ln (kT/scale^2) from the drawn inputs,
// and their covariance.
func systematics() (drags, amplitudes, mixed float64, err error) {
	liquid, err := medium.ParseFluid("water")
	if err != nil {
		return 0, 0, 0, err
	}
	at := func(diameter, kelvin, height float64) (float64, float64) {
		w, e := computed(liquid, statedDiameter+diameter, statedKelvin+kelvin, statedHeight+height)
		if e != nil {
			err = e
		}
		return math.Log(w.gamma), math.Log(w.kT)
	}
	for _, step := range [][3]float64{{diameterU * statedDiameter}, {0, kelvinU}, {0, 0, heightU}} {
		g1, a1 := at(step[0], step[1], step[2])
		g0, a0 := at(-step[0], -step[1], -step[2])
		g, a := (g1-g0)/2, (a1-a0)/2
		drags, amplitudes, mixed = drags+g*g, amplitudes+a*a, mixed+g*a
	}
	p, e := liquid.At(statedKelvin)
	if err != nil || e != nil {
		return 0, 0, 0, errors.Join(err, e)
	}
	return drags + p.ViscosityU*p.ViscosityU, amplitudes + 4*pixelU*pixelU, mixed, nil
}
