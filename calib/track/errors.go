package track

import (
	"fmt"
	"strconv"
	"strings"
	"unicode"
)

// Codes of errors, for programs that tell them apart.
const (
	CodeCell     = "cell"     // a cell is no number
	CodeRow      = "row"      // a row does not fit the table
	CodeLayout   = "layout"   // the layout of the file is ambiguous or not understood
	CodeColumns  = "columns"  // the columns cannot be told apart, or one is absent
	CodeUnit     = "unit"     // a unit is unknown, absent or contradicts a setting
	CodeTime     = "time"     // time stamps repeat, run backwards or are uneven
	CodeRate     = "rate"     // the sampling rate is unknown or contradicts a setting
	CodeFormat   = "format"   // the file is no table of numbers at all
	CodeLimit    = "limit"    // a limit of size or width is passed
	CodeCut      = "cut"      // the file ends too early
	CodeEmpty    = "empty"    // there is nothing to analyse
	CodeChanged  = "changed"  // the file changed while it was read
	CodeSetting  = "setting"  // a setting cannot be used
	CodeFileKind = "filekind" // not a regular file
)

// Error is one thing that keeps a file from being read: where, what was found
// and what to do about it.
type Error struct {
	File   string // name of the file or of the recording
	Line   int    // from 1; 0 when the whole file is meant
	Column int    // character in the line, from 1; 0 when the whole line is meant
	What   string // what was found and, where it helps, what was expected
	Remedy string // what to do
	Code   string // one of the Code constants

	cell *hidden // the cell that is meant, where Column is not yet known
}

// Error returns "file:line:column: what", and the remedy on a line of its own.
func (e *Error) Error() string {
	var b strings.Builder
	b.WriteString(Printable(e.File))
	if e.Line > 0 {
		fmt.Fprintf(&b, ":%d", e.Line)
		if e.Column > 0 {
			fmt.Fprintf(&b, ":%d", e.Column)
		}
	}
	if b.Len() > 0 {
		b.WriteString(": ")
	}
	b.WriteString(Printable(e.What))
	if e.Remedy != "" {
		b.WriteString("\n  hint: " + Printable(e.Remedy))
	}
	return b.String()
}

// maxPlaces is the number of bad places that are reported one by one.
const maxPlaces = 10

// Errors are the first bad places of a file, in the order of its lines.
type Errors struct {
	Places []*Error
	More   int // bad places beyond those
}

// Error returns one paragraph per place and a count of the rest.
func (e *Errors) Error() string {
	var b strings.Builder
	for i, place := range e.Places {
		if i > 0 {
			b.WriteByte('\n')
		}
		one := *place
		if i+1 < len(e.Places) && e.Places[i+1].Remedy == place.Remedy {
			one.Remedy = "" // the last of a series carries the hint for all
		}
		b.WriteString(one.Error())
	}
	if e.More > 0 {
		fmt.Fprintf(&b, "\n  and %d more", e.More)
	}
	return b.String()
}

// Unwrap gives errors.As access to the places.
func (e *Errors) Unwrap() []error {
	list := make([]error, len(e.Places))
	for i, place := range e.Places {
		list[i] = place
	}
	return list
}

// asError returns nil, the only place as an *Error, or all as *Errors.
func asError(places []*Error, total int) error {
	switch {
	case total == 0:
		return nil
	case total == 1 && len(places) == 1:
		return places[0]
	}
	kept := places[:min(len(places), maxPlaces)]
	return &Errors{Places: kept, More: total - len(kept)}
}

// Printable returns s with control characters, bidirectional overrides and
// invalid bytes written as escapes, so that no name can steer a terminal.
func Printable(s string) string {
	clean := true
	for _, r := range s {
		if r == unicode.ReplacementChar || !unicode.IsPrint(r) && r != '\u00a0' {
			clean = false
			break
		}
	}
	if clean {
		return s
	}
	quoted := strconv.Quote(s)
	quoted = quoted[1 : len(quoted)-1]
	return strings.NewReplacer(`\"`, `"`, `\\`, `\`).Replace(quoted)
}

// quoted shows a cell in a message: in double quotes, escaped, cut when long.
func quoted(cell string) string {
	const most = 40
	if runes := []rune(cell); len(runes) > most {
		cell = string(runes[:most]) + "…"
	}
	return strconv.Quote(cell)
}

// note appends a remark to the list.
func note(list []Note, code, format string, args ...any) []Note {
	return append(list, Note{Code: code, Text: Printable(fmt.Sprintf(format, args...))})
}
