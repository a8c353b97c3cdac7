package calib

import "math"

// stroke is a stretch of samples, begin to end (not included), in which the stage moves one way.
type stroke struct{ begin, end int }

// strokeShare is the share of the stage's range by which it must turn back for a reversal to count:
// far above the noise of a stage's sensor, and below the smallest of several amplitudes in one recording.
const strokeShare = 0.02

// strokes splits the track of a stage at its reversals.
func strokes(stage []float64) []stroke {
	threshold := 2 * spread(stage) * strokeShare
	if !(threshold > 0) {
		return nil
	}
	var turns []int
	top, bottom, direction := -1, -1, 0
	for i, v := range stage {
		if v != v {
			continue
		}
		if top < 0 || v > stage[top] {
			top = i
		}
		if bottom < 0 || v < stage[bottom] {
			bottom = i
		}
		switch {
		case direction >= 0 && stage[top]-v > threshold:
			if direction > 0 {
				turns = append(turns, top)
			}
			direction, bottom = -1, i
		case direction <= 0 && v-stage[bottom] > threshold:
			if direction < 0 {
				turns = append(turns, bottom)
			}
			direction, top = 1, i
		}
	}
	turns = append(turns, len(stage))
	var all []stroke
	begin := 0
	for _, t := range turns {
		if t > begin {
			all = append(all, stroke{begin, t})
		}
		begin = t
	}
	return all
}

// straight fits a line to values between two samples and returns its slope a sample and the rms about
// it over its rise; NaN for fewer than four values.
func straight(values []float64, begin, end int) (slope, roughness float64) {
	var n, sum, moment, square, product, total float64
	middle := float64(begin+end-1) / 2
	for i := begin; i < end; i++ {
		v := values[i] - values[begin]
		if v != v {
			continue
		}
		t := float64(i) - middle
		n++
		sum += v
		moment += t
		square += t * t
		product += t * v
		total += v * v
	}
	if n < 4 {
		return math.NaN(), math.NaN()
	}
	spreadT := square - moment*moment/n
	covariance := product - moment*sum/n
	slope = covariance / spreadT
	rest := math.Max(0, total-sum*sum/n-slope*covariance)
	return slope, math.Sqrt(rest/n) / math.Abs(slope*float64(end-begin))
}
