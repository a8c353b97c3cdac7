package series

import (
	"math"
	"slices"
)

// outliers names readings as outliers does for a line, but by fitting again without
// each point: near the surface a point bends the curve towards itself, and a residual from
// the fit with it does not tell. The root of the chi-square that a point brings is its
// studentised distance from the others.
func (m *wall) outliers(readings []Reading, s *solution) []int {
	const level = 0.05
	chiSquare := s.chiSquare
	left := make([]int, len(readings))
	for i := range left {
		left[i] = i
	}
	turns := int(float64(len(readings)) * outlierShare)
	var taken []int
	named := 0
	for range turns {
		// No point can bring more than all of chi-square.
		limit := level / float64(len(left)*turns)
		if normalTwoSided(math.Sqrt(chiSquare)) > limit {
			break
		}
		worst, rest := -1, chiSquare
		for k := range left {
			if len(left)-1 <= len(m.free) {
				break
			}
			other := *m
			some := slices.Delete(slices.Clone(left), k, k+1)
			if s, err := other.solveFrom(s.theta, pick(readings, some)); err == nil && s.chiSquare < rest {
				worst, rest = k, s.chiSquare
			}
		}
		if worst < 0 {
			break
		}
		distance := math.Sqrt(chiSquare - rest)
		_, p := deletion(distance, 0, chiSquare, len(left)-len(m.free), false)
		taken = append(taken, left[worst])
		if p < limit {
			named = len(taken)
		}
		left, chiSquare = slices.Delete(left, worst, worst+1), rest
	}
	taken = taken[:named]
	slices.Sort(taken)
	return taken
}

// solveFrom fits to these readings from one start.
func (m *wall) solveFrom(start []float64, readings []Reading) (*solution, error) {
	m.orient(readings)
	return fitCurve(m, points(readings), start)
}

func pick(readings []Reading, which []int) []Reading {
	var some []Reading
	for _, i := range which {
		some = append(some, readings[i])
	}
	return some
}

func without(readings []Reading, left []int) []Reading {
	var kept []Reading
	for i, r := range readings {
		if !slices.Contains(left, i) {
			kept = append(kept, r)
		}
	}
	return kept
}
