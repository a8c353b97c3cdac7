// Package equipartition estimates the variance of a trapped bead's position, from
// which equipartition gives the stiffness kappa = kT/V, and its potential from the
// histogram.
//
// # Model
//
// The mean square s2 [m2] of a record from which mean and linear drift were removed
// has the expectation L (V S(a) + q): L < 1 since the record's own mean and drift were
// removed, S(a) is the share of the variance that the exposure leaves (Savin and Doyle,
// Biophys. J. 88 (2005) 623; Wong and Halvorsen, Opt. Express 14 (2006) 12517) and q the
// variance of localisation noise. Hence
//
//	V = (s2/L - q)/S(a).
//
// # Uncertainty
//
// Samples are correlated over the relaxation time. The variance of s2 is that of a
// quadratic form in the autocovariance of the process (package relaxation,
// SampleVariance). The relaxation time in S and L, and q where it was fitted, come from a fit of
// the same record; what they share with s2 is counted by the covariance of an efficient
// estimator with any other one (see Estimate). docs/method.md, Eqs 26 to 30.
package equipartition

import (
	"errors"
	"fmt"
	"math"

	"beadwell/calib/relaxation"
)

// ErrNoVariance tells that noise accounts for all of the variance.
var ErrNoVariance = errors.New("the localisation noise is not smaller than the recorded variance")

// Input is what the estimate is made from.
type Input struct {
	MeanSquare float64 // s2, about the least-squares line [m2]
	Samples    int     // N, on the regular grid
	Observed   int     // samples that are not missing
	Records    int     // independent records of this length whose mean MeanSquare is; 0: one
	Process    relaxation.Process
	// Lost is the number of further real degrees of freedom that were removed from the
	// record at narrow lines, each with the spectrum there: sum of P(f)/dt [m2].
	Lost float64
	// Kept is the share of V that detector and exposure pass, KeptSlope its derivative with respect to ln fc; 0 is
	// S(a) of the exposure alone. KeptU is the relative standard uncertainty of Kept at a given fc.
	Kept, KeptSlope, KeptU float64
	// Scale is the unit of variance [m2] of the parameters ln fc, ln V, q/Scale of the
	// fit that Process comes from, Total and Data their covariance (package psd).
	Scale       float64
	Total, Data relaxation.Matrix
}

// Result is the outcome of Estimate, in SI units.
type Result struct {
	Variance    float64               // V [m2]
	SD          float64               // standard uncertainty of ln V, of the record alone
	OwnSD       float64               // the part of it that is the scatter of the mean square, with noise and corner frequency exact
	Blur        float64               // S(a)
	NoiseShare  float64               // q/s2
	Length      float64               // L
	Effective   float64               // number of independent samples with the same scatter of s2
	WithFit     [3]float64            // covariance of ln V with ln fc, ln V and q/Scale of the fit
	NoiseSlope  float64               // d ln V / d q [1/m2]
	CornerSlope float64               // d ln V / d ln fc, through blur and length
	Gain        float64               // d ln V / d ln s2
	Slope       relaxation.Parameters // d ln V / d (ln fc, ln V, q/Scale) of the fit
}

// Estimate returns the variance of the position.
//
// With T = s2 and the fitted parameters theta, an efficient (maximum-likelihood)
// estimate has Cov(theta, T) = C grad E[T], C its covariance (Rao, Linear Statistical
// Inference, 1973, 5a.2): its error is the part of any unbiased estimate's error that
// the likelihood explains.
//
// The error is ErrNoVariance when q exceeds s2/L.
func Estimate(in Input) (Result, error) {
	p := in.Process
	mean, variance := p.SampleVariance(in.Samples, relaxation.RemovedLine)
	r0 := p.RecordedVariance()
	a := 2 * math.Pi * p.Corner * p.Exposure
	s, ds := relaxation.BlurVariance(a)
	slope := a * ds  // of S with ln fc
	if in.Kept > 0 { // what else the detector takes, it takes at frequencies above those that mean and drift are made of
		mean -= p.Variance * (s - in.Kept)
		r0 -= p.Variance * (s - in.Kept)
		s, slope = in.Kept, in.KeptSlope
	}
	res := Result{Blur: s, NoiseShare: p.Noise / in.MeanSquare}
	res.Length = (mean - in.Lost/float64(in.Samples)) / r0
	signal := in.MeanSquare/res.Length - p.Noise
	if !(signal > 0) {
		return res, fmt.Errorf("%w: %.3g m2 of %.3g m2", ErrNoVariance, p.Noise, in.MeanSquare/res.Length)
	}
	res.Variance = signal / s

	relative := variance / (mean * mean) // of s2
	relative *= float64(in.Samples) / float64(max(1, in.Observed))
	relative /= float64(max(1, in.Records))
	res.Effective = 2 / relative
	gain := (signal + p.Noise) / signal // d ln V / d ln s2
	res.NoiseSlope = -1 / signal
	res.CornerSlope = -slope/s - gain*(1-res.Length)
	in.Total, in.Data = bounded(in.Total), bounded(in.Data)
	slopes := relaxation.Parameters{res.CornerSlope, 0, res.NoiseSlope * in.Scale}
	res.Gain, res.Slope = gain, slopes
	// gradient of E[s2] over the parameters, relative to s2
	grad := relaxation.Parameters{p.Variance * slope / r0, p.Variance * s / r0, in.Scale / r0}
	var shared relaxation.Parameters // Cov(theta, ln s2)
	for i := range shared {
		for j := range grad {
			shared[i] += in.Total[i][j] * grad[j]
		}
	}
	res.OwnSD = gain * math.Sqrt(relative)
	v := gain*gain*relative + in.Data.Form(slopes, slopes) + in.KeptU*in.KeptU
	for i := range slopes {
		v += 2 * gain * slopes[i] * shared[i]
	}
	res.SD = math.Sqrt(math.Max(v, 0))
	for i := range shared {
		res.WithFit[i] = gain * shared[i]
		for j := range slopes {
			res.WithFit[i] += in.Data[i][j] * slopes[j]
		}
	}
	return res, nil
}

// bounded limits the standard uncertainty of ln fc to one e-fold, correlations kept: what S and L
// owe to fc is bounded, and no linear propagation of more makes sense. Where samples are white, fc is unknown
// and the variance hardly needs it.
func bounded(m relaxation.Matrix) relaxation.Matrix {
	if m[0][0] <= 1 {
		return m
	}
	by := 1 / math.Sqrt(m[0][0])
	for i := range m {
		m[0][i] *= by
		m[i][0] *= by
	}
	return m
}
