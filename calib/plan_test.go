package calib_test

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
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
// relative uncertainty of 5 %, where terms of second order are below 1 % of the uncertainty. An empty
// noise is fitted.
var planned = []struct {
	name, rate, exposure, noise string
	corner, seconds             float64
}{
	{"detector", "4 kHz", "0 s", "0 nm", 250, 1},
	{"fast detector", "20 kHz", "0 s", "0.50(5) nm", 1000, 0.5},
	{"blurred camera", "1 kHz", "0.8 ms", "2 nm", 200, 5},
	{"slow camera", "600 Hz", "0.4 ms", "2 nm", 150, 10},
	{"exposed for the whole frame", "500 Hz", "2 ms", "3.0(3) nm", 60, 10},
	{"corner near the rate", "300 Hz", "0.2 ms", "2 nm", 120, 20},
	{"noise uncertain", "400 Hz", "2 ms", "5.0(5) nm", 105, 20},
	{"noise told by the recording", "400 Hz", "1 ms", "12.0(12) nm", 50, 50},
	{"noise fitted", "2 kHz", "0.1 ms", "", 100, 10},
}

// scatter is the standard deviation of ln fc and ln V over simulated recordings of a plan, whose
// noise has the stated variance, or one that is drawn anew with its stated uncertainty.
func scatter(t *testing.T, p *calib.Plan, samples, runs int, drawn bool) [2]float64 {
	t.Helper()
	corner, variance := float64(p.Corner.Value), float64(p.RMS.Value*p.RMS.Value)
	options := psd.Options{Exposure: float64(p.Exposure), KeepLines: true}
	noise := truthNoise(p)
	if p.Noise.Known() {
		options.Noise = psd.Noise{Known: true, Variance: noise * noise}
		if p.Noise.Combined != nil {
			options.Noise.VarianceU = 2 * noise * float64(p.Noise.Combined.Standard)
		}
	}
	random := rand.New(rand.NewPCG(3, 9))
	var sum, sum2 [2]float64
	for seed := range runs {
		actual := noise
		if drawn {
			actual = math.Sqrt(math.Max(0, noise*noise+options.Noise.VarianceU*random.NormFloat64()))
		}
		record, err := psd.Prepare(simulated(p, samples, actual, uint64(seed)), float64(p.Rate))
		if err != nil {
			t.Fatal(err)
		}
		fit, err := psd.Estimate(record, options)
		if err != nil {
			t.Fatal(err)
		}
		for i, l := range []float64{math.Log(fit.Corner / corner), math.Log(fit.Variance / variance)} {
			sum[i] += l
			sum2[i] += l * l
		}
	}
	var sd [2]float64
	for i := range sd {
		sd[i] = math.Sqrt((sum2[i] - sum[i]*sum[i]/float64(runs)) / float64(runs-1))
	}
	return sd
}

// The scatter of the estimates is within 5 % of the plan: 1500 recordings leave
// 1/sqrt(3000) = 1.8 % on a standard deviation. The statistical part is that of recordings whose noise is the
// stated one; with a noise drawn from what is stated, the scatter is the combined uncertainty.
func TestForecastAgainstSimulation(t *testing.T) {
	const runs = 1500
	for _, cell := range planned {
		t.Run(cell.name, func(t *testing.T) {
			p := forecastCell(t, exactBead, cell.corner, cell.rate, cell.exposure, cell.noise)
			row := timeOf(t, p, cell.seconds)
			routes := []calib.PlanUncertainty{row.Routes.Drag, row.Routes.Amplitude}
			for i, sd := range scatter(t, p, row.Samples, runs, false) {
				near(t, []string{"scatter by drag", "scatter by amplitude"}[i], calib.Float(sd), float64(routes[i].Statistical), 0.05)
			}
			if p.Noise.Combined == nil {
				return
			}
			for i, sd := range scatter(t, p, row.Samples, runs, true) {
				near(t, []string{"scatter by drag", "scatter by amplitude"}[i]+", noise drawn", calib.Float(sd), float64(routes[i].Combined), 0.05)
			}
		})
	}
}

