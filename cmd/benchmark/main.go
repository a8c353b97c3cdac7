// Command benchmark compares the speed and the memory of beadwell with what a practitioner writes in Python with
// pandas, scipy and matplotlib (practitioner.py beside this file), whole process against whole process, and
// writes docs/performance.md:
//
//	go run ./cmd/benchmark
//
// The two sides run alternately, so that what else the machine does meets both; medians and their ratios are
// quoted. What is not installed is left out, and the page says so.
package main

import (
	"context"
	"flag"
	"fmt"
	"os"
	"os/signal"
	"runtime/debug"
	"strings"
)

// settings are what the command line says.
type settings struct {
	out     string
	folder  string
	python  string
	duckdb  string
	rounds  int
	largest int
	tracks  int
	quick   bool
}

func main() {
	var s settings
	flag.StringVar(&s.out, "out", "docs/performance.md", "page to write")
	flag.StringVar(&s.folder, "folder", "", "folder for the recordings, which are kept; empty: a temporary one")
	flag.StringVar(&s.python, "python", "", "interpreter that has pandas, scipy and matplotlib; empty: python3, or that of the system")
	flag.StringVar(&s.duckdb, "duckdb", "", "folder with node_modules/@duckdb/node-api; empty: that reader is left out")
	flag.IntVar(&s.rounds, "rounds", 5, "runs of each side")
	flag.IntVar(&s.largest, "largest", 100_000_000, "rows of the longest recording")
	flag.IntVar(&s.tracks, "tracks", 200, "recordings in the folder")
	flag.BoolVar(&s.quick, "quick", false, "three runs of each side, up to 1e7 rows, 40 tracks: some minutes")
	flag.Parse()
	if flag.Arg(0) == readSelf {
		if err := readOnly(flag.Arg(1)); err != nil {
			fmt.Fprintln(os.Stderr, "benchmark:", err)
			os.Exit(1)
		}
		return
	}
	if s.quick {
		s.rounds, s.largest, s.tracks = 3, 10_000_000, 40
	}
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	defer stop()
	if err := run(ctx, s); err != nil {
		fmt.Fprintln(os.Stderr, "benchmark:", err)
		os.Exit(1)
	}
}

// run prepares the sides and the recordings, measures, and writes the page.
func run(ctx context.Context, s settings) error {
	if s.folder == "" {
		folder, err := os.MkdirTemp("", "beadwell-benchmark-")
		if err != nil {
			return err
		}
		defer os.RemoveAll(folder)
		s.folder = folder
	}
	b := &bench{settings: s, ctx: ctx}
	steps := []func() error{b.build, b.startUp, b.single, b.reading, b.batch, b.scaling, b.bounded}
	for _, step := range steps {
		if err := step(); err != nil {
			return err
		}
	}
	return os.WriteFile(s.out, []byte(b.page()), 0o644)
}

// goVersion is the compiler that made this program.
func goVersion() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "unknown"
	}
	return strings.TrimPrefix(info.GoVersion, "go")
}
