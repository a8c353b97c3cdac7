package transform

import "unsafe"

// source is a complex sequence z to be transformed.
type source interface {
	// gather sets dst[j width + b] = z[first + b + j stride] for b < width, as far as
	// dst reaches.
	gather(dst []complex128, first, width, stride int)
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

// series is the real series taken as half as many complex numbers, zeros after its end.
type series []float64

func (x series) gather(dst []complex128, first, width, stride int) {
	z := asComplex(x)
	for ; len(dst) > 0; first += stride {
		row := dst[:width]
		dst = dst[width:]
		n := 0
		if first < len(z) {
			n = copy(row, z[first:])
		}
		if n == width {
			continue
		}
		clear(row[n:])
		if len(x)%2 == 1 && first+n == len(z) {
			row[n] = complex(x[len(x)-1], 0)
		}
	}
}

// spectrum is the bins X_0 .. X_half of a real series, made into the conjugate of
// the transform of the half as many complex numbers: the transform of a conjugate is
// the conjugate of the inverse transform.
type spectrum struct {
	bins  []complex128
	roots *roots // exp(-2 pi i k/n)
}

func (s *spectrum) gather(dst []complex128, first, width, stride int) {
	half := len(s.bins) - 1
	scale := 0.5 / float64(half)
	for ; len(dst) > 0; first += stride {
		row := dst[:width]
		dst = dst[width:]
		for b := range row {
			k := first + b
			low, high := s.bins[k], s.bins[half-k]
			if k == 0 {
				low, high = complex(real(low), 0), complex(real(high), 0)
			}
			// Twice the transforms of the even and the odd points.
			even := complex(real(low)+real(high), imag(low)-imag(high))
			odd := complex(real(low)-real(high), imag(low)+imag(high))
			w := s.roots.at(k)
			odd *= complex(real(w), -imag(w))
			row[b] = complex(scale*(real(even)-imag(odd)), -scale*(imag(even)+real(odd)))
		}
	}
}

// powerSpectrum is spectrum for bins that are real.
type powerSpectrum struct {
	power []float64
	roots *roots // exp(-2 pi i k/n)
}

func (s *powerSpectrum) gather(dst []complex128, first, width, stride int) {
	half := len(s.power) - 1
	scale := 0.5 / float64(half)
	for ; len(dst) > 0; first += stride {
		row := dst[:width]
		dst = dst[width:]
		for b := range row {
			k := first + b
			low, high, w := s.power[k], s.power[half-k], s.roots.at(k)
			row[b] = complex(scale*(low+high+(low-high)*imag(w)), -scale*(low-high)*real(w))
		}
	}
}
