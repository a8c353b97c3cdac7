package quantity

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
)

// Value is a quantity in SI units.
type Value struct {
	SI        float64   // the value, in the SI unit of its dimension
	U         float64   // standard uncertainty, same unit; 0 when none was stated
	HasU      bool      // whether an uncertainty was stated
	Dimension Dimension // what it is; of the dimensions asked for, the one that its unit has
	Unit      string    // its unit in plain letters (um for µm, C for °C), "" for a plain number
	Text      string    // the text it was read from
}

// Error says why a text is not the quantity that was asked for.
type Error struct {
	Text    string // the text, as given
	Problem string // what is wrong, to be read after the quoted text
	Hint    string // what to do
}

// Error gives the text, the problem, and the hint on a line of its own.
func (e *Error) Error() string {
	return strconv.Quote(e.Text) + " " + e.Problem + "\n  hint: " + e.Hint
}

// characters maps typographic characters to the plain ones of the grammar.
var characters = strings.NewReplacer(
	"\u2212", "-", // minus sign
	"\u00a0", " ", "\u202f", " ", "\u2009", " ", // no-break, narrow and thin spaces
	"+/-", "±", "+-", "±",
)

// maxText bounds the length of a quantity in bytes; the longest sensible one has about 60.
const maxText = 200

// Parse reads a quantity of one of the given dimensions (Dimensionless when
// none is given). It reads 1.02 um, 1.02(3) um, 1.02(0.03) um, 1.02 +- 0.03 um,
// (1.02 +- 0.03) um, 1.02 um +- 30 nm, 1.02 um +- 3 %, with ± for +-, and powers of ten as
// 1.02(3)e-6 m. Behind +- stands a standard uncertainty. Both code points of
// the micro sign are read, and u in their place.
//
// The error is an *Error. It names the dimension found and the one wanted when
// they differ, and asks for the unit when none is there.
func Parse(text string, dims ...Dimension) (Value, error) {
	if len(dims) == 0 {
		dims = []Dimension{Dimensionless}
	}
	r := reader{text: text, dims: dims}
	value, err := r.read()
	if err != nil {
		return Value{}, err
	}
	return value, nil
}

// reader holds one text while it is taken apart.
type reader struct {
	text string
	dims []Dimension
}

// fail makes the error of this text; an empty hint becomes an example.
func (r reader) fail(hint, problem string, args ...any) *Error {
	if hint == "" {
		hint = "write " + r.wanted() + ", such as " + r.dims[0].Example()
	}
	return &Error{Text: r.text, Problem: fmt.Sprintf(problem, args...), Hint: hint}
}

// wanted lists the dimensions asked for: "a length or a length per pixel".
func (r reader) wanted() string {
	names := make([]string, len(r.dims))
	for i, dim := range r.dims {
		names[i] = dim.String()
	}
	return strings.Join(names, " or ")
}

// parts are the pieces of a quantity before their units are known.
type parts struct {
	number, uncertainty decimal
	unit                string // of the number
	uncertaintyUnit     string // of the uncertainty when it has one of its own; "%" when relative
}

func (r reader) read() (Value, *Error) {
	if len(r.text) > maxText {
		short := r.text[:maxText]
		return Value{}, &Error{Text: strings.ToValidUTF8(short, "") + "...", Problem: "is too long for a quantity", Hint: "write " + r.wanted() + ", such as " + r.dims[0].Example()}
	}
	p, err := r.split()
	if err != nil {
		return Value{}, err
	}
	unit, dim, err := r.unitOf(p.unit)
	if err != nil {
		return Value{}, err
	}
	value := Value{Dimension: dim, Unit: plainUnit(p.unit), Text: r.text}
	si, ok := p.number.float(unit.decade)
	if !ok {
		return Value{}, r.fail("", "is outside the range of numbers")
	}
	value.SI = float64(si*unit.factor) + unit.offset
	if p.uncertainty.digits != "" {
		value.HasU = true
		if value.U, err = r.uncertainty(p, unit, si); err != nil {
			return Value{}, err
		}
	}
	return value, nil
}

var decimalComma = regexp.MustCompile(`^[+-]?\d+,\d`)

