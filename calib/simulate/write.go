package simulate

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"
)

// Column is one column of a text file.
type Column struct {
	Name     string    // such as x
	Unit     Unit      // of the written numbers
	Values   []float64 // in SI units; NaN is written as nothing
	Decimals int       // decimals of the written numbers; 0 is what Decimals returns for the column alone
}

// Unit is what numbers in SI units are written in.
type Unit struct {
	Symbol string  // such as um
	PerSI  float64 // units in one SI unit: 1e6 for um; for volts the reciprocal of the sensitivity [V/m]
}

// Units that columns are often written in.
var (
	Second      = Unit{"s", 1}
	Millisecond = Unit{"ms", 1e3}
	Metre       = Unit{"m", 1}
	Micrometre  = Unit{"um", 1e6}
	Nanometre   = Unit{"nm", 1e9}
)

// Header is the way in which the header line names a column and its unit.
type Header int

const (
	Parentheses Header = iota // x (um)
	Brackets                  // x [um]
	Underscore                // x_um
	NamesOnly                 // x
	NoHeader                  // no header line
)

// CSV is a dialect of text file. The zero value is: commas, a decimal point, a header
// with units in parentheses, seven digits, lines that end in a line feed.
type CSV struct {
	Delimiter    byte     // 0 is a comma
	DecimalComma bool     // 1,5 instead of 1.5; the delimiter must be another
	Header       Header   // zero value is Parentheses
	Digits       int      // significant digits of the largest value of a column, 1 to 7; 0 is 7
	Comments     []string // lines written first, each after "# "
	CRLF         bool     // lines end in carriage return and line feed
	ByteOrder    bool     // the file begins with a byte order mark
}

// mostDigits is the largest number of significant digits that agree on every processor.
const mostDigits = 7

// WriteCSV writes columns of equal length as text. It returns an error when the dialect
// contradicts itself, when columns differ in length, when a unit has no positive factor, or
// when the writer fails.
func WriteCSV(w io.Writer, columns []Column, o CSV) error {
	if o.Delimiter == 0 {
		o.Delimiter = ','
	}
	if o.Digits == 0 {
		o.Digits = mostDigits
	}
	if err := o.validate(columns); err != nil {
		return err
	}
	out := bufio.NewWriterSize(w, 1<<16)
	out.WriteString(o.preamble(columns))
	decimals := make([]int, len(columns))
	for i, c := range columns {
		if decimals[i] = c.Decimals; decimals[i] == 0 {
			decimals[i] = Decimals(o.Digits, c)
		}
	}
	var line []byte
	for row := range columns[0].Values {
		line = line[:0]
		for i, c := range columns {
			if i > 0 {
				line = append(line, o.Delimiter)
			}
			line = o.appendNumber(line, c.Values[row]*c.Unit.PerSI, decimals[i])
		}
		if _, err := out.Write(append(line, o.lineEnd()...)); err != nil {
			return err
		}
	}
	return out.Flush()
}

func (o CSV) validate(columns []Column) error {
	switch {
	case len(columns) == 0:
		return fmt.Errorf("no columns to write")
	case o.Digits < 1 || o.Digits > mostDigits:
		return fmt.Errorf("%d significant digits: from 1 to %d, beyond which processors may disagree", o.Digits, mostDigits)
	case o.DecimalComma && o.Delimiter == ',':
		return fmt.Errorf("a comma cannot both separate columns and mark decimals: use a semicolon or a tab between columns")
	case o.Header < Parentheses || o.Header > NoHeader:
		return fmt.Errorf("header style %d: not known", o.Header)
	}
	for _, c := range columns {
		if len(c.Values) != len(columns[0].Values) {
			return fmt.Errorf("column %q has %d values, column %q has %d", c.Name, len(c.Values), columns[0].Name, len(columns[0].Values))
		}
		if !positive(c.Unit.PerSI) {
			return fmt.Errorf("column %q: unit %q is %v times its SI unit: must be positive and finite", c.Name, c.Unit.Symbol, c.Unit.PerSI)
		}
	}
	return nil
}

// preamble returns what stands before the first row.
func (o CSV) preamble(columns []Column) string {
	text := ""
	if o.ByteOrder {
		text = "\ufeff"
	}
	for _, comment := range o.Comments {
		text += "# " + comment + o.lineEnd()
	}
	if o.Header == NoHeader {
		return text
	}
	for i, c := range columns {
		if i > 0 {
			text += string(o.Delimiter)
		}
		text += o.title(c)
	}
	return text + o.lineEnd()
}

func (o CSV) title(c Column) string {
	switch o.Header {
	case Brackets:
		return c.Name + " [" + c.Unit.Symbol + "]"
	case Underscore:
		return c.Name + "_" + c.Unit.Symbol
	case NamesOnly:
		return c.Name
	}
	return c.Name + " (" + c.Unit.Symbol + ")"
}

func (o CSV) lineEnd() string {
	if o.CRLF {
		return "\r\n"
	}
	return "\n"
}

// appendNumber appends a value; nothing for NaN.
func (o CSV) appendNumber(line []byte, value float64, decimals int) []byte {
	if math.IsNaN(value) {
		return line
	}
	begin := len(line)
	line = strconv.AppendFloat(line, value, 'f', decimals, 64)
	if o.DecimalComma {
		for i := begin; i < len(line); i++ {
			if line[i] == '.' {
				line[i] = ','
			}
		}
	}
	return line
}

// Decimals returns the number of decimals that leaves the largest value of all the columns,
// in their units, the given number of significant digits.
func Decimals(digits int, columns ...Column) int {
	largest := 0.0
	for _, c := range columns {
		for _, v := range c.Values {
			if size := math.Abs(v * c.Unit.PerSI); size > largest && finite(size) {
				largest = size
			}
		}
	}
	if largest == 0 {
		return 0
	}
	before := 1 + int(math.Floor(math.Log10(largest))) // digits before the point
	if largest >= math.Pow10(before)-0.5*math.Pow10(before-digits) {
		before++ // rounding carries into a new digit
	}
	return max(digits-before, 0)
}

// TimeColumn returns the time column of a recording sampled at rate [Hz]: with as many
// decimals, up to nine, as the sampling interval needs.
func TimeColumn(r Recording, unit Unit, rate float64) Column {
	c := Column{Name: "t", Unit: unit, Values: r.Time, Decimals: 9}
	for d := 1; d < 9; d++ {
		// 1e-6 of the last decimal lets through the rounding of an interval such as 1/3000 x 3.
		if scaled := unit.PerSI / rate * math.Pow10(d); math.Abs(scaled-math.Round(scaled)) < 1e-6 && scaled > 0.5 {
			c.Decimals = d
			break
		}
	}
	return c
}
