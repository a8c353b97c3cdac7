// Package msd estimates the plateau and the relaxation time of a trapped bead from
// the mean-square displacement of its position.
//
// # Model
//
// At a lag of n samples, n >= 1, the mean-square displacement is
//
//	M(n) = 2 V (S(a) - B(a) c^n) + 2 q   [m2],
//
// with c = exp(-2 pi fc dt), a = 2 pi fc W, exposure W, and white localisation noise of
// variance q (package relaxation; blur factors S and B: Savin and Doyle, Biophys.
// J. 88 (2005) 623). Its plateau, blur and noise removed, is 2 V, the relaxation time 1/(2 pi fc).
//
// # Method
//
// The time average over all pairs of samples is fitted by generalised least squares
// with the covariance that its lags really have. For a Gaussian process
// the covariance of two products of increments is a sum of products of
// autocovariances (Isserlis, Biometrika 12 (1918) 134), and for this one the sum over time is
// elementary (see covariance.go; docs/method.md, Eqs 31 to 33). Neighbouring lags are almost the same statistic: the
// correlation matrix gets ridge = 1e-9 on its diagonal, far above rounding and far below
// any eigenvalue that carries information.
package msd
