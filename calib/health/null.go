package health

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"beadwell/calib/relaxation"
)

// chance is the p-value below which a finding is beyond chance. With about 16
// checks an axis it leaves room for three axes within one percent, and costs little
// power: 3.7 standard deviations instead of 3.1 for 1e-3.
const chance = 2e-4

// null is the null hypothesis of one axis: what a trapped bead alone would do.
// Variances are in units of the square of the position.
type null struct {
	n        float64 // observed samples
	observed float64 // share of samples that were observed
	r0       float64 // variance of the samples
	vb       float64 // covariance r(k) = vb c^k for k >= 1
	rho      float64 // 2 pi fc dt, the logarithm of 1/c
}

// newNull takes the process of an axis, its observed samples and all samples.
func newNull(p relaxation.Process, n, all int) null {
	b, _ := relaxation.BlurCovariance(2 * math.Pi * p.Corner * p.Exposure)
	return null{
		n: float64(n), observed: float64(n) / float64(all),
		r0: p.RecordedVariance(), vb: p.Variance * b, rho: 2 * math.Pi * p.Corner * p.Interval,
	}
}

// usable tells whether the null hypothesis is a process at all.
func (h null) usable() bool {
	return h.n > 1 && h.r0 > 0 && h.vb >= 0 && h.rho > 0 && !math.IsInf(h.r0, 0) && !math.IsInf(h.vb, 0) && !math.IsInf(h.rho, 0)
}

// inflation returns sum_k rho(k)^power (1 - |k|/m), the number of samples that
// count as one in the mean of the Hermite polynomial of that order over m
// consecutive samples.
func (h null) inflation(power int, m float64) float64 {
	p := float64(power)
	x := p * h.rho
	amplitude := math.Pow(h.vb/h.r0, p) * h.observed
	c := math.Exp(-x)
	one := -math.Expm1(-x)
	sum := c / one
	if m > 0 {
		sum -= c * -math.Expm1(-x*m) / (m * one * one)
	}
	return 1 + 2*amplitude*math.Max(sum, 0)
}

// effective returns the effective number among m samples for a Hermite order.
func (h null) effective(power int, m float64) float64 { return m / h.inflation(power, m) }

// longRun returns the two-sided spectral density at zero frequency, per sample:
// m times the variance of the mean of m samples, for m far above 1/rho.
func (h null) longRun() float64 { return h.r0 * h.inflation(1, math.Inf(1)) }

// density returns the two-sided spectral density per sample at theta = 2 pi f dt.
func (h null) density(theta float64) float64 {
	c := math.Exp(-h.rho)
	s := math.Sin(theta / 2)
	one := -math.Expm1(-h.rho)
	kernel := -math.Expm1(-2*h.rho) / (one*one + 4*c*s*s) // 1 + 2 sum c^k cos(k theta)
	return h.r0 + h.vb*h.observed*(kernel-1)
}

// memory returns the relaxation time in samples, at least one.
func (h null) memory() float64 { return math.Max(1, 1/h.rho) }

// freedom returns the degrees of freedom that the fitted low-frequency power is
// worth: 2/Var(ln longRun). The variance is that of V (1+c)/(1-c) from N ideal
// samples, with the errors of V and c taken as fully correlated, as they are for
// c -> 1: sqrt Var = sqrt(4/((1-c^2)N)) + sqrt(2(1+c^2)/((1-c^2)N)). For c -> 1 it
// is 4/(pi fc T). Half of it is given away for the noise that is fitted as well.
func (h null) freedom() float64 {
	c2 := math.Exp(-2 * h.rho)
	one := -math.Expm1(-2*h.rho) * h.n
	sd := math.Sqrt(4/one) + math.Sqrt(2*(1+c2)/one)
	return math.Max(1.0/(sd*sd), 4)
}

// normal returns the standard normal deviate as rare as t is in a Student
// distribution of nu degrees of freedom.
func normal(t, nu float64) float64 {
	if math.IsNaN(t) || t == 0 {
		return 0
	}
	p := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: nu}.Survival(math.Abs(t))
	if p < 1e-300 {
		return math.Copysign(37, t) // the normal deviate of the smallest p-values
	}
	return math.Copysign(-distuv.UnitNormal.Quantile(p), t)
}

// twoSided returns the two-sided p-value of a standard normal deviate.
func twoSided(z float64) float64 { return math.Erfc(math.Abs(z) / math.Sqrt2) }
