package track

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
)

// padded returns text followed by a newline and the bytes fastNumber may touch.
func padded(text string) []byte { return append([]byte(text+"\n"), make([]byte, pad)...) }

// randomNumber writes a number in one of the forms that recordings use.
func randomNumber(rng *rand.Rand) string {
	switch rng.IntN(7) {
	case 0: // fixed decimals
		return strconv.FormatFloat(rng.NormFloat64()*math.Pow(10, float64(rng.IntN(9)-4)), 'f', rng.IntN(12), 64)
	case 1: // shortest form
		return strconv.FormatFloat(rng.NormFloat64()*math.Pow(10, float64(rng.IntN(30)-15)), 'g', -1, 64)
	case 2: // exponent form, up to 19 digits
		return strconv.FormatFloat(rng.NormFloat64()*math.Pow(10, float64(rng.IntN(30)-20)), 'e', rng.IntN(19), 64)
	case 3: // any bit pattern
		f := math.Float64frombits(rng.Uint64())
		if math.IsNaN(f) || math.IsInf(f, 0) {
			return "0"
		}
		return strconv.FormatFloat(f, 'e', 16+rng.IntN(3), 64)
	case 4: // near half way between two numbers
		f := math.Float64frombits(rng.Uint64()>>12 | uint64(1000+rng.IntN(60))<<52)
		g := math.Nextafter(f, math.Inf(1))
		return strconv.FormatFloat(f+(g-f)/2, 'e', 18, 64)
	case 5: // integers
		return strconv.FormatInt(rng.Int64()>>rng.IntN(63), 10)
	default: // digits at random places
		s := ""
		for range 1 + rng.IntN(22) {
			s += string(rune('0' + rng.IntN(10)))
		}
		at := rng.IntN(len(s) + 1)
		return s[:at] + "." + s[at:]
	}
}

// Every number is bit-equal to strconv.ParseFloat, also when the unit moves its
// decimal point; a number that the fast way declines is read by the general way.
func TestNumbersEqualParseFloat(t *testing.T) {
	rng := rand.New(rand.NewPCG(6, 9))
	declined, total := 0, 2_000_000
	if testing.Short() {
		total = 200_000
	}
	for range total {
		text := randomNumber(rng)
		if text == "." {
			continue
		}
		want, err := strconv.ParseFloat(text, 64)
		if err != nil {
			t.Fatalf("ParseFloat(%q): %v", text, err)
		}
		v, next, ok := fastNumber(padded(text), 0, '.', 0)
		if p, at, easy := plainNumber(padded(text), 0, '.', 0); easy && (!ok || at != next || math.Float64bits(p) != math.Float64bits(v)) {
			t.Fatalf("plainNumber(%q) = %v, fastNumber says %v", text, p, v)
		}
		if !ok {
			declined++
			if v, err = generalNumber(text, '.', 0, 0); err != nil {
				t.Fatalf("generalNumber(%q) = %v", text, err)
			}
		} else if next != len(text) {
			t.Fatalf("fastNumber(%q) stops at %d, want %d", text, next, len(text))
		}
		if math.Float64bits(v) != math.Float64bits(want) {
			t.Fatalf("%q reads as %x, want %x (strconv.ParseFloat)", text, v, want)
		}
	}
	if declined*4 > total {
		t.Errorf("the fast way declined %d of %d numbers, want under a quarter", declined, total)
	}
}

// A unit moves the decimal point before the number is rounded: "12.3" nm is the
// double nearest to 12.3e-9.
func TestUnitsMoveTheDecimalPoint(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for range 100_000 {
		text := strconv.FormatFloat(rng.NormFloat64()*100, 'f', rng.IntN(9), 64)
		for _, shift := range []int{-9, -6, -3, 3} {
			want, _ := strconv.ParseFloat(fmt.Sprintf("%se%d", text, shift), 64)
			v, _, ok := fastNumber(padded(text), 0, '.', shift)
			g, err := generalNumber(text, '.', 0, shift)
			if !ok || err != nil || v != want || g != want {
				t.Fatalf("%q with 10^%d reads as %v (%t) and %v (%v), want %v", text, shift, v, ok, g, err, want)
			}
		}
	}
}

func BenchmarkFastNumber(b *testing.B) {
	for _, text := range []string{"-0.123456", "12.345", "1.234567890123456789e-07", "0.12345678901234567"} {
		b.Run(text, func(b *testing.B) {
			buf := padded(text)
			for b.Loop() {
				if _, _, ok := fastNumber(buf, 0, '.', -6); !ok {
					b.Fatal("declined")
				}
			}
		})
	}
}
