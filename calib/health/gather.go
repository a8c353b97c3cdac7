package health

import (
	"math"
	"slices"
	"sort"
)

// Gathered is what the checks keep of an axis whose samples come in parts and are not held: the sums of
// blocks, the distribution of values, and the extremes. Make it with Gather.
type Gathered struct {
	summary summary
	open    block // the last block, not complete
	filled  int   // samples in it
	last    float64
	run     int

	grid      float64
	grids     grids
	comb      histogram
	low, high tail

	// Power is the mean of |X_k|^2 [unit of X, squared] of Segments stretches of Length samples, mean and line of
	// each taken off. Together with MeanSquare, that of the same stretches, it is set by whoever has the spectrum.
	Power      []float64
	Length     int
	Segments   int
	MeanSquare float64
}

// Gather begins with the first part of an axis, which sets units and resolution: it should be long
// against the memory of the bead. Add then takes this part and all others.
func Gather(first []float64) *Gathered {
	s := summary{length: max(1, (len(first)+fineBlocks-1)/fineBlocks), total: emptyBlock()}
	s.centre, s.scale = location(first)
	values := sampled(first, 4096)
	g := &Gathered{summary: s, open: emptyBlock(), last: math.NaN(), grid: grid(slices.Clone(values), s.scale)}
	mean, square := 0.0, 0.0
	for _, v := range values {
		mean += v / float64(len(values))
	}
	for _, v := range values {
		square += (v - mean) * (v - mean) / float64(len(values))
	}
	g.grids = gridsOf(values, s.scale)
	g.comb = newHistogram(mean, math.Sqrt(square))
	g.low.sign, g.high.sign = 1, -1
	return g
}

// Add takes the next samples [unit of X]; NaN is a missing one.
func (g *Gathered) Add(x []float64) {
	for i, v := range x {
		g.comb.add(v)
		at := g.summary.samples + i
		g.low.see(v, at)
		g.high.see(v, at)
	}
	for len(x) > 0 {
		n := min(len(x), g.summary.length-g.filled)
		var b block
		b, g.last, g.run = g.summary.read(x[:n], g.summary.samples, g.last, g.run)
		g.open.add(b)
		g.summary.total.add(b)
		g.summary.samples += n
		x = x[n:]
		if g.filled += n; g.filled == g.summary.length {
			g.close()
		}
	}
}

// close ends a block. When there are twice as many as are wanted, neighbours are joined.
func (g *Gathered) close() {
	g.summary.blocks = append(g.summary.blocks, g.open)
	g.open, g.filled = emptyBlock(), 0
	if len(g.summary.blocks) < 2*fineBlocks {
		return
	}
	joined, _ := g.summary.joined(fineBlocks)
	g.summary.blocks = joined
	g.summary.length *= 2
}

// Samples returns the number of samples, with the missing ones.
func (g *Gathered) Samples() int { return g.summary.samples }

// Missing returns the number of samples that are missing.
func (g *Gathered) Missing() int { return g.summary.samples - int(g.summary.total.n) }

// Mean returns the mean of the samples that are there [unit of X].
func (g *Gathered) Mean() float64 { return g.summary.total.mean()*g.summary.scale + g.summary.centre }

// Extent returns the smallest and the largest value [unit of X] in each of about count stretches of step samples.
func (g *Gathered) Extent(count int) (low, high []float64, step int) {
	s := g.complete()
	coarse, per := s.joined(count)
	for _, b := range coarse {
		if b.n == 0 {
			low, high = append(low, math.NaN()), append(high, math.NaN())
			continue
		}
		low, high = append(low, b.low*s.scale+s.centre), append(high, b.high*s.scale+s.centre)
	}
	return low, high, per * s.length
}

// complete returns the sums with the last block, even if it is short.
func (g *Gathered) complete() summary {
	s := g.summary
	if g.filled > 0 {
		s.blocks = append(slices.Clone(s.blocks), g.open)
	}
	return s
}

// Scaled returns what would have been gathered from the samples times a positive factor.
func (g *Gathered) Scaled(factor float64) *Gathered {
	out := *g
	out.summary.centre *= factor
	out.summary.scale *= factor
	out.grid *= factor
	out.grids = g.grids.scaled(factor)
	out.comb.low *= factor
	out.comb.per /= factor
	out.low, out.high = g.low.scaled(factor), g.high.scaled(factor)
	out.MeanSquare *= factor * factor
	out.Power = make([]float64, len(g.Power))
	for k, p := range g.Power {
		out.Power[k] = p * factor * factor
	}
	return &out
}

// survey returns what survey finds of samples that are at hand.
func (g *Gathered) survey() values {
	v := values{grid: g.grid, grids: g.grids, comb: g.comb}
	sd := math.Sqrt(g.summary.total.variance()) * g.summary.scale
	width := railWidth(v.grid, sd)
	v.low, v.high = g.low.rail(width), g.high.rail(width)
	return v
}

// tailValues is the number of values that are kept at either end. Of a signal that is on no grid they are the
// outermost samples: a rail holds far more samples than there are beside it.
const tailValues = 256

// tail holds the outermost values at one end, the outermost first.
type tail struct {
	sign   float64 // 1 for the smallest, -1 for the largest values
	values []extreme
}

// extreme is one value with the samples that have it.
type extreme struct {
	value    float64
	at       int // samples
	visits   int // separate stretches of them
	from, to int // first and last
}

// see takes a sample.
func (t *tail) see(v float64, i int) {
	n := len(t.values)
	if !(v-v == 0) || n == tailValues && t.sign*v > t.sign*t.values[n-1].value {
		return
	}
	k := sort.Search(n, func(k int) bool { return t.sign*t.values[k].value >= t.sign*v })
	if k < n && t.values[k].value == v {
		e := &t.values[k]
		e.at++
		if e.to != i-1 {
			e.visits++
		}
		e.to = i
		return
	}
	if n == tailValues {
		t.values = t.values[:n-1]
	}
	t.values = slices.Insert(t.values, k, extreme{value: v, at: 1, visits: 1, from: i, to: i})
}

func (t *tail) scaled(factor float64) tail {
	out := tail{sign: t.sign, values: slices.Clone(t.values)}
	for i := range out.values {
		out.values[i].value *= factor
	}
	return out
}

// rail counts the samples at the extreme and within a width of it.
func (t *tail) rail(width float64) rail {
	if len(t.values) == 0 {
		return rail{}
	}
	e := t.values[0]
	r := rail{value: e.value, at: e.at, visits: e.visits, from: e.from, to: e.to}
	for _, o := range t.values[1:] {
		if math.Abs(o.value-e.value) <= width {
			r.beside += o.at
		}
	}
	return r
}
