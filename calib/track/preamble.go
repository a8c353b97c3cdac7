package track

import (
	"math"
	"regexp"
	"strings"
)

// preamble is what the lines above the data say in the form of keys and values.
type preamble struct {
	mark   byte // decimal mark of the numbers in the rows, 0 when they do not show it
	rates  []statedRate
	start  float64 // time of the first sample [s]
	unit   unit    // unit of the positions
	stated bool
	comma  bool // a number of a rate or an interval has a decimal comma for certain
	doubt  *statedRate
}

// statedRate is a sampling rate in a line above the data.
type statedRate struct {
	rate float64 // Hz
	line int
	bare bool   // it, or the interval that gives it, came without a unit
	text string // as written, where it reads two ways
}

// rate returns the stated rate nearest to a wanted one, the first of several where
// none is wanted (0), and the zero value where none is stated.
func (p *preamble) rate(wanted float64) statedRate {
	var best statedRate
	for i, r := range p.rates {
		if i == 0 || wanted > 0 && math.Abs(r.rate-wanted) < math.Abs(best.rate-wanted) {
			best = r
		}
	}
	return best
}

// contradiction returns the first stated rate that is another than the first, nil if
// all agree.
func (p *preamble) contradiction() *statedRate {
	for i := range p.rates {
		if !agree(p.rates[i].rate, p.rates[0].rate, 0) {
			return &p.rates[i]
		}
	}
	return nil
}

// Keys of the preamble, as words in lower case without their order.
var (
	rateKeys     = [][]string{{"rate"}, {"sampling", "rate"}, {"sample", "rate"}, {"sampling", "frequency"}, {"sample", "frequency"}, {"samplerate"}, {"samplingrate"}, {"fs"}, {"frame", "rate"}, {"framerate"}, {"fps"}, {"frames", "per", "second"}, {"samples", "per", "second"}, {"acquisition", "rate"}, {"acquisition", "frequency"}, {"scan", "rate"}, {"abtastrate"}, {"bildrate"}, {"fréquence"}, {"frecuencia"}}
	intervalKeys = [][]string{{"dt"}, {"delta", "t"}, {"deltat"}, {"time", "step"}, {"timestep"}, {"sampling", "interval"}, {"sample", "interval"}, {"sample", "period"}, {"sampling", "period"}, {"increment"}, {"time", "increment"}, {"x", "increment"}, {"interval"}, {"time", "interval"}, {"frame", "interval"}, {"frame", "time"}, {"abtastintervall"}, {"δt"}, {"δ", "t"}}
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

// The words of a rate in any other order.
var (
	rateNouns      = words("rate frequency freq frequenz fréquence frecuencia frequenza")
	rateQualifiers = words("sampling sample samples acquisition acq frame camera recording record daq adc data of the actual effective")
)

// isRateKey tells whether words name a sampling rate.
func isRateKey(list []string) bool {
	if matches(list, rateKeys) {
		return true
	}
	nouns := 0
	for _, w := range list {
		if rateNouns[w] {
			nouns++
		} else if !rateQualifiers[w] {
			return false
		}
	}
	return nouns == 1 && len(list) > 1
}

// isKey tells whether words name anything that a preamble is read for.
func isKey(list []string) bool {
	return isRateKey(list) || matches(list, intervalKeys) || matches(list, startKeys) || matches(list, unitKeys)
}

// readKey reads one line of the form "key: value unit", "key = value",
// "key<delimiter>value" or "key value unit".
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
	for _, other := range ";,|" { // the lines above the data may be cut otherwise
		if first := strings.IndexRune(text, other); at < 0 && first > 0 && isKey(splitWords(parseName(strings.Trim(text[:first], "\" ")).header)) {
			at = first
		}
	}
	switch {
	case at < 0:
		p.readPlain(text, number)
	case at > 0:
		p.set(strings.Trim(text[:at], "\" "), strings.Trim(trimCell(text[at+1:]), "\"=:;,\t| "), number)
	}
}

