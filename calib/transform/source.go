package transform

import "unsafe"

// source is a complex sequence z to be transformed.
type source interface {
	// gather sets columns[b][j] = z[first + b + j stride].
	gather(columns [][]complex128, first, stride int)
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

func (x series) gather(columns [][]complex128, first, stride int) {
	z := asComplex(x)
	whole := 0 // rows of the block that lie inside z
	if last := first + len(columns) - 1; last < len(z) {
		whole = min((len(z)-1-last)/stride+1, len(columns[0]))
	}
	gatherRows(columns, z, first, stride, whole)
	for b, column := range columns {
		for j := whole; j < len(column); j++ {
			column[j] = x.at(first + b + j*stride)
		}
	}
}

// at returns element j of the complex sequence.
func (x series) at(j int) complex128 {
	switch {
	case 2*j+1 < len(x):
		return complex(x[2*j], x[2*j+1])
	case 2*j < len(x):
		return complex(x[2*j], 0)
	default:
		return 0
	}
}

// gatherRows is gather for the first count rows, which lie inside z.
func gatherRows(columns [][]complex128, z []complex128, first, stride, count int) {
	if stride == 1 && len(columns) == 1 {
		copy(columns[0][:count], z[first:])
		return
	}
	if len(columns) != blockWidth {
		for b, column := range columns {
			for j := range column[:count] {
				column[j] = z[first+b+j*stride]
			}
		}
		return
	}
	c0, c1, c2, c3 := columns[0][:count], columns[1][:count], columns[2][:count], columns[3][:count]
	c4, c5, c6, c7 := columns[4][:count], columns[5][:count], columns[6][:count], columns[7][:count]
	for j := range c0 {
		from := (*[blockWidth]complex128)(z[first+j*stride:])
		c0[j], c1[j], c2[j], c3[j] = from[0], from[1], from[2], from[3]
		c4[j], c5[j], c6[j], c7[j] = from[4], from[5], from[6], from[7]
	}
}

// spectrum is the bins X_0 .. X_half of a real series, made into the conjugate of
// the transform of the half as many complex numbers: the transform of a conjugate is
// the conjugate of the inverse transform.
type spectrum struct {
	bins  []complex128
	roots *roots // exp(-2 pi i k/n)
}

func (s *spectrum) gather(columns [][]complex128, first, stride int) {
	half := len(s.bins) - 1
	scale := 0.5 / float64(half)
	for b, column := range columns {
		for j := range column {
			k := first + b + j*stride
			low, high := s.bins[k], s.bins[half-k]
			if k == 0 {
				low, high = complex(real(low), 0), complex(real(high), 0)
			}
			// Twice the transforms of the even and the odd points.
			even := complex(real(low)+real(high), imag(low)-imag(high))
			odd := complex(real(low)-real(high), imag(low)+imag(high))
			w := s.roots.at(k)
			odd *= complex(real(w), -imag(w))
			column[j] = complex(scale*(real(even)-imag(odd)), -scale*(imag(even)+real(odd)))
		}
	}
}
