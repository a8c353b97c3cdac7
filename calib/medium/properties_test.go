package medium

import (
	"math"
	"testing"
)

// TestViscosityTemp compares the derivative of water with the one of SR6-08 Eq. 7 in
// closed form, and its size with the -2.28 %/K of the literature at 25 C.
func TestViscosityTemp(t *testing.T) {
	for _, kelvin := range []float64{255, 273.15, 298.15, 310.15, 380} {
		r := kelvin / 300
		slope := -(1.9*280.68*math.Pow(r, -1.9) + 7.7*511.45*math.Pow(r, -7.7) +
			19.6*61.131*math.Pow(r, -19.6) + 40*0.45903*math.Pow(r, -40)) * 1e-6 / kelvin
		want := slope / waterViscosity(kelvin)
		// Truncation step^2/6 f''' is under 1e-8 of f' for a step of 0.01 K.
		if got := at(t, "water", kelvin).ViscosityTemp; math.Abs(got/want-1) > 1e-7 {
			t.Errorf("ViscosityTemp of water at %g K = %.10g, want %.10g", kelvin, got, want)
		}
	}
	if got := at(t, "water", 298.15).ViscosityTemp; math.Abs(got+0.0228) > 0.00005 {
		t.Errorf("ViscosityTemp of water at 25 C = %g, want -0.0228 per K", got)
	}
}

// TestShape checks what every liquid here does: viscosity and density fall with
// temperature (water above 4 C, heavy water above 11 C), and rise with the amount.
func TestShape(t *testing.T) {
	for _, example := range Examples() {
		fluid, _ := ParseFluid(example)
		_, high := fluid.Range()
		low := max(fluid.solution.low, 285.15)
		last := at(t, example, low)
		for kelvin := low + 1; kelvin <= high; kelvin++ {
			now := at(t, example, kelvin)
			if now.Viscosity >= last.Viscosity || now.Density >= last.Density || now.ViscosityTemp >= 0 {
				t.Fatalf("%s does not thin between %g and %g K: %+v, %+v", example, kelvin-1, kelvin, last, now)
			}
			if now.ViscosityU <= 0 || now.DensityU <= 0 || now.Source == "" {
				t.Fatalf("%s at %g K lacks an uncertainty or a source: %+v", example, kelvin, now)
			}
			last = now
		}
	}
	for _, series := range [][]string{
		{"glycerol 1 %", "glycerol 10 %", "glycerol 50 %", "glycerol 90 %", "glycerol 100 %"},
		{"sucrose 1 %", "sucrose 20 %", "sucrose 47.9 %", "sucrose 48.1 %", "sucrose 65 %"},
		{"saline 0.01 mol/kg", "saline 0.15 mol/kg", "saline 2 mol/kg", "saline 6 mol/kg"},
	} {
		last := Properties{}
		for _, name := range series {
			now := at(t, name, 298.15)
			if now.Viscosity <= last.Viscosity || now.Density <= last.Density {
				t.Errorf("%s is not thicker and denser than the weaker solution", name)
			}
			last = now
		}
	}
}

// TestDilute checks that a weak solution is water: within the uncertainty that the
// correlation states, plus that of water.
func TestDilute(t *testing.T) {
	for _, name := range []string{"glycerol 0.01 %", "sucrose 0.01 %", "saline 0.0001 mol/kg"} {
		for _, kelvin := range []float64{293.15, 298.15, 310.15} {
			got, water := at(t, name, kelvin), at(t, "water", kelvin)
			if gap := got.Viscosity/water.Viscosity - 1; math.Abs(gap) > 0.005 {
				t.Errorf("viscosity of %s at %g K is %.2g off water", name, kelvin, gap)
			}
			if gap := got.Density/water.Density - 1; math.Abs(gap) > got.DensityU {
				t.Errorf("density of %s at %g K is %.2g off water", name, kelvin, gap)
			}
		}
	}
}

// TestBranches checks that the two branches of Barber's viscosity meet at 48 %:
// the gap is below the stated uncertainty at every temperature.
func TestBranches(t *testing.T) {
	for celsius := 0.0; celsius <= 60; celsius += 5 {
		low, high := sucroseViscosity(celsius, 0.48), sucroseViscosity(celsius, 0.4800001)
		if gap := high/low - 1; math.Abs(gap) > 0.01 {
			t.Errorf("sucrose jumps by %.2g at 48 %% and %g C", gap, celsius)
		}
	}
}

// TestBoltzmann is the exact value of the SI of 2019.
func TestBoltzmann(t *testing.T) {
	if Boltzmann != 1.380649e-23 {
		t.Errorf("Boltzmann = %g", Boltzmann)
	}
}
