package quantity

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

func TestFormat(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	tests := []struct {
		value, u float64
		unit     string
		want     string
	}{
		{100.02147, 0.00035, "1", "100.02147(35)"}, // JCGM 100:2008, 7.2.2, example
		{52.34e-6, 1.1e-6, "pN/um", "52.3(11) pN/um"},
		{52.34e-6, 0.11e-6, "pN/um", "52.34(11) pN/um"},
		{52.34e-6, 11e-6, "pN/um", "52(11) pN/um"},
		{1.02e-6, 0.03e-6, "um", "1.020(30) um"},
		{1.02e-6, 0.03e-6, "nm", "1020(30) nm"},
		{297.65, 2, "C", "24.5(20) C"},
		{297.65, 2, "K", "297.6(20) K"}, // a tie: to the even 6
		{0.954e-3, 0.021e-3, "mPa s", "0.954(21) mPa s"},
		{1834.6, 12.4, "Hz", "1835(12) Hz"},
		{1834.6, 124, "Hz", "1830(120) Hz"},
		{1834.6, 1240, "Hz", "1800(1200) Hz"},
		{1834.6, 124e3, "Hz", "0(120000) Hz"},
		{1234567, 1e4, "Hz", "1235000(10000) Hz"},
		{12345678, 2, "Hz", "1.23456780(20)e7 Hz"},
		{3, 4e8, "Hz", "0.0(40)e8 Hz"},
		{5e-9, 1e-12, "m", "5.0000(10)e-9 m"},
		{137.035999177, 2.1e-8, "1", "1.37035999177(21)e2"}, // CODATA 2022
		{6.67430e-11, 1.5e-15, "1", "6.67430(15)e-11"},      // CODATA 2022
		{0.5, 1.2e-6, "1", "0.5000000(12)"},
		{0.5, 1.2e-7, "1", "5.0000000(12)e-1"},
		{-52.34e-6, 1.1e-6, "pN/um", "-52.3(11) pN/um"},
		{-0.01, 1.1, "1", "0.0(11)"}, // no negative zero
		{0, 1.1, "1", "0.0(11)"},
		// Carries.
		{9.996, 0.0996, "1", "10.00(10)"},
		{99.96, 0.1, "1", "99.96(10)"},
		{999.96, 1, "1", "1000.0(10)"},
		{0.5, 9.96, "1", "0(10)"},
		// Ties go to even, in decimal: 2.45 and 2.35 are not ties in binary.
		{2.25, 1, "1", "2.2(10)"},
		{2.35, 1, "1", "2.4(10)"},
		{2.45, 1, "1", "2.4(10)"},
		{2.45e-6, 1e-6, "um", "2.4(10) um"},
		{2.45e-9, 1e-9, "nm", "2.4(10) nm"},
		{1, 0.125, "1", "1.00(12)"},
		{1, 0.135, "1", "1.00(14)"},
		{1, 0.0125, "1", "1.000(12)"},
		{1, 0.0995, "1", "1.00(10)"},
		{0.5, 10, "1", "0(10)"},
		{1.5, 10, "1", "2(10)"},
		{2.4500001, 1, "1", "2.5(10)"},
		// Without uncertainty, and with one that is not known.
		{1.02e-6, 0, "um", "1.02 um"},
		{0, 0, "um", "0 um"},
		{1.0 / 3, 0, "1", "0.333333"},
		{297.65, 0, "C", "24.5 C"},
		{100, 0, "1", "100"},
		{123456789, 0, "Hz", "1.23457e8 Hz"},
		{1.5e-9, 0, "m", "1.5e-9 m"},
		{52.3456e-6, nan, "pN/um", "52.35(?) pN/um"},
		{52.3456e-6, inf, "pN/um", "52.35(?) pN/um"},
		{52.3456e-6, -1, "pN/um", "52.35(?) pN/um"},
		{5.23456e9, nan, "1", "5.235(?)e9"},
		{nan, 1, "um", "unknown um"},
		{inf, 1, "um", "inf um"},
		{-inf, 1, "", "-inf"},
	}
	for _, tt := range tests {
		if got := Format(tt.value, tt.u, tt.unit); got != tt.want {
			t.Errorf("Format(%v, %v, %q) = %q, want %q", tt.value, tt.u, tt.unit, got, tt.want)
		}
	}
}

