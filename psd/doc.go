// Package psd estimates the corner frequency and the variance of a trapped bead
// from the power spectrum of its position.
//
// # Model
//
// The spectrum is that of the samples themselves: a relaxation process of corner
// frequency fc [Hz] and variance V [m2], averaged over the exposure, aliased by the
// sampling, with white localisation noise of variance q [m2] on top. Its formula stands
// in package relaxation. Frequencies are in Hz; a spectrum is one-sided and in m2/Hz
// where it leaves the package.
//
// # Method
//
// The Whittle likelihood of the whole periodogram (Whittle, Ark. Mat. 2 (1953) 423)
// is maximised by Fisher scoring. It has its least variance where a least-squares
// fit is biased: at every periodogram value's exponential distribution. For a
// record without gaps a term for the two ends makes it the exact likelihood; short
// records, and records with missing samples, use the exact likelihood in the time
// domain. Both remove the mean and a linear drift with their degrees of freedom.
//
// Narrow lines, such as mains pickup, are found as periodogram values that chance
// does not make, taken out by least squares, and left out of the fit.
package psd
