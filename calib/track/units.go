package track

import (
	"math"
	"strings"
)

// dimension is what a unit measures.
type dimension uint8

const (
	noDimension dimension = iota
	length
	voltage
	duration
	frequency
	plain // px, counts, 1: no SI unit
	frames
)

// unit is a unit of measurement: 10^shift times the SI unit, or as many times the SI
// unit as times says.
type unit struct {
	name  string // canonical spelling
	dim   dimension
	shift int
	times float64 // 1 but for minutes, hours and days
}

// isCoarse tells units of time that nobody samples in, and whose names mean other
// things as well: a least value, a height, a distance.
func (u unit) isCoarse() bool { return u.dim == duration && u.times != 1 }

// toMetre returns the factor to metres, NaN for what is no length.
func (u unit) toMetre() float64 {
	if u.dim != length {
		return math.NaN()
	}
	if u.shift < 0 {
		return 1 / math.Pow10(-u.shift)
	}
	return math.Pow10(u.shift)
}

// siShift is the power of ten that the reader applies to the numbers.
func (u unit) siShift() int {
	if u.dim == plain || u.dim == frames {
		return 0
	}
	return u.shift
}

// units lists the accepted spellings. Case matters (mV, MV), so that only
// spelled-out names are also matched in lower case.
var units = makeUnits()

func makeUnits() map[string]unit {
	table := map[string]unit{}
	add := func(u unit, spellings ...string) {
		for _, s := range append(spellings, u.name) {
			table[s] = u
		}
	}
	add(unit{"m", length, 0, 1}, "metre", "meter", "metres", "meters")
	add(unit{"cm", length, -2, 1})
	add(unit{"mm", length, -3, 1}, "millimetre", "millimeter", "millimetres", "millimeters")
	add(unit{"um", length, -6, 1}, "\u00b5m", "\u03bcm", "micron", "microns", "mum", "micrometre", "micrometer", "micrometres", "micrometers", "mikrometer", "micromètre", "micromètres", "mcm", "мкм", "微米", "µ", "\u03bc")
	add(unit{"nm", length, -9, 1}, "nanometre", "nanometer", "nanometres", "nanometers", "nanomètre", "nanomètres", "нм", "纳米")
	add(unit{"pm", length, -12, 1}, "picometre", "picometer", "picometres", "picometers")
	add(unit{"angstrom", length, -10, 1}, "Å", "\u212b", "Angstrom", "ångström", "ångstrom", "angstroms")
	add(unit{"px", plain, 0, 1}, "pix", "pixel", "pixels", "Pixel", "Px", "PX")
	add(unit{"V", voltage, 0, 1}, "volt", "volts", "Volt", "Volts", "v", "В")
	add(unit{"mV", voltage, -3, 1}, "millivolt", "millivolts", "mv")
	add(unit{"uV", voltage, -6, 1}, "uv", "\u00b5V", "\u03bcV", "microvolt", "microvolts")
	add(unit{"counts", plain, 0, 1}, "count", "cts", "ct", "ADU", "adu", "lsb", "LSB", "digits", "Counts")
	add(unit{"1", plain, 0, 1}, "norm", "normalised", "normalized", "a.u.", "au", "arb. u.", "arb.u.", "dimensionless", "rel.", "-")
	add(unit{"s", duration, 0, 1}, "sec", "secs", "second", "seconds", "Sekunde", "sekunde", "sekunden", "seconde", "secondes", "segundos", "с", "秒")
	add(unit{"ms", duration, -3, 1}, "msec", "millisecond", "milliseconds", "мс", "毫秒")
	add(unit{"us", duration, -6, 1}, "\u00b5s", "\u03bcs", "usec", "microsecond", "microseconds", "мкс", "微秒")
	add(unit{"ns", duration, -9, 1}, "nsec", "nanosecond", "nanoseconds")
	add(unit{"min", duration, 0, 60}, "mins", "minute", "minutes", "Minuten", "minuten", "minutos", "minuti", "мин", "分")
	add(unit{"h", duration, 0, 3600}, "hr", "hrs", "hour", "hours", "Stunden", "stunden", "heures", "horas", "ore", "ч", "小时")
	add(unit{"d", duration, 0, 86400}, "day", "days", "Tage", "tage", "jours")
	add(unit{"Hz", frequency, 0, 1}, "hz", "HZ", "hertz", "1/s", "s-1", "s^-1", "fps", "S/s", "Sa/s", "sps", "samples/s", "frames/s", "Гц")
	add(unit{"kHz", frequency, 3, 1}, "khz", "KHz", "KHZ", "kS/s", "kSa/s", "ksps")
	add(unit{"MHz", frequency, 6, 1}, "MS/s", "MSa/s")
	add(unit{"frame", frames, 0, 1}, "frames", "fr", "frame number", "frame no", "sample", "samples", "#", "image", "images")
	return table
}

// findUnit looks a unit up in any of its spellings.
func findUnit(s string) (unit, bool) {
	s = strings.Trim(trimCell(s), "()[]{}<>")
	s = trimCell(s)
	if strings.ContainsAny(s, `\$`) { // as TeX writes it
		s = strings.NewReplacer(`\mu `, "µ", `\mu`, "µ", "$", "", "{", "", "}", "", `\rm `, "", `\mathrm`, "", `\text`, "").Replace(s)
	}
	if u, ok := units[s]; ok {
		return u, true
	}
	if len(s) > 3 {
		if u, ok := units[strings.ToLower(s)]; ok {
			return u, true
		}
	}
	return unit{}, false
}

// findUpper looks up a unit that stands in capitals like all that is around it.
func findUpper(s string) (unit, bool) {
	if u, ok := findUnit(s); ok || s != strings.ToUpper(s) {
		return u, ok
	}
	return findUnit(strings.ToLower(s))
}

// positional tells whether a position may be given in u.
func (u unit) positional() bool {
	return u.dim == length || u.dim == voltage || u.dim == plain
}
