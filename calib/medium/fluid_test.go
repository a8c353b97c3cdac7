package medium

import (
	"math"
	"strings"
	"testing"
)

func TestParseFluid(t *testing.T) {
	for text, want := range map[string]string{
		"water":                 "water",
		"  Heavy   WATER ":      "heavy water",
		"glycerol 20 %":         "glycerol 20 %",
		"glycerol 20.50%":       "glycerol 20.5 %",
		"sucrose 10 %":          "sucrose 10 %",
		"saline 0.15 mol/kg":    "saline 0.15 mol/kg",
		"Saline 0.150  mol/kg ": "saline 0.15 mol/kg",
	} {
		fluid, err := ParseFluid(text)
		if err != nil || fluid.Name != want {
			t.Errorf("ParseFluid(%q) = %q, %v; want %q", text, fluid.Name, err, want)
			continue
		}
		again, err := ParseFluid(fluid.Name)
		if err != nil || again != fluid {
			t.Errorf("ParseFluid(%q) = %v, %v; want the same fluid as %q", fluid.Name, again, err, text)
		}
	}
}

func TestParseFluidRefuses(t *testing.T) {
	for text, want := range map[string]string{
		"":                   "write one of",
		"watr":               `did you mean "water"`,
		"glyerol 30 %":       `did you mean "glycerol 20 %"`,
		"glycerine 30 %":     `did you mean "glycerol 20 %"`,
		"D2O":                `did you mean "heavy water"`,
		"heavy watre":        `did you mean "heavy water"`,
		"PBS":                `did you mean "saline 0.15 mol/kg"`,
		"NaCl 0.15 mol/kg":   `did you mean "saline 0.15 mol/kg"`,
		"olive oil":          `"heavy water"`,
		"20 %":               "write one of",
		"water 5 %":          "takes none",
		"waters":             `did you mean "water"`,
		"glycerol":           "has no amount in %",
		"glycerol %":         "has no amount in %",
		"glycerol 0.2":       "has no amount in %",
		"glycerol 1 mol/kg":  "has no amount in %",
		"saline 0.9 %":       "has no amount in mol/kg",
		"glycerol 20,5 %":    "not a plain decimal number",
		"glycerol 1e1 %":     "not a plain decimal number",
		"glycerol 0x1p3 %":   "not a plain decimal number",
		"glycerol 1_0 %":     "not a plain decimal number",
		"glycerol -5 %":      "not a plain decimal number",
		"glycerol NaN %":     "not a plain decimal number",
		"glycerol . %":       "not a plain decimal number",
		"glycerol 0 %":       `write "water"`,
		"glycerol 101 %":     "above 100 %",
		"sucrose 70 %":       "above 65 %",
		"saline 6.5 mol/kg":  "above 6 mol/kg",
		"saline inf mol/kg":  "not a plain decimal number",
		"saline 1.2.3mol/kg": "not a plain decimal number",
	} {
		fluid, err := ParseFluid(text)
		if err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("ParseFluid(%q) = %q, %v; want an error with %q", text, fluid.Name, err, want)
		}
		if fluid != (Fluid{}) {
			t.Errorf("ParseFluid(%q) gave a fluid beside its error", text)
		}
	}
}

func FuzzParseFluid(f *testing.F) {
	for _, text := range append(Examples(), "", "20 %", "glycerol 1e999 %", "sal\x00ine", "saline 999999999999999999999 mol/kg") {
		f.Add(text)
	}
	f.Fuzz(func(t *testing.T, text string) {
		fluid, err := ParseFluid(text)
		if (err == nil) == (fluid == Fluid{}) {
			t.Errorf("ParseFluid(%q) = %v, %v: want exactly one of value and error", text, fluid, err)
		}
		if err == nil && !(fluid.amount >= 0 && fluid.amount <= 6) {
			t.Errorf("ParseFluid(%q) has amount %g", text, fluid.amount)
		}
	})
}

func TestAtRefuses(t *testing.T) {
	for _, example := range Examples() {
		fluid, _ := ParseFluid(example)
		low, high := fluid.Range()
		for _, kelvin := range []float64{low - 0.01, high + 0.01, math.NaN(), math.Inf(1), math.Inf(-1), 0, -5, 1e9} {
			properties, err := fluid.At(kelvin)
			if err == nil || !strings.Contains(err.Error(), "outside") {
				t.Errorf("%s At(%g) = %v, %v; want an error with the range", example, kelvin, properties, err)
			}
		}
		if _, err := fluid.At(25); err == nil || !strings.Contains(err.Error(), "in C? 25 C is 298.15 K") {
			t.Errorf("%s At(25) = %v; want a hint that 25 looks like C", example, err)
		}
		for _, kelvin := range []float64{low, high, low - slack/2} {
			if _, err := fluid.At(kelvin); err != nil {
				t.Errorf("%s At(%g): %v", example, kelvin, err)
			}
		}
	}
	if _, err := (Fluid{}).At(298.15); err == nil {
		t.Error("the zero Fluid has properties")
	}
	if low, high := (Fluid{}).Range(); !math.IsNaN(low) || !math.IsNaN(high) {
		t.Errorf("Range of the zero Fluid = %g, %g; want NaN", low, high)
	}
}
