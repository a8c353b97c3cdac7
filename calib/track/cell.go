package track

import (
	"errors"
	"math"
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// fault is why a cell is no number: a reason that ends the sentence
// `x "0.0l2" ...` and what to do about it.
type fault struct{ reason, remedy string }

func (f *fault) Error() string { return f.reason }

const correctCell = "correct the cell, or leave it empty for a missing sample"

var (
	notNumber  = &fault{"is not a number", correctCell}
	tooLarge   = &fault{"is too large for a number", correctCell}
	beyond     = &fault{"is beyond anything that is measured", correctCell}
	infinite   = &fault{"is not a finite number", correctCell}
	percentage = &fault{"is a percentage", "give the plain number, in the unit of the column"}
	hexForm    = &fault{"is in hexadecimal form", "write the number in decimal form"}
	scoreForm  = &fault{"has an underscore in it", "write the number without separators"}
	twoMarks   = &fault{"can be read with a decimal mark or with a thousands separator", "state the decimal mark (--decimal point or comma), or write the number without separators"}
)

// missingWords are the spellings of a missing sample, in lower case.
var missingWords = map[string]bool{
	"": true, "nan": true, "-nan": true, "+nan": true, "na": true, "n/a": true, "#n/a": true, "-": true, "--": true, "---": true,
	"null": true, "none": true, "nil": true, ".": true, "?": true, "missing": true, "<na>": true, "nd": true, "n.d.": true,
	"nan(ind)": true, "-nan(ind)": true, "1.#qnan": true, "-1.#qnan": true, "1.#ind": true, "-1.#ind": true, "–": true, "—": true, "−": true,
}

// trimCell cuts white space of every kind, and no-break spaces, from both ends.
func trimCell(s string) string {
	return strings.TrimFunc(s, func(r rune) bool { return unicode.IsSpace(r) || r == '\u200b' || r == '\ufeff' })
}

// isMissing tells whether a trimmed cell stands for a missing sample.
func isMissing(s string) bool {
	if len(s) > 12 || s != "" && s[0]-'0' <= 9 {
		return false
	}
	return missingWords[s] || missingWords[strings.ToLower(s)]
}

// isSpacer tells whether r separates groups of three digits: a space of any
// width or an apostrophe.
func isSpacer(r rune) bool {
	return r == '\'' || r == '\u2019' || unicode.Is(unicode.Zs, r)
}

// generalNumber reads one cell with everything that a careful person accepts:
// surrounding and no-break spaces, a leading plus, the Unicode minus, exponents
// with e, E, d or D, groups of three digits. thousands is the separator that is
// known to be in use (0 for none). A missing sample is NaN. The value comes
// times 10^shift, rounded once.
func generalNumber(cell string, mark, thousands byte, shift int) (float64, error) {
	s := trimCell(cell)
	if isMissing(s) {
		return math.NaN(), nil
	}
	if len(s) > 400 {
		return 0, notNumber
	}
	var room [448]byte
	plain, exponent, err := canonical(room[:0], s, rune(mark), rune(thousands))
	if err != nil {
		return 0, err
	}
	if exponent += shift; exponent != 0 {
		plain = strconv.AppendInt(append(plain, 'e'), int64(exponent), 10)
	}
	v, err := parseASCII(plain)
	switch {
	case errors.Is(err, strconv.ErrRange):
		return 0, tooLarge
	case err != nil:
		return 0, notNumber
	}
	return v, nil
}

// canonical appends the sign, the digits and a decimal point of s to dst and
// returns the exponent apart.
func canonical(dst []byte, s string, mark, thousands rune) (plain []byte, exponent int, err error) {
	rest := s
	if r, size := utf8.DecodeRuneInString(rest); r == '+' || r == '-' || r == '−' || r == '–' || r == '－' {
		rest = strings.TrimLeft(rest[size:], " ")
		if r != '+' {
			dst = append(dst, '-')
		}
	}
	body, power := rest, ""
	if at := strings.IndexAny(rest, "eEdD"); at >= 0 {
		body, power = rest[:at], rest[at+1:]
		if exponent, err = exponentOf(power); err != nil {
			return nil, 0, shapeFault(rest)
		}
	}
	whole, fraction := body, ""
	marked := false
	if at := strings.IndexRune(body, mark); at >= 0 {
		whole, fraction, marked = body[:at], body[at+1:], true
	}
	if marked && mark == ',' && fraction == "" { // more likely a delimiter
		return nil, 0, notNumber
	}
	start := len(dst)
	if dst, err = appendGroups(dst, whole, mark, thousands, marked); err != nil {
		if err == notNumber {
			err = shapeFault(rest)
		}
		return nil, 0, err
	}
	dst = append(dst, '.')
	for _, r := range []byte(fraction) {
		if r-'0' > 9 {
			return nil, 0, shapeFault(rest)
		}
		dst = append(dst, r)
	}
	if len(dst) == start+1 {
		return nil, 0, shapeFault(rest)
	}
	return dst, exponent, nil
}

// appendGroups appends the digits of the whole part, which may stand in groups
// of three. A point or a comma counts as a separator only where it is known to
// be one or where the decimal mark stands beside it in the same cell.
func appendGroups(dst []byte, whole string, mark, thousands rune, marked bool) ([]byte, error) {
	separator := rune(0)
	run, groups := 0, 0
	for _, r := range whole {
		switch {
		case r >= '0' && r <= '9':
			dst = append(dst, byte(r))
			run++
		case isSpacer(r), (r == '.' || r == ',') && r != mark:
			if separator != 0 && r != separator || run == 0 || run > 3 || groups > 0 && run != 3 {
				return nil, notNumber
			}
			separator, run = r, 0
			groups++
		default:
			return nil, notNumber
		}
	}
	if groups > 0 && run != 3 {
		return nil, notNumber
	}
	if (separator == '.' || separator == ',') && separator != thousands && !marked && groups < 2 {
		return nil, twoMarks
	}
	return dst, nil
}

// exponentOf reads the power of ten after the exponent letter. Powers beyond
// +-99999 are clamped: they overflow or vanish either way.
func exponentOf(s string) (int, error) {
	negative := false
	if r, size := utf8.DecodeRuneInString(s); r == '-' || r == '+' || r == '−' {
		s, negative = s[size:], r != '+'
	}
	if s == "" {
		return 0, notNumber
	}
	e := 0
	for _, c := range []byte(s) {
		if c-'0' > 9 {
			return 0, notNumber
		}
		e = min(e*10+int(c-'0'), 99999)
	}
	if negative {
		e = -e
	}
	return e, nil
}

// shapeFault names what is wrong with an unsigned text that is no number.
func shapeFault(s string) error {
	lower := strings.ToLower(s)
	switch {
	case strings.HasPrefix(lower, "inf") || lower == "∞" || strings.HasPrefix(lower, "1.#inf"):
		return infinite
	case strings.HasPrefix(lower, "0x"):
		return hexForm
	case strings.HasSuffix(s, "%"):
		return percentage
	case strings.Contains(s, "_"):
		return scoreForm
	}
	return notNumber
}
