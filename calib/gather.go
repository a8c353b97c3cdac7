package calib

import (
	"fmt"
	"math"
	"runtime"
	"sync"

	"beadwell/calib/health"
	"beadwell/calib/msd"
	"beadwell/calib/track"
	"beadwell/calib/transform"
	"beadwell/equipartition"
	"beadwell/psd"
)

const (
	// windowParts is the number of parts in what is in memory at a time: few enough for parts that hold many
	// relaxation times, so many that what is left over at the end of a record is a small share.
	windowParts = 32
	// longestPart is the length of a part [samples] beyond which nothing is gained: 2^22 samples hold ten thousand
	// relaxation times where the corner frequency is a four-hundredth of the sampling rate.
	longestPart = 1 << 22
	// endRelaxations is the length of the ends of a part that are kept for the exact likelihood, in relaxation times: beyond,
	// exp(-40) of a sample is left. keptEnds bounds the samples of all ends of an axis: 16 MB.
	endRelaxations = 40
	keptEnds       = 1 << 21
	// partWorkers bounds the number of parts that are worked on at a time, each with its own copy of its samples.
	partWorkers = 4
	// longestBridge is the longest run of samples, between two stretches of the file, that is filled as missing; the part that
	// a longer one falls into is given up.
	longestBridge = 1 << 12
)

// Gatherer goes through a recording that is too long for the memory. It takes consecutive stretches of its samples, cuts
// them into parts of equal length, and keeps of each what the estimates are made from: sums that are sufficient for
// records of that length which are independent. The results do not depend on the number of processors.
type Gatherer struct {
	memory  float64 // limit that the reader keeps to [bytes]
	length  int     // samples of a part
	axes    []*gatheredAxis
	bands   []pairBand
	segment int
	pairs   []pairSums
	seen    int // samples so far, with the missing ones
	parts   int // parts that were used
	holes   int // parts that were given up for missing samples
	bridged int // missing samples that were bridged in parts that were used
}

// gatheredAxis is one axis of a recording that is gone through.
type gatheredAxis struct {
	name   string
	carry  []float64 // the beginning of the next part
	sigma  float64   // rough standard deviation, which sets the width of histogram bins [recorded unit]
	corner float64   // rough corner frequency, in units of the rate

	spectrum  psd.Gathered
	lags      msd.Summed
	histogram equipartition.Histogram
	health    *health.Gathered
}

// Part takes the next samples of the recording. gap is the number of samples that are missing before them. The
// values are only read during the call.
func (g *Gatherer) Part(rec *track.Recording, gap int) error {
	if g.axes == nil {
		if err := g.begin(rec); err != nil {
			return err
		}
	}
	if len(rec.Axes) != len(g.axes) {
		return fmt.Errorf("%s: the number of axes changes", rec.Name)
	}
	g.fill(gap)
	streams := make([][]float64, len(g.axes))
	transform.Each(len(g.axes), func(next func() (int, bool)) {
		for i, ok := next(); ok; i, ok = next() {
			g.axes[i].health.Add(rec.Axes[i].Values)
			streams[i] = rec.Axes[i].Values
		}
	})
	g.seen += rec.Samples
	g.cut(streams)
	return nil
}

// fill counts the samples of a gap as missing.
func (g *Gatherer) fill(gap int) {
	if gap == 0 {
		return
	}
	g.seen += gap
	missing := make([]float64, min(gap, longestBridge))
	for i := range missing {
		missing[i] = math.NaN()
	}
	for _, a := range g.axes {
		for left := gap; left > 0; left -= len(missing) {
			a.health.Add(missing[:min(left, len(missing))])
		}
		if gap <= longestBridge {
			a.carry = append(a.carry, missing...)
		} else {
			a.carry = a.carry[:0]
		}
	}
	if gap > longestBridge {
		g.holes++
	}
}

