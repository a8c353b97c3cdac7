package track

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strconv"
)

// Tolerances of the time grid, as fractions of the sampling interval. Jitter of
// 5 % rms blurs positions by less than a twentieth of an interval of motion;
// beyond 45 % a stamp could belong to the next grid point.
const (
	jitterRMS = 0.05
	jitterMax = 0.45
)

// grid places samples on a regular time grid.
type grid struct {
	interval float64 // sampling interval dt [s]
	start    float64 // time of grid point 0 [s]
	samples  int     // grid points
	place    []int   // grid point of each row; nil when row i is point i
	rms, max float64 // of the stamps about the grid [s]
	slopeU   float64 // standard uncertainty of interval [s]
	rounded  bool    // the stamps are off the grid by their rounding alone
	longest  int     // longest run of points without a stamp
}

// gridFault is a row whose stamp does not fit.
type gridFault struct {
	row          int
	what, remedy string
}

// resolution is the rounding of stamps as written.
type resolution struct {
	step  float64 // fixed step [s]; 0 when unknown
	shift int     // unit of the file as a power of ten of a second
	times float64 // and times this; 0 means 1
}

func (r resolution) factor() float64 { return cmp.Or(r.times, 1) }

const timeRemedy = "repair the stamps, or leave out the time column and state the rate (--rate) if the samples are known to be evenly spaced"

// fitGrid finds the regular grid of the stamps t [s]. Steps of one and of two
// units of rounding can come from rounding or from lost rows; likely, the rate
// that is expected [Hz], decides, and without one (0) such stamps are refused.
func fitGrid(t []float64, written resolution, likely float64) (grid, *gridFault) {
	g := fitLine(t, nil)
	if g.interval != g.interval {
		if i := slices.IndexFunc(t, math.IsNaN); i >= 0 {
			return grid{}, &gridFault{i, "the time is missing", "complete the time, or remove the row"}
		}
	}
	if g.interval > 0 && g.fits() {
		g.samples = len(t)
		g.rounded = written.step > 0 && g.max <= 0.55*written.step
		return g, nil
	}
	if g.interval > 0 && g.isRounded(t, written) {
		ratio := g.interval / written.step
		doubtful := ratio > 1.001 && ratio < 1.999 && g.max <= 0.55*written.step
		if doubtful && likely == 0 {
			return g, &gridFault{1, fmt.Sprintf("the stamps are rounded to %s: their uneven steps can be rounding (%.6g Hz) or lost rows (%.6g Hz)", seconds(written.step), 1/g.interval, 1/written.step),
				"state the rate (--rate), or export the time with more digits"}
		}
		if !doubtful || math.Abs(likely*g.interval-1) < math.Abs(likely*written.step-1) {
			g.samples, g.rounded = len(t), true
			return g, nil
		}
	}
	for i := 1; i < len(t); i++ {
		switch {
		case t[i] < t[i-1]:
			return g, &gridFault{i, fmt.Sprintf("time runs backwards: %s after %s", seconds(t[i]), seconds(t[i-1])),
				"sort the rows by time; keep one recording in a file"}
		case t[i] == t[i-1]:
			return g, &gridFault{i, fmt.Sprintf("the time %s occurs twice", seconds(t[i])), "remove the repeated row, or export the time with more digits"}
		}
	}
	return fitGaps(t, written)
}

// seconds prints a time for a message.
func seconds(t float64) string { return strconv.FormatFloat(t, 'g', 10, 64) + " s" }

// fits tells whether the stamps lie on the grid within the tolerance for jitter.
func (g *grid) fits() bool {
	return g.max <= jitterMax*g.interval && g.rms <= jitterRMS*g.interval
}

// fitLine fits t = start + interval*place by least squares (place is 0, 1, 2, ...
// when nil).
func fitLine(t []float64, place []int) grid {
	n := float64(len(t))
	first, centre, xx := t[0], (n-1)/2, n*(n*n-1)/12
	if place != nil {
		centre = blockSums(len(t), func(lo, hi int) (s sums) {
			for _, k := range place[lo:hi] {
				s.a += float64(k)
			}
			return s
		}).a / n
		xx = blockSums(len(t), func(lo, hi int) (s sums) {
			for _, k := range place[lo:hi] {
				d := float64(k) - centre
				s.a += d * d
			}
			return s
		}).a
	}
	at := func(i int) float64 {
		if place == nil {
			return float64(i)
		}
		return float64(place[i])
	}
	moments := blockSums(len(t), func(lo, hi int) (s sums) {
		for i := lo; i < hi; i++ {
			d := t[i] - first
			s.a += d
			s.b += (at(i) - centre) * d
		}
		return s
	})
	g := grid{interval: moments.b / xx, place: place}
	offset := moments.a/n - g.interval*centre
	g.start = first + offset
	interval := g.interval
	residuals := blockSums(len(t), func(lo, hi int) (s sums) {
		for i := lo; i < hi; i++ {
			r := math.Abs(t[i] - first - offset - interval*at(i))
			s.a += r * r
			if r > s.max {
				s.max = r
			}
		}
		return s
	})
	g.max = residuals.max
	g.rms = math.Sqrt(residuals.a / n)
	g.slopeU = math.Sqrt(residuals.a / max(n-2, 1) / xx)
	return g
}

// isRounded tells whether rounding alone explains the distance of every stamp
// from an even grid. Rounding must show in at least ten uneven steps: a single
// one is a gap or a repeated row. Where stamps are rounded to more than four
// intervals, lost rows could no longer be seen.
func (g *grid) isRounded(t []float64, written resolution) bool {
	step := func(float64) float64 { return written.step }
	if written.step <= 0 || g.max > 0.55*written.step {
		if step = floatStep(t, written); step == nil {
			return false
		}
	}
	uneven := 0
	for i, v := range t {
		q := step(v)
		if q > 4*g.interval || math.Abs(v-g.start-g.interval*float64(i)) > 0.55*q {
			return false
		}
		if i > 0 && math.Abs(v-t[i-1]-g.interval) > 0.4*g.interval {
			uneven++
		}
	}
	return uneven >= 10 || uneven == 0
}

// floatStep recognises stamps in single precision, and stamps with six or seven
// significant digits, and returns their rounding step; nil for anything else.
func floatStep(t []float64, written resolution) func(v float64) float64 {
	tail := "e" + strconv.Itoa(written.shift)
	times := written.factor()
	scale := math.Pow10(-written.shift) / times
	same := func(digits int) bool {
		for _, v := range t {
			w, _ := strconv.ParseFloat(strconv.FormatFloat(v*scale, 'g', digits, 64)+tail, 64)
			if math.Abs(w*times-v) > 1e-15*math.Abs(v) {
				return false
			}
		}
		return true
	}
	single := func() bool {
		for _, v := range t {
			// As text a single has nine digits or fewer: half of their last one is free.
			if w := float64(float32(v * scale)); math.Abs(w-v*scale) > 1e-15*math.Abs(w)+0.51*written.step*scale {
				return false
			}
		}
		return true
	}
	digits := func(n int) func(float64) float64 {
		return func(v float64) float64 {
			return math.Pow(10, math.Floor(math.Log10(max(math.Abs(v*scale), 1e-300)))+1-float64(n)) / scale
		}
	}
	switch {
	case same(6):
		return digits(6)
	case same(7):
		return digits(7)
	case single():
		return func(v float64) float64 {
			f := float32(math.Abs(v * scale))
			return float64(math.Nextafter32(f, math.MaxFloat32)-f) / scale
		}
	}
	return nil
}
