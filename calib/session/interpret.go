package session

import (
	"errors"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"unicode"

	"beadwell/calib/medium"
	"beadwell/calib/quantity"
)

// Interval is a band of frequencies.
type Interval struct {
	Low, High float64 // Hz
}

// maxText bounds the text of a setting in bytes; a list of a hundred bands fits.
const maxText = 4000

// interpret reads the text of a setting into its value, words or bands.
func interpret(key Key, axis, text string, origin Origin) (Setting, *quantity.Error) {
	s := Setting{Key: key.Name, Axis: axis, Text: strings.TrimSpace(text), Origin: origin}
	if len(text) > maxText {
		return s, &quantity.Error{Text: text, Problem: "is too long", Hint: "write it like " + key.Placeholder}
	}
	if word, ok := key.word(text); ok {
		s.Word = word
		return s, nil
	}
	if s.Text == "" {
		return s, &quantity.Error{Problem: "is empty", Hint: "write it like " + key.Placeholder + ", or leave it out"}
	}
	var problem *quantity.Error
	switch key.Form {
	case Choice:
		problem = &quantity.Error{Text: s.Text, Problem: "is not a choice", Hint: "write one of " + strings.Join(key.Words, ", ")}
	case Text:
		s.Word, problem = plainText(key, s.Text, origin)
	case Range:
		var band Interval
		band, problem = readInterval(key, s.Text)
		s.Bands = []Interval{band}
	case RangeList:
		s.Bands, problem = readIntervals(key, s.Text)
	default:
		s.Value, problem = readQuantity(key, s.Text)
	}
	return s, problem
}

// word finds the canonical word of a text that is one of the key's words.
func (k Key) word(text string) (string, bool) {
	for _, form := range []string{text, strings.TrimSpace(text)} {
		if alias, ok := k.aliases[form]; ok {
			return alias, true
		}
		if slices.Contains(k.Words, form) {
			return form, true
		}
	}
	return "", false
}

func readQuantity(key Key, text string) (quantity.Value, *quantity.Error) {
	if key.bareZero && text == "0" {
		dim := key.Dimensions[0]
		return quantity.Value{Dimension: dim, Unit: dim.SIUnit(), Text: text}, nil
	}
	value, problem := parse(text, key.Dimensions...)
	if problem != nil {
		if len(key.Words) > 0 {
			problem.Hint += "; or the word " + strings.Join(key.Words, " or ")
		}
		return value, problem
	}
	return value, key.possible(value)
}

// parse is quantity.Parse with its error's own type.
func parse(text string, dims ...quantity.Dimension) (quantity.Value, *quantity.Error) {
	value, err := quantity.Parse(text, dims...)
	var problem *quantity.Error
	if errors.As(err, &problem) {
		return value, problem
	}
	return value, nil
}

// possible refuses a value that nothing in a laboratory can have: a slip.
func (k Key) possible(v quantity.Value) *quantity.Error {
	slip := func(problem, hint string) *quantity.Error {
		return &quantity.Error{Text: v.Text, Problem: problem, Hint: hint}
	}
	if k.Limits == "" { // a sensitivity: of either sign, but not zero
		if v.SI == 0 {
			return slip("is zero", "write it like "+k.Placeholder)
		}
		return k.uncertain(v)
	}
	low, high := k.bounds()
	kelvin := v.Dimension == quantity.Temperature
	switch {
	case v.SI < 0 && !kelvin:
		return slip("is negative", "write it like "+k.Placeholder)
	case v.SI == 0 && low > 0 && !kelvin:
		return slip("is zero", "write it like "+k.Placeholder)
	case v.SI < low || v.SI > high:
		hint := "check the number and its unit; it is written like " + k.Placeholder
		if kelvin {
			hint = "check the unit, C or K; it is written like " + k.Placeholder
		}
		return slip("is outside the possible range, "+k.Limits, hint)
	}
	if low > 0 {
		return k.uncertain(v)
	}
	return nil
}

// uncertain refuses a value that cannot be zero and is not known from zero.
func (k Key) uncertain(v quantity.Value) *quantity.Error {
	if v.HasU && v.U >= max(v.SI, -v.SI) {
		return &quantity.Error{Text: v.Text, Problem: "has an uncertainty as large as itself",
			Hint: "in brackets stand the last digits: 1.02(3) is 1.02 with a standard uncertainty of 0.03"}
	}
	return nil
}

