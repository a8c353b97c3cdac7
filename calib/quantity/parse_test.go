package quantity

import (
	"errors"
	"math"
	"strings"
	"testing"

	"beadwell/calib/bound"
)

// ulp is the allowance for one product of two float64: half a unit in the
// last place each for value and factor.
const ulp = 2.3e-16

func TestParse(t *testing.T) {
	tests := []struct {
		text string
		dim  Dimension
		si   float64
		u    float64 // -1: none stated
	}{
		// The three forms of JCGM 100:2008, 7.2.2, with its own example (there a mass of
		// 100.02147 g with 0.35 mg).
		{"100.02147(35)", Dimensionless, 100.02147, 0.00035},
		{"100.02147(0.00035)", Dimensionless, 100.02147, 0.00035},
		{"(100.02147 ± 0.00035)", Dimensionless, 100.02147, 0.00035},
		// CODATA 2022: inverse fine-structure constant; constant of gravitation, as a number.
		{"137.035999177(21)", Dimensionless, 137.035999177, 0.000000021},
		{"6.67430(15)e-11", Dimensionless, 6.67430e-11, 0.00015e-11},

		{"1.02(3) um", Length, 1.02e-6, 0.03e-6},
		{"1.02(30) um", Length, 1.02e-6, 0.30e-6},
		{"1.020(3) um", Length, 1.020e-6, 0.003e-6},
		{"1.02(0.03) um", Length, 1.02e-6, 0.03e-6},
		{"102(3) nm", Length, 102e-9, 3e-9},
		{"102.(3) nm", Length, 102e-9, 3e-9},
		{"1.02 +- 0.03 um", Length, 1.02e-6, 0.03e-6},
		{"1.02+/-0.03um", Length, 1.02e-6, 0.03e-6},
		{"1.02 ± 0.03 \u00b5m", Length, 1.02e-6, 0.03e-6},
		{"1.02 ± 0.03 \u03bcm", Length, 1.02e-6, 0.03e-6},
		{"1.02 um +- 0.03 um", Length, 1.02e-6, 0.03e-6},
		{"1.02 um +- 30 nm", Length, 1.02e-6, 30e-9},
		{"1.02 um +- 0.03", Length, 1.02e-6, 0.03e-6},
		{"1.02 um +- 5 %", Length, 1.02e-6, 0.051e-6},
		{"1.02 +- 5 % um", Length, 1.02e-6, 0.051e-6},
		{"-1.02 um +- 5 %", Length, -1.02e-6, 0.051e-6},
		{"1.2(1)e-6 m", Length, 1.2e-6, 0.1e-6},
		{"1.2E-6 +- 1e-7 m", Length, 1.2e-6, 1e-7},
		{"1.02(0) um", Length, 1.02e-6, 0},
		{"110 um", Length, 110e-6, -1},
		{"110\u00a0um", Length, 110e-6, -1},
		{"\u22121 um", Length, -1e-6, -1},
		{".5 um", Length, 0.5e-6, -1},
		{"0 um", Length, 0, -1},

		{"24.5 C", Temperature, 297.65, -1},
		{"24.5(5) C", Temperature, 297.65, 0.5},
		{"24.5 +- 0.5 °C", Temperature, 297.65, 0.5},
		{"24.5 C +- 500 mK", Temperature, 297.65, 0.5},
		{"24.5(5) deg C", Temperature, 297.65, 0.5},
		{"297.6 K", Temperature, 297.6, -1},
		{"300 K +- 1 %", Temperature, 300, 3},
		{"-5 C", Temperature, 268.15, -1},

		{"2 kHz", Frequency, 2000, -1},
		{"500 1/s", Frequency, 500, -1},
		{"500 s-1", Frequency, 500, -1},
		{"400 fps", Frequency, 400, -1},
		{"2 min", Time, 120, -1},
		{"2 min +- 0.5 min", Time, 120, 30},
		{"2 min +- 5 %", Time, 120, 6},
		{"3 1/min", Frequency, 0.05, -1},
		{"0.95(2) mPa s", Viscosity, 0.95e-3, 0.02e-3},
		{"0.95(2) mPa·s", Viscosity, 0.95e-3, 0.02e-3},
		{"0.95 cP", Viscosity, 0.95e-3, -1}, // 1 P = 0.1 Pa s, SI brochure (CGS units)
		{"1.05 g/cm3", Density, 1050, -1},
		{"1.05 g/cm³", Density, 1050, -1},
		{"1.05 kg/L", Density, 1050, -1},
		{"1.31(4) um/V", LengthPerVoltage, 1.31e-6, 0.04e-6},
		{"1.31 nm/mV", LengthPerVoltage, 1.31e-6, -1},
		{"0.32 nm/count", LengthPerCount, 0.32e-9, -1},
		{"65.0(3) nm/px", LengthPerPixel, 65e-9, 0.3e-9},
		{"36(4) K/W", HeatingPerPower, 36, 4},
		{"36 mK/mW", HeatingPerPower, 36, -1},
		{"36 C/W", HeatingPerPower, 36, -1}, // a difference: no offset
		{"3 %", Fraction, 0.03, -1},
		{"20(1) %", Fraction, 0.20, 0.01},
		{"20 % +- 1 %", Fraction, 0.20, 0.01},
		{"0.25", Fraction, 0.25, -1},
		{"0.15 mol/kg", Molality, 0.15, -1},
		{"20 um/s", Velocity, 20e-6, -1},
		{"52.3(11) pN/um", Stiffness, 52.3e-6, 1.1e-6},
		{"0.0523 pN/nm", Stiffness, 52.3e-6, -1},
		{"1.1 pN/um/mW", StiffnessPerPower, 1.1e-3, -1},
	}
	for _, tt := range tests {
		got, err := Parse(tt.text, tt.dim)
		if err != nil {
			t.Errorf("Parse(%q) error: %v", tt.text, err)
			continue
		}
		if math.Abs(got.SI-tt.si) > 2*ulp*math.Abs(tt.si) {
			t.Errorf("Parse(%q).SI = %v, want %v", tt.text, got.SI, tt.si)
		}
		// A relative uncertainty is a product of three numbers.
		if want := max(tt.u, 0); got.HasU != (tt.u >= 0) || math.Abs(got.U-want) > 4*ulp*want {
			t.Errorf("Parse(%q) uncertainty = %v, %v; want %v", tt.text, got.U, got.HasU, tt.u)
		}
		if got.Dimension != tt.dim || got.Text != tt.text {
			t.Errorf("Parse(%q) = %+v, want the dimension %v and the text", tt.text, got, tt.dim)
		}
	}
}