// forecastCell is the plan of a regime.
func forecastCell(t *testing.T, bead []string, corner float64, rate, exposure, noise string) *calib.Plan {
	t.Helper()
	return forecast(t, calib.PlanOptions{Corner: corner}, cellSettings(bead, rate, exposure, noise)...)
}

func cellSettings(bead []string, rate, exposure, noise string) []string {
	pairs := with(bead, "recording.rate", rate, "recording.exposure", exposure)
	if noise != "" {
		pairs = append(pairs, "recording.noise", noise)
	}
	return pairs
}

// truthNoise is the noise of a simulated recording [m]: the stated one, else 2 nm.
func truthNoise(p *calib.Plan) float64 {
	if p.Noise.Known() {
		return float64(p.Noise.Value)
	}
	return 2e-9
}

func simulated(p *calib.Plan, samples int, noise float64, seed uint64) []float64 {
	axis := simulate.Axis{Corner: float64(p.Corner.Value), Variance: float64(p.RMS.Value * p.RMS.Value), Noise: noise}
	return simulate.Record(simulate.Truth{Samples: samples, Rate: float64(p.Rate), Exposure: float64(p.Exposure), Axes: []simulate.Axis{axis}}, seed)[0]
}

// With an exact exposure a longer recording never has a larger combined uncertainty. The statistical part rises only
// where an uncertain noise is told by the recording, and a note says so; the combined one rises only by an uncertain
// exposure, and a finding says that.
func TestForecastAgainstDuration(t *testing.T) {
	rose := map[string]int{}
	for _, corner := range []float64{20, 100, 300} {
		for _, exposure := range []string{"0 s", "0.8 ms", "0.80(8) ms"} {
			for _, noise := range []string{"", "0 nm", "5 nm", "5(1) nm", "30(10) nm"} {
				for _, diameter := range []string{"1.00 um", "1.00(3) um"} {
					name := fmt.Sprintf("%g Hz, exposure %s, noise %s, bead %s", corner, exposure, noise, diameter)
					bead := []string{"bead.diameter", diameter, "medium.fluid", "water", "medium.temperature", "25.0(5) C", "chamber.height", "far"}
					p := forecastCell(t, bead, corner, "1 kHz", exposure, noise)
					statistical, combined := false, false
					for i := 1; i < len(p.Times); i++ {
						before, now := p.Times[i-1].Routes, p.Times[i].Routes
						combined = combined || now.Both.Combined > 1.01*before.Both.Combined
						statistical = statistical || now.Amplitude.Statistical > 1.01*before.Amplitude.Statistical
					}
					_, learned := findingOf(p, calib.CodeNoiseLearned)
					_, grows := findingOf(p, calib.CodeExposureGrows)
					if statistical && !learned || combined && !grows {
						t.Errorf("%s: a rise (statistical %v, combined %v) without its finding", name, statistical, combined)
					}
					if learned && noise != "5(1) nm" && noise != "30(10) nm" || grows && exposure != "0.80(8) ms" {
						t.Errorf("%s: a finding without its cause (noise %v, exposure %v)", name, learned, grows)
					}
					for what, is := range map[string]bool{"noise": learned, "exposure": grows} {
						if is {
							rose[what]++
						}
					}
				}
			}
		}
	}
	if rose["noise"] == 0 || rose["exposure"] == 0 {
		t.Errorf("no regime shows the two rises: %v", rose)
	}
}

