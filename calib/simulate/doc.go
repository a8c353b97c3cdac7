// Package simulate makes recordings of a trapped bead whose truth is known
// exactly: for tests, for documentation, and for planning a measurement.
//
// # Model
//
// Each axis is an overdamped bead in a harmonic trap, an Ornstein-Uhlenbeck
// process of variance V = kT/kappa [m²] and corner frequency
// fc = kappa/(2 pi gamma) [Hz]:
//
//	dx/dt = -2 pi fc x + sqrt(4 pi fc V) w(t),   <w(t) w(t')> = delta(t-t')
//
// Sample i is the mean of x over an exposure of length W [s] that begins at
// t_i = i/fs, with fs the sampling rate [Hz] and 0 <= W <= 1/fs, plus white
// Gaussian localisation noise of variance q [m²], plus the mean, a slow linear
// drift and sinusoidal lines. The record starts in equilibrium.
//
// The update from sample to sample is exact (Gillespie, Phys. Rev. E 54 (1996)
// 2084: the position and its time integral are jointly Gaussian), so there is
// no time step to choose and no discretisation error at any fc/fs. With
// c = exp(-2 pi fc/fs) and a = 2 pi fc W the samples have
//
//	variance               V S(a) + q,   S(a) = 2/a - 2(1-exp(-a))/a²
//	covariance at lag n>0  V B(a) cⁿ,    B(a) = (sinh(a/2)/(a/2))²
//
// (S: Wong & Halvorsen, Opt. Express 14 (2006) 12517, Eq. 7.) A free bead is the
// same process without a trap: mean-square displacement 2D(t - W/3) + 2q.
//
// # Further kinds
//
// A motion with any other spectrum (frequency-dependent drag, the low-pass of a photodiode)
// comes from its spectrum with all aliases, see SpectralSynthesis. A slightly anharmonic trap is
// integrated in steps of at most a twentieth of the relaxation time. A moving stage adds the exact
// response of the bead. Then come cross-talk, noise, mean, drift and lines, and last the Faults of
// detector and computer.
//
// # Random numbers
//
// Equal arguments give equal recordings. Every axis has a stream of its own, a
// PCG-DXSM generator (math/rand/v2) whose 128-bit state is set from the seed
// and the index of the axis through the SplitMix64 finaliser. A pair of
// 53-bit uniform numbers becomes a pair of normal deviates by the polar method
// (Marsaglia & Bray, SIAM Rev. 6 (1964) 260). The first of a pair drives the
// motion and the second the noise and blur, so that with one seed the bead
// takes the same path whatever the noise.
//
// In the loop over samples all products are rounded before they enter a sum, so
// that no processor may fuse them, and exponentials come from math.Expm1, which has no assembly form
// on amd64. Values printed with at most seven significant digits therefore
// agree on every amd64 processor, and elsewhere to one unit of the last digit,
// where math.Log may differ in its last bit.
package simulate
