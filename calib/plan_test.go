package calib_test

import (
	"context"
	"fmt"
	"math"
	"testing"

	"beadwell/calib"
	"beadwell/calib/session"
	"beadwell/calib/simulate"
	"beadwell/calib/track"
	"beadwell/psd"
)

// planSettings are settings as flags; pairs of key and text.
func planSettings(t *testing.T, pairs ...string) *session.Settings {
	t.Helper()
	flags := &session.Settings{}
	for i := 0; i < len(pairs); i += 2 {
		if err := flags.Set(pairs[i], "", pairs[i+1], session.FromFlag, pairs[i]); err != nil {
			t.Fatal(err)
		}
	}
	set, err := session.ForTrack(session.Sources{Flags: flags})
	if err != nil {
		t.Fatal(err)
	}
	return set
}

// exactBead is a bead whose inputs are exact but for the correlation of the viscosity.
var exactBead = []string{"bead.diameter", "1 um", "medium.viscosity", "0.89 mPa s", "medium.temperature", "25 C", "chamber.height", "far"}

func forecast(t *testing.T, opt calib.PlanOptions, pairs ...string) *calib.Plan {
	t.Helper()
	p, err := calib.Forecast(planSettings(t, pairs...), opt)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func with(base []string, pairs ...string) []string {
	return append(base[:len(base):len(base)], pairs...)
}

func timeOf(t *testing.T, p *calib.Plan, seconds float64) calib.PlanTime {
	t.Helper()
	for _, row := range p.Times {
		if math.Abs(float64(row.Duration)/seconds-1) < 1e-9 {
			return row
		}
	}
	t.Fatalf("the plan has no row of %g s", seconds)
	return calib.PlanTime{}
}

func near(t *testing.T, what string, got calib.Float, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(float64(got)/want-1) <= tolerance) {
		t.Errorf("%s = %.6g, want %.6g within %.2g", what, float64(got), want, tolerance)
	}
}

// Cramer-Rao bounds of N ideal samples (exact zero noise, no exposure), from the transition density of
// the Ornstein-Uhlenbeck process: sd ln fc = sqrt((1-c^2)/N)/(c|ln c|) and var ln V = (2/N)(1+c^2)/(1-c^2).
// The tolerance is the straight line that the plan counts as removed: 1/(T fc) and less.
func TestForecastClosedForm(t *testing.T) {
	for _, rate := range []float64{600, 2000, 50000} {
		p := forecast(t, calib.PlanOptions{Corner: 500}, with(exactBead, "recording.rate", fmt.Sprintf("%g Hz", rate), "recording.noise", "0 nm")...)
		row := timeOf(t, p, 100)
		c, n := math.Exp(-2*math.Pi*500/rate), 100*rate
		near(t, fmt.Sprintf("drag at %g Hz", rate), row.Routes.Drag.Statistical, math.Sqrt((1-c*c)/n)/(c*-math.Log(c)), 1e-3)
		near(t, fmt.Sprintf("amplitude at %g Hz", rate), row.Routes.Amplitude.Statistical, math.Sqrt(2/n*(1+c*c)/(1-c*c)), 1e-3)
		if row.Samples != int(n) {
			t.Errorf("samples %d, want %g", row.Samples, n)
		}
	}
}

// A fast detector with the whole band reaches sigma(fc)/fc = s_fc/sqrt(pi fc T), with s_fc from u and v of
// Berg-Sorensen and Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594. For 0 to infinity u = pi/... the limit
// s_fc = sqrt(2) gives sqrt(2/(pi fc T)): 0.01128 for 500 Hz and 10 s.
func TestForecastFastLimit(t *testing.T) {
	p := forecast(t, calib.PlanOptions{Corner: 500}, with(exactBead, "recording.rate", "1 MHz", "recording.noise", "0 nm")...)
	row := timeOf(t, p, 10)
	// per ideal samples sd ln fc -> sqrt(2 2 pi x/N)/(2 pi x) = 1/sqrt(pi fc T), at 1 MHz within 2 pi fc dt/2 = 0.16 %
	near(t, "drag", row.Routes.Drag.Statistical, 1/math.Sqrt(math.Pi*500*10), 3e-3)
	near(t, "amplitude", row.Routes.Amplitude.Statistical, 1/math.Sqrt(math.Pi*500*10), 3e-3)
}

// planned are regimes with what a recording in each of them is: the tests below use no more than about a
// relative uncertainty of 5 %, where terms of second order are below 1 % of the uncertainty.
var planned = []struct {
	name, rate, exposure, noise string
	corner, seconds             float64
}{
	{"detector", "4 kHz", "0 s", "0 nm", 250, 1},
	{"blurred camera", "1 kHz", "0.8 ms", "2 nm", 200, 5},
	{"slow camera", "600 Hz", "0.4 ms", "2 nm", 150, 10},
}

