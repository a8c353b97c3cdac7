package figure

import (
	"math"

	"beadwell/calib"
)

// maxMarks is the largest number of marks with error bars that a column holds
// without their running into each other.
const maxMarks = 200

// merged joins neighbouring blocks of a spectrum until at most maxMarks are
// left, or a few more where used and unused ones alternate. Power, model and
// frequency are means weighted by the number of bins; the residual is made anew.
func merged(points []calib.SpectrumPoint) []calib.SpectrumPoint {
	group := (len(points) + maxMarks - 1) / maxMarks
	if group <= 1 {
		return points
	}
	var out []calib.SpectrumPoint
	for from := 0; from < len(points); {
		to := from + 1
		for to < len(points) && to < from+group && points[to].Used == points[from].Used {
			to++
		}
		out = append(out, join(points[from:to]))
		from = to
	}
	if len(out) > 2*maxMarks {
		return every(out, 2*maxMarks)
	}
	return out
}

func join(points []calib.SpectrumPoint) calib.SpectrumPoint {
	if len(points) == 1 {
		return points[0]
	}
	var f, power, model, variance, weights float64
	bins := 0
	for _, p := range points {
		w := math.Max(float64(p.Bins), 1)
		f += w * float64(p.Frequency)
		power += w * float64(p.Power)
		model += w * float64(p.Model)
		variance += w * w * float64(p.Standard) * float64(p.Standard)
		weights += w
		bins += p.Bins
	}
	standard := math.Sqrt(variance) / weights
	return calib.SpectrumPoint{
		Frequency: calib.Float(f / weights), Power: calib.Float(power / weights), Model: calib.Float(model / weights),
		Standard: calib.Float(standard), Residual: calib.Float((power - model) / weights / standard),
		Bins: bins, Used: points[0].Used,
	}
}

// every keeps n of the points, evenly spread and with both ends.
func every[T any](points []T, n int) []T {
	var out []T
	for _, i := range thinned(len(points), n) {
		out = append(out, points[i])
	}
	return out
}