// readPlain reads "key value unit", where the unit makes sure that it is one.
func (p *preamble) readPlain(text string, number int) {
	at := strings.IndexAny(text, "0123456789")
	if at <= 0 {
		return
	}
	if q, ok := p.quantity(text[at:]); ok && q.unit.name != "" && !q.unit.isCoarse() {
		p.set(text[:at], text[at:], number)
	}
}

// set takes a key with its value. The key may hold the unit.
func (p *preamble) set(key, value string, number int) {
	name := parseName(key)
	words := splitCased(key)
	if last := len(words) - 1; !name.stated && last > 0 {
		if u, ok := findUnit(words[last]); ok && u.dim == frequency {
			name = columnInfo{header: strings.Join(words[:last], " "), unit: u, stated: true}
		}
	}
	if !name.stated || !isKey(splitWords(name.header)) {
		name = columnInfo{header: key}
	}
	p.take(name, value, number)
}

// take takes a key whose unit is apart, with its value.
func (p *preamble) take(key columnInfo, value string, number int) {
	list := splitWords(key.header)
	if matches(list, unitKeys) {
		if u, ok := findUnit(value); ok && u.positional() {
			p.unit, p.stated = u, true
		}
		return
	}
	isRate, isInterval, isStart := isRateKey(list), matches(list, intervalKeys), matches(list, startKeys)
	if !isRate && !isInterval && !isStart {
		return
	}
	q, ok := p.quantity(value)
	if !ok {
		return
	}
	p.comma = p.comma || q.comma
	u, bare := q.unit, q.unit.name == ""
	if bare && key.stated {
		u, bare = key.unit, false
	}
	stated := statedRate{line: number, bare: bare && (!isRate || list[0] != "fps")}
	switch {
	case isRate && (bare || u.dim == frequency) && q.value > 0:
		stated.rate = q.value * math.Pow10(u.shift)
	case isInterval && (bare || u.dim == duration) && q.value > 0:
		stated.rate = math.Pow10(-u.shift) / q.value
		if u.isCoarse() {
			stated.rate /= u.times
		}
	case isStart && (bare || u.dim == duration):
		p.start = q.value * math.Pow10(u.shift)
		return
	default:
		return
	}
	if q.doubtful {
		stated.text = value
		p.doubt = &stated
		return
	}
	p.rates = append(p.rates, stated)
}

// amount is a number with a unit from a preamble.
type amount struct {
	value    float64
	unit     unit
	comma    bool // the comma in it can only be a decimal mark
	doubtful bool // it reads two ways
}

var leadingNumber = regexp.MustCompile(`^[+\-−]?[0-9.,]+(?:[ '\x{2019}\x{a0}\x{2009}\x{202f}][0-9]{3}\b)*[0-9.,]*(?:[eE][+\-−]?[0-9]+)?`)

// quantity reads a number and the unit behind it. One mark before three digits is
// what it is in the rows.
func (p *preamble) quantity(s string) (amount, bool) {
	s = trimCell(s)
	number := leadingNumber.FindString(s)
	var q amount
	if tail := trimCell(s[len(number):]); tail != "" {
		var ok bool
		if q.unit, ok = findUnit(tail); !ok {
			return q, false
		}
	}
	mark := byte('.')
	points, commas := strings.Count(number, "."), strings.Count(number, ",")
	unsigned := strings.TrimLeft(number, "+-−")
	switch {
	case points > 0 && commas > 0:
		if strings.LastIndexByte(number, ',') > strings.LastIndexByte(number, '.') {
			mark, q.comma = ',', true
		}
	case commas == 1 && isGroup(unsigned, ','):
		if p.mark == ',' {
			mark = ','
		}
		q.doubtful = p.mark == 0
	case commas == 1:
		mark, q.comma = ',', true
	case points == 1 && isGroup(unsigned, '.'):
		q.doubtful = p.mark == ','
	case points > 1:
		mark = ','
	}
	v, err := generalNumber(number, mark, '.'+','-mark, 0)
	q.value = v
	return q, err == nil && !math.IsNaN(v) && number != ""
}
