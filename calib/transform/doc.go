// Package transform computes discrete Fourier transforms of real series, and
// from them power and autocovariance sums.
//
// # Definitions
//
// The transform of x_0 .. x_{n-1} is
//
//	X_k = sum_j x_j exp(-2 pi i j k / n),    k = 0 .. n/2,
//
// with no factor in front; the bins above n/2 are the conjugates of those below
// it and are not stored. The inverse carries the whole factor 1/n, so that
// Inverse(Forward(x)) is x. Nothing here has a unit of its own: X_k has the unit
// of x, power and autocovariance sums have its square.
//
// # Lengths
//
// Plans exist for even lengths with no prime factor above 5. GoodLength and
// GoodLengthAbove find the nearest ones. Neighbours are less than 7 % apart above a length
// of 1000, less than 3 % above 100000.
//
// # Method
//
// A real series of n points is taken as n/2 complex ones (Cooley, Lewis and
// Welch, J. Sound Vib. 12 (1970) 315). As long as these fit the caches, the transform is
// the self-sorting one of Stockham (AFIPS Conf. Proc. 28 (1966) 229) with factors 4, 5, 3
// and 2; longer ones are laid out as a matrix and done in two sweeps over memory
// (Gentleman and Sande, AFIPS Conf. Proc. 29 (1966) 563; Bailey, J. Supercomput. 4
// (1990) 23), shared among processors.
//
// # Accuracy
//
// The error of a transform, as a root mean square over bins and relative to the root
// mean square of the bins, is below 0.7 eps sqrt(log2 n), with eps = 2^-52 the spacing of
// numbers at 1 (see TestRoundingError): 7e-16 for a million points. It is relative to
// the largest bins, not to each: a weak bin beside a strong one carries the rounding of
// the strong one.
//
// Every result is the same to the last bit for any number of processors. Other
// processor types may fuse multiplications with additions and differ in rounding.
package transform
