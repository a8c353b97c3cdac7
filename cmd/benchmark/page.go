package main

import (
	"fmt"
	"os"
	"runtime"
	"strings"
	"time"
)

// machineLimit is the sum of the fastest known parts for 1e7 rows of three axes on two cores [s]: a parser in C, FFTW,
// direct sums of lags. Measured apart from this program, on another machine of the same kind.
const machineLimit = 0.7

// page is the text of docs/performance.md.
func (b *bench) page() string {
	var p strings.Builder
	say := func(format string, values ...any) { fmt.Fprintf(&p, format+"\n", values...) }
	say("# Performance\n")
	say("Written by `%s` on %s in %.0f minutes: Go %s, %s/%s, %d processors. Do not edit; run the command again. Each comparison ran",
		b.commandLine(), time.Now().UTC().Format("2006-01-02"), time.Since(b.begin).Minutes(), goVersion(), runtime.GOOS, runtime.GOARCH, runtime.NumCPU())
	say("whole processes alternately, %d of each unless a table says otherwise. Times are medians of wall clock; a ratio is the median", b.rounds)
	say("of the ratios of neighbouring runs, in which most of what else the machine does cancels. Memory is the largest resident set.\n")
	say("The other side is [practitioner.py](../cmd/benchmark/practitioner.py): what somebody who knows pandas, scipy and")
	say("matplotlib writes for the same purpose, with one periodogram, a maximum-likelihood fit, variance and mean-square")
	say("displacement by transforms, and figures in PNG. It makes fewer estimates, and no uncertainties, checks or report.\n")
	if len(b.missing) > 0 {
		say("Not installed here, and left out: %s.\n", strings.Join(b.missing, "; "))
	}

	say("## One recording\n")
	say("Calibration of time, x, y, z, with report and four figures in SVG.\n")
	say("| rows | side | wall, s | processor, s | memory, MB | ratio of time | bound | ratio of memory | bound |")
	say("| --- | --- | --- | --- | --- | --- | --- | --- | --- |")
	b.comparison(say, "1e6", b.one, boundSingle, 0)
	b.comparison(say, "1e7", b.ten, boundLong, boundLongMemory)
	say("\nThe parts at the limit of the machine (a parser in C, FFTW, direct sums of lags; measured elsewhere on two cores)")
	if len(b.ten) > 0 {
		say("take about %.1f s for 1e7 rows of three axes: this run is %.1f times that.\n", machineLimit, b.ten[0].median.wall/machineLimit)
	}

	say("## Reading alone\n")
	say("1e7 rows of time, x, y, z; start of the process left out. beadwell also computes the SHA-256 of the file.\n")
	say("| reader | s | memory, MB | ratio | bound |")
	say("| --- | --- | --- | --- | --- |")
	for _, o := range b.reads {
		bound := ""
		switch o.side.name {
		case "beadwell":
		case "pandas":
			bound = fmt.Sprintf("at least %g", boundPandas)
		default:
			bound = fmt.Sprintf("the fastest of these at least %g", boundColumns)
		}
		say("| %s | %.2f | %.0f | %.2f | %s |", o.side.name, o.median.wall, o.median.memory/1e6, o.ratio, bound)
	}

	say("\n## A folder\n")
	say("%d recordings of 1e5 rows of time, x, y; %d runs of each side; the script with %d processes.\n", b.tracks, max(3, b.rounds/2), runtime.NumCPU())
	say("| figures | side | wall, s | processor, s | memory, MB | ratio of time | bound | ratio of memory | bound |")
	say("| --- | --- | --- | --- | --- | --- | --- | --- | --- |")
	b.comparison(say, "four each", b.figures, boundFigures, 0)
	b.comparison(say, "none", b.plain, boundBatch, 0)
	say("\nThe first ratio is mostly the cost of the other side's figures, the second mostly that of its reading and fitting.")

	say("\n## Scaling\n")
	say("One recording with report and figures. The bound of the memory is 8 bytes x rows x axes x 2, plus 120 MB.\n")
	say("| rows | wall, s | of which reading, s | us a row | memory, MB | bound, MB |")
	say("| --- | --- | --- | --- | --- | --- |")
	for _, s := range b.sizes {
		say("| %.0e | %.2f | %.2f | %.3f | %.0f | %.0f |", float64(s.rows), s.self.median.wall, s.read, 1e6*s.self.median.wall/float64(s.rows),
			s.self.median.memory/1e6, 48*float64(s.rows)/1e6+120)
	}
	if b.limited != nil {
		say("\nWith `--max-memory %q` the recording of %.0e rows is analysed in parts, once: %.1f s, %.0f MB.", b.limitedSize, float64(b.limitedRows),
			b.limited.median.wall, b.limited.median.memory/1e6)
	}
	say("\n## Start\n")
	say("`beadwell --help`: %.1f ms, the median of %d runs (bound: %.0f ms).", 1e3*b.start.median.wall, 4*b.rounds, 1e3*boundStart)
	return p.String()
}

// comparison writes the rows of one comparison.
func (b *bench) comparison(say func(string, ...any), what string, found []outcome, bound, memory float64) {
	for i, o := range found {
		ratio, limit, share, shareLimit := "", "", "", ""
		if i > 0 {
			ratio, limit = fmt.Sprintf("%.1f", o.ratio), fmt.Sprintf("at least %g", bound)
			share = fmt.Sprintf("%.2f", found[0].median.memory/o.median.memory)
			if memory > 0 {
				shareLimit = fmt.Sprintf("at most %g", memory)
			}
		}
		say("| %s | %s | %.2f | %.2f | %.0f | %s | %s | %s | %s |", what, o.side.name, o.median.wall, o.median.cpu, o.median.memory/1e6, ratio, limit, share, shareLimit)
	}
}

// commandLine is how this program was started, without the places of this machine.
func (b *bench) commandLine() string {
	line := "go run ./cmd/benchmark"
	if b.quick {
		line += " -quick"
	}
	for i, a := range os.Args[1:] {
		if a == "-duckdb" && i+2 < len(os.Args) {
			line += " -duckdb FOLDER"
		}
	}
	return line
}
