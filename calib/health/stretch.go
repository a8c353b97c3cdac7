package health

import (
	"math"
	"slices"
)

// leastStretch is the share of the record below which a good stretch is not offered:
// with less, the choice of the stretch is worth more than the data in it.
const leastStretch = 0.1

// GoodStretch returns the longest stretch of samples, to exclusive, that no bad check has a
// claim on. It reports false when nothing is bad, when what is bad has no place in
// the record, such as a saturated detector, or when less than a tenth is left.
func GoodStretch(in Input, checks []Check) (from, to int, ok bool) {
	if len(in.Axes) == 0 || !(in.Rate > 0) {
		return 0, 0, false
	}
	n := in.Axes[0].sampleCount()
	var bad [][2]float64
	for _, c := range checks {
		if c.Level == Bad && placed[c.Code] {
			bad = append(bad, c.Ranges...)
		}
	}
	if len(bad) == 0 {
		return 0, 0, false
	}
	slices.SortFunc(bad, func(a, b [2]float64) int {
		switch {
		case a[0] < b[0]:
			return -1
		case a[0] > b[0]:
			return 1
		}
		return 0
	})
	start := 0
	consider := func(end int) {
		if end-start > to-from {
			from, to = start, end
		}
	}
	for _, r := range bad {
		consider(min(int(math.Floor(r[0]*in.Rate)), n))
		start = max(start, min(int(math.Ceil(r[1]*in.Rate)), n))
	}
	consider(n)
	if float64(to-from) < leastStretch*float64(n) {
		return 0, 0, false
	}
	return from, to, true
}

// Placed tells whether the ranges of a code say which part of the record is spoiled, so
// that GoodStretch can leave it out.
func Placed(code string) bool { return placed[code] }

// placed are the codes whose ranges say which part of the record is spoiled.
var placed = map[string]bool{
	"lost-bead": true, "held-bead": true, "jump": true, "unsteady-motion": true, "frozen-samples": true,
}