// The decade of the unit joins the number's text, so the value is the float64
// nearest to what was written, as if it had been written in SI.
func TestParseRoundsOnce(t *testing.T) {
	for text, want := range map[string]float64{
		"65.0 nm": 65.0e-9, "1.1 um": 1.1e-6, "0.3 um": 0.3e-6, "4.35 nm": 4.35e-9,
	} {
		if got, err := Parse(text, Length); err != nil || got.SI != want {
			t.Errorf("Parse(%q) = %v, %v; want exactly %v", text, got.SI, err, want)
		}
	}
}

func TestParsePicksDimension(t *testing.T) {
	dims := []Dimension{LengthPerVoltage, LengthPerCount, Length}
	for text, want := range map[string]Dimension{"1 um/V": LengthPerVoltage, "1 nm/counts": LengthPerCount, "1 um": Length, "1 um/1": Length} {
		got, err := Parse(text, dims...)
		if err != nil || got.Dimension != want {
			t.Errorf("Parse(%q) = %v, %v; want %v", text, got.Dimension, err, want)
		}
	}
	if got, err := Parse("0.25"); err != nil || got.Dimension != Dimensionless || got.SI != 0.25 {
		t.Errorf("Parse without dimensions = %+v, %v; want a plain number", got, err)
	}
}

// The SI prefixes, from the SI brochure (9th edition, Table 7).
func TestPrefixes(t *testing.T) {
	for prefix, want := range map[string]float64{"a": 1e-18, "f": 1e-15, "p": 1e-12, "n": 1e-9, "u": 1e-6, "m": 1e-3, "c": 1e-2, "d": 1e-1, "k": 1e3, "M": 1e6, "G": 1e9} {
		if got, err := Parse("1 "+prefix+"m", Length); err != nil || got.SI != want {
			t.Errorf("1 %sm = %v, %v; want %v m", prefix, got.SI, err, want)
		}
	}
	if got, err := Parse("1 um2/s", Diffusion); err != nil || got.SI != 1e-12 {
		t.Errorf("1 um2/s = %v, %v; want 1e-12: a power takes the prefix with it", got.SI, err)
	}
}

func TestParseUnitIsPlain(t *testing.T) {
	for text, want := range map[string]string{"1 \u00b5m": "um", "1 \u03bcm": "um", "1um": "um"} {
		if got, _ := Parse(text, Length); got.Unit != want {
			t.Errorf("Parse(%q).Unit = %q, want %q", text, got.Unit, want)
		}
	}
	if got, _ := Parse("1 mPa  ·s", Viscosity); got.Unit != "mPa s" {
		t.Errorf("unit = %q, want mPa s", got.Unit)
	}
}

