package main

import (
	"fmt"
	"io"
	"math"

	"beadwell/calib"
)

// legs of the tables, with the bound that each is held against.
var tableLegs = []struct {
	name, title string
	bound       func(Bounds) float64
}{
	{calib.LegSpectrum, "corner frequency x drag", func(b Bounds) float64 { return b.Drag }},
	{calib.LegEquipartition, "equipartition", func(b Bounds) float64 { return b.Amplitude }},
	{calib.LegDisplacement, "MSD plateau", func(b Bounds) float64 { return b.Amplitude }},
	{adopted, "adopted", func(b Bounds) float64 { return b.Both }},
}

// writeTables writes docs/accuracy.md from the outcomes.
func writeTables(w io.Writer, outcomes []*Outcome) {
	fmt.Fprint(w, `# Accuracy

Simulated recordings of known truth, calibrated by the whole program and scored. Written by

    go run ./cmd/accuracy -results cmd/accuracy/results/accuracy.json -write docs/accuracy.md

which adds to the file of results what its cells lack: 2000 recordings for the main cells, 200 for the others, or as many as `+"`-runs`"+` asks for.
`+"`-part 1/4` to `-part 4/4`"+` run a quarter of the cells each. The number of recordings behind each row stands in the row.

One bead of 1 um in water at 25 C, 5 um above a surface, corner frequency 500 Hz; the sampling rate follows from fc/fs.
Simulated and fitted with constant drag. Columns, for each estimate of ln(stiffness):
bias in units of the scatter; efficiency, the Cramer-Rao bound of the knowledge used over the variance found (the bound in % stands
in brackets); coverage of the 95 % and 68 % intervals in %; estimates withheld in %.
Statistical intervals with inputs exact; combined ones in the cells with inputs drawn. Equality test: share rejected at the 5 % level.
Monte-Carlo error of a coverage of 95 %: 0.5 % with 2000 recordings, 1.3 % with 300, 2.2 % with 100. An estimate whose bound exceeds 50 % (35 % where the noise is not stated) is withheld by design.

`)
	summary(w, outcomes)
	group(w, "Inputs exact", outcomes, func(c Cell) bool { return !c.Drawn && c.spoilt() == "" })
	group(w, "Inputs drawn from their stated uncertainties", outcomes, func(c Cell) bool { return c.Drawn })
	group(w, "Drift, lines, gaps, long records", outcomes, func(c Cell) bool { return c.spoilt() != "" })
	naiveTable(w, outcomes)
}

func (c Cell) spoilt() string {
	switch {
	case c.Drift > 0:
		return fmt.Sprintf("drift %g rms", c.Drift)
	case c.Line > 0:
		return fmt.Sprintf("line %g rms", c.Line)
	case c.Gaps > 0:
		return fmt.Sprintf("%g %% missing", 100*c.Gaps)
	case c.Periods >= 1e5:
		return "long"
	}
	return ""
}

func (c Cell) columns() string {
	noise := fmt.Sprintf("%g", c.Noise)
	if c.Unknown {
		noise += " unknown"
	}
	s := fmt.Sprintf("| %g | %g | %g | %s |", c.Ratio, c.Periods, c.Exposure, noise)
	if x := c.spoilt(); x != "" {
		s = fmt.Sprintf("| %g, %s | %g | %g | %s |", c.Ratio, x, c.Periods, c.Exposure, noise)
	}
	return s
}

func group(w io.Writer, title string, outcomes []*Outcome, in func(Cell) bool) {
	fmt.Fprintf(w, "## %s\n\n", title)
	for _, leg := range tableLegs {
		fmt.Fprintf(w, "### %s\n\n| fc/fs | T fc | exposure | noise | recordings | bias | efficiency | 95 %% | 68 %% | withheld |", leg.title)
		if leg.name == adopted {
			fmt.Fprint(w, " equality | inconsistent |")
		}
		fmt.Fprint(w, "\n|---|---|---|---|---|---|---|---|---|---|")
		if leg.name == adopted {
			fmt.Fprint(w, "---|---|")
		}
		fmt.Fprintln(w)
		for _, o := range outcomes {
			if in(o.Cell) {
				row(w, o, leg.name, leg.bound(o.Bounds))
			}
		}
		fmt.Fprintln(w)
	}
}

func row(w io.Writer, o *Outcome, leg string, bound float64) {
	t := o.tally(leg)
	fmt.Fprintf(w, "%s %d |", o.Cell.columns(), o.Runs)
	scale := 100.0
	if t.Count < 2 {
		fmt.Fprintf(w, " | (%s) | | | 100 |", percent(bound))
	} else {
		e := bound / t.Scatter()
		in95, in68 := t.In95, t.In68
		if o.Cell.Drawn {
			in95, in68 = t.All95, t.All68
		}
		fmt.Fprintf(w, " %+.2f | %.2f (%s) | %.1f | %.1f | %.1f |", t.Bias(), e*e, percent(bound), scale*t.Share(in95), scale*t.Share(in68),
			scale*float64(t.Withheld+o.Failed)/float64(o.Runs))
	}
	if leg == adopted {
		rejected := o.Rejected
		if o.Cell.Drawn {
			rejected = o.RejectedAll
		}
		if o.Tested > o.Runs/2 {
			fmt.Fprintf(w, " %.1f |", scale*float64(rejected)/float64(o.Tested))
		} else {
			fmt.Fprint(w, " |")
		}
		fmt.Fprintf(w, " %.1f |", scale*float64(o.Inconsistent)/float64(o.Runs))
	}
	fmt.Fprintln(w)
}

func percent(bound float64) string {
	if math.IsInf(bound, 0) || bound > 10 {
		return "> 1000"
	}
	return fmt.Sprintf("%.2g", 100*bound)
}

func naiveTable(w io.Writer, outcomes []*Outcome) {
	fmt.Fprintf(w, `## A script of one's own on the same recordings

On the first %d recordings of each cell.
Unweighted plain Lorentzian on a spectrum averaged over 16 segments; kT over the raw variance with the error of independent
samples; unweighted fit of the MSD with independent errors. Error in %% of the stiffness, and coverage of the 95 %% interval in %%.

| fc/fs | T fc | exposure | noise | Lorentzian | covers | variance | covers | MSD | covers |
|---|---|---|---|---|---|---|---|---|---|
`, naiveRuns)
	for _, o := range outcomes {
		if o.Cell.Drawn || o.Cell.Gaps > 0 {
			continue
		}
		fmt.Fprint(w, o.Cell.columns())
		for _, name := range naiveNames {
			t := o.tally(name)
			if t.Count < 2 {
				fmt.Fprint(w, " | |")
				continue
			}
			fmt.Fprintf(w, " %+.0f | %.0f |", 100*math.Expm1(t.Mean()), 100*t.Share(t.In95))
		}
		fmt.Fprintln(w)
	}
}
