// Package relaxation describes the position of a trapped bead as it is really
// recorded: an exponentially relaxing Gaussian process that is averaged over the
// exposure of each sample, sampled at regular times, and read with white noise.
//
// # Model
//
// A bead in a harmonic trap of stiffness kappa and drag gamma relaxes with the
// corner frequency fc = kappa/(2 pi gamma) [Hz] about its mean and has the
// variance V = kT/kappa [m2] (Uhlenbeck and Ornstein, Phys. Rev. 36 (1930) 823).
// With the sampling interval dt [s], the exposure W <= dt [s] and white
// localisation noise of variance q [m2], and
//
//	c = exp(-2 pi fc dt),  a = 2 pi fc W,
//	S(a) = 2/a - 2 (1 - exp(-a))/a^2,  B(a) = (sinh(a/2)/(a/2))^2,
//
// the autocovariance of what is recorded is
//
//	r(0) = V S(a) + q,  r(n) = V B(a) c^|n|  for |n| >= 1
//
// (S: Savin and Doyle, Biophys. J. 88 (2005) 623; Wong and Halvorsen, Opt.
// Express 14 (2006) 12517), which is the autocovariance of an ARMA(1,1) process.
// Its power spectrum, two-sided, in units of m2/Hz, is
//
//	P(f) = dt [V B (1-c^2)/(1 + c^2 - 2 c cos(2 pi f dt)) + V (S-B) + q],
//
// aliasing and blur included exactly. The one-sided spectrum is twice that. (docs/method.md,
// Eqs 4 to 11.)
//
// # Likelihoods
//
// Two forms of the Gaussian likelihood of a record are provided. Exact is the
// innovations form of a Kalman filter, O(N), for short records and records with
// missing samples. Spectral works on the blocked periodogram; it is the
// likelihood of the same process on a ring of N samples, which is a sum over
// frequencies (Whittle, Ark. Mat. 2 (1953) 423), times the factor that opens the
// ring. That factor depends on the filtered states at the two ends only and is
// known in closed form (see ends.go), so that Spectral too is exact up to terms of
// exp(-2 pi fc T) and has none of the leakage bias of the plain Whittle form. (docs/method.md,
// Eqs 12 to 18.)
//
// Both are restricted likelihoods: the mean and, unless asked otherwise, a linear
// drift are removed together with the degrees of freedom that they take.
package relaxation