// What Calibrate states of six recordings is on average what the plan predicts, with inputs exact and
// with their uncertainties, by both routes and adopted. Each stated uncertainty varies by about the
// relative uncertainty itself (below 6 %), so the mean of six by 2.5 %; 5 % are two of these.
func TestForecastAgainstCalibrate(t *testing.T) {
	stated := []string{"bead.diameter", "1.00(1) um", "medium.temperature", "25.0(5) C", "medium.fluid", "water", "chamber.height", "5.0(3) um"}
	const runs = 6
	for _, cell := range planned {
		t.Run(cell.name, func(t *testing.T) {
			set := planSettings(t, cellSettings(stated, cell.rate, cell.exposure, cell.noise)...)
			p, err := calib.Forecast(set, calib.PlanOptions{Corner: cell.corner})
			if err != nil {
				t.Fatal(err)
			}
			row := timeOf(t, p, cell.seconds)
			var mean [6]float64
			for seed := range runs {
				nan := math.NaN()
				x := simulated(p, row.Samples, truthNoise(p), uint64(seed))
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

func findingOf(p *calib.Plan, code string) (calib.Finding, bool) {
	for _, f := range p.Findings {
		if f.Code == code {
			return f, true
		}
	}
	return calib.Finding{}, false
}

// Each finding comes when it should, and not when it should not.
func TestForecastFindings(t *testing.T) {
	full := []string{"bead.diameter", "1.02(3) um", "medium.fluid", "water", "medium.temperature", "25.0(5) C", "chamber.height", "8.0(5) um", "recording.noise", "1 nm"}
	for _, c := range []struct {
		code    string
		with    []string // what brings it
		without []string // what does not
		corner  float64
	}{
		{calib.CodeSlowRate, []string{"recording.rate", "300 Hz"}, []string{"recording.rate", "2 kHz"}, 200},
		{calib.CodeBlurred, []string{"recording.rate", "500 Hz", "recording.exposure", "2 ms"}, []string{"recording.rate", "500 Hz", "recording.exposure", "0.2 ms"}, 200},
		{calib.CodeNoiseDominant, []string{"recording.rate", "2 kHz", "recording.noise", "50 nm"}, []string{"recording.rate", "2 kHz"}, 200},
		{calib.CodeCloseSurface, []string{"recording.rate", "2 kHz", "chamber.height", "0.8(1) um"}, []string{"recording.rate", "2 kHz"}, 200},
		{calib.CodeHydrodynamics, []string{"recording.rate", "100 kHz"}, []string{"recording.rate", "1 kHz"}, 200},
		{calib.CodeExactInputs, []string{"recording.rate", "2 kHz", "bead.diameter", "1 um"}, []string{"recording.rate", "2 kHz"}, 200},
	} {
		if f, ok := findingOf(forecast(t, calib.PlanOptions{Corner: c.corner}, with(full, c.with...)...), c.code); !ok || f.Text == "" || f.Remedy == "" || f.Axis != "x" {
			t.Errorf("%s does not come with %v: %+v", c.code, c.with, f)
		}
		if f, ok := findingOf(forecast(t, calib.PlanOptions{Corner: c.corner}, with(full, c.without...)...), c.code); ok {
			t.Errorf("%s comes with %v: %+v", c.code, c.without, f)
		}
	}
	p := forecast(t, calib.PlanOptions{Corner: 200}, "bead.diameter", "1 um", "recording.rate", "300 Hz")
	for _, code := range []string{calib.CodeAssumed, calib.CodeNoHeight, calib.CodeNoiseUnknown} {
		if _, ok := findingOf(p, code); !ok {
			t.Errorf("%s does not come with nothing stated", code)
		}
	}
}

// A fit with constant drag is low in the corner frequency by what simulated recordings of 60 s show: 475.4 Hz
// and 447.2 Hz for 500 Hz at 10 and 40 kHz (R = 0.5 um, water of 25 C, bulk; statistical uncertainty 0.4 %).
func TestForecastInertia(t *testing.T) {
	for rate, want := range map[string]float64{"10 kHz": 475.4, "40 kHz": 447.2} {
		p := forecast(t, calib.PlanOptions{Corner: 500}, "bead.diameter", "1 um", "bead.density", "1.05 g/cm3", "medium.temperature", "25 C", "medium.fluid", "water",
			"chamber.height", "far", "recording.noise", "0 nm", "recording.rate", rate)
		f, ok := findingOf(p, calib.CodeHydrodynamics)
		if got := 500 * (1 + float64(f.Value)); !ok || math.Abs(got-want) > 4 {
			t.Errorf("%s: fitted corner frequency %.1f Hz, want %.1f (simulated), within 4", rate, got, want)
		}
	}
}

// The time for a wanted uncertainty gives that uncertainty; half of a purely statistical one takes four times as
// long; what the inputs forbid is never reached; and the recording that is enough is 5 % above the floor.
func TestForecastWanted(t *testing.T) {
	plan := func(wanted float64, pairs ...string) *calib.Plan {
		return forecast(t, calib.PlanOptions{Corner: 500, Wanted: wanted}, with([]string{"recording.rate", "20 kHz", "recording.noise", "0 nm"}, pairs...)...)
	}
	fine := plan(0.01, exactBead...)
	half := plan(0.005, exactBead...)
	// the line that is removed costs 1/(T fc) of the first, and the search ends at 1e-4
	near(t, "time for half the uncertainty", half.Wanted.Drag.Value, 4*float64(fine.Wanted.Drag.Value), 3e-3)
	c := math.Exp(-2 * math.Pi * 500 / 20e3) // the closed form of TestForecastClosedForm, with the line
	near(t, "time for 1 % by drag", fine.Wanted.Drag.Value, (1-c*c)/(c*c*math.Log(c)*math.Log(c))/(1e-4*20e3), 3e-3)
	if fine.Enough.Known() || fine.Enough.Reason == "" {
		t.Errorf("with exact inputs a duration is enough: %+v", fine.Enough)
	}
	rough := plan(0.02, "bead.diameter", "1.00(3) um", "medium.temperature", "25(1) C", "medium.fluid", "water", "chamber.height", "far")
	if q := rough.Wanted.Drag; q.Known() || q.Reason == "" {
		t.Errorf("2 %% by drag with a bead of 3 %%: %+v", q)
	}
	if !rough.Wanted.Amplitude.Known() {
		t.Errorf("2 %% by amplitude: %+v", rough.Wanted.Amplitude)
	}
	// u(T)/T of kT, and 3 % of the diameter with the viscosity of 1 K, 2.2 %/K at 25 C (IAPWS SR6-08, Eq. of viscosity)
	near(t, "floor by amplitude", rough.Floor.Amplitude, 1/298.15, 1e-3)
	near(t, "floor by drag", rough.Floor.Drag, math.Hypot(0.03, 0.0224), 0.02)
	if rough.Floor.Dominant != "temperature" {
		t.Errorf("dominant input %q, want temperature: the amplitude route carries the combination", rough.Floor.Dominant)
	}
	sum := 0.0
	for _, line := range rough.Floor.Budget {
		sum += float64(line.Share)
	}
	near(t, "sum of the shares", calib.Float(sum), 1, 1e-3)
	again := forecast(t, calib.PlanOptions{Corner: 500, Wanted: 1.05 * float64(rough.Floor.Both)}, "recording.rate", "20 kHz", "recording.noise", "0 nm",
		"bead.diameter", "1.00(3) um", "medium.temperature", "25(1) C", "medium.fluid", "water", "chamber.height", "far")
	near(t, "enough", rough.Enough.Value, float64(again.Wanted.Both.Value), 1e-3)
}

// Lengths do not matter: a bead twice as large in the same relative terms, with the same corner
// frequency, gives the same plan. The exposure's uncertainty does, where the exposure is long.
func TestForecastScaling(t *testing.T) {
	settings := func(diameter, exposure string) []string {
		return []string{"bead.diameter", diameter, "medium.viscosity", "0.89(1) mPa s", "medium.temperature", "25.0(5) C", "chamber.height", "far", "recording.rate", "1 kHz",
			"recording.exposure", exposure, "recording.noise", "0 nm"}
	}
	row := func(diameter, exposure string) calib.PlanRoutes {
		return timeOf(t, forecast(t, calib.PlanOptions{Corner: 200}, settings(diameter, exposure)...), 10).Routes
	}
	one, two := row("1.00(2) um", "0.8 ms"), row("2.00(4) um", "0.8 ms")
	near(t, "both", two.Both.Combined, float64(one.Both.Combined), 1e-9)
	near(t, "drag", two.Drag.Combined, float64(one.Drag.Combined), 1e-9)
	blur := row("1.00(2) um", "0.80(8) ms")
	if !(blur.Amplitude.Combined > 1.2*one.Amplitude.Combined) || blur.Amplitude.Statistical != one.Amplitude.Statistical {
		t.Errorf("an exposure known to 10 %%: amplitude %+v, known exactly %+v", blur.Amplitude, one.Amplitude)
	}
}

// The influence of an uncertain exposure is that which Calibrate finds by repeating its estimates. Their mean over
// eight recordings varies by less than 3 %, and first order in 10 % of the exposure is good to 5 %.
func TestForecastExposure(t *testing.T) {
	set := planSettings(t, with(exactBead, "recording.rate", "1 kHz", "recording.exposure", "0.70(7) ms", "recording.noise", "0 nm")...)
	p, err := calib.Forecast(set, calib.PlanOptions{Corner: 200})
	if err != nil {
		t.Fatal(err)
	}
	row := timeOf(t, p, 20)
	const runs = 8
	var mean [2]float64
	for seed := range runs {
		nan := math.NaN()
		x := simulated(p, row.Samples, truthNoise(p), uint64(seed))
		rec := &track.Recording{Name: "simulated", Rate: float64(p.Rate), RateU: nan, RateOrigin: "setting", Samples: len(x), JitterRMS: nan, JitterMax: nan,
			Axes: []track.Axis{{Name: "x", Header: "x", Unit: "m", ToMetre: 1, Values: x}}}
		r, err := calib.Calibrate(context.Background(), rec, set, calib.Options{})
		if err != nil {
			t.Fatal(err)
		}
		for i, leg := range []int{0, 3} {
			q := r.Axes[0].Estimates[leg].Stiffness
			mean[i] += float64(q.Combined.Standard/q.Value) / runs
		}
	}
	near(t, "by drag", calib.Float(mean[0]), float64(row.Routes.Drag.Combined), 0.08)
	near(t, "by amplitude", calib.Float(mean[1]), float64(row.Routes.Amplitude.Combined), 0.08)
}

func TestForecastRefused(t *testing.T) {
	for _, c := range []struct {
		want  string
		opt   calib.PlanOptions
		pairs []string
	}{
		{"bead.diameter", calib.PlanOptions{Corner: 500}, []string{"recording.rate", "2 kHz"}},
		{"recording.rate", calib.PlanOptions{Corner: 500}, []string{"bead.diameter", "1 um"}},
		{"recording.rate", calib.PlanOptions{Corner: 500}, []string{"bead.diameter", "1 um", "recording.rate", "100 Hz"}},
		{"stiffness", calib.PlanOptions{}, []string{"bead.diameter", "1 um", "recording.rate", "2 kHz"}},
	} {
		_, err := calib.Forecast(planSettings(t, c.pairs...), c.opt)
		var wrong *calib.SettingError
		if !errors.As(err, &wrong) || wrong.Key != c.want {
			t.Errorf("%v: %v, want a SettingError of %s", c.pairs, err, c.want)
		}
	}
}

// The rates lie in order, with the planned one among them once, and none is faster than the exposure allows.
func TestForecastRates(t *testing.T) {
	p := forecast(t, calib.PlanOptions{Corner: 200}, with(exactBead, "recording.rate", "730 Hz", "recording.exposure", "0.5 ms", "recording.noise", "0 nm")...)
	planned, before := 0, 0.0
	for _, row := range p.Rates.Rows {
		if row.Planned {
			planned++
		}
		if float64(row.Rate) <= before || float64(row.Rate) > 2000.001 {
			t.Errorf("rate %g after %g, at an exposure of 0.5 ms", float64(row.Rate), before)
		}
		before = float64(row.Rate)
	}
	if planned != 1 {
		t.Errorf("the planned rate is there %d times", planned)
	}
	if !p.Rates.Best.Known() {
		t.Error("no best rate")
	}
}
