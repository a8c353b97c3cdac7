package calib

import (
	"bytes"
	"encoding/json"
	"math"
	"strconv"
)

// Float is a float64 that JSON can always carry: NaN, the unknown number of
// the numeric packages, is written as null and read back as NaN. Infinities
// have no meaning in a result and are written as null too.
type Float float64

// MarshalJSON writes the shortest decimal that reads back to the same bits.
func (f Float) MarshalJSON() ([]byte, error) {
	v := float64(f)
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return []byte("null"), nil
	}
	return AppendFloat(make([]byte, 0, 24), v), nil
}

// AppendFloat appends a finite number with the shortest digits that read back to the same bits, as encoding/json writes it.
func AppendFloat(to []byte, v float64) []byte {
	if size := math.Abs(v); size == 0 || size >= 1e-6 && size < 1e21 {
		return strconv.AppendFloat(to, v, 'f', -1, 64)
	}
	to = strconv.AppendFloat(to, v, 'e', -1, 64)
	if n := len(to); to[n-4] == 'e' && to[n-3] == '-' && to[n-2] == '0' { // e-09 is e-9
		to = append(to[:n-2], to[n-1])
	}
	return to
}

// UnmarshalJSON reads a number, or null as NaN.
func (f *Float) UnmarshalJSON(b []byte) error {
	if bytes.Equal(b, []byte("null")) {
		*f = Float(math.NaN())
		return nil
	}
	v, err := strconv.ParseFloat(string(b), 64)
	if err != nil {
		return &json.UnmarshalTypeError{Value: string(b), Type: floatType}
	}
	*f = Float(v)
	return nil
}

// Known tells whether f carries a number.
func (f Float) Known() bool { return !math.IsNaN(float64(f)) && !math.IsInf(float64(f), 0) }

// Quantity is one number of a result in SI units, with its uncertainties.
//
// Value is null when the number is withheld or unknown, and Reason then says
// why. Statistical takes every stated input as exact; Combined adds the stated
// standard uncertainties of the inputs. Either is absent when it does not apply
// (an input has no statistical part).
type Quantity struct {
	Value       Float        `json:"value"`                 // in the unit beside it; null when it is not known
	Unit        string       `json:"unit"`                  // SI; 1 for a ratio
	Statistical *Uncertainty `json:"statistical,omitempty"` // inputs taken as exact; absent when it has none
	Combined    *Uncertainty `json:"combined,omitempty"`    // with the stated uncertainties of the inputs; absent when it has none
	Reason      string       `json:"reason,omitempty"`      // why the value is null
}

// Uncertainty is a standard uncertainty with its coverage intervals, all in the
// unit of the quantity. The intervals need not be symmetric; an end that the
// data do not bound is null.
type Uncertainty struct {
	Standard   Float    `json:"standard_uncertainty"` // null when it is not known
	Interval68 [2]Float `json:"interval_68"`          // lower and upper end, coverage 68.27 %
	Interval95 [2]Float `json:"interval_95"`          // lower and upper end, coverage 95 %
}

// Known tells whether the quantity has a value.
func (q Quantity) Known() bool { return q.Value.Known() }

// Exact makes a quantity without any uncertainty [unit].
func Exact(value float64, unit string) Quantity {
	return Quantity{Value: Float(value), Unit: unit}
}

// Withheld makes a quantity whose value is unknown for the given reason.
func Withheld(unit, reason string) Quantity {
	return Quantity{Value: Float(math.NaN()), Unit: unit, Reason: reason}
}
