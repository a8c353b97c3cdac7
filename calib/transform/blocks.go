package transform

// minimumBlock is the shortest block whose spectrum is taken. The cost per point is flat
// about it: shorter ones overlap more in what is done per block, longer ones leave
// the caches.
const minimumBlock = 1 << 11

// blockSize returns the length of the blocks whose spectra give the autocovariance up to maxLag.
func blockSize(maxLag int) int {
	size := minimumBlock
	for size < maxLag {
		size *= 2
	}
	return size
}

// blockSums sets sums[k] = sum_j x_j x_{j+k} for all k < len(sums) <= size + 1.
//
// The series is cut into blocks of the given size. With X_b the transform of block b,
// padded with as many zeros, that of the two blocks b and b+1 in a row is
// X_b + (-1)^k X_{b+1}, since a shift by half of the length is a factor (-1)^k. So each block is
// transformed once, and the products of a block's points with all that follow up to
// one block later have the spectrum conj(X_b) (X_b + (-1)^k X_{b+1}), which is summed
// over the blocks (Rader, IEEE Trans. Audio Electroacoust. 18 (1970) 439).
func blockSums(sums, x []float64, size int) {
	p := recentPlans.get(2 * size)
	blocks := (len(x)-1)/size + 1
	groups := min((blocks-1)/8+1, blockGroups)
	spectra := make([][]complex128, groups)
	spread(groups, groups, func(next func() (int, bool)) {
		here, following := make([]complex128, size+1), make([]complex128, size+1)
		for i, ok := next(); ok; i, ok = next() {
			spectra[i] = make([]complex128, size+1)
			here = p.Forward(here, block(x, i*blocks/groups, size))
			for b := i * blocks / groups; b < (i+1)*blocks/groups; b++ {
				following = p.Forward(following, block(x, b+1, size))
				addSpectrum(spectra[i], here, following)
				here, following = following, here
			}
		}
	})
	for _, spectrum := range spectra[1:] {
		for k, z := range spectrum {
			spectra[0][k] += z
		}
	}
	copy(sums, p.Inverse(nil, spectra[0]))
}

// blockGroups is the largest number of groups of blocks that are summed apart, so that
// processors can share them. The groups do not depend on the number of processors, for
// they set the order of the sums. Each costs one transform more: eight blocks make one.
const blockGroups = 16

// block returns block b of x, which is empty beyond the end.
func block(x []float64, b, size int) []float64 {
	return x[min(b*size, len(x)):min((b+1)*size, len(x))]
}

// addSpectrum adds conj(here) (here + (-1)^k following) to sum.
func addSpectrum(sum, here, following []complex128) {
	here, following = here[:len(sum)], following[:len(sum)]
	sign := 1.0
	for k := range sum {
		u := here[k]
		v := complex(real(u)+sign*real(following[k]), imag(u)+sign*imag(following[k]))
		sum[k] += complex(real(u)*real(v)+imag(u)*imag(v), real(u)*imag(v)-imag(u)*real(v))
		sign = -sign
	}
}
