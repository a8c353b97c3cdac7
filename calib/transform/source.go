package transform

import "unsafe"

// source is a complex sequence z to be transformed: either it lies in memory, and is only
// read, or fill sets dst to z[first], z[first+1] ..
type source struct {
	z    []complex128
	fill func(dst []complex128, first int)
}

// asComplex views pairs of neighbouring numbers as complex ones: element j is
// x_2j + i x_2j+1. An odd number at the end is left out.
func asComplex(x []float64) []complex128 {
	if len(x) < 2 {
		return nil
	}
	// A complex128 is two float64, real part first, with the alignment of a float64.
	return unsafe.Slice((*complex128)(unsafe.Pointer(&x[0])), len(x)/2)
}

// asReal views complex numbers as pairs of neighbouring real ones.
func asReal(z []complex128) []float64 {
	if len(z) == 0 {
		return nil
	}
	return unsafe.Slice((*float64)(unsafe.Pointer(&z[0])), 2*len(z))
}

// seriesSource is the real series of up to n points taken as n/2 complex numbers, zeros
// after its end.
func seriesSource(x []float64, n int) source {
	z := asComplex(x)
	if len(x) == n {
		return source{z: z}
	}
	return source{fill: func(dst []complex128, first int) {
		copied := copy(dst, z[min(first, len(z)):])
		clear(dst[copied:])
		if copied < len(dst) && len(x)%2 == 1 && first+copied == len(z) {
			dst[copied] = complex(x[len(x)-1], 0)
		}
	}}
}

// spectrumSource is the bins X_0 .. X_half of a real series, made into the conjugate of
// the transform of the half as many complex numbers: the transform of a conjugate is the
// conjugate of the inverse transform. roots is exp(-2 pi i k/(2 half)).
func spectrumSource(bins []complex128, roots *roots) source {
	half := len(bins) - 1
	scale := 0.5 / float64(half)
	return source{fill: func(dst []complex128, first int) {
		for i := range dst {
			k := first + i
			low, high, w := bins[k], bins[half-k], roots.at(k)
			if k == 0 {
				low, high = complex(real(low), 0), complex(real(high), 0)
			}
			// Twice the transforms of the even and the odd points.
			even := complex(real(low)+real(high), imag(low)-imag(high))
			odd := complex(real(low)-real(high), imag(low)+imag(high)) * complex(real(w), -imag(w))
			dst[i] = complex(scale*(real(even)-imag(odd)), -scale*(imag(even)+real(odd)))
		}
	}}
}

// powerSource is spectrumSource for bins that are real.
func powerSource(power []float64, roots *roots) source {
	half := len(power) - 1
	scale := 0.5 / float64(half)
	return source{fill: func(dst []complex128, first int) {
		low, high := power[first:][:len(dst)], power[half-first-len(dst)+1:][:len(dst)]
		for i := range dst {
			a, b, w := low[i], high[len(dst)-1-i], roots.at(first+i)
			dst[i] = complex(scale*(a+b+(a-b)*imag(w)), -scale*(a-b)*real(w))
		}
	}}
}
