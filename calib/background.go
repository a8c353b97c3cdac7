package calib

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"beadwell/calib/session"
	"beadwell/calib/track"
	"beadwell/psd"
)

// Background is the noise of a detector or of a tracking, from a recording without a bead or with a stuck one.
type Background struct {
	Name     string      `json:"name,omitempty"` // of the recording, where it is another one
	Samples  int         `json:"samples"`        // analysed
	Noise    Quantity    `json:"noise"`          // standard deviation of the white noise
	Variance Quantity    `json:"noise_variance"` // its square
	Excess   Float       `json:"excess_share"`   // variance at low frequency above the white noise, over it
	Lines    []NoiseLine `json:"lines"`          // narrow lines in its spectrum
}

// NoiseLine is a narrow line of a background.
type NoiseLine struct {
	Frequency Float    `json:"f_hz"`      // middle of the line
	Amplitude Float    `json:"amplitude"` // of the sine, in the unit of the noise
	Range     [2]Float `json:"range_hz"`  // lowest and highest frequency that it reaches
}

// CodeBackgroundDrift is the code of the finding that a background is not white.
const CodeBackgroundDrift = "background-not-white"

// background is the noise of one axis in its recorded unit.
type background struct {
	name     string
	samples  int
	variance float64 // of the white noise, unit squared
	u        float64 // standard uncertainty of variance
	excess   float64 // variance beyond the white noise, over it
	drifts   bool    // the excess is more than chance
	lines    []psd.Line
}

const (
	// whiteFrom is the share of half the sampling rate above which the noise is taken as white.
	whiteFrom = 0.25
	// driftSigma is the number of standard uncertainties from which on an excess at low frequency is real.
	driftSigma = 4
	// levelBins is the number of frequencies whose median is the level that a line must exceed.
	levelBins = 64
)

// measureNoise finds the noise of positions that hold no motion of a bead: narrow lines, which are removed with the same
// search as in a trapped recording, and the level of what is white above a quarter of half the rate. What there is more
// at lower frequency, drift and pointing of the laser, adds to the uncertainty, since it is no white noise.
func measureNoise(values []float64, rate float64) (background, error) {
	r, err := psd.Prepare(values, rate)
	if err != nil {
		return background{}, err
	}
	b := background{samples: r.Observed()}
	if !(r.MeanSquare() > 0) {
		return b, errors.New("the position does not change")
	}
	r.RemoveLines(levelOf(r))
	b.lines = r.Lines
	share := float64(r.Samples) / float64(r.Observed())
	var sum, all float64
	var n, m int
	for k := 1; k < len(r.Power)-1; k++ {
		f := float64(k) * rate / float64(r.Length)
		if slices.ContainsFunc(b.lines, func(l psd.Line) bool { return f >= l.Low && f <= l.High }) {
			continue
		}
		p := r.Power[k] / float64(r.Length) * share
		all += p
		m++
		if f > whiteFrom*rate/2 {
			sum += p
			n++
		}
	}
	if n < 8 {
		return b, errors.New("too few samples to tell the level of the noise")
	}
	b.variance = sum / float64(n)
	white := b.variance / math.Sqrt(float64(n)) // of an average of exponential deviates
	b.excess = all/float64(m)/b.variance - 1
	chance := math.Sqrt(1/float64(n)-1/float64(m)) + 1e-12
	b.drifts = b.excess > driftSigma*chance
	b.u = white
	if b.drifts {
		b.u = math.Hypot(white, b.excess*b.variance)
	}
	return b, nil
}

// levelOf returns the level of the periodogram around each frequency, by the median of its neighbours: that of exponential deviates
// is ln 2 of their mean.
func levelOf(r *psd.Record) func(k int) float64 {
	var levels []float64
	for k := 0; k < len(r.Power); k += levelBins {
		part := slices.Clone(r.Power[max(k, 1):min(k+levelBins, len(r.Power))])
		if len(part) < levelBins/2 && len(levels) > 0 {
			levels = append(levels, levels[len(levels)-1])
			continue
		}
		slices.Sort(part)
		levels = append(levels, part[len(part)/2]/math.Ln2/float64(r.Length))
	}
	return func(k int) float64 { return levels[k/levelBins] }
}