// The scatter of the estimates is within 5 % of the plan: 1500 recordings leave
// 1/sqrt(3000) = 1.8 % on a standard deviation.
func TestForecastAgainstSimulation(t *testing.T) {
	const runs = 1500
	for _, cell := range planned {
		t.Run(cell.name, func(t *testing.T) {
			p := forecast(t, calib.PlanOptions{Corner: cell.corner}, with(exactBead, "recording.rate", cell.rate, "recording.exposure", cell.exposure, "recording.noise", cell.noise)...)
			row := timeOf(t, p, cell.seconds)
			options := psd.Options{Exposure: float64(p.Exposure), KeepLines: true, Noise: psd.Noise{Known: true, Variance: float64(p.Noise.Value * p.Noise.Value)}}
			var sum, sum2 [2]float64
			for seed := range runs {
				record, err := psd.Prepare(simulated(p, row.Samples, uint64(seed)), float64(p.Rate))
				if err != nil {
					t.Fatal(err)
				}
				fit, err := psd.Estimate(record, options)
				if err != nil {
					t.Fatal(err)
				}
				for i, l := range []float64{math.Log(fit.Corner / cell.corner), math.Log(fit.Variance / float64(p.RMS.Value*p.RMS.Value))} {
					sum[i] += l
					sum2[i] += l * l
				}
			}
			for i, want := range []calib.PlanUncertainty{row.Routes.Drag, row.Routes.Amplitude} {
				sd := math.Sqrt((sum2[i] - sum[i]*sum[i]/runs) / (runs - 1))
				near(t, []string{"scatter by drag", "scatter by amplitude"}[i], calib.Float(sd), float64(want.Statistical), 0.05)
			}
		})
	}
}

func simulated(p *calib.Plan, samples int, seed uint64) []float64 {
	axis := simulate.Axis{Corner: float64(p.Corner.Value), Variance: float64(p.RMS.Value * p.RMS.Value), Noise: float64(p.Noise.Value)}
	return simulate.Record(simulate.Truth{Samples: samples, Rate: float64(p.Rate), Exposure: float64(p.Exposure), Axes: []simulate.Axis{axis}}, seed)[0]
}

// What Calibrate states of six recordings is on average what the plan predicts, with inputs exact and
// with their uncertainties, by both routes and adopted. Each stated uncertainty varies by about the
// relative uncertainty itself (below 6 %), so the mean of six by 2.5 %; 5 % are two of these.
func TestForecastAgainstCalibrate(t *testing.T) {
	stated := []string{"bead.diameter", "1.00(1) um", "medium.temperature", "25.0(5) C", "medium.fluid", "water", "chamber.height", "5.0(3) um"}
	const runs = 6
	for _, cell := range planned {
		t.Run(cell.name, func(t *testing.T) {
			set := planSettings(t, with(stated, "recording.rate", cell.rate, "recording.exposure", cell.exposure, "recording.noise", cell.noise)...)
			p, err := calib.Forecast(set, calib.PlanOptions{Corner: cell.corner})
			if err != nil {
				t.Fatal(err)
			}
			row := timeOf(t, p, cell.seconds)
			var mean [6]float64
			for seed := range runs {
				nan := math.NaN()
				x := simulated(p, row.Samples, uint64(seed))
				rec := &track.Recording{Name: "simulated", Rate: float64(p.Rate), RateU: nan, RateOrigin: "setting", Samples: len(x), JitterRMS: nan, JitterMax: nan,
					Axes: []track.Axis{{Name: "x", Header: "x", Unit: "m", ToMetre: 1, Values: x}}}
				r, err := calib.Calibrate(context.Background(), rec, set, calib.Options{})
				if err != nil {
					t.Fatal(err)
				}
				for i, q := range []calib.Quantity{r.Axes[0].Estimates[0].Stiffness, r.Axes[0].Estimates[3].Stiffness, r.Axes[0].Adopted.Stiffness} {
					mean[2*i] += float64(q.Statistical.Standard/q.Value) / runs
					mean[2*i+1] += float64(q.Combined.Standard/q.Value) / runs
				}
			}
			for i, want := range []calib.PlanUncertainty{row.Routes.Drag, row.Routes.Amplitude, row.Routes.Both} {
				name := []string{"drag", "amplitude", "both"}[i]
				near(t, "stated by "+name+", inputs exact", calib.Float(mean[2*i]), float64(want.Statistical), 0.05)
				near(t, "stated by "+name, calib.Float(mean[2*i+1]), float64(want.Combined), 0.05)
			}
		})
	}
}
