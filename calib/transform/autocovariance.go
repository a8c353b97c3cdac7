package transform

// directLags is the number of lags up to which direct sums are the fastest way.
const directLags = 40

// directLength is the length of a series up to which direct sums are taken for any lag.
const directLength = 128

// Autocovariance returns the sums sum_j x_j x_{j+k} for k = 0 .. maxLag [unit of x,
// squared], not divided by anything. x is used as it is given: the caller removes
// the mean, or else the sums hold it and the digits of what matters are lost. Lags
// beyond the series have the sum 0; a negative maxLag gives an empty result.
//
// Three ways are taken, whichever is the fastest. Up to some tens of lags the products
// are summed directly; the error of a sum is then relative to sum_j |x_j x_{j+k}|.
// For more lags, but few against the length of the series, spectra of blocks are added up
// (Rader, IEEE Trans. Audio Electroacoust. 18 (1970) 439). For lags that reach through the
// series, it is transformed as a whole. In the last two the error of every sum is relative
// to the sum at lag 0: its root mean square is below 0.2 eps log2(n) of that,
// eps = 2^-52 (see TestAutocovarianceAccuracy), so that sums as small as that have no digits.
//
// A NaN or an infinity in x makes sums NaN: all of them, unless they were summed directly.
func Autocovariance(x []float64, maxLag int) []float64 {
	if maxLag < 0 {
		return nil
	}
	sums := make([]float64, maxLag+1)
	lags := min(maxLag+1, len(x))
	switch size := blockSize(lags - 1); {
	case lags <= directLags || len(x) <= directLength:
		directSums(sums[:lags], x)
	case size <= len(x)/4:
		blockSums(sums[:lags], x, size)
	default:
		wholeSums(sums[:lags], x)
	}
	return sums
}

// PowerAndAutocovariance returns |X_k|^2 for k = 0 .. n/2, where n is the length of
// x, and sum_j x_j x_{j+k} for k = 0 .. n-1 [both: unit of x, squared]. Together they cost
// little more than the sums alone: these need the transform of x padded with zeros to twice
// its length, and every other bin of that is one of x itself. The powers are those of
// Power to the last bit; the accuracy of the sums is that of Autocovariance. The error is
// that of NewPlan when n is not a good length.
func PowerAndAutocovariance(x []float64) (power, sums []float64, err error) {
	p, err := NewPlan(len(x))
	if err != nil {
		return nil, nil, err
	}
	if p.half%2 == 0 {
		power, sums = p.powerAndSums(x)
		return power, sums, nil
	}
	return p.Power(nil, x), Autocovariance(x, len(x)-1), nil
}

// Ring returns the sums sum_j x_j x_{(j+k) mod n} for k = 0 .. n-1 [unit of x, squared] from |X_k|^2, k = 0 .. n/2, of a series
// of the even good length n; nil when n is not one or the powers are not as many. The accuracy is that of Autocovariance.
func Ring(power []float64, n int) []float64 {
	p, err := NewPlan(n)
	if err != nil || len(power) != p.half+1 {
		return nil
	}
	spectrum := make([]complex128, len(power))
	for k, v := range power {
		spectrum[k] = complex(v, 0)
	}
	return p.Inverse(nil, spectrum)
}
