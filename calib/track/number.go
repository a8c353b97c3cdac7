package track

import (
	"encoding/binary"
	"math"
	"math/bits"
	"strconv"
	"sync"
	"unsafe"
)

// pad is the number of readable bytes that fastNumber needs beyond the last
// digit: it loads eight bytes at a time.
const pad = 16

// farthest bounds the numbers that are taken for a position or a time, in SI units or
// that of the file. It is far above all that is measured, and its square far below
// what a float64 holds.
const farthest = 1e30

// tens holds the powers of ten that a float64 represents exactly.
var tens = [...]float64{1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11,
	1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19, 1e20, 1e21, 1e22}

// wholeTens holds the powers of ten by which up to eight digits are appended.
var wholeTens = [16]uint64{1, 10, 100, 1000, 10000, 100000, 1000000, 10000000, 100000000}

// eightDigits reads the run of decimal digits at the start of the eight bytes
// of w (first byte lowest) and returns its value and its length, 0 to 8.
func eightDigits(w uint64) (value uint64, n int) {
	x := w ^ 0x3030303030303030
	// A byte above 9 sets its own high bit; a carry can only disturb later bytes.
	other := (x | (x + 0x7676767676767676)) & 0x8080808080808080
	n = bits.TrailingZeros64(other) >> 3
	x <<= uint(64 - 8*n)
	x = (x * (1 + 10<<8)) >> 8 & 0x00ff00ff00ff00ff
	x = (x * (1 + 100<<16)) >> 16 & 0x0000ffff0000ffff
	return (x * (1 + 10000<<32)) >> 32, n
}

// plainNumber reads the commonest form: an optional minus, digits, a decimal
// mark with at most eight digits behind it, fifteen digits in all, no exponent.
// It is fastNumber without the rare cases, and reports false for them.
func plainNumber(b []byte, i int, mark byte, shift int) (v float64, next int, ok bool) {
	var negative uint64
	if b[i] == '-' {
		negative = 1
	}
	i += int(negative) // without a branch: the sign of a trace is a coin toss
	start := i
	var m uint64
	for {
		d := uint64(b[i]) - '0'
		if d > 9 {
			break
		}
		m = m*10 + d
		i++
	}
	digits, decimals := i-start, 0
	if b[i] == mark {
		var more uint64
		more, decimals = eightDigits(binary.LittleEndian.Uint64(b[i+1:]))
		m = m*wholeTens[decimals&15] + more
		i += 1 + decimals
	}
	power := decimals - shift
	if uint(digits+decimals-1) >= 15 || uint(power) > 22 || b[i]-'0' <= 9 || b[i]|0x20 == 'e' {
		return 0, i, false
	}
	v = float64(m) / tens[power]
	return math.Float64frombits(math.Float64bits(v) | negative<<63), i, true
}

// fastNumber reads a plain decimal number that starts at b[i]: an optional
// sign, digits with at most one decimal mark, an optional exponent. It returns
// the value times 10^shift, rounded once (bit-equal to strconv.ParseFloat of
// the same digits with the shifted exponent), and the index after the number.
// It reports false for anything else, and for what it cannot round exactly;
// the caller then takes the general way. At least pad bytes must follow in b.
//
// A significand below 2^53 and a power of ten of at most 22 are both exact, so
// one division or multiplication rounds once (W. D. Clinger, Proc. ACM PLDI
// (1990) 92); wider significands go through roundWide.
func fastNumber(b []byte, i int, mark byte, shift int) (v float64, next int, ok bool) {
	var negative uint64
	if b[i] == '-' {
		negative = 1
	}
	i += int(negative)
	m, n := eightDigits(binary.LittleEndian.Uint64(b[i:]))
	i += n
	digits := n
	for n == 8 && digits < 20 {
		var more uint64
		more, n = eightDigits(binary.LittleEndian.Uint64(b[i:]))
		m = m*wholeTens[n] + more
		i, digits = i+n, digits+n
	}
	exponent := shift
	if b[i] == mark {
		i++
		for n = 8; n == 8 && digits < 20; {
			var more uint64
			more, n = eightDigits(binary.LittleEndian.Uint64(b[i:]))
			m = m*wholeTens[n] + more
			i, digits, exponent = i+n, digits+n, exponent-n
		}
	}
	if digits == 0 || digits > 19 || b[i]-'0' <= 9 {
		return 0, i, false
	}
	if b[i]|0x20 == 'e' {
		var e int
		if e, i, ok = smallExponent(b, i+1); !ok {
			return 0, i, false
		}
		exponent += e
	}
	switch {
	case m > 1<<53:
		v, ok = roundWide(m, exponent)
		if !ok {
			return 0, i, false
		}
	case exponent < -22 || exponent > 22:
		v, ok = roundWide(m, exponent)
		if !ok {
			return 0, i, false
		}
	case exponent <= 0:
		v = float64(m) / tens[-exponent]
	default:
		v = float64(m) * tens[exponent]
	}
	return math.Float64frombits(math.Float64bits(v) | negative<<63), i, true
}

// smallExponent reads a signed exponent of one to three digits at b[i].
func smallExponent(b []byte, i int) (e, next int, ok bool) {
	negative := b[i] == '-'
	if negative || b[i] == '+' {
		i++
	}
	start := i
	for b[i]-'0' <= 9 && i-start < 4 {
		e = e*10 + int(b[i]-'0')
		i++
	}
	if negative {
		e = -e
	}
	return e, i, i > start && i-start < 4
}

// wideRange is the range of decimal exponents that roundWide serves: every
// length, voltage or time in use, with room.
const wideRange = 64

// wideTen is 10^e as a 128-bit significand with its top bit set, rounded down.
type wideTen struct{ high, low uint64 }

// wideTens makes the table of roundWide when it is first needed.
var wideTens = sync.OnceValue(makeWideTens)

// roundWide returns m times 10^e rounded to the nearest float64, or false when
// 128 bits of the power of ten do not settle the rounding or e is outside its
// range. Source: D. Lemire, Softw. Pract. Exper. 51 (2021) 1700, section 5.
func roundWide(m uint64, e int) (float64, bool) {
	if m == 0 {
		return 0, true
	}
	if e < -wideRange || e > wideRange {
		return 0, false
	}
	power := wideTens()[e+wideRange]
	lead := bits.LeadingZeros64(m)
	m <<= uint(lead)
	// floor(e*log2(10)) by an integer ratio that is exact over |e| <= 350.
	binary := (217706*e)>>16 + 64 + 1023 - lead
	high, low := bits.Mul64(m, power.high)
	if high&0x1ff == 0x1ff && low+m < m {
		high2, low2 := bits.Mul64(m, power.low)
		merged, carry := bits.Add64(low, high2, 0)
		high += carry
		if high&0x1ff == 0x1ff && merged+1 == 0 && low2+m < m {
			return 0, false
		}
		low = merged
	}
	top := high >> 63
	f := high >> (top + 9)
	binary -= int(1 ^ top)
	if low == 0 && high&0x1ff == 0 && f&3 == 1 {
		return 0, false // exactly half way: left to the general way
	}
	f += f & 1
	f >>= 1
	if f>>53 > 0 {
		f >>= 1
		binary++
	}
	if binary < 1 || binary > 2046 {
		return 0, false
	}
	return math.Float64frombits(uint64(binary)<<52 | f&(1<<52-1)), true
}

// parseASCII is strconv.ParseFloat on bytes, without a copy of them.
func parseASCII(b []byte) (float64, error) {
	return strconv.ParseFloat(unsafe.String(unsafe.SliceData(b), len(b)), 64)
}