// begin settles the length of the parts and what depends on the motion from the first samples.
func (g *Gatherer) begin(rec *track.Recording) error {
	g.length = transform.GoodLength(min(longestPart, rec.Samples/windowParts))
	corner := 0.5
	for _, axis := range rec.Axes {
		a := &gatheredAxis{name: axis.Name, corner: roughCorner, health: health.Gather(axis.Values)}
		r, err := psd.Prepare(bridged(axis.Values[:g.length]), 1)
		if err != nil {
			return &DataError{Name: rec.Name, Axis: axis.Name, Problem: err.Error(), Remedy: "check the columns"}
		}
		a.sigma = math.Sqrt(r.MeanSquare())
		if fit, err := psd.Estimate(r, psd.Options{}); err == nil {
			a.corner = math.Min(fit.Corner, 0.5)
		}
		a.lags.Lags = msd.Lags(g.length, 1/(2*math.Pi*a.corner))
		corner = math.Min(corner, a.corner)
		a.histogram.Sigma = a.sigma
		g.axes = append(g.axes, a)
	}
	for i, a := range g.axes {
		for _, b := range g.axes[i+1:] {
			g.bands = append(g.bands, bandOf(a.corner, b.corner))
		}
	}
	g.segment = segmentOf(g.length, corner)
	g.pairs = make([]pairSums, len(g.bands))
	return nil
}

// roughCorner stands for a corner frequency that the first part does not tell, in units of the rate: lags up to some
// hundreds of samples serve any that is faster.
const roughCorner = 0.05

// cut goes through the complete parts of the samples that are there, and keeps the rest for the next ones.
func (g *Gatherer) cut(streams [][]float64) {
	have := len(g.axes[0].carry)
	count := (have + len(streams[0])) / g.length
	parts := make([]*part, count)
	turn := sync.NewCond(&sync.Mutex{})
	done := 0
	one := func(k int) {
		parts[k] = g.analyse(streams, k*g.length-have)
		turn.L.Lock()
		defer turn.L.Unlock()
		for done != k { // sums are added up in the order of the parts
			turn.Wait()
		}
		g.add(parts[k])
		parts[k] = nil
		done++
		turn.Broadcast()
	}
	transform.Some(count, min(partWorkers, runtime.GOMAXPROCS(0)), func(next func() (int, bool)) {
		for k, ok := next(); ok; k, ok = next() {
			one(k)
		}
	})
	rest := count*g.length - have
	for i, a := range g.axes {
		if rest > 0 {
			a.carry = append(a.carry[:0], streams[i][rest:]...)
		} else {
			a.carry = append(a.carry[count*g.length:], streams[i]...)
		}
	}
}

// part is what one part of a recording gives, of every axis.
type part struct {
	records    []*psd.Record // nil: the part is given up
	lags       []msd.Summed
	histograms []equipartition.Histogram
	pairs      []pairSums
	bridged    int
}

// analyse goes through the part that begins at a sample of the streams; a negative one lies in what was carried over.
func (g *Gatherer) analyse(streams [][]float64, from int) *part {
	p := &part{}
	for i, a := range g.axes {
		x := streams[i][max(0, from):max(0, from+g.length)]
		if from < 0 {
			begin := a.carry[len(a.carry)+from:]
			x = append(append(make([]float64, 0, g.length), begin[:min(len(begin), g.length)]...), x...)
		}
		missing := countUnknown(x)
		if float64(missing) > mostFilled*float64(len(x)) {
			return &part{}
		}
		if missing > 0 {
			p.bridged += missing
			x = bridged(x)
		}
		r, err := psd.Prepare(x, 1)
		if err != nil { // a part beyond any position is no better than a missing one
			return &part{}
		}
		p.records = append(p.records, r)
		sums := msd.Summed{Lags: a.lags.Lags}
		sums.Add(r.X)
		p.lags = append(p.lags, sums)
		p.histograms = append(p.histograms, equipartition.Count(r.X, a.sigma))
	}
	if len(p.records) > 1 {
		p.pairs = sumPairs(p.records, true, g.segment, g.bands)
	}
	return p
}

// add adds a part to the sums.
func (g *Gatherer) add(p *part) {
	if p.records == nil {
		g.holes++
		return
	}
	g.parts++
	g.bridged += p.bridged
	for i, a := range g.axes {
		a.spectrum.Add(p.records[i], a.endsOf(g.length, g.parts))
		a.lags.Join(&p.lags[i])
		a.histogram.Add(&p.histograms[i])
	}
	addPairs(g.pairs, p.pairs)
}

// endsOf returns how many samples of either end of the next part are kept: none when there are enough.
func (a *gatheredAxis) endsOf(length, parts int) int {
	most := min(length/4, int(endRelaxations/(2*math.Pi*a.corner))+1)
	if 2*most*parts > keptEnds {
		return 0
	}
	return most
}

// axis returns what was gathered of an axis.
func (g *Gatherer) axis(name string) *gatheredAxis {
	for _, a := range g.axes {
		if a.name == name {
			return a
		}
	}
	return nil
}
