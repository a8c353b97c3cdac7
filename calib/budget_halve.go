package calib

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// mostImprovement is the factor beyond which an input is not asked to be better; another is
// asked to help.
const mostImprovement = 8

// toHalve says what to measure better to halve the combined standard uncertainty: the
// fewest of the largest contributions that can do it, all improved by one factor.
func toHalve(lines []BudgetLine) string {
	sorted := slices.Clone(lines)
	slices.SortStableFunc(sorted, func(a, b BudgetLine) int { return cmp.Compare(b.Contribution, a.Contribution) })
	total := 0.0
	for _, l := range sorted {
		total += float64(l.Contribution * l.Contribution)
	}
	sum := 0.0
	for i, l := range sorted {
		sum += float64(l.Contribution*l.Contribution) / total
		// 1 - sum + sum/f^2 = 1/4 (docs/method.md, Eq. 69)
		factor := math.Sqrt(sum / (sum - 0.75))
		if sum > 0.75 && (factor <= mostImprovement || i == len(sorted)-1) {
			return "To halve the combined standard uncertainty: " + improvements(sorted[:i+1], factor) + "."
		}
	}
	return ""
}

func improvements(lines []BudgetLine, factor float64) string {
	var parts []string
	for _, l := range lines {
		if l.Input == statisticsLine {
			parts = append(parts, "record "+twoDigits(factor*factor)+" times as long")
			continue
		}
		parts = append(parts, fmt.Sprintf("know the %s to %s in place of %s", l.Input, precision(l, factor), precision(l, 1)))
	}
	return join(parts)
}

// precision prints the standard uncertainty of an input, better by a factor.
func precision(l BudgetLine, factor float64) string {
	u := float64(l.StandardUncertainty) / factor
	if l.Unit == "K" {
		return fmt.Sprintf("%.2g K", u)
	}
	if l.Value > 0 {
		return twoDigits(100*u/float64(l.Value)) + " %"
	}
	return fmt.Sprintf("%.2g %s", u, l.Unit)
}

// twoDigits prints a positive number with two significant digits, and whole from ten on.
func twoDigits(v float64) string {
	if v >= 10 {
		return fmt.Sprintf("%.0f", v)
	}
	return fmt.Sprintf("%.2g", v)
}
