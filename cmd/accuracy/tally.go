package main

import (
	"context"
	"math"
	"runtime"
	"sync"

	"beadwell/calib"
)

// Tally scores one estimate over the recordings of a cell. All fields are exported for
// the file of results.
type Tally struct {
	Count, Withheld int
	Sum, Square     float64
	In68, In95      int // statistical intervals that hold the truth
	All68, All95    int // combined ones
	Open            int // intervals with an unbounded end
}

func (t *Tally) add(q calib.Quantity, truth float64) {
	if !q.Known() {
		t.Withheld++
		return
	}
	t.error(float64(q.Value), truth)
	inside := func(i [2]calib.Float) int {
		if truth < float64(i[0]) || truth > float64(i[1]) { // an unknown end excludes nothing
			return 0
		}
		return 1
	}
	t.In68 += inside(q.Statistical.Interval68)
	t.In95 += inside(q.Statistical.Interval95)
	t.All68 += inside(q.Combined.Interval68)
	t.All95 += inside(q.Combined.Interval95)
	if !q.Statistical.Interval95[0].Known() || !q.Statistical.Interval95[1].Known() {
		t.Open++
	}
}

func (t *Tally) error(value, truth float64) {
	t.Count++
	e := math.Log(value / truth)
	t.Sum += e
	t.Square += e * e
}

func (t *Tally) addNaive(n naive, truth float64) {
	if !(n.value > 0) {
		t.Withheld++
		return
	}
	t.error(n.value, truth)
	if truth >= n.low && truth <= n.high {
		t.In95++
	}
}

// Mean and Scatter are those of the error of ln kappa.
func (t Tally) Mean() float64    { return t.Sum / float64(t.Count) }
func (t Tally) Scatter() float64 { m := t.Mean(); return math.Sqrt(t.Square/float64(t.Count) - m*m) }

// Bias is the mean error in units of the scatter.
func (t Tally) Bias() float64 { return t.Mean() / t.Scatter() }

// Share is a count over the recordings with an estimate.
func (t Tally) Share(n int) float64 { return float64(n) / float64(t.Count) }

// Outcome is the score of a cell.
type Outcome struct {
	Cell   Cell
	Runs   int
	Bounds Bounds
	Legs   map[string]*Tally

	Tested                int // recordings with an equality test
	Rejected, RejectedAll int // at the 5 % level: inputs exact, inputs with their uncertainties
	FitTested, Misfit     int // goodness of fit at the 5 % level
	Inconsistent, Unfit   int // verdicts
	Doubtful              int // recordings with a doubtful finding on the recording itself
	Failed                int // recordings that were refused
	Error                 string
}

const (
	adopted            = "adopted"
	naiveLorentzian    = "naive Lorentzian"
	naiveRaw           = "naive variance"
	naiveDisplacements = "naive MSD"

	naiveRuns = 200 // recordings of a cell that a script is tried on: what it misses shows in fewer
)

// study adds recordings of a cell to its outcome until there are as many as asked for.
// Recordings are scored in the order of their numbers, so that the outcome does not depend
// on the number of processors; it is unfinished when the context ends.
func (o *Outcome) study(ctx context.Context, runs int) {
	c := o.Cell
	trials := make([]trial, max(0, runs-o.Runs))
	each(len(trials), func(i int) { trials[i] = c.try(ctx, c.seed(o.Runs+i), o.Runs+i < naiveRuns) })
	if ctx.Err() != nil {
		return
	}
	o.Runs += len(trials)
	for _, t := range trials {
		if t.err != nil {
			o.Failed++
			o.Error = t.err.Error()
			continue
		}
		o.score(t)
	}
}

// newOutcome returns the outcome of a cell without recordings.
func newOutcome(c Cell) (*Outcome, error) {
	b, err := c.bounds()
	return &Outcome{Cell: c, Bounds: b, Legs: map[string]*Tally{}}, err
}

// each calls f for 0 to runs-1, on as many goroutines as there are processors.
func each(runs int, f func(i int)) {
	var group sync.WaitGroup
	next := make(chan int)
	for range runtime.GOMAXPROCS(0) {
		group.Go(func() {
			for i := range next {
				f(i)
			}
		})
	}
	for i := range runs {
		next <- i
	}
	close(next)
	group.Wait()
}

var naiveNames = []string{naiveLorentzian, naiveRaw, naiveDisplacements}

// trial is the outcome of one recording.
type trial struct {
	result *calib.Result
	truth  float64
	naive  []naive // nil where no script was tried
	err    error
}

func (c Cell) try(ctx context.Context, seed uint64, compare bool) trial {
	r, w, rec, err := c.calibrate(ctx, seed)
	if err != nil {
		return trial{err: err}
	}
	t := trial{result: slim(r), truth: w.kappa}
	if compare && c.Gaps == 0 {
		x := rec.Axes[0].Values
		for i := range x {
			x[i] *= statedPixel
		}
		gamma, kT := float64(r.Axes[0].Drag.Value), float64(r.Medium.ThermalEnergy.Value)
		t.naive = []naive{naiveSpectrum(x, rec.Rate, gamma), naiveVariance(x, kT), naiveDisplacement(x, kT)}
	}
	return t
}

// slim drops the curves of a result.
func slim(r *calib.Result) *calib.Result {
	for i := range r.Axes {
		a := &r.Axes[i]
		a.Spectrum.Points, a.Spectrum.Model, a.Trace = nil, nil, calib.Trace{}
		a.Equipartition.Potential, a.Displacement.Points, a.Displacement.Model = calib.Potential{}, nil, nil
	}
	return r
}

func (o *Outcome) tally(name string) *Tally {
	if o.Legs[name] == nil {
		o.Legs[name] = &Tally{}
	}
	return o.Legs[name]
}

func (o *Outcome) score(t trial) {
	r, truth := t.result, t.truth
	a := r.Axes[0]
	for _, e := range a.Estimates {
		o.tally(e.Leg).add(e.Stiffness, truth)
	}
	o.tally(adopted).add(a.Adopted.Stiffness, truth)
	for i, n := range t.naive {
		o.tally(naiveNames[i]).addNaive(n, truth)
	}
	count := func(p calib.Float, n *int) {
		if float64(p) < 0.05 {
			*n++
		}
	}
	if p := a.CrossCheck.Equality.PValue; p.Known() {
		o.Tested++
		count(p, &o.Rejected)
		count(a.CrossCheck.Equality.PValueCombined, &o.RejectedAll)
	}
	if p := a.Spectrum.Goodness.PValue; p.Known() {
		o.FitTested++
		count(p, &o.Misfit)
	}
	switch r.Verdict.Status {
	case calib.Inconsistent:
		o.Inconsistent++
	case calib.Unfit:
		o.Unfit++
	}
	for _, c := range r.Checks {
		if c.Level != "ok" {
			o.Doubtful++
			break
		}
	}
}
