package transform

// pairing turns elements of the packed transform into results. Element i of z is Z_k
// and element i from the end of mirror is Z_{half-k}; the results for k and half-k go
// to element i of low and to element i from the end of high. The four have one
// length. first times roots[i] is exp(-2 pi i k/n).
type pairing[T float64 | complex128] func(low, high []T, z, mirror []complex128, first complex128, roots []complex128)

// bins returns X_k and X_{half-k} from the packed transform's Z_k and Z_{half-k}
// and w = exp(-2 pi i k/n) (Cooley, Lewis and Welch, J. Sound Vib. 12 (1970) 315).
func bins(z, mirror, w complex128) (low, high complex128) {
	// even and odd are twice the transforms of the even and odd points of x.
	even := complex(real(z)+real(mirror), imag(z)-imag(mirror))
	odd := complex(imag(z)+imag(mirror), real(mirror)-real(z))
	odd *= w
	low = complex(0.5*(real(even)+real(odd)), 0.5*(imag(even)+imag(odd)))
	high = complex(0.5*(real(even)-real(odd)), 0.5*(imag(odd)-imag(even)))
	return low, high
}

// binPairs gives the bins X_k.
func binPairs(low, high, z, mirror []complex128, first complex128, roots []complex128) {
	mirror, high, low, roots = mirror[:len(z)], high[:len(z)], low[:len(z)], roots[:len(z)]
	for i := range z {
		j := len(z) - 1 - i
		low[i], high[j] = bins(z[i], mirror[j], first*roots[i])
	}
}

// powerPairs gives |X_k|^2.
func powerPairs(low, high []float64, z, mirror []complex128, first complex128, roots []complex128) {
	mirror, high, low, roots = mirror[:len(z)], high[:len(z)], low[:len(z)], roots[:len(z)]
	for i := range z {
		j := len(z) - 1 - i
		a, b := bins(z[i], mirror[j], first*roots[i])
		low[i], high[j] = square(a), square(b)
	}
}

// conjugatePairs gives the conjugate of Z_k.
func conjugatePairs(low, high, z, mirror []complex128, _ complex128, _ []complex128) {
	mirror, high, low = mirror[:len(z)], high[:len(z)], low[:len(z)]
	for i := range z {
		j := len(z) - 1 - i
		low[i], high[j] = complex(real(z[i]), -imag(z[i])), complex(real(mirror[j]), -imag(mirror[j]))
	}
}

// squarePairs gives |Z_k|^2.
func squarePairs(low, high []float64, z, mirror []complex128, _ complex128, _ []complex128) {
	mirror, high, low = mirror[:len(z)], high[:len(z)], low[:len(z)]
	for i := range z {
		j := len(z) - 1 - i
		low[i], high[j] = square(z[i]), square(mirror[j])
	}
}

// square returns |z|^2.
func square(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }
