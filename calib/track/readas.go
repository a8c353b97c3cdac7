package track

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// ReadAs says how a file was understood.
type ReadAs struct {
	Format      string      // "text" or "npy"
	Delimiter   string      // "comma", "semicolon", "tab", "space", "pipe"; empty for npy
	Decimal     string      // "point" or "comma"; empty for npy
	Encoding    string      // "UTF-8", "UTF-16LE", "UTF-16BE", "Windows-1252"; element type for npy
	Compression string      // "gzip", "zstd" or empty
	HeaderLines int         // lines above the first row
	Rows        int         // rows with numbers
	Ignored     int         // lines among and behind the rows that hold no sample: remarks, blank lines, repeated headers, footers
	Columns     []ColumnUse // every column of the file
	Rate        float64     // sampling rate [Hz], NaN when unknown
	RateOrigin  string      // where Rate comes from
}

// ColumnUse says what a column of the file is used for.
type ColumnUse struct {
	Header string // name as in the file, without the unit; empty when it has none
	Role   string // "time", "date", "frame", "x", "y", "z", "bead", "kept", "constant" or "unused"
	Unit   string // unit as used; empty when there is none
}

// String returns one line: delimiter, decimal mark, columns with units,
// sampling rate, rows.
func (r ReadAs) String() string {
	var parts []string
	if r.Format == "npy" {
		parts = append(parts, "npy "+r.Encoding)
	} else {
		parts = append(parts, r.Delimiter+" delimited", "decimal "+r.Decimal)
		if r.Encoding != "UTF-8" {
			parts = append(parts, r.Encoding)
		}
	}
	if r.Compression != "" {
		parts = append(parts, r.Compression)
	}
	var columns []string
	for _, c := range r.Columns {
		if c.Role == "unused" {
			continue
		}
		s := c.Role
		if c.Header != "" && c.Header != c.Role {
			s += " = " + strconv.Quote(c.Header)
		}
		if c.Unit != "" {
			s += " (" + c.Unit + ")"
		}
		columns = append(columns, s)
	}
	parts = append(parts, "columns "+strings.Join(columns, ", "))
	if !math.IsNaN(r.Rate) && r.Rate > 0 {
		parts = append(parts, fmt.Sprintf("%s Hz from the %s", strconv.FormatFloat(r.Rate, 'g', 7, 64), r.RateOrigin))
	} else {
		parts = append(parts, "sampling rate unknown")
	}
	parts = append(parts, fmt.Sprintf("%d rows", r.Rows))
	return Printable(strings.Join(parts, "; "))
}
