package transform

import "sync"

// Plan holds what transforms of one length need. It is never changed after it is
// made: any number of goroutines may use one Plan at a time, on buffers of their own.
type Plan struct {
	n      int     // real points
	half   int     // complex points, n/2 = rows x columns
	rows   int     // 1 for a length that is done in one piece
	column *kernel // transforms down a column, of length rows; nil if rows is 1
	row    *kernel // transforms along a row, of length half/rows

	halfRoots roots        // exp(-2 pi i k/half), k < half; only if rows > 1
	stepRoots []complex128 // exp(-2 pi i q r/half), q = 1, 2, 4, for each row r; only if rows > 1
	rowRoots  []complex128 // exp(-2 pi i k rows/n), k < half/rows
	roots     roots        // exp(-2 pi i k/n), k < n

	work  pool[complex128] // buffers of length half; only if rows > 1
	reals pool[float64]    // buffers of length half
	desks sync.Pool        // *desk
}

// wholeLimit is the longest complex length that is done in one piece. Its two buffers and
// its roots, 16 bytes a point each, must fit a third-level cache with room to spare:
// there one piece costs 0.75 of the time of rows and columns, beyond it up to 3 times.
const wholeLimit = 1 << 16

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
	p := &Plan{n: n, half: n / 2, rows: 1, roots: newRoots(n)}
	if p.half > wholeLimit {
		p.rows = divisorNearRoot(p.half)
		p.column = newKernel(p.rows)
		p.halfRoots = newRoots(p.half)
		for r := range p.rows {
			p.stepRoots = append(p.stepRoots, root(r, p.half), root(2*r, p.half), root(4*r, p.half))
		}
	}
	columns := p.half / p.rows
	p.row = newKernel(columns)
	p.rowRoots = make([]complex128, columns)
	for k := range p.rowRoots {
		p.rowRoots[k] = root(k, 2*columns)
	}
	return p
}

// divisorNearRoot returns the largest divisor d of n that is not above its square
// root, with d and n/d multiples of four if there is such a one above a quarter of the
// root: transforms of both lengths then begin with the cheapest stage.
func divisorNearRoot(n int) int {
	best, bestOfFour := 1, 0
	for d := 2; d <= n/d; d++ {
		if n%d != 0 {
			continue
		}
		best = d
		if d%4 == 0 && n/d%4 == 0 {
			bestOfFour = d
		}
	}
	if 4*bestOfFour > best {
		return bestOfFour
	}
	return best
}

// Length returns the number of real points of the plan.
func (p *Plan) Length() int { return p.n }

// Power returns |X_k|^2 for k = 0 .. n/2 [unit of x, squared], not scaled. A series
// shorter than the plan is padded with zeros at its end; a longer one is a caller's
// error and panics. x is not modified. The result is in dst if that has the capacity;
// dst and x must not overlap.
func (p *Plan) Power(dst, x []float64) []float64 {
	p.checkSeries(x)
	dst = sized(dst, p.half+1)
	run(p, dst, seriesSource(x, p.n), powerPairs)
	return dst
}

// PowerOf is Power of a series of the plan's length that is not in memory: fill sets x to its points from one on. It is
// called from several goroutines at a time. work is room for as many numbers, which are overwritten; nil: it is made.
func (p *Plan) PowerOf(dst, work []float64, fill func(x []float64, from int)) []float64 {
	dst = sized(dst, p.half+1)
	var room *[]complex128
	if len(work) == p.n {
		z := asComplex(work)
		room = &z
	}
	runIn(p, dst, source{fill: func(z []complex128, first int) { fill(asReal(z), 2*first) }}, powerPairs, room)
	return dst
}

// Forward returns X_k for k = 0 .. n/2 [unit of x]. A series shorter than the plan
// is padded with zeros at its end; a longer one is a caller's error and panics. x is not
// modified. The result is in dst if that has the capacity.
func (p *Plan) Forward(dst []complex128, x []float64) []complex128 {
	p.checkSeries(x)
	dst = sized(dst, p.half+1)
	run(p, dst, seriesSource(x, p.n), binPairs)
	return dst
}

func (p *Plan) checkSeries(x []float64) {
	if len(x) > p.n {
		panic("transform: series is longer than the plan")
	}
}

// Inverse returns the n real points x whose transform is c, of length n/2+1: it
// undoes Forward, the factor 1/n included. The imaginary parts of the first and last
// bin are taken as zero. A c of another length is a caller's error and panics. c
// is not modified. The result is in dst if that has the capacity.
func (p *Plan) Inverse(dst []float64, c []complex128) []float64 {
	if len(c) != p.half+1 {
		panic("transform: spectrum does not have the length of the plan, n/2+1")
	}
	dst = sized(dst, p.n)
	run(p, asComplex(dst), spectrumSource(c, &p.roots), conjugatePairs)
	return dst
}

// sized returns a slice of n elements, in s if that has the capacity.
func sized[T any](s []T, n int) []T {
	if cap(s) >= n {
		return s[:n]
	}
	return make([]T, n)
}
