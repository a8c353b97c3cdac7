package transform

// kernel transforms complex sequences of one length that fits the caches.
//
// It is Stockham's self-sorting decimation in frequency: a stage takes the
// sequence as radix x groups x stride numbers and leaves it as groups x radix x
// stride, so that after the last stage the bins stand in order without a
// permutation. The stride is 1 in the first stage and grows by the radix.
type kernel struct {
	n      int
	stages []stage
}

// stage is one pass over the sequence.
type stage struct {
	radix  int
	groups int // butterflies that differ in their roots of unity
	stride int // neighbouring butterflies that share them
	// roots holds, for each group p, exp(-2 pi i p q/length) for q = 1 .. radix-1,
	// where length = radix x groups.
	roots []complex128
}

// newKernel prepares transforms of length n, which must be 5-smooth.
func newKernel(n int) *kernel {
	k := &kernel{n: n}
	length, stride := n, 1
	for _, radix := range factors(n) {
		s := stage{radix: radix, groups: length / radix, stride: stride}
		s.roots = make([]complex128, 0, s.groups*(radix-1))
		for p := range s.groups {
			for q := 1; q < radix; q++ {
				s.roots = append(s.roots, root(p*q, length))
			}
		}
		k.stages = append(k.stages, s)
		length, stride = s.groups, stride*radix
	}
	return k
}

// transform transforms width sequences at a time, which lie in src side by side:
// element j of sequence b is src[j width + b]. The result lies likewise in a or in b,
// whichever is returned first; the other one is returned second. All three have
// length n width, a and b do not overlap; src may be b, and is kept if it is not.
func (k *kernel) transform(src, a, b []complex128, width int) (result, other []complex128) {
	if len(k.stages) == 0 {
		copy(a, src)
		return a, b
	}
	k.stages[0].run(a, src, width)
	for i := range k.stages[1:] {
		k.stages[i+1].run(b, a, width)
		a, b = b, a
	}
	return a, b
}

// run performs the stage from x to y.
func (s *stage) run(y, x []complex128, width int) {
	stride := s.stride * width
	switch {
	case s.radix == 4 && s.groups == 1:
		radix4Last(y, x)
	case s.radix == 4 && stride == 1:
		radix4First(y, x, s.roots)
	case s.radix == 4:
		radix4(y, x, s.roots, stride)
	case s.radix == 5:
		radix5(y, x, s.roots, stride)
	case s.radix == 3:
		radix3(y, x, s.roots, stride)
	case s.groups == 1:
		radix2Last(y, x)
	default:
		radix2(y, x, s.roots, stride)
	}
}
