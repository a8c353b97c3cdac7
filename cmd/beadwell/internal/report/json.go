package report

import (
	"encoding/json"
	"io"

	"beadwell/calib"
)

// SetVersion names the layout of a Set, as calib.SchemaVersion does for one result.
const SetVersion = "beadwell-results/1"

// Set is the JSON of several recordings in one run: the results in the order of
// the command line, and what kept the others from having one.
type Set struct {
	Schema   string          `json:"schema"`
	Results  []*calib.Result `json:"results"`  // never null
	Failures []Problem       `json:"failures"` // never null
	// Joined are the straight lines through recordings with a stage at constant speed that share a trap.
	Joined []calib.FlowJoin `json:"joined_flow,omitempty"`
}

// Join finds the lines through several recordings.
func (s *Set) Join() {
	var parts []calib.FlowPart
	for _, r := range s.Results {
		parts = append(parts, calib.FlowParts(r)...)
	}
	if joined := calib.JoinFlow(parts); len(joined) > 0 {
		s.Joined = joined
	}
}

// Problem is an error as JSON: what --format json writes to standard error, and
// what stands in a Set for a recording that failed. A key is absent when it has no meaning for the error.
type Problem struct {
	Code    string    `json:"code"`             // "usage", "settings", "input", "output", "distrust", "partial", "interrupted", "internal"
	Status  int       `json:"exit_status"`      // exit status that the problem has by itself
	Input   string    `json:"input,omitempty"`  // recording that failed, as named on the command line
	File    string    `json:"file,omitempty"`   // file that the problem stands in
	Line    int       `json:"line,omitempty"`   // from 1
	Column  int       `json:"column,omitempty"` // from 1
	Message string    `json:"message"`
	Remedy  string    `json:"remedy,omitempty"`
	Others  []Problem `json:"others,omitempty"` // further places with a problem
}

// FileError is an error about a file or folder, which has no place within it.
type FileError struct {
	File string
	Err  error // what is wrong with it
}

func (e *FileError) Error() string { return e.File + ": " + e.Err.Error() }
func (e *FileError) Unwrap() error { return e.Err }

// JSON writes one result as indented JSON that ends with a newline. The same
// result gives the same bytes, and ReadJSON gives the same result back. An
// input name that is no UTF-8, which JSON cannot carry, is kept beside its
// readable form as input.name_bytes.
func JSON(w io.Writer, r *calib.Result) error { return WriteJSON(w, storable(r)) }

// SetJSON writes the results of several recordings.
func SetJSON(w io.Writer, s Set) error {
	stored := Set{Schema: SetVersion, Results: []*calib.Result{}, Failures: []Problem{}, Joined: s.Joined}
	for _, r := range s.Results {
		stored.Results = append(stored.Results, storable(r))
	}
	stored.Failures = append(stored.Failures, s.Failures...)
	return WriteJSON(w, stored)
}

// ProblemJSON writes one problem on one line.
func ProblemJSON(w io.Writer, p Problem) error {
	line, err := json.Marshal(p)
	if err != nil {
		return err
	}
	_, err = w.Write(append(escapeInvisible(line), '\n'))
	return err
}

// WriteJSON writes a value as all JSON outputs are: indented, ending with a newline, and with the characters escaped that a terminal would
// act on.
func WriteJSON(w io.Writer, value any) error {
	text, err := jsonOf(value, true)
	if err != nil {
		return err
	}
	_, err = w.Write(append(text, '\n'))
	return err
}