func TestParseErrors(t *testing.T) {
	tests := []struct {
		text string
		dim  Dimension
		want string // in the message
	}{
		{"", Length, "is empty\n  hint: write a length, such as 1.02(3) um"},
		{"1.02", Length, "has no unit"},
		{"0", Length, "has no unit"},
		{"1.02(3)", Length, "has no unit"},
		{"1.02 s", Length, "is a time, not a length"},
		{"1.02 V s", Length, "is in V s, not a length"},
		{"24.5 C", Length, "is a temperature, not a length"},
		{"2", Frequency, "write a frequency, such as 2 kHz"},
		{"2 ms", Frequency, "is a time, not a frequency"},
		{"0.95 mPa", Viscosity, "is in mPa, not a viscosity"},
		{"3 %", Length, "is a plain number, not a length"},
		{"1.02 m", Dimensionless, "is a length, not a plain number"},
		{"1,02 um", Length, "decimal mark as a point"},
		{"1.02 micron", Length, "hint: write um"},
		{"2 KHZ", Frequency, "hint: write kHz"},
		{"1.02 furlong", Length, `unknown unit "furlong"`},
		{"um", Length, "does not start with a number"},
		{"NaN um", Length, "does not start with a number"},
		{"inf um", Length, "does not start with a number"},
		{"0x10 um", Length, "unknown unit"},
		{"1_000 um", Length, "unknown unit"},
		{"1 000 um", Length, "unknown unit"},
		{"1 2 um", Length, "unknown unit"},
		{"1 1 um", Length, "unknown unit"},
		{"1e999 um", Length, "outside the range"},
		{"1e99999999999999999999 um", Length, "outside the range"},
		{"1e-99999999999999999999 um", Length, "outside the range"},
		{"1e400 um", Length, "outside the range"},
		{"1e-400 um", Length, "outside the range"},
		{"1.02(3) +- 0.03 um", Length, "twice"},
		{"1.02 +- um", Length, "no positive number"},
		{"1.02 +- -0.03 um", Length, "no positive number"},
		{"1.02(-3) um", Length, "unknown unit"},
		{"1.02() um", Length, "unknown unit"},
		{"1.02 um +- 0.03 s", Length, `uncertainty in "s"`},
		{"1.02 +- 3 %", Length, "percent sign"},
		{"20 +- 1 %", Fraction, "percent sign"},
		{"(1.02) um", Length, "is not a number with a unit"},
		{"(1.02 +- 0.03 um", Length, "is not a number with a unit"},
		{"24.5 C +- 2 %", Temperature, "natural zero"},
		{"24.5 C/1", Temperature, "unknown unit"},
		{"24.5 C2", Temperature, "unknown unit"},
		{"2 kfps", Frequency, "unknown unit"},
		{"24.5 F", Temperature, "unknown unit"},
		{"1 N/m W", StiffnessPerPower, "unknown unit"},
		{"1 um//V", LengthPerVoltage, "unknown unit"},
		{"1 um/", Length, "unknown unit"},
		{"1 m99", Length, "unknown unit"},
		{"1 m-", Length, "unknown unit"},
		{strings.Repeat("1", 300) + " um", Length, "too long"},
	}
	for _, tt := range tests {
		got, err := Parse(tt.text, tt.dim)
		var problem *Error
		if !errors.As(err, &problem) || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("Parse(%q, %v) = %+v, %v; want an error with %q", tt.text, tt.dim, got, err, tt.want)
		}
		if got != (Value{}) {
			t.Errorf("Parse(%q) returned a value beside its error: %+v", tt.text, got)
		}
		if problem != nil && problem.Hint == "" {
			t.Errorf("Parse(%q): no hint in %v", tt.text, err)
		}
	}
}

func TestDimensions(t *testing.T) {
	for dim := range dimensionCount {
		if v, err := Parse(dim.Example(), dim); err != nil || v.Dimension != dim {
			t.Errorf("example %q of %v: %+v, %v", dim.Example(), dim, v, err)
		}
		if v, err := Parse("1 "+dim.SIUnit(), dim); err != nil || v.SI != 1 {
			t.Errorf("SI unit %q of %v: %+v, %v; want exactly 1", dim.SIUnit(), dim, v, err)
		}
	}
	if bad := Dimension(-1); bad.String() == "" || bad.Example() != "" || bad.SIUnit() != "" {
		t.Errorf("an unknown dimension has a name, but no example and unit")
	}
	if _, err := Parse("1 m", Dimension(99)); err == nil {
		t.Error("an unknown dimension was accepted")
	}
}

func FuzzParse(f *testing.F) {
	for _, seed := range []string{"1.02(3) um", "1.02 +- 0.03 um", "(1.02 ± 0.03) \u00b5m", "24.5(5) °C", "36(4) K/W", "1.2(1)e-6 m",
		"3 %", "1 um +- 3 %", "1e400 m", "1(1)e-330 m", "1 m3/m3/m3", "1 pN/um/mW", "0", "", "\xff", "1\u202fum"} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		for dim := range dimensionCount {
			var v Value
			var err error
			bound.Effort(t, func() { v, err = Parse(text, dim) })
			if err != nil {
				if v != (Value{}) {
					t.Fatalf("Parse(%q, %v) has both value and error", text, dim)
				}
				continue
			}
			if math.IsNaN(v.SI) || math.IsInf(v.SI, 0) || math.IsNaN(v.U) || math.IsInf(v.U, 0) || v.U < 0 || (!v.HasU && v.U != 0) {
				t.Fatalf("Parse(%q, %v) = %+v", text, dim, v)
			}
			if v.Unit != "" {
				Format(v.SI, v.U, v.Unit) // a unit that was read can be printed
			}
		}
	})
}
