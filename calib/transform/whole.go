package transform

// wholeSums sets sums[k] = sum_j x_j x_{j+k} for all k < len(sums) <= len(x).
func wholeSums(sums, x []float64) {
	p := recentPlans.get(2 * GoodLengthAbove((len(x)+1)/2))
	_, all := p.powerAndSums(x)
	copy(sums, all)
}

// powerAndSums returns |X_k|^2 for k = 0 .. n/2, and sum_j x_j x_{j+l} for l = 0 .. n-1,
// for a plan of which n is a multiple of 4.
//
// The sums r_l are those of a cycle of 2n points, half of them zeros. The even bins of its
// transform are the bins X_k of the cycle of n points; their powers P_k give
//
//	A_l = (1/n) sum_k P_k exp(2 pi i k l/n)              = r_l + r_{n-l}.
//
// The odd bins are Y_k = sum_j x_j exp(-2 pi i j (2k+1)/(2n)); their powers Q_k give
//
//	B_l = (1/n) sum_k Q_k exp(2 pi i (2k+1) l/(2n))      = r_l - r_{n-l}.
//
// So r_l = (A_l + B_l)/2 and r_{n-l} = (A_l - B_l)/2 for l = 0 .. n/2, and nothing longer than n
// points is ever held. See halfBinSource for Y and cosineSums for B.
func (p *Plan) powerAndSums(x []float64) (power, sums []float64) {
	power = p.Power(nil, x)
	halves := newRoots(2 * p.n)
	odd := p.reals.get(p.half)
	defer p.reals.put(odd)
	run(p, *odd, halfBinSource(x, p.half, &halves), squarePairs)
	sums = make([]float64, p.n)
	run(p, asComplex(sums), powerSource(power, &p.roots), conjugatePairs)
	difference := cosineSums(*odd, &halves)
	scale := 1 / float64(p.n)
	sums[0] = 0.5*sums[0] + scale*difference[0]
	for l := 1; l <= p.half; l++ {
		sum, b := 0.5*sums[l], scale*difference[l]
		sums[l], sums[p.n-l] = sum+b, sum-b
	}
	return power, sums
}

// halfBinSource is a series of up to 2 half = n points, made into the half as many complex
// numbers z_j = (x_j - i x_{j+half}) exp(-2 pi i j/(2n)), of which the transform is
//
//	Z_k = sum_{j<n} x_j exp(-2 pi i j (4k+1)/(2n)) = Y_{2k},
//
// the bins half-way between those of the series. The other ones are conjugates of
// these, Y_{n-1-2k}. roots is exp(-2 pi i k/(2n)).
func halfBinSource(x []float64, half int, roots *roots) source {
	return source{fill: func(dst []complex128, first int) {
		for i := range dst {
			j := first + i
			var re, im float64
			if j < len(x) {
				re = x[j]
			}
			if j+half < len(x) {
				im = -x[j+half]
			}
			dst[i] = complex(re, im) * roots.at(j)
		}
	}}
}

// cosineSums returns sum_{k<m} q_k cos(pi (2k+1) l/(2m)) for l = 0 .. m, where m is even and the
// q_k with even k stand in order from the front of v, those with odd k from the back. It is
// the real part of exp(-pi i l/(2m)) times the transform of v (Makhoul, IEEE Trans. Acoust.
// Speech Signal Process. 28 (1980) 27). For m = n/2 that is the order in which
// the transform of halfBinSource has them. roots is exp(-2 pi i k/(4m)).
func cosineSums(v []float64, roots *roots) []float64 {
	m := len(v)
	sums := make([]float64, m+1)
	for l, bin := range recentPlans.get(m).Forward(nil, v) {
		z := bin * roots.at(l)
		sums[l], sums[m-l] = real(z), -imag(z)
	}
	return sums
}
