package psd

import (
	"fmt"
	"math"

	"beadwell/calib/relaxation"
)

// Range is a range of frequencies [Hz], both ends included. The zero Range means no
// restriction.
type Range struct{ Low, High float64 }

// Noise is what is known of the localisation noise beforehand. The zero value means
// nothing: the noise is fitted.
type Noise struct {
	Known     bool
	Variance  float64 // q [m2]
	VarianceU float64 // its standard uncertainty [m2]; 0 is exact
}

// Options are the settings of a fit. The zero value fits the whole band with
// instantaneous exposure and unknown noise.
type Options struct {
	Exposure  float64 // of each sample [s], at most the sampling interval
	Noise     Noise
	Band      Range   // frequencies to fit; zero: all
	Exclude   []Range // frequencies to leave out
	KeepLines bool    // do not search for narrow lines
	From      *Fit    // another fit to the same record, from whose maximum to search; nil: a scan finds where to begin

	// Form replaces the likelihood of the relaxation process, for a spectrum of
	// another shape; nil is the relaxation process. It is given the blocked periodogram of the record and a scale [m2].
	Form func(b relaxation.Blocks, scale float64) relaxation.Likelihood
}

// The methods of a fit.
const (
	Whittle = "Whittle likelihood of the spectrum"
	Exact   = "exact likelihood in the time domain"
)

// exactLimit is the number of samples up to which the likelihood is computed in the
// time domain, where it has no approximation at all. A filter run over 1200 samples takes as
// long as a sum over the blocks of a long record.
const exactLimit = 1200

// Fit is the outcome of Estimate, in SI units. Parameters of the underlying
// problem are those of package relaxation: ln(fc dt), ln(V/scale), q/scale.
type Fit struct {
	Method   string
	Corner   float64 // fc [Hz]
	Variance float64 // V [m2]
	NoiseQ   float64 // q [m2]; negative values are possible when it was fitted
	Interval float64 // dt [s]
	Exposure float64 // W [s]

	Problem relaxation.Problem
	Maximum relaxation.Maximum
	// Covariance of the parameters. Total counts the prior of the noise as data;
	// Data is the part due to the record alone, with a stated noise taken as exact.
	Total, Data relaxation.Matrix

	Blocks    relaxation.Blocks
	Bins      int     // Fourier frequencies used
	Band      Range   // frequencies used
	Excluded  []Range // given ones
	Goodness  Goodness
	NoiseFree bool // the noise was fitted without prior knowledge
}

// Estimate fits the spectrum of a record. It removes narrow lines from the record first, unless told not to. The
// estimates have the least variance that the data allow (Cramer-Rao) and, being
// maximum-likelihood estimates, a bias of the order of their variance.
//
// The error is relaxation.ErrNoMaximum when the likelihood has no maximum (a
// spectrum without a corner, or noise and blur that cannot be told from
// relaxation), and ErrTooShort when fewer than 16 frequencies are left.
func Estimate(r *Record, opt Options) (*Fit, error) {
	f, err := estimate(r, opt)
	if err != nil || opt.KeepLines || r.Missing > 0 || r.Observed() < 256 {
		return f, err
	}
	density := f.density()
	if r.RemoveLines(func(k int) float64 { return density(float64(k)*r.Rate/float64(r.Length)) * r.Rate / 2 }) {
		return estimate(r, opt)
	}
	return f, nil
}

