package calib

import (
	"context"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"sync"

	"gonum.org/v1/gonum/stat"
)

// propagation is what came of drawing a model many times (JCGM 101:2008): for each
// output the values in order of size, their mean, standard deviation and correlation.
type propagation struct {
	rejected    int // draws outside of what the model can evaluate
	mean, sd    []float64
	correlation [][]float64
	sorted      [][]float64
}

// drawsPerBlock is the number of draws that share a generator, so that the result does not
// depend on the number of processors.
const drawsPerBlock = 4096

// propagate draws a model of some outputs. The model fills out and returns false for a draw
// that it cannot evaluate; such draws are left out and counted. Each block of draws has a PCG generator of
// its own, made from the seed and the block's number.
func propagate(ctx context.Context, draws, outputs int, seed uint64, model func(rng *rand.Rand, out []float64) bool) (*propagation, error) {
	blocks := (draws + drawsPerBlock - 1) / drawsPerBlock
	columns := make([][][]float64, blocks)
	limit := make(chan struct{}, runtime.GOMAXPROCS(0))
	var group sync.WaitGroup
	for b := range blocks {
		group.Go(func() {
			limit <- struct{}{}
			defer func() { <-limit }()
			if ctx.Err() == nil {
				n := min(drawsPerBlock, draws-b*drawsPerBlock)
				columns[b] = drawBlock(n, outputs, rand.New(rand.NewPCG(seed, uint64(b))), model)
			}
		})
	}
	group.Wait()
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	p := &propagation{rejected: draws}
	for k := range outputs {
		var all []float64
		for b := range columns {
			all = append(all, columns[b][k]...)
		}
		p.sorted = append(p.sorted, all)
	}
	p.summarise(draws)
	return p, nil
}

func drawBlock(n, outputs int, rng *rand.Rand, model func(*rand.Rand, []float64) bool) [][]float64 {
	columns := make([][]float64, outputs)
	out := make([]float64, outputs)
	for range n {
		if !model(rng, out) {
			continue
		}
		for k, v := range out {
			columns[k] = append(columns[k], v)
		}
	}
	return columns
}

// summarise computes the moments, and sorts.
func (p *propagation) summarise(draws int) {
	for i, x := range p.sorted {
		mean, sd := stat.MeanStdDev(x, nil)
		p.mean, p.sd = append(p.mean, mean), append(p.sd, sd)
		row := make([]float64, len(p.sorted))
		for j, y := range p.sorted {
			row[j] = stat.Correlation(x, y, nil)
		}
		row[i] = 1
		p.correlation = append(p.correlation, row)
		p.rejected = draws - len(x)
	}
	for _, x := range p.sorted {
		slices.Sort(x)
	}
}

// symmetric is the probabilistically symmetric coverage interval of an output (JCGM 101:2008, 7.7.2).
func (p *propagation) symmetric(output int, coverage float64) (low, high float64) {
	x := p.sorted[output]
	return stat.Quantile((1-coverage)/2, stat.Empirical, x, nil), stat.Quantile((1+coverage)/2, stat.Empirical, x, nil)
}

// shortest is the shortest coverage interval of an output (JCGM 101:2008, 7.7.4).
func (p *propagation) shortest(output int, coverage float64) (low, high float64) {
	x := p.sorted[output]
	width := int(math.Round(coverage * float64(len(x))))
	best := 0
	for i := 0; i+width < len(x); i++ {
		if x[i+width]-x[i] < x[best+width]-x[best] {
			best = i
		}
	}
	return x[best], x[best+width]
}

// endError is the standard error of an end of a symmetric interval from so many draws of a normal output of
// standard deviation sd: sqrt(p(1-p)/M) over the density there (David and Nagaraja, Order Statistics (2003), Eq. 10.1.4 for
// normal samples; from memory).
func endError(sd float64, draws int, coverage float64) float64 {
	tail := (1 - coverage) / 2
	z := coverageFactor(coverage, math.Inf(1))
	density := math.Exp(-z*z/2) / math.Sqrt(2*math.Pi)
	return sd * math.Sqrt(tail*(1-tail)/float64(draws)) / density
}

// tolerance is half a unit of the second digit of a standard uncertainty (JCGM 101:2008, 7.9.2).
func tolerance(u float64) float64 {
	return 0.5 * math.Pow(10, math.Floor(math.Log10(u))-1)
}
