// Command accuracy reruns the accuracy study: simulated recordings of known truth in
// every regime, calibrated by the whole program, and scored for bias, efficiency,
// coverage and the size of the tests; with -detection the study of false alarms and detection, with -folders that of series over folders. It keeps the outcomes in a file, so that a study
// can be run in parts, and writes docs/accuracy.md or docs/detection.md from it.
package main

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"flag"
	"fmt"
	"io/fs"
	"maps"
	"os"
	"os/signal"
	"slices"
	"strings"
	"time"

	"github.com/google/renameio/v2"
)

func main() {
	if err := run(); err != nil {
		fmt.Fprintln(os.Stderr, "accuracy:", err)
		os.Exit(1)
	}
}

func run() error {
	runs := flag.Int("runs", 0, "recordings per cell; 0: 2000 for main cells, 200 for others")
	part := flag.String("part", "1/1", "which part of the cells to run, such as 2/4")
	match := flag.String("match", "", "only cells whose name contains this text")
	file := flag.String("results", "accuracy.json", "file of results, read and added to: a cell that has fewer recordings than asked for gets the rest")
	write := flag.String("write", "", "page to write from the file of results")
	limit := flag.Duration("limit", 0, "start no further cell after this time")
	detection := flag.Bool("detection", false, "study false alarms and detection in place of accuracy")
	kinds := flag.Bool("kinds", false, "study the other kinds of recordings in place of trapped beads")
	folders := flag.Bool("folders", false, "study series over folders in place of trapped beads; -runs is the number of folders, 0: 100")
	flag.Parse()
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	defer stop()
	var of, at int
	if n, err := fmt.Sscanf(*part, "%d/%d", &at, &of); n != 2 || err != nil || at < 1 || at > of {
		return fmt.Errorf("part %q is not of the form 2/4", *part)
	}
	if *folders {
		return runFolders(ctx, plan{runs: *runs, file: *file, write: *write, limit: *limit})
	}
	if *kinds {
		return runKinds(ctx, plan{runs: *runs, at: at - 1, of: of, match: *match, file: *file, write: *write, limit: *limit})
	}
	if *detection {
		return runDetection(ctx, plan{runs: *runs, at: at - 1, of: of, match: *match, file: *file, write: *write, limit: *limit})
	}
	known, err := load[Outcome](*file)
	if err != nil {
		return err
	}
	list, counts := cells()
	begin := time.Now()
	for i, c := range list {
		n := counts[i]
		if *runs > 0 {
			n = *runs
		}
		if i%of != at-1 || !strings.Contains(c.String(), *match) {
			continue
		}
		o := known[c.String()]
		if o == nil {
			if o, err = newOutcome(c); err != nil {
				return err
			}
		}
		if o.Runs >= n {
			continue
		}
		if ctx.Err() != nil || *limit > 0 && time.Since(begin) > *limit {
			break
		}
		o.study(ctx, n)
		if ctx.Err() != nil {
			break
		}
		known[c.String()] = o
		t := o.tally(adopted)
		fmt.Printf("%v: %d recordings, adopted bias %+.2f, coverage %.1f %%, %s\n", c, n, t.Bias(), 100*t.Share(t.In95), time.Since(begin).Round(time.Second))
		if err := save(*file, known); err != nil {
			return err
		}
	}
	if *write == "" {
		return nil
	}
	var page strings.Builder
	writeTables(&page, inOrder(list, known))
	return renameio.WriteFile(*write, []byte(page.String()), 0o644)
}

// inOrder returns the outcomes there are, in the order of the cells.
func inOrder(list []Cell, known map[string]*Outcome) []*Outcome {
	var outcomes []*Outcome
	for _, c := range list {
		if o := known[c.String()]; o != nil {
			outcomes = append(outcomes, o)
		}
	}
	return outcomes
}

// load reads the file of results; one that does not exist is empty.
func load[T any](name string) (map[string]*T, error) {
	known := map[string]*T{}
	data, err := os.ReadFile(name)
	if errors.Is(err, fs.ErrNotExist) {
		return known, nil
	}
	if err != nil {
		return nil, err
	}
	return known, json.Unmarshal(data, &known)
}

// save writes the file of results, a line for each cell in the order of the names.
func save[T any](name string, known map[string]*T) error {
	var b bytes.Buffer
	b.WriteString("{\n")
	for i, cell := range slices.Sorted(maps.Keys(known)) {
		if i > 0 {
			b.WriteString(",\n")
		}
		value, err := json.Marshal(known[cell])
		if err != nil {
			return fmt.Errorf("%s: %w", cell, err)
		}
		fmt.Fprintf(&b, "%q: %s", cell, value)
	}
	b.WriteString("\n}\n")
	return renameio.WriteFile(name, b.Bytes(), 0o644)
}
