// Command accuracy reruns the accuracy study: simulated recordings of known truth in
// every regime, scored for bias, efficiency, coverage and the size of the tests.
package main

import (
	"context"
	"flag"
	"fmt"
	"os"
	"os/signal"
)

func main() {
	runs := flag.Int("runs", 200, "recordings per cell")
	ratio := flag.Float64("ratio", 0, "only this fc/fs")
	periods := flag.Float64("periods", 0, "only this T fc")
	drawn := flag.Bool("drawn", false, "draw true inputs from their stated uncertainties")
	flag.Parse()
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt)
	defer stop()
	for _, p := range []float64{30, 300, 3000} {
		for _, x := range []float64{0.002, 0.02, 0.05, 0.15, 0.4, 1} {
			if *ratio != 0 && x != *ratio || *periods != 0 && p != *periods {
				continue
			}
			for _, w := range []float64{0, 1} {
				for _, n := range []struct {
					noise   float64
					unknown bool
				}{{0, false}, {0.1, false}, {0.5, false}, {0.1, true}} {
					fmt.Print(study(ctx, Cell{Ratio: x, Periods: p, Exposure: w, Noise: n.noise, Unknown: n.unknown, Drawn: *drawn}, *runs))
				}
			}
		}
	}
}
