package main

import (
	"fmt"
	"io"
	"math"
	"strings"
)

// What the study is held against.
const (
	boundedBelow = 0.15 // Cramer-Rao bound up to which an estimate is judged
	widest95     = 0.015
	widest68     = 0.03
	leastBias    = 0.1 // of the scatter, T fc >= 300
	leastBias30  = 0.2 // below
	mostWithheld = 0.01
	widestSize   = 0.01 // of the equality test at the 5 % level
	sure         = 2.0  // Monte-Carlo errors by which a figure must be outside
)

// apart tells whether the noise, the blur and the motion can be told apart at all: not with
// the noise unstated and less than three samples in 1/fc.
func (c Cell) apart() bool { return !c.Unknown || c.Ratio < 0.3 }

// judgement counts the pairs of cell and estimate that miss a bound.
type judgement struct {
	title   string
	pairs   int
	outside []string
}

// hold compares a share with its bounds: outside is what leaves them by more than the
// Monte-Carlo error allows.
func (j *judgement) hold(name string, share, low, high float64, n int) {
	j.pairs++
	// the error of a share at the bound itself, which does not vanish where nothing is found
	e := func(p float64) float64 { return sure * math.Sqrt(p*(1-p)/float64(n)) }
	if share < low-e(low) || share > high+e(high) {
		j.outside = append(j.outside, fmt.Sprintf("%s: %.1f %% of %d", name, 100*share, n))
	}
}

// efficiencies averages the efficiency over cells.
type efficiencies struct{ sum, weight, square float64 }

func (e *efficiencies) add(t *Tally, bound float64) {
	// the variance of n normal deviates is known to sqrt(2/n) of itself
	ratio, n := math.Pow(bound/t.Scatter(), 2), float64(t.Count)
	e.sum += n * ratio
	e.weight += n
	e.square += 2 * n
}

func (e efficiencies) String() string {
	if e.weight == 0 {
		return ""
	}
	return fmt.Sprintf("%.3f +- %.3f", e.sum/e.weight, math.Sqrt(e.square)/e.weight)
}

// summary writes how the outcomes stand against the bounds.
func summary(w io.Writer, outcomes []*Outcome) {
	coverage95 := judgement{title: "95 % intervals hold the truth in 95 +- 1.5 %, one withheld counting as a miss"}
	coverage68 := judgement{title: "68 % intervals in 68.3 +- 3 %"}
	bias := judgement{title: "bias below 0.1 of the scatter (0.2 for T fc < 300)"}
	withheld := judgement{title: "withheld in less than 1 %"}
	size := judgement{title: "equality test: 5 +- 1 % rejected at the 5 % level"}
	recordings := 0
	mean := map[string]map[float64]*efficiencies{}
	var held, number float64
	for _, o := range outcomes {
		recordings += o.Runs
		c := o.Cell
		if !c.apart() {
			continue
		}
		tested := false
		for _, leg := range tableLegs {
			t, bound := o.tally(leg.name), leg.bound(o.Bounds)
			if bound > boundedBelow || t.Count < 2 {
				continue
			}
			tested = true
			name := fmt.Sprintf("%s, %s", c, leg.title)
			in95, in68 := t.In95, t.In68
			if c.Drawn {
				in95, in68 = t.All95, t.All68
			}
			coverage95.hold(name, float64(in95)/float64(o.Runs), 0.95-widest95, 0.95+widest95, o.Runs)
			coverage68.hold(name, t.Share(in68), 0.683-widest68, 0.683+widest68, t.Count)
			withheld.hold(name, float64(t.Withheld+o.Failed)/float64(o.Runs), 0, mostWithheld, o.Runs)
			held, number = held+float64(in95), number+float64(o.Runs)
			bias.pairs++
			most := leastBias
			if c.Periods < 300 {
				most = leastBias30
			}
			if b := math.Abs(t.Bias()); b > most+sure/math.Sqrt(float64(t.Count)) {
				bias.outside = append(bias.outside, fmt.Sprintf("%s: %+.2f of %d", name, t.Bias(), t.Count))
			}
			if c.spoilt() == "" {
				if mean[leg.name] == nil {
					mean[leg.name] = map[float64]*efficiencies{}
				}
				if mean[leg.name][c.Periods] == nil {
					mean[leg.name][c.Periods] = &efficiencies{}
				}
				mean[leg.name][c.Periods].add(t, bound)
			}
		}
		if tested && o.Tested > o.Runs/2 && o.Bounds.Drag < boundedBelow && o.Bounds.Amplitude < boundedBelow {
			rejected := o.Rejected
			if c.Drawn {
				rejected = o.RejectedAll
			}
			size.hold(c.String(), float64(rejected)/float64(o.Tested), 0.05-widestSize, 0.05+widestSize, o.Tested)
		}
	}
	fmt.Fprintf(w, `## Against the bounds

%d recordings. Judged are the estimates whose Cramer-Rao bound is under 15 %%, in all cells but those with the noise unstated and
fc/fs above 0.3, where noise, blur and motion cannot be told apart. A figure is outside when it misses its bound by more than two
Monte-Carlo errors; of figures that meet it exactly one in forty does so by chance. The 95 %% intervals hold the truth in %.2f %% of all.

| bound | pairs of cell and estimate | outside |
|---|---|---|
`, recordings, 100*held/number)
	all := []judgement{coverage95, coverage68, bias, withheld, size}
	for _, j := range all {
		fmt.Fprintf(w, "| %s | %d | %d |\n", j.title, j.pairs, len(j.outside))
	}
	title := "\nOutside:\n\n"
	for _, j := range all {
		for _, s := range j.outside {
			fmt.Fprintf(w, "%s- %s (%s)\n", title, s, strings.SplitN(j.title, " (", 2)[0])
			title = ""
		}
	}
	fmt.Fprint(w, "\nEfficiency, averaged over the cells by their recordings, with its Monte-Carlo error:\n\n| estimate |")
	for _, p := range periods {
		fmt.Fprintf(w, " T fc = %g |", p)
	}
	fmt.Fprint(w, "\n|---|---|---|---|\n")
	for _, leg := range tableLegs {
		fmt.Fprintf(w, "| %s |", leg.title)
		for _, p := range periods {
			e := mean[leg.name][p]
			if e == nil {
				e = &efficiencies{}
			}
			fmt.Fprintf(w, " %v |", *e)
		}
		fmt.Fprintln(w)
	}
	fmt.Fprintln(w)
}
