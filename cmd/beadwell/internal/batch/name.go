package batch

import (
	"strings"
	"unicode"
)

// longestName bounds the name of a folder [bytes]; file systems stop at 255.
const longestName = 180

// safeName keeps letters, digits and a few signs; it begins with none of those signs that
// hide a file or make it a flag.
func safeName(name string) string {
	safe := strings.Map(func(r rune) rune {
		if r == unicode.ReplacementChar || !(unicode.IsLetter(r) || unicode.IsDigit(r) || strings.ContainsRune("._-", r)) {
			return '_'
		}
		return r
	}, name)
	for len(safe) > longestName {
		safe = safe[1:]
		for safe != "" && safe[0]&0xc0 == 0x80 { // inside a letter of several bytes
			safe = safe[1:]
		}
	}
	if safe == "" || safe[0] == '.' || safe[0] == '-' {
		safe = "_" + safe
	}
	if reserved[safe] {
		safe += "_"
	}
	return safe
}

// reserved are the names of files beside the folders.
var reserved = map[string]bool{IndexName: true, SummaryJSON: true, SummaryCSV: true}
