// Package health examines a recording of a trapped bead before its calibration is
// trusted: is anything wrong with the detector, the clock, the bead, or the plan
// of the measurement?
//
// # Null hypothesis
//
// Every statistical check asks whether a trapped bead alone could have made what is
// seen. The bead is the fitted process of package relaxation: Gaussian, with the
// autocovariance r(k) [m2] at a lag of k samples, blur and noise included. Its
// samples are correlated, so that N of them count as fewer. With rho(k) =
// r(k)/r(0) the mean of the Hermite polynomial He_n of standardised samples has
// the variance
//
//	n!/N sum_k rho(k)^n,
//
// the sum running over all lags of both signs (docs/method.md, Eq. 49; Mehler's formula; for instance
// Taqqu, Z. Wahrscheinlichkeitstheorie 31 (1975) 287). The mean, n = 1, has the
// fewest effective samples; the variance (n = 2), skewness (n = 3) and kurtosis
// (n = 4) decorrelate n times as fast.
//
// The process is fitted to the same record. The uncertainty of its low-frequency
// power, which judges drifts and jumps, is counted as the degrees of freedom of a
// Student or Fisher distribution.
//
// # Levels
//
// A finding is doubtful when it is both beyond chance and large enough to matter,
// and bad when a calibration of the whole record should not be used. Beyond chance
// means a p-value of 2e-4 for each check: see TestFalseAlarms for the rate of
// alarms on clean recordings and TestDetection for that on spoiled ones.
//
// # Cost
//
// A record is read three times, and transformed in pieces of at most 2^18 samples.
// What is kept of it are the sums of some two thousand blocks.
package health
