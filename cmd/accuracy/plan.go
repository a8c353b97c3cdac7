package main

// The grid of the study.
var (
	ratios  = []float64{0.002, 0.02, 0.05, 0.15, 0.4, 1}
	periods = []float64{30, 300, 3000}
	shares  = []float64{0, 1} // exposure over sampling interval
	noises  = []struct {
		noise   float64
		unknown bool
	}{{0, false}, {0.1, false}, {0.5, false}, {0.1, true}}
)

// Runs of a cell.
const (
	mainRuns  = 2000
	extraRuns = 200
)

// cells lists the study: the main cells with inputs exact, the same with inputs drawn at
// T fc = 300, and cells with what spoils a recording.
func cells() (list []Cell, runs []int) {
	add := func(c Cell, n int) { list, runs = append(list, c), append(runs, n) }
	for _, p := range periods {
		for _, x := range ratios {
			for _, w := range shares {
				for _, n := range noises {
					add(Cell{Ratio: x, Periods: p, Exposure: w, Noise: n.noise, Unknown: n.unknown}, mainRuns)
				}
			}
		}
	}
	for _, x := range ratios {
		for _, w := range shares {
			for _, n := range noises {
				add(Cell{Ratio: x, Periods: 300, Exposure: w, Noise: n.noise, Unknown: n.unknown, Drawn: true}, mainRuns)
			}
		}
	}
	for _, x := range []float64{0.005, 0.05, 0.25} {
		base := Cell{Ratio: x, Periods: 1000, Exposure: 0.5, Noise: 0.1}
		drift, line, gaps, long := base, base, base, base
		drift.Drift = 1
		line.Line = 0.3
		gaps.Gaps = 0.02
		long.Periods = 1e5
		for _, c := range []Cell{drift, line, gaps, long} {
			add(c, extraRuns)
		}
	}
	return list, runs
}
