package calib

import (
	"context"
	"math"
	"strings"
	"testing"
)

// The end gauge of JCGM 100:2008, H.1: contributions to u(l) in nm with their degrees of
// freedom, and what is published of their sum.
func TestEndGauge(t *testing.T) {
	u := []float64{25, 9.7, 2.9, 16.6} // Table H.1: standard, comparison, difference of expansion, of temperature
	nu := []float64{18, 25.6, 50, 2}
	total := 0.0
	for _, v := range u {
		total += v * v
	}
	total = math.Sqrt(total)
	freedom := effectiveFreedom(u, nu)
	k := coverageFactor(0.99, freedom)
	for _, c := range []struct {
		name           string
		got, want, tol float64
	}{
		{"combined standard uncertainty, nm (H.1.5)", total, 32, 0.5},        // published in whole nm
		{"effective degrees of freedom (H.1.6)", math.Floor(freedom), 16, 0}, // published as 16.7 and truncated; 16.76 from the rounded contributions
		{"t of 99 % at 16 (H.1.6)", k, 2.92, 0.005},                          // published with two decimals
		{"expanded uncertainty, nm (H.1.6)", k * math.Round(total), 93, 0.5}, // published in whole nm, from u = 32
	} {
		if math.Abs(c.got-c.want) > c.tol {
			t.Errorf("%s = %.4g, want %g (JCGM 100:2008)", c.name, c.got, c.want)
		}
	}
}

func TestCoverageFactor(t *testing.T) {
	for _, c := range []struct{ p, freedom, want float64 }{
		{0.95, 1, 12.71}, {0.95, 10, 2.23}, {0.95, 50, 2.01}, {0.95, math.Inf(1), 1.960}, // JCGM 100:2008, Table G.2, two decimals
		{0.95, 9.9, 2.26},  // truncated to 9; the table's value
		{0.95, 0.2, 12.71}, // never below one
		{0.95, 1e9, 1.960},
	} {
		if got := coverageFactor(c.p, c.freedom); math.Abs(got-c.want) > 0.006 {
			t.Errorf("coverageFactor(%g, %g) = %.4f, want %g (JCGM 100:2008, Table G.2)", c.p, c.freedom, got, c.want)
		}
	}
}

// A single input with few degrees of freedom keeps them; one without any keeps infinity.
func TestEffectiveFreedom(t *testing.T) {
	if got := effectiveFreedom([]float64{3, 0}, []float64{7, math.Inf(1)}); math.Abs(got-7) > 1e-12 {
		t.Errorf("effectiveFreedom of one input = %g, want 7", got)
	}
	if got := effectiveFreedom([]float64{3, 4}, []float64{math.Inf(1), math.Inf(1)}); !math.IsInf(got, 1) {
		t.Errorf("effectiveFreedom of exact uncertainties = %g, want +Inf", got)
	}
}

