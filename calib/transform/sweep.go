package transform

import (
	"runtime"
	"sync"
	"sync/atomic"
)

// blockWidth is the number of columns or rows that are worked on together: eight
// real results fill a cache line of 64 bytes, eight complex points two.
const blockWidth = 8

// parallelLimit is the complex length from which more than one processor is used;
// below it, waking them costs a noticeable part of what they save.
const parallelLimit = 1 << 15

// desk is the working memory of one worker: blockWidth and as many mirror columns or
// rows, and a spare one.
type desk struct {
	block, mirror [][]complex128
	spare         []complex128
}

func (p *Plan) newDesk() *desk {
	length := p.half / p.rows
	d := &desk{spare: make([]complex128, length)}
	count := blockWidth
	if p.rows == 1 {
		count = 1
	}
	for range count {
		d.block = append(d.block, make([]complex128, length))
		d.mirror = append(d.mirror, make([]complex128, length))
	}
	return d
}

// run transforms the source and writes results for k = 0 .. half, or up to half-1 if
// dst is that short, by way of pair.
func run[T float64 | complex128](p *Plan, dst []T, from source, pair pairing[T]) {
	if p.rows == 1 {
		d := p.borrowDesk()
		defer p.desks.Put(d)
		from.gather(d.block, 0, 1)
		z, _ := p.row.transform(d.block[0], d.spare, d.block[0])
		storeWhole(p, dst, z, pair)
		return
	}
	work, ok := p.work.Get().(*[]complex128)
	if !ok {
		w := make([]complex128, p.half)
		work = &w
	}
	defer p.work.Put(work)
	columns := p.half / p.rows
	p.spread((columns+blockWidth-1)/blockWidth, func(d *desk, block int) {
		first := block * blockWidth
		p.columnBlock(d, *work, from, first, min(blockWidth, columns-first))
	})
	p.spread(p.rows/2/blockWidth+1, func(d *desk, block int) {
		rowBlock(p, d, dst, *work, block*blockWidth, pair)
	})
}

func (p *Plan) borrowDesk() *desk {
	if d, ok := p.desks.Get().(*desk); ok {
		return d
	}
	return p.newDesk()
}

// spread calls do for every block, from several goroutines when the length is worth
// it. Blocks touch separate parts of the results, so their order does not matter.
func (p *Plan) spread(blocks int, do func(d *desk, block int)) {
	workers := min(runtime.GOMAXPROCS(0), blocks)
	if p.half < parallelLimit {
		workers = 1
	}
	var next atomic.Int64
	work := func() {
		d := p.borrowDesk()
		defer p.desks.Put(d)
		for {
			block := int(next.Add(1)) - 1
			if block >= blocks {
				return
			}
			do(d, block)
		}
	}
	var group sync.WaitGroup
	for range workers - 1 {
		group.Go(work)
	}
	work()
	group.Wait()
}

// columnBlock transforms width columns from column first on, and multiplies row r of
// column c with exp(-2 pi i r c/half).
func (p *Plan) columnBlock(d *desk, work []complex128, from source, first, width int) {
	columns := p.half / p.rows
	block := d.block[:width]
	for b := range block {
		block[b] = block[b][:p.rows]
	}
	d.spare = d.spare[:p.rows]
	from.gather(block, first, columns)
	for b := range block {
		block[b], d.spare = p.column.transform(block[b], d.spare, block[b])
	}
	if width < blockWidth {
		for b, column := range block {
			for r, z := range column {
				work[r*columns+first+b] = z * p.halfRoots.at(r*(first+b))
			}
		}
		return
	}
	p.scatterColumns(work, block, first)
}

// scatterColumns is the end of columnBlock for a full block. The roots of a row's eight
// columns are products of the first one with powers of that of the row.
func (p *Plan) scatterColumns(work []complex128, block [][]complex128, first int) {
	columns := p.half / p.rows
	c0, c1, c2, c3 := block[0], block[1], block[2], block[3]
	c4, c5, c6, c7 := block[4], block[5], block[6], block[7]
	for r := range p.rows {
		to := (*[blockWidth]complex128)(work[r*columns+first:])
		step := (*[3]complex128)(p.stepRoots[3*r:])
		w0 := p.halfRoots.at(r * first)
		w1, w2 := w0*step[0], w0*step[1]
		w3 := w1 * step[1]
		to[0], to[1], to[2], to[3] = c0[r]*w0, c1[r]*w1, c2[r]*w2, c3[r]*w3
		to[4], to[5] = c4[r]*(w0*step[2]), c5[r]*(w1*step[2])
		to[6], to[7] = c6[r]*(w2*step[2]), c7[r]*(w3*step[2])
	}
}
