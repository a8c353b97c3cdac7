package transform

// directLags is the number of lags up to which direct sums are the faster way.
const directLags = 64

// Autocovariance returns the sums sum_j x_j x_{j+k} for k = 0 .. maxLag [unit of x,
// squared], not divided by anything. x is used as it is given: the caller removes
// the mean, or else the sums hold it and the digits of what matters are lost. Lags
// beyond the series have the sum 0; a negative maxLag gives an empty result.
func Autocovariance(x []float64, maxLag int) []float64 {
	if maxLag < 0 {
		return nil
	}
	sums := make([]float64, maxLag+1)
	lags := min(maxLag, len(x)-1)
	if lags < directLags {
		for k := 0; k <= lags; k++ {
			sums[k] = dot(x[:len(x)-k], x[k:])
		}
		return sums
	}
	p := recentPlans.get(GoodLengthAbove(len(x) + lags))
	copy(sums[:lags+1], p.fromPower(p.Power(nil, x)))
	return sums
}

// PowerAndAutocovariance returns |X_k|^2 for k = 0 .. n/2, where n is the length of
// x, and sum_j x_j x_{j+k} for k = 0 .. n-1, both from one transform of x padded
// with zeros to exactly 2n. It returns the error of NewPlan when n is not a good length.
func PowerAndAutocovariance(x []float64) (power, sums []float64, err error) {
	if err := checkLength(len(x)); err != nil {
		return nil, nil, err
	}
	p := recentPlans.get(2 * len(x))
	padded := p.Power(nil, x)
	power = make([]float64, len(x)/2+1)
	for k := range power {
		power[k] = padded[2*k]
	}
	return power, p.fromPower(padded)[:len(x)], nil
}

// fromPower returns the cyclic autocovariance sums whose transform is power.
func (p *Plan) fromPower(power []float64) []float64 {
	c := make([]complex128, len(power))
	for k, v := range power {
		c[k] = complex(v, 0)
	}
	return p.Inverse(nil, c)
}

// dot returns sum_j a_j b_j.
func dot(a, b []float64) float64 {
	b = b[:len(a)]
	var s float64
	for j, v := range a {
		s += v * b[j]
	}
	return s
}
