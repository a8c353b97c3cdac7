package report

import (
	"encoding/csv"
	"io"
	"strconv"

	"beadwell/calib"
)

// LookVersion names the layout of a LookSet.
const LookVersion = "beadwell-check/1"

// LookSet is what check found out about recordings, in the order of the command line.
type LookSet struct {
	Schema   string       `json:"schema"`
	Looks    []calib.Look `json:"recordings"` // never null
	Failures []Problem    `json:"failures"`   // never null
}

// LooksJSON writes what check found as indented JSON.
func LooksJSON(w io.Writer, s LookSet) error {
	out := LookSet{Schema: LookVersion, Looks: []calib.Look{}, Failures: append([]Problem{}, s.Failures...)}
	for _, l := range s.Looks {
		l.ReadAs.Columns = append([]calib.Column{}, l.ReadAs.Columns...)
		l.Settings = append([]calib.Setting{}, l.Settings...)
		out.Looks = append(out.Looks, l)
	}
	return WriteJSON(w, out)
}

// lookHeader names the columns of LooksCSV.
var lookHeader = []string{"file", "bead", "axis", "code", "name", "level", "judged", "value", "threshold", "unit", "from_s", "to_s", "text", "problem"}

// LooksCSV writes one row for each check of each recording, also those that found
// nothing, and one row for a recording that could not be read. from_s and to_s span all
// stretches that a check names.
func LooksCSV(w io.Writer, s LookSet) error {
	out := csv.NewWriter(w)
	out.Write(lookHeader) // errors stay in the writer until Flush
	for _, l := range s.Looks {
		for _, c := range l.Checks {
			from, to := "", ""
			if n := len(c.Ranges); n > 0 {
				from, to = exactCell(c.Ranges[0][0]), exactCell(c.Ranges[n-1][1])
			}
			out.Write([]string{cell(l.Input.Name), cell(l.Input.Bead), cell(c.Axis), c.Code, c.Name, c.Level, strconv.FormatBool(c.Judged),
				exactCell(c.Value), exactCell(c.Limit), c.Unit, from, to, cell(c.Text), ""})
		}
	}
	for _, f := range s.Failures {
		row := make([]string, len(lookHeader))
		row[0], row[len(row)-1] = cell(f.Input), cell(f.Message)
		out.Write(row)
	}
	out.Flush()
	return out.Error()
}
