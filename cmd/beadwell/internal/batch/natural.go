package batch

import (
	"cmp"
	"strings"
)

// natural compares names as people order them: runs of digits by their number, so
// that run2 comes before run10. Names that are equal that way are ordered by bytes.
func natural(a, b string) int {
	x, y := a, b
	for x != "" && y != "" {
		if isDigit(x[0]) && isDigit(y[0]) {
			var m, n string
			m, x = digits(x)
			n, y = digits(y)
			if c := cmp.Or(cmp.Compare(len(m), len(n)), strings.Compare(m, n)); c != 0 {
				return c
			}
			continue
		}
		if x[0] != y[0] {
			return cmp.Compare(x[0], y[0])
		}
		x, y = x[1:], y[1:]
	}
	return cmp.Or(cmp.Compare(len(x), len(y)), strings.Compare(a, b))
}

func isDigit(c byte) bool { return c >= '0' && c <= '9' }

// digits splits off a run of digits, without zeros in front.
func digits(s string) (run, rest string) {
	end := 0
	for end < len(s) && isDigit(s[end]) {
		end++
	}
	return strings.TrimLeft(s[:end], "0"), s[end:]
}
