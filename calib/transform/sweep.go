package transform

// blockWidth is the number of columns or rows that are worked on together: eight
// real results fill a cache line of 64 bytes, eight complex points two.
const blockWidth = 8

// parallelLimit is the complex length from which more than one processor is used;
// below it, waking them costs a noticeable part of what they save.
const parallelLimit = 1 << 15

// desk is the working memory of one worker.
type desk struct {
	columns       [2][]complex128 // blockWidth columns side by side, twice
	block, mirror [][]complex128  // blockWidth rows each
	spare         []complex128    // a row
}

func (p *Plan) newDesk() *desk {
	length, count := p.half/p.rows, blockWidth
	if p.rows == 1 {
		count = 1
	}
	d := &desk{spare: make([]complex128, length)}
	for range count {
		d.block = append(d.block, make([]complex128, length))
	}
	if p.rows > 1 {
		for range count {
			d.mirror = append(d.mirror, make([]complex128, length))
		}
		d.columns[0] = make([]complex128, blockWidth*p.rows)
		d.columns[1] = make([]complex128, blockWidth*p.rows)
	}
	return d
}

// run transforms the source and writes results for k = 0 .. half, or up to half-1 if
// dst is that short, by way of pair.
func run[T float64 | complex128](p *Plan, dst []T, from source, pair pairing[T]) {
	runIn(p, dst, from, pair, nil)
}

// runIn is run with a buffer of length half; nil: one of the plan's.
func runIn[T float64 | complex128](p *Plan, dst []T, from source, pair pairing[T], work *[]complex128) {
	if p.rows == 1 {
		d := p.borrowDesk()
		defer p.desks.Put(d)
		z := from.z
		if z == nil {
			z = d.block[0]
			from.fill(z, 0)
		}
		z, _ = p.row.transform(z, d.spare, d.block[0], 1)
		storeWhole(p, dst, z, pair)
		return
	}
	if work == nil {
		work = p.work.get(p.half)
		if p.half <= keptWork {
			defer p.work.put(work)
		}
	}
	z := from.z
	if z == nil {
		z = *work
		p.spread((p.half+fillLength-1)/fillLength, func(_ *desk, block int) {
			first := block * fillLength
			from.fill(z[first:min(first+fillLength, p.half)], first)
		})
	}
	columns := p.half / p.rows
	p.spread((columns+blockWidth-1)/blockWidth, func(d *desk, block int) {
		first := block * blockWidth
		p.columnBlock(d, *work, z, first, min(blockWidth, columns-first))
	})
	p.spread(p.rows/2/blockWidth+1, func(d *desk, block int) {
		rowBlock(p, d, dst, *work, block*blockWidth, pair)
	})
}

// keptWork is the longest buffer that is kept for the next transform, in complex points: 16 MB. Longer ones count in the
// memory of the process, and their first touch costs little of a transform of that length.
const keptWork = 1 << 20

// fillLength is the number of points of a source that are made at a time. They are made in
// their order and not as the columns need them: numbers far apart have to be waited
// for, which cost three times what the additional sweep over memory does.
const fillLength = 1 << 14

func (p *Plan) borrowDesk() *desk {
	if d, ok := p.desks.Get().(*desk); ok {
		return d
	}
	return p.newDesk()
}

// spread calls do for every block, from several goroutines when the length is worth it.
func (p *Plan) spread(blocks int, do func(d *desk, block int)) {
	limit := 1
	if p.half >= parallelLimit {
		limit = blocks
	}
	spread(blocks, limit, func(next func() (int, bool)) {
		d := p.borrowDesk()
		defer p.desks.Put(d)
		for block, ok := next(); ok; block, ok = next() {
			do(d, block)
		}
	})
}

// columnBlock transforms width columns from column first on, and multiplies row r of
// column c with exp(-2 pi i r c/half). z and work may be the same.
func (p *Plan) columnBlock(d *desk, work, z []complex128, first, width int) {
	columns := p.half / p.rows
	a, b := d.columns[0][:p.rows*width], d.columns[1][:p.rows*width]
	for r := range p.rows {
		copy(a[r*width:][:width], z[r*columns+first:])
	}
	a, _ = p.column.transform(a, b, a, width)
	if width == blockWidth {
		p.turnColumns(work, a, first)
		return
	}
	for i, v := range a {
		r, c := i/width, first+i%width
		work[r*columns+c] = v * p.halfRoots.at(r*c)
	}
}

// turnColumns is the end of columnBlock for a full block. The roots of a row's eight
// columns are products of the first one with powers of that of the row.
func (p *Plan) turnColumns(work, z []complex128, first int) {
	columns := p.half / p.rows
	for r := range p.rows {
		in := (*[blockWidth]complex128)(z[blockWidth*r:])
		to := (*[blockWidth]complex128)(work[r*columns+first:])
		step := (*[3]complex128)(p.stepRoots[3*r:])
		w0 := p.halfRoots.at(r * first)
		w1, w2 := w0*step[0], w0*step[1]
		w3 := w1 * step[1]
		to[0], to[1], to[2], to[3] = in[0]*w0, in[1]*w1, in[2]*w2, in[3]*w3
		to[4], to[5] = in[4]*(w0*step[2]), in[5]*(w1*step[2])
		to[6], to[7] = in[6]*(w2*step[2]), in[7]*(w3*step[2])
	}
}