func TestFormatInterval(t *testing.T) {
	nan := math.NaN()
	tests := []struct {
		low, high float64
		unit      string
		want      string
	}{
		{51.21e-6, 53.49e-6, "pN/um", "[51.2, 53.5] pN/um"},
		{51.21e-6, 63.49e-6, "pN/um", "[51, 63] pN/um"},
		{-0.001e-6, 0.0012e-6, "nm", "[-1.0, 1.2] nm"},
		{295.15, 297.15, "C", "[22.0, 24.0] C"},
		{0.001, 0.997, "1", "[0.0, 1.0]"}, // the width rounds to 1.0
		{1200, 4800, "Hz", "[1200, 4800] Hz"},
		{1, 1, "Hz", "[1, 1] Hz"},
		{nan, 2, "Hz", "[unknown, 2.00] Hz"},
		{1.5, math.Inf(1), "Hz", "[1.50, inf] Hz"},
		{4.42969e-3, nan, "ms", "[4.43, unknown] ms"},
		{nan, nan, "Hz", "[unknown, unknown] Hz"},
		{math.Inf(-1), math.Inf(1), "Hz", "[-inf, inf] Hz"},
		{0, nan, "Hz", "[0, unknown] Hz"},
		{1e12, 2e12, "Hz", "[1e12, 2e12] Hz"},
	}
	for _, tt := range tests {
		if got := FormatInterval(tt.low, tt.high, tt.unit); got != tt.want {
			t.Errorf("FormatInterval(%v, %v, %q) = %q, want %q", tt.low, tt.high, tt.unit, got, tt.want)
		}
	}
}

func TestFormatUnknownUnitPanics(t *testing.T) {
	defer func() {
		if message, _ := recover().(string); !strings.HasPrefix(message, "quantity: ") {
			t.Errorf("Format with an unknown unit: recovered %q, want a message of this package", message)
		}
	}()
	Format(1, 1, "furlong")
}

func TestConvert(t *testing.T) {
	if got, err := Convert(297.65, "C"); err != nil || math.Abs(got-24.5) > 6e-14 { // 1 ulp of 297.65
		t.Errorf("Convert(297.65, C) = %v, %v; want 24.5", got, err)
	}
	if got, err := Convert(120, "min"); err != nil || got != 2 {
		t.Errorf("Convert(120, min) = %v, %v; want 2", got, err)
	}
	if got, err := Convert(1, "furlong"); err == nil || !math.IsNaN(got) {
		t.Errorf("Convert(1, furlong) = %v, %v; want an error", got, err)
	}
}

// What Format prints, Parse reads back: the uncertainty to half of its second
// digit (at most 5 % of it), the value to half a unit of the last digit shown,
// which is at most 5 % of the uncertainty too.
func TestFormatParseRoundTrip(t *testing.T) {
	random := rand.New(rand.NewPCG(7, 11))
	units := []struct {
		unit string
		dim  Dimension
	}{{"um", Length}, {"pN/um", Stiffness}, {"C", Temperature}, {"mPa s", Viscosity}, {"kHz", Frequency}, {"1", Dimensionless}}
	for range 20000 {
		at := units[random.IntN(len(units))]
		one, err := Parse("1 "+at.unit, at.dim)
		if err != nil {
			t.Fatal(err)
		}
		u := math.Pow(10, 12*random.Float64()-6)
		x := random.NormFloat64() * u * math.Pow(10, 8*random.Float64()-1)
		if at.unit != "C" {
			x, u = x*one.SI, u*one.SI
		}
		text := Format(x, u, at.unit)
		back, err := Parse(text, at.dim)
		if err != nil {
			t.Fatalf("Parse(Format(%v, %v, %q) = %q): %v", x, u, at.unit, text, err)
		}
		// 1e-13 of the value stands for the 15 digits that survive a change of unit.
		if math.Abs(back.U-u) > 0.0501*u || math.Abs(back.SI-x) > 0.0501*u+1e-13*(math.Abs(x)+300) && at.unit == "C" ||
			at.unit != "C" && math.Abs(back.SI-x) > 0.0501*u+1e-13*math.Abs(x) {
			t.Fatalf("Format(%v, %v, %q) = %q, read as %v, %v", x, u, at.unit, text, back.SI, back.U)
		}
	}
}

func FuzzFormat(f *testing.F) {
	f.Add(52.3e-6, 1.1e-6)
	f.Add(-1e300, 1e-300)
	f.Add(1e-300, 1e300)
	f.Add(0.0, 5e-324)
	f.Add(math.MaxFloat64, math.NaN())
	f.Fuzz(func(t *testing.T, x, u float64) {
		text := Format(x, u, "m")
		if len(text) > 700 {
			t.Fatalf("Format(%v, %v) has %d bytes", x, u, len(text))
		}
		if !math.IsNaN(x) && !math.IsInf(x, 0) && u > 1e-290 && u < 1e290 && math.Abs(x) < 1e290 && math.Abs(x) < 1e100*u && len(text) < maxText {
			if v, err := Parse(text, Length); err != nil || math.Abs(v.U-u) > 0.0501*u {
				t.Fatalf("Format(%v, %v) = %q, read as %v, %v", x, u, text, v, err)
			}
		}
		FormatInterval(x, u, "um")
	})
}