// stagedResult calibrates a simulated recording with some settings replaced.
func stagedResult(t testing.TB, s stage, more map[string]string, opt Options) *Result {
	t.Helper()
	r, err := Calibrate(context.Background(), s.recording(t, 6), s.settingsWith(t, more), opt)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// The contributions add up to the combined uncertainty in quadrature whatever is adopted. The
// likelihood is evaluated at the maximum alone, so only rounding is lost.
func TestBudgetAddsUp(t *testing.T) {
	more := map[string]string{"recording.noise": "8(2) nm", "recording.exposure": "30(10) us"}
	s := ordinary()
	s.noise, s.rate, s.exposure = 8e-9, 2e3, 0.06 // slow enough that the record does not tell the noise by itself
	for _, adopt := range []string{"", RouteDrag, RouteAmplitude} {
		a := stagedResult(t, s, more, Options{Adopt: adopt}).Axes[0].Adopted
		sum, share := 0.0, 0.0
		seen := map[string]float64{}
		for _, l := range a.Budget {
			sum += float64(l.Contribution * l.Contribution)
			share += float64(l.Share)
			seen[l.Input] = float64(l.Contribution)
		}
		total := float64(a.Stiffness.Combined.Standard / a.Stiffness.Value)
		if math.Abs(sum/(total*total)-1) > 1e-3 || math.Abs(share-1) > 1e-3 {
			t.Errorf("adopt %q: contributions add up to %.6g, shares to %.6g; combined %.6g", adopt, math.Sqrt(sum), share, total)
		}
		if seen[noiseLine] == 0 || seen[exposureLine] == 0 {
			t.Errorf("adopt %q: noise and exposure are missing in %v", adopt, seen)
		}
	}
}

// The temperature acts on the drag route through the viscosity alone, and on the amplitude
// route through kT alone: d ln(kT)/d ln T is 1, d ln(eta)/d ln T about -6.9 for water at 25 C
// (2.3 % a kelvin; IAPWS R12-08).
func TestTemperatureHasItsNetEffect(t *testing.T) {
	for adopt, want := range map[string]float64{RouteAmplitude: 1, RouteDrag: -6.8} {
		a := stagedResult(t, ordinary(), nil, Options{Adopt: adopt}).Axes[0].Adopted
		for _, l := range a.Budget {
			if l.Input == "temperature" && math.Abs(float64(l.Sensitivity)-want) > 0.2 {
				t.Errorf("adopt %s: temperature has a sensitivity of %.3g, want %g", adopt, float64(l.Sensitivity), want)
			}
		}
	}
}

// The record has pi T fc degrees of freedom: 12 s of 500 Hz / 1.1 (wall) make 17000.
func TestExpandedUncertainty(t *testing.T) {
	s := ordinary()
	s.seconds = 0.4
	a := stagedResult(t, s, nil, Options{}).Axes[0].Adopted
	e := a.Expanded
	stat := float64(a.Stiffness.Statistical.Standard / a.Stiffness.Combined.Standard)
	want := math.Pi * s.seconds * trueCorner / 1.06 / math.Pow(stat, 4) // wall factor 1.06 at ten radii
	if e == nil || math.Abs(float64(e.Freedom)/want-1) > 0.25 {         // fc is estimated to 4 %, and the wall factor rounded
		t.Fatalf("expanded = %+v, want about %.0f degrees of freedom", e, want)
	}
	if got := float64(e.Uncertainty / a.Stiffness.Combined.Standard); math.Abs(got/float64(e.Factor)-1) > 1e-15 || got < 1.96 || got > 2.1 { // a product and a quotient are rounded
		t.Errorf("expanded over standard uncertainty is %g, coverage factor %g", got, float64(e.Factor))
	}
}

// What is said to halve the uncertainty does.
func TestHalving(t *testing.T) {
	line := func(name, unit string, value, u, c float64) BudgetLine {
		return BudgetLine{Input: name, Unit: unit, Value: Float(value), StandardUncertainty: Float(u), Contribution: Float(c)}
	}
	lines := []BudgetLine{line("bead diameter", "m", 1e-6, 2e-8, 0.02), line("temperature", "K", 298, 0.5, 0.004), line(statisticsLine, "N/m", 5e-5, 5e-7, 0.003)}
	// shares 0.941, 0.038, 0.021: the diameter alone, better by sqrt(0.9412/(0.9412-0.75)) = 2.219
	want := "To halve the combined standard uncertainty: know the bead diameter to 0.9 % in place of 2 %."
	if got := toHalve(lines); got != want {
		t.Errorf("toHalve = %q, want %q", got, want)
	}
	lines[1].Contribution = 0.02
	// shares 0.494, 0.494, 0.011: both, better by sqrt(0.9888/0.2388) = 2.035
	if got := toHalve(lines); !strings.Contains(got, "know the bead diameter to 0.98 % in place of 2 % and know the temperature to 0.25 K in place of 0.5 K") {
		t.Errorf("toHalve = %q", got)
	}
	if got := toHalve(lines[2:]); !strings.Contains(got, "record 4 times as long") {
		t.Errorf("toHalve of statistics alone = %q, want a record four times as long", got)
	}
}

// What a line says of the exposure is what happens when another exposure is stated. The step of one
// standard uncertainty is that of the line itself; the prior of the drag moves a little with it.
func TestExposureLineIsTheChange(t *testing.T) {
	for _, adopt := range []string{"", RouteDrag, RouteAmplitude} {
		at := func(exposure string) Adopted {
			return stagedResult(t, ordinary(), map[string]string{"recording.exposure": exposure}, Options{Adopt: adopt}).Axes[0].Adopted
		}
		want := math.Abs(math.Log(float64(at("35 us").Stiffness.Value / at("30 us").Stiffness.Value)))
		for _, l := range at("30(5) us").Budget {
			if l.Input == exposureLine && math.Abs(float64(l.Contribution)/want-1) > 0.02 {
				t.Errorf("adopt %q: the exposure contributes %.4g, and stating 5 us more changes ln(stiffness) by %.4g", adopt, float64(l.Contribution), want)
			}
		}
	}
}
