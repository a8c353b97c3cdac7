package medium

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

// TestPublished holds every fluid against testdata/published.csv, whose rows carry
// their tolerance, source and provenance: rounding where the row is the correlation
// itself, the stated uncertainty where it is another source.
func TestPublished(t *testing.T) {
	file, err := os.Open("testdata/published.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	rows, err := csv.NewReader(file).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) < 70 {
		t.Fatalf("published.csv has %d rows, want at least 70", len(rows))
	}
	for _, row := range rows[1:] {
		fluid, err := ParseFluid(row[0])
		if err != nil {
			t.Fatal(err)
		}
		kelvin := number(t, row[1]) + 273.15
		got, err := fluid.At(kelvin)
		if err != nil {
			t.Fatal(err)
		}
		want, tolerance := number(t, row[3]), number(t, row[4])
		var value float64
		switch row[2] {
		case "viscosity":
			value = got.Viscosity
		case "density":
			value = got.Density
		case "relative viscosity":
			value = got.Viscosity / at(t, "water", kelvin).Viscosity
		default:
			t.Fatalf("unknown property %q", row[2])
		}
		if gap := value/want - 1; !(math.Abs(gap) <= tolerance) {
			t.Errorf("%s of %s at %s C = %.9g, want %.9g within %.1e (%s): gap %.2e",
				row[2], row[0], row[1], value, want, tolerance, row[5], gap)
		}
	}
}

// TestHeavyWaterRelease compares the formulation of 1984, before its shift, with the
// verification table of IAPWS R17-20 (2020), within the uncertainties stated there.
func TestHeavyWaterRelease(t *testing.T) {
	for _, row := range []struct{ kelvin, density, want, tolerance float64 }{
		{298.15, 0, 10.035938e-6, 0.015},
		{298.15, 1105, 1092.6424e-6, 0.003},
		{298.15, 1130, 1088.3626e-6, 0.01},
		{373.15, 1064, 326.63791e-6, 0.01},
	} {
		if got := heavyWaterViscosity(row.kelvin, row.density); math.Abs(got/row.want-1) > row.tolerance {
			t.Errorf("heavyWaterViscosity(%g, %g) = %g, want %g within %g", row.kelvin, row.density, got, row.want, row.tolerance)
		}
	}
}

func number(t *testing.T, text string) float64 {
	t.Helper()
	value, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return value
}

func at(t *testing.T, name string, kelvin float64) Properties {
	t.Helper()
	fluid, err := ParseFluid(name)
	if err != nil {
		t.Fatal(err)
	}
	properties, err := fluid.At(kelvin)
	if err != nil {
		t.Fatal(err)
	}
	return properties
}
