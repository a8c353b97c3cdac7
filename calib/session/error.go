package session

import (
	"errors"
	"fmt"
	"strconv"
	"strings"

	"beadwell/calib/quantity"
)

// Error is one thing that is wrong with the settings.
type Error struct {
	Where   string // "session.toml:4:12", "tracks.csv:3:7" or "--diameter"; "" when there is no place
	Key     string // the setting, with its axis; "" when it is not about one
	Text    string // the text as given; "" when there is none
	Problem string // what is wrong, to be read after key and text
	Hint    string // what to do
}

// Error gives place, setting, text and problem, and the hint on a line of its own.
func (e *Error) Error() string {
	var words []string
	switch {
	case strings.HasPrefix(e.Where, "--"):
		words = append(words, e.Where)
	case e.Where != "":
		words = append(words, printable(e.Where)+":")
	}
	if e.Key != "" && !strings.HasPrefix(e.Where, "--") {
		words = append(words, printable(e.Key))
	}
	if e.Text != "" {
		words = append(words, quoted(e.Text))
	}
	words = append(words, e.Problem)
	if e.Hint == "" {
		return strings.Join(words, " ")
	}
	return strings.Join(words, " ") + "\n  hint: " + e.Hint
}

// Position splits Where into file, line and column; line and column are 0
// when there are none.
func (e *Error) Position() (file string, line, column int) {
	file = e.Where
	var numbers []int
	for range 2 {
		i := strings.LastIndexByte(file, ':')
		if i < 0 {
			break
		}
		n, err := strconv.Atoi(file[i+1:])
		if err != nil {
			break
		}
		file, numbers = file[:i], append(numbers, n)
	}
	switch len(numbers) {
	case 1:
		return file, numbers[0], 0
	case 2:
		return file, numbers[1], numbers[0]
	}
	return file, 0, 0
}

// maxShown bounds the problems shown at once: more would scroll the first away.
const maxShown = 10

// joined makes one error of many, the first ten with a count of the rest.
func joined(problems []*Error) error {
	if len(problems) == 0 {
		return nil
	}
	var all []error
	for i, p := range problems {
		if i == maxShown {
			all = append(all, fmt.Errorf("and %d more", len(problems)-maxShown))
			break
		}
		all = append(all, p)
	}
	return errors.Join(all...)
}

// at places a problem with a quantity.
func at(where, key, axis string, problem *quantity.Error) *Error {
	return &Error{Where: where, Key: withAxis(key, axis), Text: problem.Text, Problem: problem.Problem, Hint: problem.Hint}
}

func withAxis(key, axis string) string {
	if axis == "" {
		return key
	}
	return key + "." + axis
}

// longest text that a message repeats, in bytes.
const maxQuoted = 120

func quoted(text string) string {
	if len(text) > maxQuoted {
		return strconv.Quote(strings.ToValidUTF8(text[:maxQuoted], "")) + "..."
	}
	return strconv.Quote(text)
}

// printable makes a name safe for a terminal: what is not printable is escaped.
func printable(name string) string {
	q := strconv.Quote(name)
	if q == `"`+name+`"` {
		return name
	}
	return q
}
