package main

import (
	"context"
	"fmt"
	"strings"
	"time"

	"github.com/google/renameio/v2"
)

// plan says which part of the study of detection is run.
type plan struct {
	runs   int // recordings of a cell
	at, of int // every of-th cell from at
	match  string
	file   string // of results
	write  string // page; empty: none
	limit  time.Duration
}

// detectionRuns is the number of recordings of a cell unless another is asked for.
const detectionRuns = 200

// runDetection runs the cells that the file of results does not hold yet, and writes the page.
func runDetection(ctx context.Context, p plan) error {
	if p.runs == 0 {
		p.runs = detectionRuns
	}
	known, err := load[Detection](p.file)
	if err != nil {
		return err
	}
	list := detectionCells()
	begin := time.Now()
	for i, c := range list {
		n := c.count(p.runs)
		if i%p.of != p.at || !strings.Contains(c.Name, p.match) {
			continue
		}
		if old := known[c.Name]; old != nil && old.Runs >= n {
			continue
		}
		if ctx.Err() != nil || p.limit > 0 && time.Since(begin) > p.limit {
			break
		}
		d := detect(ctx, c, n)
		if ctx.Err() != nil {
			break
		}
		known[c.Name] = d
		fmt.Printf("%v, %s\n", d, time.Since(begin).Round(time.Second))
		if err := save(p.file, known); err != nil {
			return err
		}
	}
	if p.write == "" {
		return nil
	}
	var page strings.Builder
	writeDetection(&page, list, known)
	return renameio.WriteFile(p.write, []byte(page.String()), 0o644)
}