// bounds returns the limits in SI units; the registry's test holds that they can be read.
func (k Key) bounds() (low, high float64) {
	a, b, _ := strings.Cut(k.Limits, " to ")
	from, _ := quantity.Parse(a, k.Dimensions...)
	to, _ := quantity.Parse(b, k.Dimensions...)
	return from.SI, to.SI
}

var rangeWord = regexp.MustCompile(`\s+to\s+`)

// readInterval reads "10 Hz to 8 kHz"; the first number may borrow the unit of
// the second.
func readInterval(key Key, text string) (Interval, *quantity.Error) {
	fail := func(problem string) (Interval, *quantity.Error) {
		return Interval{}, &quantity.Error{Text: text, Problem: problem, Hint: "write it like " + key.Placeholder}
	}
	ends := rangeWord.Split(text, -1)
	if len(ends) != 2 {
		return fail("is not a range")
	}
	high, problem := parse(ends[1], key.Dimensions...)
	if problem != nil {
		return Interval{}, problem
	}
	if bare, _ := parse(ends[0]); bare.Text != "" {
		ends[0] += " " + high.Unit
	}
	low, problem := parse(ends[0], key.Dimensions...)
	switch {
	case problem != nil:
		return Interval{}, problem
	case low.HasU || high.HasU:
		return fail("has an uncertainty at an end")
	case low.SI < 0:
		return fail("starts below zero")
	case low.SI >= high.SI:
		return fail("does not rise")
	}
	return Interval{low.SI, high.SI}, nil
}

func readIntervals(key Key, text string) ([]Interval, *quantity.Error) {
	var all []Interval
	for part := range strings.FieldsFuncSeq(text, func(r rune) bool { return r == ',' || r == ';' }) {
		interval, problem := readInterval(key, strings.TrimSpace(part))
		if problem != nil {
			return nil, problem
		}
		all = append(all, interval)
	}
	if len(all) == 0 {
		return nil, &quantity.Error{Text: text, Problem: "holds no range", Hint: "write it like " + key.Placeholder}
	}
	return all, nil
}

// plainText checks a free text: a fluid, a column, a bead, a file.
func plainText(key Key, text string, origin Origin) (string, *quantity.Error) {
	if strings.ContainsFunc(text, func(r rune) bool { return !unicode.IsPrint(r) && r != '\u00a0' }) {
		return "", &quantity.Error{Text: text, Problem: "has characters that cannot be printed", Hint: "write it like " + key.Placeholder}
	}
	switch {
	case key.Name == "medium.fluid":
		return fluid(text)
	case origin == FromFlag:
	case key.Name == "recording.background":
		return text, localPath(text)
	case key.Name == "recording.free_bead", key.Name == "recording.companions":
		for _, path := range (Setting{Word: text}).Files() {
			if problem := localPath(path); problem != nil {
				return "", problem
			}
		}
	}
	return text, nil
}

// fluid returns the canonical name of a fluid.
func fluid(text string) (string, *quantity.Error) {
	known, err := medium.ParseFluid(text)
	if err == nil {
		return known.Name, nil
	}
	message := strings.TrimPrefix(err.Error(), "fluid "+strconv.Quote(text))
	problem, hint, found := strings.Cut(strings.TrimLeft(message, ": "), ": ")
	if !found {
		hint = "write one of " + strings.Join(medium.Examples(), ", ")
	}
	return "", &quantity.Error{Text: text, Problem: problem, Hint: hint}
}

// localPath refuses a path that leads out of its folder.
func localPath(path string) *quantity.Error {
	hint := "write the path from the folder of the session file downwards, with forward slashes, such as day2/run.csv"
	switch {
	case strings.Contains(path, `\`):
		return &quantity.Error{Text: path, Problem: "has a backslash", Hint: hint}
	case slices.Contains(strings.Split(path, "/"), ".."), !filepath.IsLocal(filepath.FromSlash(path)):
		return &quantity.Error{Text: path, Problem: "leads out of the folder", Hint: hint}
	}
	return nil
}
