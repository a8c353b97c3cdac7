package report

import (
	"regexp"
	"strings"
)

// The plain spellings of units and minus signs in printed quantities, and what
// a page shows instead. A unit counts only behind a number, a space or a slash
// and where a word ends, so that file names and words stay as they are.
//
// They are applied in this order; needle is a part of every text that the pattern matches, and spares the others the search.
var spellings = []struct {
	needle  string
	pattern *regexp.Regexp
	shown   string
}{
	{"u", regexp.MustCompile(`(^|[\d)\]%] |[/,(] ?)u(m2?|s|V|W|Pa)\b`), "${1}µ${2}"},
	{"/um", regexp.MustCompile(`\b(pN|nN|V|K|N|m)/um\b`), "${1}/µm"},
	{"m2", regexp.MustCompile(`\b([nµ]?m)2\b`), "${1}²"},
	{"m3", regexp.MustCompile(`\b(kg/m|g/cm)3\b`), "${1}³"},
	{" C", regexp.MustCompile(`([\d)\]]) C\b`), "${1} °C"},
	{"-", regexp.MustCompile(`(^|[\s(\[])-(\d)`), "${1}−${2}"},
	{" ", regexp.MustCompile(`([\d)\]]) (%|°C|[pnµmk]?[mNsVWKJ]\b|[mk]?Hz|mPa|nm²|µm²|pN/µm)`), "${1}\u00a0${2}"},
}

// typeset makes text safe to show and spells its units as print does: "um" as
// "µm", "nm2" as "nm²", "C" behind a number as "°C", a hyphen before a number
// as a minus sign. A number and its unit stay on one line.
func typeset(s string) string {
	s = Plain(s)
	for _, as := range spellings {
		if strings.Contains(s, as.needle) {
			s = as.pattern.ReplaceAllString(s, as.shown)
		}
	}
	return s
}
