// Package track reads position time series of trapped particles from text files
// and from NumPy arrays.
//
// A recording is a table with one row per sample: an optional time column (or a
// sampling rate from elsewhere) and one to three position columns. The reader
// finds delimiter, decimal mark, encoding, header, units and the roles of the
// columns from the first mebibyte of the file, says what it found in
// Recording.ReadAs, and refuses what cannot be read in one way only: a length
// without a unit, a comma that is both delimiter and decimal mark, time that
// runs backwards. Every inference can be replaced by a field of Options.
//
// # Values
//
// Lengths come out in metres, volts in volts; pixels, counts and plain numbers
// stay in the unit of the file. The unit moves the decimal point of the text
// before the only rounding, so "12.3" under `x (nm)` is the double nearest to
// 12.3e-9, the same as "0.0123" under `x (um)`. Numbers are bit-equal to
// strconv.ParseFloat of that text. Missing samples are NaN.
//
// # Time
//
// Samples lie on a regular grid. The sampling interval dt is the slope of a
// straight line through all time stamps by least squares, so that rounded and
// single-precision stamps do no harm. Stamps may lie off the grid by 5 % of dt
// (root mean square) and 45 % (largest), or by half the step to which the file
// rounds them. Where stamps skip whole multiples of dt the grid points between
// are NaN on every axis. Anything else is refused with its place.
package track

// Options are the settings of a reading. The zero value infers everything from
// the file. A field that is set switches its inference off.
type Options struct {
	Name       string            // name for messages and results; empty: the base name of the file
	Delimiter  string            // "comma", "semicolon", "tab", "space" or "pipe"; empty: found
	Decimal    string            // "point" or "comma"; empty: found
	Header     string            // "none" or the number of lines above the data; empty: found
	Rate       float64           // sampling rate [Hz], for files without time stamps; 0: from the file
	RateForced bool              // Rate wins over the time column, with a note; otherwise a contradiction is an error
	Unit       string            // position unit where the header states none: m, mm, um, nm, px, V, mV, counts or 1
	UnitForced bool              // Unit wins over the header, with a note; otherwise a contradiction is an error
	TimeUnit   string            // unit of the time column: s, ms, us, ns, min, h, d or frame; empty: from the header
	Columns    map[string]string // "time", "x", "y", "z" to a header name or a column number from 1
	Keep       []string          // other numeric columns to keep, by header name or number
	Bead       string            // the one bead to return; empty: all
	MaxBytes   int64             // limit of the text after decompression [bytes]; 0: 64 GiB
	Workers    int               // parallel parsers; 0: one per processor. The result does not depend on it
	// MaxMemory bounds the memory [bytes] of reading and of an analysis that holds the samples twice. A recording that needs more is
	// handed to Part in consecutive stretches. 0, or without Part: no bound.
	MaxMemory int64
	Part      Taker
	NoHash    bool // leave Recording.SHA256 empty, for speed
	Inspect   bool // an unknown unit or rate is a note, not an error: for a first look at a file
}

// Taker takes a recording that is too long for the memory, stretch by stretch, in the order of time. The values of a
// stretch are only valid during the call; gap is the number of samples that are missing before it. An
// error ends the reading.
type Taker func(stretch *Recording, gap int) error

// Recording is the track of one particle on a regular time grid.
type Recording struct {
	Name       string   // Options.Name, followed by "#" and the bead where a file holds several
	Bead       string   // identifier of the bead in the file; empty when there is none
	Axes       []Axis   // in the order x, y, z
	Rate       float64  // sampling rate [Hz]; NaN when unknown (only with Options.Inspect)
	RateU      float64  // standard uncertainty of Rate from the scatter of the stamps [Hz]; NaN without a time column
	RateOrigin string   // "time column", "setting", "header"; empty when unknown
	Start      float64  // time of the first sample [s]; 0 when the file does not tell
	Samples    int      // points of the time grid, with the missing ones
	Missing    int      // grid points that are missing on every axis
	JitterRMS  float64  // root mean square of the stamps about the grid [s]; NaN without a time column
	JitterMax  float64  // largest distance of a stamp from the grid [s]; NaN without a time column
	InParts    bool     // it was handed to Options.Part: the axes hold no values
	Extra      []Column // the columns of Options.Keep
	ReadAs     ReadAs   // what was found in the file
	Notes      []Note   // what the reader decided and the user should know
	Size       int64    // size of the file [bytes]
	SHA256     string   // of the bytes of the file, in hexadecimal
}

// Axis is one coordinate of a recording.
type Axis struct {
	Name    string    // "x", "y" or "z"
	Header  string    // name of the column in the file
	Unit    string    // unit in the file: m, mm, um, nm, pm, px, V, mV, uV, counts or 1; empty when unknown
	ToMetre float64   // metres per unit for lengths; NaN for px, V, mV, counts and 1
	Values  []float64 // metres for lengths, volts for V, mV and uV, otherwise the unit of the file; NaN is missing
	Missing int       // number of NaN in Values
}

// Column is a column that is kept without a meaning.
type Column struct {
	Header string
	Values []float64 // as in the file, on the grid of the recording; NaN is missing
}

// Note is a remark on how a file was read that does not stop the analysis.
type Note struct {
	Code string // short and stable, for programs
	Text string
}
