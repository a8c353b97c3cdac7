package transform

import "sync"

// Plan holds what transforms of one length need. It is never changed after it is
// made: any number of goroutines may use one Plan at a time, on buffers of their own.
type Plan struct {
	n       int     // real points
	half    int     // complex points, n/2
	kernel  *kernel // transforms of length half
	roots   roots   // exp(-2 pi i k/n)
	scratch sync.Pool
}

// NewPlan returns a plan for transforms of n real points. It returns an error,
// which names the nearest lengths that will do, when n is odd, zero or has a prime
// factor above 5. Plans of recent lengths are kept and returned again.
func NewPlan(n int) (*Plan, error) {
	if err := checkLength(n); err != nil {
		return nil, err
	}
	return recentPlans.get(n), nil
}

// makePlan makes a plan for a length that has been checked.
func makePlan(n int) *Plan {
	return &Plan{n: n, half: n / 2, kernel: newKernel(n / 2), roots: newRoots(n)}
}

// Length returns the number of real points of the plan.
func (p *Plan) Length() int { return p.n }

// buffers is the working memory of one transform.
type buffers struct{ a, b, c []complex128 }

func (p *Plan) borrow() *buffers {
	if b, ok := p.scratch.Get().(*buffers); ok {
		return b
	}
	return &buffers{make([]complex128, p.half), make([]complex128, p.half), make([]complex128, p.half)}
}

// packed returns the transform of z_j = x_2j + i x_2j+1, which lies in b.
func (p *Plan) packed(b *buffers, x []float64) []complex128 {
	if len(x) > p.n {
		panic("transform: series is longer than the plan")
	}
	for j := range b.a {
		var re, im float64
		if 2*j < len(x) {
			re = x[2*j]
		}
		if 2*j+1 < len(x) {
			im = x[2*j+1]
		}
		b.a[j] = complex(re, im)
	}
	p.kernel.transform(b.b, b.c, b.a)
	return b.b
}

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

// Power returns |X_k|^2 for k = 0 .. n/2 [unit of x, squared], not scaled. A series
// shorter than the plan is padded with zeros at its end; a longer one is a caller's
// error and panics. x is not modified. The result is in dst if that has the capacity;
// dst and x must not overlap.
func (p *Plan) Power(dst, x []float64) []float64 {
	b := p.borrow()
	defer p.scratch.Put(b)
	z := p.packed(b, x)
	dst = sized(dst, p.half+1)
	for k := 0; k <= p.half/2; k++ {
		low, high := bins(z[k], z[(p.half-k)%p.half], p.roots.at(k))
		dst[k], dst[p.half-k] = square(low), square(high)
	}
	return dst
}

// Forward returns X_k for k = 0 .. n/2 [unit of x]. A series shorter than the plan
// is padded with zeros at its end; a longer one is a caller's error and panics. x is not
// modified. The result is in dst if that has the capacity.
func (p *Plan) Forward(dst []complex128, x []float64) []complex128 {
	b := p.borrow()
	defer p.scratch.Put(b)
	z := p.packed(b, x)
	dst = sized(dst, p.half+1)
	for k := 0; k <= p.half/2; k++ {
		dst[k], dst[p.half-k] = bins(z[k], z[(p.half-k)%p.half], p.roots.at(k))
	}
	return dst
}

// Inverse returns the n real points x whose transform is c, of length n/2+1: it
// undoes Forward, the factor 1/n included. The imaginary parts of the first and last
// bin are taken as zero. A c of another length is a caller's error and panics. c
// is not modified. The result is in dst if that has the capacity.
func (p *Plan) Inverse(dst []float64, c []complex128) []float64 {
	if len(c) != p.half+1 {
		panic("transform: spectrum does not have the length of the plan, n/2+1")
	}
	b := p.borrow()
	defer p.scratch.Put(b)
	scale := 1 / float64(p.n)
	for k := range b.a {
		low, high := c[k], c[p.half-k]
		if k == 0 {
			low, high = complex(real(low), 0), complex(real(high), 0)
		}
		// The packed transform Z_k = even + i odd, conjugated: the forward transform of
		// the conjugate is the conjugate of the inverse one.
		even := complex(real(low)+real(high), imag(low)-imag(high))
		odd := complex(real(low)-real(high), imag(low)+imag(high))
		w := p.roots.at(k)
		odd *= complex(real(w), -imag(w))
		b.a[k] = complex(scale*(real(even)-imag(odd)), -scale*(imag(even)+real(odd)))
	}
	p.kernel.transform(b.b, b.c, b.a)
	dst = sized(dst, p.n)
	for j, z := range b.b {
		dst[2*j], dst[2*j+1] = real(z), -imag(z)
	}
	return dst
}

// square returns |z|^2.
func square(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// sized returns a slice of n elements, in s if that has the capacity.
func sized[T any](s []T, n int) []T {
	if cap(s) >= n {
		return s[:n]
	}
	return make([]T, n)
}
