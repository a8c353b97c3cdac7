package track

import (
	"math"
	"strings"
)

// preamble is what the lines above the data say in the form of keys and values.
type preamble struct {
	rate     float64 // sampling rate [Hz], 0 when absent
	rateLine int
	start    float64 // time of the first sample [s]
	unit     unit    // unit of the positions
	stated   bool
	bare     bool // the rate or the interval came without a unit
}

// Keys of the preamble, as words in lower case without their order.
var (
	rateKeys     = [][]string{{"rate"}, {"sampling", "rate"}, {"sample", "rate"}, {"sampling", "frequency"}, {"sample", "frequency"}, {"samplerate"}, {"samplingrate"}, {"fs"}, {"frame", "rate"}, {"framerate"}, {"fps"}, {"frames", "per", "second"}, {"samples", "per", "second"}, {"acquisition", "rate"}, {"acquisition", "frequency"}, {"scan", "rate"}, {"abtastrate"}, {"bildrate"}, {"fréquence"}, {"frecuencia"}}
	intervalKeys = [][]string{{"dt"}, {"delta", "t"}, {"deltat"}, {"time", "step"}, {"timestep"}, {"sampling", "interval"}, {"sample", "interval"}, {"sample", "period"}, {"sampling", "period"}, {"increment"}, {"time", "increment"}, {"x", "increment"}, {"interval"}, {"time", "interval"}, {"frame", "interval"}, {"frame", "time"}, {"abtastintervall"}}
	startKeys    = [][]string{{"t", "0"}, {"start"}, {"start", "time"}, {"time", "start"}, {"x", "start"}, {"time", "offset"}, {"t", "start"}, {"first", "sample"}}
	unitKeys     = [][]string{{"unit"}, {"units"}, {"position", "unit"}, {"position", "units"}, {"length", "unit"}, {"length", "units"}, {"unit", "of", "position"}, {"einheit"}}
)

func matches(list []string, keys [][]string) bool {
	for _, key := range keys {
		if strings.Join(list, " ") == strings.Join(key, " ") {
			return true
		}
	}
	return false
}

// readKey reads one line of the form "key: value unit", "key = value" or
// "key<delimiter>value".
func (p *preamble) readKey(text string, delimiter byte, number int) {
	text = strings.TrimLeft(trimCell(text), "#%;/! \t")
	if strings.Count(text, "=")+strings.Count(text, ":") > 1 && strings.Contains(text, ";") {
		for part := range strings.SplitSeq(text, ";") {
			p.readKey(part, delimiter, number)
		}
		return
	}
	at := strings.IndexAny(text, ":=")
	if at < 0 && delimiter != ' ' {
		at = strings.IndexByte(text, delimiter)
	}
	if at < 0 {
		at = strings.LastIndexByte(text, '\t')
	}
	if at < 0 {
		p.readPlain(text, number)
		return
	}
	if at == 0 {
		return
	}
	key := strings.Trim(text[:at], "\" ")
	value := strings.Trim(trimCell(text[at+1:]), "\"=:;,\t| ")
	p.set(parseName(key), value, number)
}

// readPlain reads "key value unit", where the unit makes sure that it is one.
func (p *preamble) readPlain(text string, number int) {
	at := strings.IndexAny(text, "0123456789")
	if at <= 0 {
		return
	}
	if _, u, ok := quantity(text[at:]); ok && u.name != "" && !u.isCoarse() {
		p.set(columnInfo{header: text[:at]}, text[at:], number)
	}
}

// set takes a key with its value.
func (p *preamble) set(key columnInfo, value string, number int) {
	list := splitWords(key.header)
	if matches(list, unitKeys) {
		if u, ok := findUnit(value); ok && u.positional() {
			p.unit, p.stated = u, true
		}
		return
	}
	isRate, isInterval, isStart := matches(list, rateKeys), matches(list, intervalKeys), matches(list, startKeys)
	if !isRate && !isInterval && !isStart {
		return
	}
	v, u, ok := quantity(value)
	if !ok {
		return
	}
	bare := u.name == ""
	if bare && key.stated {
		u, bare = key.unit, false
	}
	switch {
	case isRate && (bare || u.dim == frequency) && v > 0:
		p.rate, p.rateLine, p.bare = v*math.Pow10(u.shift), number, bare && list[0] != "fps"
	case isInterval && (bare || u.dim == duration) && v > 0:
		p.rate, p.rateLine, p.bare = math.Pow10(-u.shift)/v, number, bare
	case isStart && (bare || u.dim == duration):
		p.start = v * math.Pow10(u.shift)
	}
}

// quantity reads a number and the unit behind it.
func quantity(s string) (float64, unit, bool) {
	s = trimCell(s)
	end := len(s)
	for i, r := range s {
		if !strings.ContainsRune("0123456789.,+-−eE", r) {
			end = i
			break
		}
	}
	tail := trimCell(s[end:])
	u := unit{}
	if tail != "" {
		var ok bool
		if u, ok = findUnit(tail); !ok {
			return 0, u, false
		}
	}
	mark := byte('.')
	if strings.Contains(s[:end], ",") && !strings.Contains(s[:end], ".") {
		mark = ','
	}
	v, err := generalNumber(s[:end], mark, 0, 0)
	return v, u, err == nil && !math.IsNaN(v) && trimCell(s[:end]) != ""
}
