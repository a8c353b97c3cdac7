package health

import (
	"math"
	"slices"
)

// fineBlocks is the number of blocks whose sums are kept. It sets the resolution
// in time, 0.05 % of the record, and the memory.
const fineBlocks = 2048

// block holds sums over consecutive samples of y = (x - centre)/scale.
type block struct {
	n              float64 // observed samples
	s1, s2, s3, s4 float64 // sums of powers of y
	steps, d2, d4  float64 // number of pairs of observed neighbours, sums of powers of their difference
	equal          float64 // pairs of neighbours that are exactly equal
	low, high      float64 // smallest and largest y; +Inf and -Inf when n is 0
}

func emptyBlock() block { return block{low: math.Inf(1), high: math.Inf(-1)} }

func (b *block) add(o block) {
	b.n += o.n
	b.s1 += o.s1
	b.s2 += o.s2
	b.s3 += o.s3
	b.s4 += o.s4
	b.steps += o.steps
	b.d2 += o.d2
	b.d4 += o.d4
	b.equal += o.equal
	b.low = math.Min(b.low, o.low)
	b.high = math.Max(b.high, o.high)
}

// shift subtracts a from all y.
func (b *block) shift(a float64) {
	n, s1, s2, s3, s4 := b.n, b.s1, b.s2, b.s3, b.s4
	b.s1 = s1 - a*n
	b.s2 = s2 - 2*a*s1 + a*a*n
	b.s3 = s3 - 3*a*s2 + 3*a*a*s1 - a*a*a*n
	b.s4 = s4 - 4*a*s3 + 6*a*a*s2 - 4*a*a*a*s1 + a*a*a*a*n
	b.low -= a
	b.high -= a
}

// mean returns the mean of y; NaN without samples.
func (b block) mean() float64 { return b.s1 / b.n }

// variance returns the mean square about the own mean.
func (b block) variance() float64 {
	m := b.s1 / b.n
	return math.Max(b.s2/b.n-m*m, 0)
}

// summary is what the first pass over an axis keeps.
type summary struct {
	samples       int // all
	length        int // samples of each block, the last may be shorter
	centre, scale float64
	blocks        []block
	total         block
	low, high     float64 // smallest and largest x
	frozenAt      int     // first sample of the longest run of equal values
	frozen        int     // samples in that run
}

func summarise(x []float64) summary {
	s := summary{samples: len(x), low: math.Inf(1), high: math.Inf(-1)}
	s.centre, s.scale = location(x)
	s.length = max(1, (len(x)+fineBlocks-1)/fineBlocks)
	s.blocks = make([]block, 0, (len(x)+s.length-1)/s.length)
	s.total = emptyBlock()
	previous, run := math.NaN(), 0
	for from := 0; from < len(x); from += s.length {
		var b block
		b, previous, run = s.read(x[from:min(from+s.length, len(x))], from, previous, run)
		s.blocks = append(s.blocks, b)
		s.total.add(b)
	}
	return s
}

// read sums one block that begins at sample from. The last y before it and the
// number of equal steps that led to that are handed on.
func (s *summary) read(x []float64, from int, previous float64, run int) (block, float64, int) {
	b := emptyBlock()
	per := 1 / s.scale
	low, high := math.Inf(1), math.Inf(-1)
	for i, v := range x {
		if v-v != 0 { // NaN or infinite
			previous, run = v, 0
			continue
		}
		y := (v - s.centre) * per
		y2 := y * y
		b.n++
		b.s1 += y
		b.s2 += y2
		b.s3 += y2 * y
		b.s4 += y2 * y2
		if d := y - previous; d == 0 {
			b.steps++
			b.equal++
			run++
			if run >= s.frozen {
				s.frozen, s.frozenAt = run+1, from+i-run
			}
		} else if d == d {
			d2 := d * d
			b.steps++
			b.d2 += d2
			b.d4 += d2 * d2
			run = 0
		}
		previous = y
		if v < low {
			low = v
		}
		if v > high {
			high = v
		}
	}
	s.low, s.high = min(s.low, low), max(s.high, high)
	b.low, b.high = (low-s.centre)*per, (high-s.centre)*per // infinities stay
	return b, previous, run
}

// location returns the median and a scale of some samples: the interquartile range,
// or the range when that is zero, or 1.
func location(x []float64) (centre, scale float64) {
	v := sampled(x, 1024)
	if len(v) == 0 {
		return 0, 1
	}
	slices.Sort(v)
	n := len(v)
	scale = (v[3*n/4] - v[n/4]) / 1.349 // the interquartile range of a normal distribution is 1.349 standard deviations
	if scale <= 0 {
		scale = v[n-1] - v[0]
	}
	if !(scale > 1e-300) {
		scale = 1
	}
	return v[n/2], scale
}

// sampled returns about count of the observed samples, spread over the record.
func sampled(x []float64, count int) []float64 {
	stride := max(1, len(x)/count)
	v := make([]float64, 0, len(x)/stride+1)
	for i := 0; i < len(x); i += stride {
		if x[i]-x[i] == 0 {
			v = append(v, x[i])
		}
	}
	return v
}

// joined returns the sums of about count blocks of equal numbers of fine blocks.
func (s summary) joined(count int) (coarse []block, per int) {
	per = max(1, (len(s.blocks)+count-1)/count)
	for from := 0; from < len(s.blocks); from += per {
		b := emptyBlock()
		for _, o := range s.blocks[from:min(from+per, len(s.blocks))] {
			b.add(o)
		}
		coarse = append(coarse, b)
	}
	return coarse, per
}
