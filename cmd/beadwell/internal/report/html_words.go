package report

import "regexp"

// The plain spellings of units and minus signs in printed quantities, and what
// a page shows instead. A unit counts only behind a number, a space or a slash
// and where a word ends, so that file names and words stay as they are.
var (
	microUnit   = regexp.MustCompile(`(^|[\d)\]%] |[/,(] ?)u(m2?|s|V|W|Pa)\b`)
	microBelow  = regexp.MustCompile(`\b(pN|nN|V|K|N|m)/um\b`)
	squareUnit  = regexp.MustCompile(`\b([nµ]?m)2\b`)
	cubicUnit   = regexp.MustCompile(`\b(kg/m|g/cm)3\b`)
	celsius     = regexp.MustCompile(`([\d)\]]) C\b`)
	joined      = regexp.MustCompile(`([\d)\]]) (%|°C|[pnµmk]?[mNsVWKJ]\b|[mk]?Hz|mPa|nm²|µm²|pN/µm)`)
	minusBefore = regexp.MustCompile(`(^|[\s(\[])-(\d)`)
)

// typeset makes text safe to show and spells its units as print does: "um" as
// "µm", "nm2" as "nm²", "C" behind a number as "°C", a hyphen before a number
// as a minus sign. A number and its unit stay on one line.
func typeset(s string) string {
	s = Plain(s)
	s = microUnit.ReplaceAllString(s, "${1}µ${2}")
	s = microBelow.ReplaceAllString(s, "${1}/µm")
	s = squareUnit.ReplaceAllString(s, "${1}²")
	s = cubicUnit.ReplaceAllString(s, "${1}³")
	s = celsius.ReplaceAllString(s, "${1} °C")
	s = minusBefore.ReplaceAllString(s, "${1}−${2}")
	return joined.ReplaceAllString(s, "${1}\u00a0${2}")
}
