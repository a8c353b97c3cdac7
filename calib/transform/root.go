package transform

import "math"

// root returns exp(-2 pi i k/n) for k >= 0.
//
// The angle is folded into the first eighth of the circle in integers before it
// is rounded, so that both parts are good to about one unit in the last place, the
// quarter turns are exact, and the symmetries of the circle hold to the last bit.
func root(k, n int) complex128 {
	eighths := 8 * (k % n) // the angle in units of a full turn / 8n
	negateSine, negateCosine, swap := false, false, false
	if eighths > 4*n {
		eighths, negateSine = 8*n-eighths, true
	}
	if eighths > 2*n {
		eighths, negateCosine = 4*n-eighths, true
	}
	if eighths > n {
		eighths, swap = 2*n-eighths, true
	}
	sine, cosine := math.Sincos(math.Pi / 4 * (float64(eighths) / float64(n)))
	if swap {
		sine, cosine = cosine, sine
	}
	if negateCosine {
		cosine = -cosine
	}
	if negateSine {
		sine = -sine
	}
	return complex(cosine, -sine)
}

// roots is a table of exp(-2 pi i k/n) that holds about 2 sqrt(n) numbers: the
// root k is the product of a coarse one and a fine one.
type roots struct {
	coarse, fine []complex128
	shift        uint // k = coarse index << shift | fine index
	mask         int
}

// newRoots makes the table for 0 <= k < n.
func newRoots(n int) roots {
	var shift uint
	for 1<<(2*shift) < n {
		shift++
	}
	r := roots{shift: shift, mask: 1<<shift - 1}
	r.fine = make([]complex128, min(n, 1<<shift))
	for k := range r.fine {
		r.fine[k] = root(k, n)
	}
	r.coarse = make([]complex128, (n-1)>>shift+1)
	for k := range r.coarse {
		r.coarse[k] = root(k<<shift, n)
	}
	return r
}

// at returns exp(-2 pi i k/n) for 0 <= k < n.
func (r *roots) at(k int) complex128 {
	return r.coarse[k>>r.shift] * r.fine[k&r.mask]
}
