package track

import (
	"bytes"
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"

	"github.com/klauspost/compress/gzip"
	"github.com/klauspost/compress/zstd"
	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"
)

// decimal is a number as an integer and a power of ten, so that it can be
// written exactly in any unit.
type decimal struct {
	digits int64
	power  int
}

// in writes the number times 10^shift in fixed form with a decimal mark.
func (d decimal) in(shift int, mark string) string {
	sign, digits := "", d.digits
	if digits < 0 {
		sign, digits = "-", -digits
	}
	s := strconv.FormatInt(digits, 10)
	power := d.power + shift
	if power >= 0 {
		return sign + s + strings.Repeat("0", power)
	}
	for len(s) <= -power {
		s = "0" + s
	}
	return sign + s[:len(s)+power] + mark + s[len(s)+power:]
}

func (d decimal) float() float64 {
	v, _ := strconv.ParseFloat(fmt.Sprintf("%de%d", d.digits, d.power), 64)
	return v
}

// writer is one dialect.
type writer struct {
	delimiter, mark, unit, end, style, encoding, compression string
	shift                                                    int
	quoted, trailing, comments, unitsRow, missing, exponent  bool
}

func randomWriter(rng *rand.Rand) writer {
	pick := func(list ...string) string { return list[rng.IntN(len(list))] }
	flip := func() bool { return rng.IntN(4) == 0 }
	w := writer{delimiter: pick(",", ";", "\t", "|", " ", "   ", ", "), mark: pick(".", "."), end: pick("\n", "\r\n", "\r"),
		style: pick("%s (%s)", "%s [%s]", "%s_%s", "%s/%s"), encoding: pick("utf8", "bom", "utf16le", "utf16be", "latin1"),
		compression: pick("", "", "gzip", "zstd"), quoted: flip(), trailing: flip(), comments: flip(), unitsRow: flip(), missing: flip(), exponent: flip()}
	if w.delimiter[0] != ',' || w.quoted {
		w.mark = pick(".", ",")
	}
	w.unit = pick("m", "mm", "um", "µm", "nm", "pm")
	w.shift = map[string]int{"m": 0, "mm": 3, "um": 6, "µm": 6, "nm": 9, "pm": 12}[w.unit]
	if w.delimiter[0] == ' ' {
		w.trailing, w.missing = false, false
		w.style = "%s_%s"
	}
	return w
}

// write returns the bytes of a recording of times and positions.
func (w writer) write(t, x, y []decimal) []byte {
	var b strings.Builder
	row := func(cells ...string) {
		for i, c := range cells {
			if i > 0 {
				b.WriteString(w.delimiter)
			}
			if w.quoted {
				c = `"` + c + `"`
			}
			b.WriteString(c)
		}
		if w.trailing {
			b.WriteString(w.delimiter[:1])
		}
		b.WriteString(w.end)
	}
	if w.comments {
		b.WriteString("# made by a test" + w.end)
	}
	if w.unitsRow {
		row("t", "x", "y")
		row("s", w.unit, w.unit)
	} else {
		row(fmt.Sprintf(w.style, "t", "s"), fmt.Sprintf(w.style, "x", w.unit), fmt.Sprintf(w.style, "y", w.unit))
	}
	position := func(d decimal, i int) string {
		if w.missing && i == 7 {
			return ""
		}
		if w.exponent {
			return decimal{d.digits, -3}.in(0, w.mark) + fmt.Sprintf("e%d", d.power+3+w.shift)
		}
		return d.in(w.shift, w.mark)
	}
	for i := range t {
		row(t[i].in(0, w.mark), position(x[i], i), position(y[i], i))
		if w.comments && i == 5 {
			b.WriteString("# a remark" + w.end)
		}
	}
	return w.pack(b.String())
}

func (w writer) pack(text string) []byte {
	data := []byte(text)
	switch w.encoding {
	case "bom":
		data = append([]byte("\ufeff"), data...)
	case "utf16le":
		data, _ = unicode.UTF16(unicode.LittleEndian, unicode.UseBOM).NewEncoder().Bytes(data)
	case "utf16be":
		data, _ = unicode.UTF16(unicode.BigEndian, unicode.IgnoreBOM).NewEncoder().Bytes(data)
	case "latin1":
		data, _ = charmap.ISO8859_1.NewEncoder().Bytes(data)
	}
	var packed bytes.Buffer
	switch w.compression {
	case "gzip":
		z := gzip.NewWriter(&packed)
		_, _ = z.Write(data)
		_ = z.Close()
		return packed.Bytes()
	case "zstd":
		z, _ := zstd.NewWriter(&packed)
		_, _ = z.Write(data)
		_ = z.Close()
		return packed.Bytes()
	}
	return data
}

// A recording written in any dialect and in any unit reads back to the same
// bits: those of the double nearest to the decimal number in metres.
func TestAnyDialectSameBits(t *testing.T) {
	rng := rand.New(rand.NewPCG(21, 22))
	trials := 500
	if testing.Short() {
		trials = 200
	}
	for trial := range trials {
		n := 20 + rng.IntN(40)
		times, x, y := make([]decimal, n), make([]decimal, n), make([]decimal, n)
		for i := range n {
			times[i] = decimal{int64(i) * 5, -4}
			x[i] = decimal{rng.Int64N(2_000_000) - 1_000_000, -13}
			y[i] = decimal{rng.Int64N(2_000_000) - 1_000_000, -13}
		}
		w := randomWriter(rng)
		list, err := Read(t.Context(), bytes.NewReader(w.write(times, x, y)), Options{Name: "trial", Workers: 1 + trial%3})
		if err != nil {
			w.compression, w.encoding = "", "utf8"
			t.Fatalf("trial %d, %+v: %v\n%.300s", trial, w, err, w.write(times, x, y))
		}
		rec := list[0]
		if len(rec.Axes) != 2 || rec.Samples != n || rec.Rate != 2000 {
			t.Fatalf("trial %d, %+v: %d axes, %d samples, %v Hz", trial, w, len(rec.Axes), rec.Samples, rec.Rate)
		}
		for k, truth := range [][]decimal{x, y} {
			for i, d := range truth {
				have, want := rec.Axes[k].Values[i], d.float()
				if w.missing && i == 7 {
					want = math.NaN()
				}
				if math.Float64bits(have) != math.Float64bits(want) && !(have == 0 && want == 0) && (have == have || want == want) {
					t.Fatalf("trial %d, %+v: axis %d sample %d = %v, want %v", trial, w, k, i, have, want)
				}
			}
		}
	}
}
