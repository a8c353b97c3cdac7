package relaxation

import "math"

// Process is a recorded relaxation process. All fields are in SI units.
type Process struct {
	Corner   float64 // corner frequency fc [Hz]
	Variance float64 // V, of the position itself, before blur and noise [m2]
	Noise    float64 // q, variance of the white localisation noise [m2]
	Interval float64 // dt, sampling interval [s]
	Exposure float64 // W, exposure of each sample, 0 <= W <= dt [s]
}

// Decay returns c = exp(-2 pi fc dt), the correlation that is left after one
// sampling interval.
func (p Process) Decay() float64 { return math.Exp(-2 * math.Pi * p.Corner * p.Interval) }

// RecordedVariance returns r(0) = V S(a) + q [m2].
func (p Process) RecordedVariance() float64 {
	s, _ := BlurVariance(2 * math.Pi * p.Corner * p.Exposure)
	return p.Variance*s + p.Noise
}

// Autocovariance returns r(n) [m2] at a lag of n samples.
func (p Process) Autocovariance(n int) float64 {
	if n == 0 {
		return p.RecordedVariance()
	}
	b, _ := BlurCovariance(2 * math.Pi * p.Corner * p.Exposure)
	return p.Variance * b * math.Exp(-2*math.Pi*p.Corner*p.Interval*math.Abs(float64(n)))
}

// MSD returns the mean-square displacement 2 (r(0) - r(n)) [m2] at a lag of
// n samples.
func (p Process) MSD(n int) float64 {
	if n == 0 {
		return 0
	}
	return p.MSDCurve(float64(n))
}

// MSDCurve continues MSD to lags between whole samples, from one sample on, for drawing.
func (p Process) MSDCurve(n float64) float64 {
	a := 2 * math.Pi * p.Corner * p.Exposure
	s, _ := BlurVariance(a)
	b, _ := BlurCovariance(a)
	// V (S - B c^n) = V [(S - B) + B (1 - c^n)], which keeps its digits for small lags
	rise := -math.Expm1(-2 * math.Pi * p.Corner * p.Interval * math.Abs(n))
	return 2*p.Variance*((s-b)+b*rise) + 2*p.Noise
}

// Spectrum returns the two-sided power spectrum of the samples at f [Hz], in
// m2/Hz, aliasing included.
func (p Process) Spectrum(f float64) float64 { return p.SpectrumFunc()(f) }

// SpectrumFunc returns Spectrum as a function, for many frequencies of one process.
func (p Process) SpectrumFunc() func(f float64) float64 {
	s := newShape(p.Corner*p.Interval, p.relativeExposure())
	return func(f float64) float64 {
		h := math.Sin(math.Pi * f * p.Interval)
		return p.Interval * s.at(p.Variance, p.Noise, 4*h*h, 0)
	}
}

// ExpectedPeriodogram returns the exact mean of the two-sided periodogram
// dt |X_k|^2 / N [m2/Hz] of a record of n samples with known mean at its k-th
// Fourier frequency, leakage included.
func (p Process) ExpectedPeriodogram(n, k int) float64 {
	a := 2 * math.Pi * p.Corner * p.Exposure
	s, _ := BlurVariance(a)
	b, _ := BlurCovariance(a)
	c := p.Decay()
	theta := 2 * math.Pi * float64(k) / float64(n)
	z := complex(c*math.Cos(theta), c*math.Sin(theta))
	cn := complex(1-math.Exp(-2*math.Pi*p.Corner*p.Interval*float64(n)), 0)
	d := 1 - z
	m := real(d)*real(d) + imag(d)*imag(d)
	ou := (1-c*c)/m - 2/float64(n)*real(z*cn/(d*d))
	return p.Interval * (p.Variance*b*ou + p.Variance*(s-b) + p.Noise)
}

func (p Process) relativeExposure() float64 { return p.Exposure / p.Interval }

// shape holds what the spectrum needs at one corner frequency: with
// D = (1-c)^2 + c sigma and sigma = 4 sin^2(pi f dt),
//
//	P/dt = V [pole/D + level] + q.
//
// The derivatives are with respect to phi = ln fc.
type shape struct {
	c, dc         float64
	gap, dgap     float64 // (1-c)^2
	pole, dpole   float64 // B (1-c^2)
	level, dlevel float64 // S - B
}

// newShape takes fc dt and W/dt, both dimensionless.
func newShape(x, w float64) shape {
	rho := 2 * math.Pi * x
	a := rho * w
	s, ds := BlurVariance(a)
	b, db := BlurCovariance(a)
	c := math.Exp(-rho)
	one := -math.Expm1(-rho)     // 1 - c
	two := -math.Expm1(-2 * rho) // 1 - c^2
	dc := -rho * c
	return shape{
		c: c, dc: dc,
		gap: one * one, dgap: -2 * one * dc,
		pole: b * two, dpole: a*db*two - 2*b*c*dc,
		level: s - b, dlevel: a * (ds - db),
	}
}

// at returns P/dt [m2] averaged over a block of frequencies with the mean sigma
// and the variance sigmaVar of sigma = 4 sin^2(pi f dt): to second order the mean
// of 1/D over a block is (1 + c^2 sigmaVar/D^2)/D at the mean sigma.
func (s shape) at(v, q, sigma, sigmaVar float64) float64 {
	d := s.gap + s.c*sigma
	r := s.c * s.c * sigmaVar / (d * d)
	return v*(s.pole*(1+r)/d+s.level) + q
}

// grad returns P/dt [m2] and its derivatives with respect to ln fc and ln V
// (the derivative with respect to q is 1).
func (s shape) grad(v, q, sigma, sigmaVar float64) (p, dphi, dv float64) {
	d := s.gap + s.c*sigma
	dd := s.dgap + s.dc*sigma
	r := s.c * s.c * sigmaVar / (d * d)
	dr := 2 * r * (s.dc/s.c - dd/d)
	g := s.pole*(1+r)/d + s.level
	dg := (s.dpole*(1+r)+s.pole*dr)/d - s.pole*(1+r)*dd/(d*d) + s.dlevel
	return v*g + q, v * dg, v * g
}

// MSDSlope returns the derivative of MSD(n) with respect to ln fc [m2].
func (p Process) MSDSlope(n int) float64 {
	a := 2 * math.Pi * p.Corner * p.Exposure
	_, ds := BlurVariance(a)
	b, db := BlurCovariance(a)
	x := 2 * math.Pi * p.Corner * p.Interval * math.Abs(float64(n))
	cn := math.Exp(-x)
	return 2 * p.Variance * (a*ds - a*db*cn + b*x*cn)
}
