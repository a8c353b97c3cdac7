package quantity

import (
	"math"
	"strconv"
	"strings"
)

// scale converts a number in some unit to SI:
// SI = number * 10^decade * factor + offset. The power of ten stands apart so
// that it can join the exponent of the number's text and cost no rounding.
type scale struct {
	powers exponents
	decade int
	factor float64
	offset float64 // K, of a temperature in C; 0 otherwise
}

// symbol is one named unit.
type symbol struct {
	scale
	prefixes bool // takes SI prefixes
}

// plain makes a symbol that is decade powers of ten times its SI unit.
func plain(powers exponents, decade int, prefixes bool) symbol {
	return symbol{scale{powers: powers, decade: decade, factor: 1}, prefixes}
}

// celsiusOffset is the thermodynamic temperature of 0 C [K], exact (SI 2019).
const celsiusOffset = 273.15

var symbols = map[string]symbol{
	"m":      plain(exponents{metre: 1}, 0, true),
	"g":      plain(exponents{kilogram: 1}, -3, true),
	"s":      plain(exponents{second: 1}, 0, true),
	"K":      plain(exponents{kelvin: 1}, 0, true),
	"mol":    plain(exponents{mole: 1}, 0, true),
	"V":      plain(exponents{volt: 1}, 0, true),
	"Hz":     plain(exponents{second: -1}, 0, true),
	"N":      plain(exponents{kilogram: 1, metre: 1, second: -2}, 0, true),
	"Pa":     plain(exponents{kilogram: 1, metre: -1, second: -2}, 0, true),
	"J":      plain(exponents{kilogram: 1, metre: 2, second: -2}, 0, true),
	"W":      plain(exponents{kilogram: 1, metre: 2, second: -3}, 0, true),
	"P":      plain(exponents{kilogram: 1, metre: -1, second: -1}, -1, true), // poise = 0.1 Pa s, exact (SI brochure)
	"L":      plain(exponents{metre: 3}, -3, true),
	"count":  plain(exponents{count: 1}, 0, false),
	"counts": plain(exponents{count: 1}, 0, false),
	"px":     plain(exponents{pixel: 1}, 0, false),
	"fps":    plain(exponents{second: -1}, 0, false),
	"%":      plain(exponents{}, -2, false),
	"1":      plain(exponents{}, 0, false),
	"B":      plain(exponents{octet: 1}, 0, true),
	"KiB":    {scale{powers: exponents{octet: 1}, factor: 1 << 10}, false}, // binary prefixes: IEC 80000-13
	"MiB":    {scale{powers: exponents{octet: 1}, factor: 1 << 20}, false},
	"GiB":    {scale{powers: exponents{octet: 1}, factor: 1 << 30}, false},
	"min":    {scale{powers: exponents{second: 1}, factor: 60}, false},
	"C":      {scale{powers: exponents{kelvin: 1}, factor: 1, offset: celsiusOffset}, false},
}

var prefixes = map[string]int{
	"a": -18, "f": -15, "p": -12, "n": -9, "u": -6, "m": -3, "c": -2, "d": -1, "k": 3, "M": 6, "G": 9,
}

// spellings maps what the hand or the keyboard writes to the one spelling
// that the tables above hold.
var spellings = strings.NewReplacer(
	"\u00b5", "u", "\u03bc", "u", // micro sign, Greek mu
	"°C", "C", "\u2103", "C", "degC", "C", "deg C", "C",
	"²", "2", "³", "3", "⁻", "-", "¹", "1",
	"·", " ", "⋅", " ", "*", " ", "^", "",
)

// plainUnit writes a unit in the one spelling, with single spaces.
func plainUnit(text string) string {
	return strings.Join(strings.Fields(spellings.Replace(text)), " ")
}

// parseUnit reads a unit such as "um/V", "mPa s" or "g/cm3". Everything after
// one "/" up to the next divides once: "pN/um/mW". The second result names the
// part that is not known, when there is one.
func parseUnit(text string) (scale, string) {
	unit := scale{factor: 1}
	groups := strings.Split(spellings.Replace(text), "/")
	for i, group := range groups {
		fields := strings.Fields(group)
		if len(fields) == 0 || (i > 0 && len(fields) > 1) {
			return scale{}, text // "N/m W" may mean two things
		}
		sign := 1
		if i > 0 {
			sign = -1
		}
		for _, field := range fields {
			part, ok := parseSymbol(field)
			if !ok || (field == "1" && len(fields) > 1) {
				return scale{}, field
			}
			unit.multiply(part, sign)
		}
	}
	if unit.offset != 0 && plainUnit(text) != "C" {
		if unit.powers == symbols["C"].powers {
			return scale{}, text // such as "C/1": with the offset or without?
		}
		unit.offset = 0 // inside a compound, C is a difference of temperatures
	}
	return unit, ""
}

// multiply takes the part into the unit, divided when sign is -1.
func (u *scale) multiply(part scale, sign int) {
	for i, power := range part.powers {
		u.powers[i] += sign * power
	}
	u.decade += sign * part.decade
	if sign > 0 {
		u.factor *= part.factor
	} else {
		u.factor /= part.factor
	}
	u.offset += part.offset
}

// parseSymbol reads one unit symbol with its prefix and its power: "cm3".
func parseSymbol(field string) (scale, bool) {
	if known, ok := symbols[field]; ok {
		return known.scale, true
	}
	name := strings.TrimRight(field, "0123456789")
	name = strings.TrimSuffix(name, "-")
	power := 1
	if digits := field[len(name):]; digits != "" {
		p, err := strconv.Atoi(digits)
		if err != nil || p == 0 || p < -3 || p > 3 {
			return scale{}, false
		}
		power = p
	}
	base, ok := prefixed(name)
	if !ok || (power != 1 && base.offset != 0) {
		return scale{}, false
	}
	raised := scale{decade: base.decade * power, factor: math.Pow(base.factor, float64(power)), offset: base.offset}
	for i, p := range base.powers {
		raised.powers[i] = p * power
	}
	return raised, true
}

// prefixed finds a symbol, with an SI prefix or without.
func prefixed(name string) (scale, bool) {
	if known, ok := symbols[name]; ok {
		return known.scale, true
	}
	if len(name) < 2 {
		return scale{}, false
	}
	decade, isPrefix := prefixes[name[:1]]
	base, isSymbol := symbols[name[1:]]
	if !isPrefix || !isSymbol || !base.prefixes {
		return scale{}, false
	}
	base.decade += decade
	return base.scale, true
}

// likelyUnits maps words that are written in place of a unit to the unit.
var likelyUnits = map[string]string{
	"micron": "um", "microns": "um", "micrometer": "um", "micrometre": "um",
	"nanometer": "nm", "nanometre": "nm", "meter": "m", "metre": "m",
	"sec": "s", "second": "s", "seconds": "s", "msec": "ms", "usec": "us",
	"celsius": "C", "kelvin": "K", "pixel": "px", "pixels": "px",
	"cts": "counts", "ct": "counts", "volt": "V", "volts": "V", "watt": "W", "percent": "%",
}

// likelyUnit guesses the unit that a wrong spelling stood for: another case
// of a known unit, or a word. It returns "" when it has no idea.
func likelyUnit(wrong string) string {
	if word, ok := likelyUnits[strings.ToLower(wrong)]; ok {
		return word
	}
	for _, common := range []string{"Hz", "kHz", "MHz", "um", "nm", "mm", "ms", "us", "mW", "W", "mV", "V", "K", "C", "kg", "px", "mPa", "Pa", "pN", "cP", "fps"} {
		if strings.EqualFold(wrong, common) {
			return common
		}
	}
	return ""
}