// split takes the text apart into number, uncertainty and their units.
func (r reader) split() (parts, *Error) {
	text := strings.TrimSpace(characters.Replace(r.text))
	if text == "" {
		return parts{}, r.fail("", "is empty")
	}
	if decimalComma.MatchString(text) {
		return parts{}, r.fail("write the decimal mark as a point, and no mark between thousands", "has a comma in its number")
	}
	if strings.HasPrefix(text, "(") {
		inside, unit, closed := strings.Cut(text[1:], ")")
		if !closed || !strings.Contains(inside, "±") {
			return parts{}, r.fail("", "is not a number with a unit")
		}
		text = inside + " " + strings.TrimSpace(unit)
	}
	var p parts
	number, uncertainty, rest, ok := readNumber(text)
	if !ok {
		return parts{}, r.fail("", "does not start with a number")
	}
	p.number, p.uncertainty = number, uncertainty
	unit, behind, has := strings.Cut(rest, "±")
	p.unit = strings.TrimSpace(unit)
	if !has {
		return p, nil
	}
	if uncertainty.digits != "" {
		return parts{}, r.fail("give the uncertainty once, in brackets or behind +-", "states its uncertainty twice")
	}
	return r.splitUncertainty(p, strings.TrimSpace(behind))
}

// splitUncertainty reads what stands behind +-.
func (r reader) splitUncertainty(p parts, behind string) (parts, *Error) {
	uncertainty, rest, ok := readPositive(behind)
	if !ok {
		return parts{}, r.fail("write a standard uncertainty behind +-, such as 1.02 +- 0.03 um", "has no positive number behind +-")
	}
	p.uncertainty = uncertainty
	own := strings.TrimSpace(rest)
	switch relative, percent := strings.CutPrefix(own, "%"); {
	case p.unit != "":
		p.uncertaintyUnit = own // 1.02 um +- 0.03 um; without a unit it is the number's
	case percent && strings.TrimSpace(relative) != "":
		p.unit, p.uncertaintyUnit = strings.TrimSpace(relative), "%" // 1.02 +- 3 % um
	case percent:
		return parts{}, r.fail("give the value its own unit or write the brackets, such as 20(1) % or 1.02 um +- 3 %",
			"does not say whether the percent sign belongs to the value or to the uncertainty alone")
	default:
		p.unit = own // 1.02 +- 0.03 um
	}
	return p, nil
}

// unitOf reads the unit and finds which of the wanted dimensions it has.
func (r reader) unitOf(text string) (scale, Dimension, *Error) {
	if text == "" {
		for _, dim := range r.dims {
			if dim == Dimensionless || dim == Fraction {
				return scale{factor: 1}, dim, nil
			}
		}
		return scale{}, 0, r.fail("", "has no unit")
	}
	unit, unknown := parseUnit(text)
	if unknown != "" {
		hint := ""
		if likely := likelyUnit(unknown); likely != "" {
			hint = "write " + likely
		}
		return scale{}, 0, r.fail(hint, "has the unknown unit %q", unknown)
	}
	for _, dim := range r.dims {
		if dim.valid() && dimensions[dim].powers == unit.powers {
			return unit, dim, nil
		}
	}
	found := nameOf(unit.powers)
	if found == "" {
		found = "in " + text
	}
	return scale{}, 0, r.fail("", "is %s, not %s", found, r.wanted())
}

// uncertainty converts the stated uncertainty to SI. number is the value
// without its decade's offset, in units of unit.factor.
func (r reader) uncertainty(p parts, unit scale, number float64) (float64, *Error) {
	relative := p.uncertaintyUnit == "%" && p.unit != "%"
	if relative && unit.offset != 0 {
		return 0, r.fail("write the uncertainty in kelvin, such as 24.5 +- 0.5 C", "has a percentage of a temperature in C, which has no natural zero")
	}
	own := unit
	switch {
	case relative:
		own = scale{decade: -2, factor: 1}
	case p.uncertaintyUnit != "":
		found, unknown := parseUnit(p.uncertaintyUnit)
		if unknown != "" || found.powers != unit.powers {
			return 0, r.fail("give the uncertainty in the unit of the value, or in %", "has an uncertainty in %q", p.uncertaintyUnit)
		}
		own = found
	}
	u, ok := p.uncertainty.float(own.decade)
	if !ok {
		return 0, r.fail("", "has an uncertainty outside the range of numbers")
	}
	u *= own.factor
	if relative {
		u *= math.Abs(float64(number * unit.factor))
	}
	return u, nil
}
