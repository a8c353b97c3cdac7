package main

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"sync"

	"beadwell/calib"
)

// Tally scores one estimate over the recordings of a cell.
type Tally struct {
	Count, Withheld              int
	sum, square                  float64
	in68, in95, in68All, in95All int // statistical, combined
	open                         int // intervals with an unbounded end
}

func (t *Tally) add(q calib.Quantity, truth float64) {
	if !q.Known() {
		t.Withheld++
		return
	}
	t.Count++
	e := math.Log(float64(q.Value) / truth)
	t.sum += e
	t.square += e * e
	inside := func(i [2]calib.Float) int {
		if truth < float64(i[0]) || truth > float64(i[1]) { // an unknown end excludes nothing
			return 0
		}
		return 1
	}
	t.in68 += inside(q.Statistical.Interval68)
	t.in95 += inside(q.Statistical.Interval95)
	t.in68All += inside(q.Combined.Interval68)
	t.in95All += inside(q.Combined.Interval95)
	if !q.Statistical.Interval95[0].Known() || !q.Statistical.Interval95[1].Known() {
		t.open++
	}
}

// Mean and Scatter are those of the error of ln kappa.
func (t Tally) Mean() float64    { return t.sum / float64(t.Count) }
func (t Tally) Scatter() float64 { m := t.Mean(); return math.Sqrt(t.square/float64(t.Count) - m*m) }

// Bias is the mean error in units of the scatter.
func (t Tally) Bias() float64 { return t.Mean() / t.Scatter() }

func (t Tally) share(n int) float64 { return float64(n) / float64(t.Count) }

// Outcome is the score of a cell.
type Outcome struct {
	Cell                                              Cell
	Bounds                                            Bounds
	Legs                                              map[string]*Tally
	Reject, RejectAll, Tested                         int // equality test at the 5 % level
	RouteReject, RouteRejectAll, AmpReject, AmpTested int
	Failed                                            int
	Verdicts                                          int // called inconsistent
	Misfit, FitTested                                 int
	Low                                               int
	Error                                             error
}

const adopted = "adopted"

// study runs a number of recordings of a cell. Recordings are scored in the order of their
// seeds, so that the outcome does not depend on the number of processors.
func study(ctx context.Context, c Cell, runs int) *Outcome {
	o := &Outcome{Cell: c, Bounds: c.bounds(), Legs: map[string]*Tally{}}
	results := make([]*calib.Result, runs)
	truths := make([]float64, runs)
	errs := make([]error, runs)
	var group sync.WaitGroup
	next := make(chan int)
	for range runtime.GOMAXPROCS(0) {
		group.Go(func() {
			for i := range next {
				r, w, _, err := c.calibrate(ctx, uint64(i+1))
				results[i], truths[i], errs[i] = slim(r), w.kappa, err
			}
		})
	}
	for i := range runs {
		next <- i
	}
	close(next)
	group.Wait()
	for i, r := range results {
		if errs[i] != nil {
			o.Failed++
			o.Error = errs[i]
			continue
		}
		o.score(r, truths[i])
	}
	return o
}

// slim drops the curves of a result.
func slim(r *calib.Result) *calib.Result {
	if r == nil {
		return nil
	}
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

func (o *Outcome) score(r *calib.Result, truth float64) {
	a := r.Axes[0]
	for _, e := range a.Estimates {
		o.tally(e.Leg).add(e.Stiffness, truth)
	}
	o.tally(adopted).add(a.Adopted.Stiffness, truth)
	count := func(p calib.Float, n *int) {
		if float64(p) < 0.05 {
			*n++
		}
	}
	if p := a.CrossCheck.Equality.PValue; p.Known() {
		o.Tested++
		count(p, &o.Reject)
		count(a.CrossCheck.Equality.PValueCombined, &o.RejectAll)
		count(a.CrossCheck.Routes.PValue, &o.RouteReject)
		count(a.CrossCheck.Routes.PValueCombined, &o.RouteRejectAll)
	}
	if p := a.CrossCheck.Amplitudes.PValue; p.Known() {
		o.AmpTested++
		count(p, &o.AmpReject)
	}
	if p := a.Spectrum.Goodness.PValue; p.Known() {
		o.FitTested++
		count(p, &o.Misfit)
	}
	if r.Verdict.Status != calib.Consistent {
		o.Verdicts++
	}
}

// String is the outcome as lines for a terminal.
func (o *Outcome) String() string {
	s := fmt.Sprintf("%v: N %d, bounds drag %.4f amplitude %.4f both %.4f; failed %d (%v); reject %.3f/%.3f of %d (routes %.3f/%.3f, amplitudes %.3f of %d), inconsistent %d, misfit %.3f\n",
		o.Cell, o.Cell.samples(), o.Bounds.Drag, o.Bounds.Amplitude, o.Bounds.Both, o.Failed, o.Error,
		float64(o.Reject)/float64(o.Tested), float64(o.RejectAll)/float64(o.Tested), o.Tested,
		float64(o.RouteReject)/float64(o.Tested), float64(o.RouteRejectAll)/float64(o.Tested),
		float64(o.AmpReject)/float64(o.AmpTested), o.AmpTested, o.Verdicts, float64(o.Misfit)/float64(o.FitTested))
	for _, name := range []string{calib.LegSpectrum, calib.LegEquipartition, calib.LegDisplacement, calib.LegSpectrumAmplitude, calib.LegDisplacementTime, adopted} {
		t := o.tally(name)
		if t.Count == 0 {
			s += fmt.Sprintf("   %-30s withheld %d\n", name, t.Withheld)
			continue
		}
		bound := o.Bounds.Amplitude
		switch name {
		case calib.LegSpectrum, calib.LegDisplacementTime:
			bound = o.Bounds.Drag
		case adopted:
			bound = o.Bounds.Both
		}
		eff := bound / t.Scatter()
		s += fmt.Sprintf("   %-30s bias %+.3f scatter %.4f efficiency %.3f  68: %.3f/%.3f 95: %.3f/%.3f withheld %d open %d\n", name, t.Bias(), t.Scatter(), eff*eff,
			t.share(t.in68), t.share(t.in68All), t.share(t.in95), t.share(t.in95All), t.Withheld, t.open)
	}
	return s
}
