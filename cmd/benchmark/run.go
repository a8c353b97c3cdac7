package main

import (
	"bytes"
	"context"
	"fmt"
	"os"
	"os/exec"
	"slices"
	"strconv"
	"strings"
	"syscall"
	"time"
)

// usage is what one process took.
type usage struct {
	wall, cpu float64 // s
	memory    float64 // largest resident set [bytes]
}

// measure runs a command, of which standard output is returned.
func measure(ctx context.Context, command ...string) (usage, string, error) {
	cmd := exec.CommandContext(ctx, command[0], command[1:]...)
	var out, complaint bytes.Buffer
	cmd.Stdout, cmd.Stderr = &out, &complaint
	begin := time.Now()
	err := cmd.Run()
	u := usage{wall: time.Since(begin).Seconds()}
	if state := cmd.ProcessState; state != nil {
		u.cpu = (state.UserTime() + state.SystemTime()).Seconds()
		if r, ok := state.SysUsage().(*syscall.Rusage); ok {
			u.memory = float64(r.Maxrss) * 1024 // kibibytes on Linux
		}
		if state.ExitCode() == 3 { // calibrated, but not to be trusted: as long a run as any
			err = nil
		}
	}
	if err != nil {
		return u, out.String(), fmt.Errorf("%s: %w: %s", strings.Join(command, " "), err, complaint.String())
	}
	return u, out.String(), nil
}

// side is one contender of a comparison.
type side struct {
	name    string
	command []string
	// printed tells that the command prints the seconds that count as the first word of its output.
	printed bool
	fresh   string // folder that is removed before each run; empty: none
}

// outcome are the medians of a side.
type outcome struct {
	side   side
	median usage
	ratio  float64 // median of its wall times over those of the first side, run by run
}

// alternate runs all sides in turn, as often as is asked for, and returns their medians. Each run of the first is
// followed by one of each other, and the ratios are of such neighbours.
func (b *bench) alternate(rounds int, sides ...side) ([]outcome, error) {
	all := make([][]usage, len(sides))
	for round := range rounds {
		for i, s := range sides {
			if s.fresh != "" {
				if err := os.RemoveAll(s.fresh); err != nil {
					return nil, err
				}
			}
			u, out, err := measure(b.ctx, s.command...)
			if err != nil {
				return nil, err
			}
			if s.printed {
				word, _, _ := strings.Cut(strings.TrimSpace(out), " ")
				if u.wall, err = strconv.ParseFloat(word, 64); err != nil {
					return nil, fmt.Errorf("%s printed %q, not seconds", s.name, out)
				}
			}
			all[i] = append(all[i], u)
			fmt.Fprintf(os.Stderr, "  %d/%d %s: %.2f s, %.0f MB\n", round+1, rounds, s.name, u.wall, u.memory/1e6)
		}
	}
	outcomes := make([]outcome, len(sides))
	for i, s := range sides {
		o := outcome{side: s}
		o.median = usage{wall: median(all[i], func(u usage) float64 { return u.wall }), cpu: median(all[i], func(u usage) float64 { return u.cpu }),
			memory: median(all[i], func(u usage) float64 { return u.memory })}
		var ratios []float64
		for k, u := range all[i] {
			ratios = append(ratios, u.wall/all[0][k].wall)
		}
		o.ratio = medianOf(ratios)
		outcomes[i] = o
	}
	return outcomes, nil
}

func median(all []usage, value func(usage) float64) float64 {
	var list []float64
	for _, u := range all {
		list = append(list, value(u))
	}
	return medianOf(list)
}

func medianOf(list []float64) float64 {
	list = slices.Sorted(slices.Values(list))
	n := len(list)
	if n == 0 {
		return 0
	}
	return (list[(n-1)/2] + list[n/2]) / 2
}
