package main

import (
	"context"
	"fmt"
	"io"
	"strings"
	"time"

	"github.com/google/renameio/v2"
)

// kindRuns is the number of recordings of a kind unless another is asked for; those with the inertia of the liquid are long and get fewer.
const (
	kindRuns    = 500
	inertiaRuns = 100
)

// runKinds runs the kinds that the file of results holds fewer recordings of, and writes the page.
func runKinds(ctx context.Context, p plan) error {
	known, err := load[KindScore](p.file)
	if err != nil {
		return err
	}
	list := kindCells()
	begin := time.Now()
	for i, c := range list {
		n := p.runs
		if n == 0 {
			if n = kindRuns; c.group == inertiaGroup {
				n = inertiaRuns
			}
		}
		s := known[c.Name]
		if s == nil {
			s = &KindScore{Name: c.Name, Scores: map[string]*Tally{}}
		}
		if i%p.of != p.at || !strings.Contains(c.Name, p.match) || s.Runs >= n {
			continue
		}
		if ctx.Err() != nil || p.limit > 0 && time.Since(begin) > p.limit {
			break
		}
		if err := studyKind(ctx, i, c, n, s); err != nil {
			return fmt.Errorf("%s: %w", c.Name, err)
		}
		known[c.Name] = s // what an interrupted run has counts too
		fmt.Printf("%s: %d recordings, %d failed, %s\n", c.Name, s.Runs, s.Failed, time.Since(begin).Round(time.Second))
		for _, name := range s.Order {
			t := s.Scores[name]
			fmt.Printf("  %-38s bias %+.2f of scatter, scatter %.2f %%, 95 %% intervals hold %.1f %%, withheld %d\n",
				name, t.Bias(), 100*t.Scatter(), 100*t.Share(t.In95), t.Withheld)
		}
		if err := save(p.file, known); err != nil {
			return err
		}
	}
	if p.write == "" {
		return nil
	}
	var page strings.Builder
	writeKinds(&page, list, known)
	return renameio.WriteFile(p.write, []byte(page.String()), 0o644)
}

// writeKinds writes the page from the scores.
func writeKinds(w io.Writer, list []kindCell, known map[string]*KindScore) {
	fmt.Fprint(w, `# Accuracy of the other kinds of recordings

Moving stages, free beads, volts, photodiodes and the inertia of the liquid: simulated recordings of known truth, calibrated by the whole
program and scored. Written by

    go run ./cmd/accuracy -kinds -results cmd/accuracy/results/kinds.json -write docs/accuracy-kinds.md

The bead is one of 1 um in water at 25 C, 8 um above the surface, in a trap of 500 Hz, recorded for 4 s at 8 kHz, unless the row says
otherwise. Inputs are exact: bias is the mean error in units of its scatter, and coverage that of the statistical interval of 95 %. A coverage of 500
recordings has a standard error of 1.0 %, one of 100 recordings 2.2 %; a bias has 0.04 and 0.10.

Simulated and fitted drag are constant in the first table, and that of an oscillating sphere near a wall in the second.
`)
	for _, group := range []struct{ name, title string }{{roleGroup, "Roles and detectors"}, {inertiaGroup, "Inertia of the liquid"}} {
		fmt.Fprintf(w, "\n## %s\n\n| recording | quantity | recordings | withheld or failed | bias, of scatter | scatter, %% | 95 %% intervals hold, %% |\n|---|---|---|---|---|---|---|\n", group.title)
		for _, c := range list {
			s := known[c.Name]
			if s == nil || c.group != group.name {
				continue
			}
			for _, name := range s.Order {
				t := s.Scores[name]
				fmt.Fprintf(w, "| %s | %s | %d | %d | %+.2f | %.2f | %.1f |\n", c.Name, name, s.Runs, t.Withheld+s.Failed, t.Bias(), 100*t.Scatter(), 100*t.Share(t.In95))
			}
		}
	}
}