func estimate(r *Record, opt Options) (*Fit, error) {
	f := &Fit{Interval: 1 / r.Rate, Exposure: opt.Exposure, Excluded: opt.Exclude, NoiseFree: !opt.Noise.Known}
	f.Blocks = r.blocks(opt.Band, opt.Exclude)
	for _, n := range f.Blocks.Bins {
		f.Bins += n
	}
	if f.Bins < leastSamples/2 {
		return f, fmt.Errorf("%w: %d frequencies are left, at least %d are needed", ErrTooShort, f.Bins, leastSamples/2)
	}
	f.setBand(r, opt)
	scale := r.MeanSquare()
	if !(scale > 0) {
		return f, fmt.Errorf("%w: the position does not change", ErrTooShort)
	}
	f.Problem.Likelihood = f.likelihood(r, opt, scale)
	free := relaxation.Parameters{0, 0, 1}
	switch {
	case opt.Noise.Known && opt.Noise.VarianceU > 0:
		f.Problem.Priors = []relaxation.Prior{{Weights: free, Mean: opt.Noise.Variance / scale, SD: opt.Noise.VarianceU / scale}}
	case opt.Noise.Known:
		f.Problem.Directions = []relaxation.Parameters{{1, 0, 0}, {0, 1, 0}}
	}
	var start relaxation.Parameters
	if opt.From != nil {
		start = f.from(*opt.From, opt.Noise)
	} else {
		start = f.Problem.Start(opt.Noise.Variance, !opt.Noise.Known)
	}
	m, err := f.Problem.Maximise(start)
	if err != nil {
		return f, err
	}
	return f, f.settle(m, r)
}

// from returns where the search starts after another fit, which may have had another unit of variance.
func (f *Fit) from(fit Fit, noise Noise) relaxation.Parameters {
	at := fit.Maximum.At
	unit := fit.Scale() / f.Scale()
	at[1] += math.Log(unit)
	at[2] *= unit
	if noise.Known && noise.VarianceU == 0 {
		at[2] = noise.Variance / f.Scale()
	}
	return at
}

// settle fills in what follows from the maximum of the likelihood.
func (f *Fit) settle(m relaxation.Maximum, r *Record) error {
	f.Maximum = m
	var err error
	if f.Total, f.Data, err = f.Problem.Covariance(m.Information); err != nil {
		return err
	}
	scale := f.Scale()
	f.Corner = math.Exp(m.At[0]) * r.Rate
	f.Variance = scale * math.Exp(m.At[1])
	f.NoiseQ = scale * m.At[2]
	f.Goodness = goodness(f, r)
	return nil
}

// likelihood chooses the form of the likelihood.
func (f *Fit) likelihood(r *Record, opt Options, scale float64) relaxation.Likelihood {
	whole := opt.Band.High == 0 && len(opt.Exclude) == 0
	w := opt.Exposure * r.Rate
	switch {
	case opt.Form != nil:
		f.Method = Whittle
		return opt.Form(f.Blocks, scale)
	case r.Missing > 0 || whole && r.Parts <= 1 && r.Observed() <= exactLimit:
		f.Method = Exact
		r.Restore()
		e := relaxation.NewExact(r.X, relaxation.RemovedLine, true, w, scale)
		e.StartFrom(f.Blocks)
		return e
	case whole:
		f.Method = Whittle
		return relaxation.NewSpectralOf(f.Blocks, r.Ends, w, scale)
	}
	f.Method = Whittle
	return relaxation.NewSpectralOf(f.Blocks, nil, w, scale)
}

func (f *Fit) setBand(r *Record, opt Options) {
	step := r.Rate / float64(r.Length)
	f.Band = Range{step, r.Rate / 2}
	if opt.Band.High > 0 {
		f.Band = Range{math.Max(step, opt.Band.Low), math.Min(r.Rate/2, opt.Band.High)}
	}
}

// Process returns the fitted process.
func (f *Fit) Process() relaxation.Process {
	return relaxation.Process{Corner: f.Corner, Variance: f.Variance, Noise: f.NoiseQ, Interval: f.Interval, Exposure: f.Exposure}
}

// Scale returns the unit of variance [m2] of the problem's parameters.
func (f *Fit) Scale() float64 { return f.Problem.Likelihood.Scale() }

// SD returns the standard uncertainty of a linear combination of ln(fc), ln(V) and
// q/scale, of the record alone, and with the prior of the noise.
func (f *Fit) SD(weights relaxation.Parameters) (data, total float64) {
	return math.Sqrt(math.Max(0, f.Data.Form(weights, weights))), math.Sqrt(math.Max(0, f.Total.Form(weights, weights)))
}