// setBackground takes the noise from the recording of a background, unless it is stated.
func (w *work) setBackground() error {
	other := w.opt.Background
	if other == nil || w.noise.Known {
		return nil
	}
	fail := func(format string, args ...any) error {
		return &SettingError{Key: "recording.background", Axis: w.axisName, Problem: fmt.Sprintf(format, args...),
			Remedy: "record the background with the settings of the recording itself, or state the noise with --noise"}
	}
	at := slices.IndexFunc(other.Axes, func(a track.Axis) bool { return a.Name == w.axisName })
	if at < 0 {
		return fail("(%s) has no axis %s", other.Name, w.axisName)
	}
	if math.Abs(other.Rate/w.rate-1) > 0.01 {
		return fail("(%s) was sampled at %.6g Hz, the recording at %.6g Hz", other.Name, other.Rate, w.rate)
	}
	a := other.Axes[at]
	if math.IsNaN(a.ToMetre) != math.IsNaN(w.recorded.ToMetre) || math.IsNaN(a.ToMetre) && a.Unit != w.recorded.Unit {
		return fail("(%s) is in %s, the recording in %s", other.Name, a.Unit, w.recorded.Unit)
	}
	b, err := measureNoise(a.Values, other.Rate)
	if err != nil {
		return fail("(%s): %s", other.Name, err)
	}
	b.name = other.Name
	square := w.perUnit * w.perUnit
	w.noise = psd.Noise{Known: true, Variance: b.variance * square, VarianceU: b.u * square}
	w.noiseRecorded, w.background = w.unscaled, &b
	return nil
}

// describe turns the noise into a part of the result; perUnit is the length of the recorded unit.
func (b background) describe(perUnit float64, unit string) *Background {
	square := perUnit * perUnit
	sd := math.Sqrt(b.variance) * perUnit
	out := &Background{Name: b.name, Samples: b.samples, Variance: around(b.variance*square, b.u*square, unit+"2"),
		Noise: around(sd, sd*b.u/(2*b.variance), unit), Excess: Float(b.excess), Lines: []NoiseLine{}}
	for _, l := range b.lines {
		out.Lines = append(out.Lines, NoiseLine{Frequency: Float(l.Frequency), Amplitude: Float(l.Amplitude * perUnit), Range: [2]Float{Float(l.Low), Float(l.High)}})
	}
	return out
}

// findingsOf tells when a background is not white.
func (b background) findingsOf(axis string) []Finding {
	if !b.drifts {
		return nil
	}
	return []Finding{{Code: CodeBackgroundDrift, Severity: Doubtful, Axis: axis, Value: Float(b.excess), Limit: Float(math.NaN()), Unit: "1",
		Text:   fmt.Sprintf("The background is not white: at low frequency it holds %.0f %% more variance than its white noise makes. The excess is counted as an uncertainty of the noise.", 100*b.excess),
		Remedy: "look for drift, air currents or pointing of the laser; record the background for as long as the bead"}}
}

// measureBackground analyses a recording without a bead.
func measureBackground(ctx context.Context, rec *track.Recording, set *session.Settings, opt Options) (*Result, error) {
	var works []*work
	for _, a := range rec.Axes {
		w := &work{name: rec.Name, axisName: a.Name, set: set, source: a, recorded: a, rate: rec.Rate, start: rec.Start, unit: 1, phys: &physics{}}
		if err := w.setExposure(); err != nil {
			return nil, err
		}
		if err := w.setLength(); err != nil {
			return nil, err
		}
		works = append(works, w)
	}
	r := newResult(rec, set, works, opt)
	const noBead = "the recording is a background: it holds no bead"
	for _, w := range works {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		b, err := measureNoise(w.positions(), w.rate)
		if err != nil {
			return nil, w.dataError(err, "record longer, or check the columns")
		}
		w.axis = blankAxis(w, noBead)
		unit := "m"
		if w.unscaled {
			unit = w.source.Unit
		}
		w.axis.Background = b.describe(1, unit)
		r.Findings = append(r.Findings, b.findingsOf(w.axisName)...)
		r.Axes = append(r.Axes, w.axis)
	}
	r.Medium = Medium{Temperature: Withheld("K", noBead), Viscosity: Withheld("Pa s", noBead), Density: Withheld("kg/m3", noBead), ThermalEnergy: Withheld("J", noBead)}
	r.Bead = Bead{Diameter: Withheld("m", noBead), Height: Withheld("m", noBead)}
	r.Verdict = Verdict{Status: Consistent, Text: "The background gives the noise of the detection.", Reason: "it holds no bead, and no stiffness", FamilyWiseP: Float(math.NaN())}
	r.inspect(rec, set)
	return r, nil
}
