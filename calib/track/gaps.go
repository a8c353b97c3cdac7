package track

import (
	"fmt"
	"math"
	"slices"
	"strconv"
)

// fitGaps places stamps that skip whole multiples of the interval.
func fitGaps(t []float64, written resolution) (grid, *gridFault) {
	interval := usualStep(t)
	if interval <= 0 || len(t) < 3 {
		return grid{}, &gridFault{0, "the time does not advance", timeRemedy}
	}
	place := make([]int, len(t))
	for i := 1; i < len(t); i++ {
		k := math.Round((t[i] - t[i-1]) / interval)
		if k > float64(len(t)) {
			return grid{}, &gridFault{i, fmt.Sprintf("a gap of %s, longer than the record before and after it", seconds(t[i]-t[i-1])), "split the file at the gap"}
		}
		place[i] = place[i-1] + max(int(k), 1)
	}
	var g grid
	for range 6 {
		g = fitLine(t, place)
		if g.interval <= 0 || !g.replace(t, place) {
			break
		}
	}
	last := place[len(place)-1]
	if last > 4*len(t)+16 {
		return g, &gridFault{0, fmt.Sprintf("more than three quarters of the samples are missing: %d of %d", last+1-len(t), last+1), timeRemedy}
	}
	rounding := written.step > 0 && g.max <= 0.55*written.step && written.step <= 0.9*g.interval
	if !g.fits() && !rounding || !slices.IsSorted(place) {
		return g, g.uneven(t, place)
	}
	g.rounded = rounding
	g.samples = last + 1
	for i := 1; i < len(place); i++ {
		if place[i] == place[i-1] {
			return g, g.uneven(t, place)
		}
		g.longest = max(g.longest, place[i]-place[i-1]-1)
	}
	if g.samples == len(t) {
		g.place = nil
	}
	return g, nil
}

// replace puts every stamp on its nearest grid point and tells whether one moved.
func (g *grid) replace(t []float64, place []int) bool {
	moved := false
	first := int(math.Round((t[0] - g.start) / g.interval))
	for i, v := range t {
		if k := int(math.Round((v-g.start)/g.interval)) - first; k != place[i] {
			place[i] = k
			moved = true
		}
	}
	return moved
}

// usualStep is the mean of the steps that are within half of their median.
func usualStep(t []float64) float64 {
	stride := max(len(t)/200_000, 1)
	var steps []float64
	for i := 1; i < len(t); i += stride {
		steps = append(steps, t[i]-t[i-1])
	}
	slices.Sort(steps)
	if len(steps) == 0 {
		return 0
	}
	median := steps[len(steps)/2]
	sum, n := 0.0, 0
	for _, s := range steps {
		if math.Abs(s-median) <= 0.5*median {
			sum += s
			n++
		}
	}
	if n == 0 {
		return 0
	}
	return sum / float64(n)
}

// uneven names the first step that is far from a multiple of the usual one,
// else the stamp that is farthest from the grid.
func (g *grid) uneven(t []float64, place []int) *gridFault {
	worst, distance := 1, -1.0
	usual := usualStep(t)
	for i := 1; i < len(t); i++ {
		steps := (t[i] - t[i-1]) / usual
		if off := math.Abs(steps - max(math.Round(steps), 1)); off > 0.35 {
			worst = i
			break
		}
		if r := math.Abs(t[i] - g.start - g.interval*float64(place[i])); r > distance {
			worst, distance = i, r
		}
	}
	return &gridFault{worst, fmt.Sprintf("the time steps are uneven: %s here, %s on average. The stamps lie %.2g %% of a step off an even grid (root mean square), and %.2g %% at the worst; up to %g %% and %g %% they are taken for samples at even times",
		seconds(t[worst]-t[worst-1]), seconds(g.interval), 100*g.rms/g.interval, 100*g.max/g.interval, 100*jitterRMS, 100*jitterMax), timeRemedy}
}

// fitFrames places samples by their frame numbers.
func fitFrames(f []float64) (grid, *gridFault) {
	g := grid{rms: math.NaN(), max: math.NaN()}
	const remedy = "number the frames with whole numbers that rise; keep one recording in a file, or name the column of the bead"
	for i, v := range f {
		switch {
		case v != math.Trunc(v) || math.Abs(v) > 1<<53:
			return g, &gridFault{i, fmt.Sprintf("the frame number %s is not whole", strconv.FormatFloat(v, 'g', -1, 64)), remedy}
		case i > 0 && v <= f[i-1]:
			return g, &gridFault{i, fmt.Sprintf("frame %.0f comes after frame %.0f", v, f[i-1]), remedy}
		case i > 0 && v-f[i-1] > float64(len(f)):
			return g, &gridFault{i, fmt.Sprintf("a gap of %.0f frames, longer than the record", v-f[i-1]), "split the file at the gap"}
		}
	}
	last := f[len(f)-1] - f[0]
	if last > float64(4*len(f)+16) {
		return g, &gridFault{0, fmt.Sprintf("more than three quarters of the frames are missing: %.0f of %.0f", last+1-float64(len(f)), last+1), remedy}
	}
	g.samples = int(last) + 1
	if g.samples > len(f) {
		g.place = make([]int, len(f))
		for i, v := range f {
			g.place[i] = int(v - f[0])
			if i > 0 {
				g.longest = max(g.longest, g.place[i]-g.place[i-1]-1)
			}
		}
	}
	return g, nil
}
