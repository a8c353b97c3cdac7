package track

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// positions writes n rows from a format with the index and a lively value.
func positions(n int, format func(i int, x float64) string) string {
	var b strings.Builder
	for i := range n {
		b.WriteString(format(i, float64(i*37%19)-9.25))
	}
	return b.String()
}

// placeOf returns line and column of a refusal.
func placeOf(err error) string {
	if e, ok := err.(*Error); ok {
		return fmt.Sprintf("%d:%d", e.Line, e.Column)
	}
	return fmt.Sprint(err)
}

// Lines that hold no sample, of whatever kind and line end, count in the places
// of later errors.
func TestPlacesBehindSkippedLines(t *testing.T) {
	good := positions(5, func(i int, x float64) string { return fmt.Sprintf("0.00%d,%g\n", i, x) })
	text := "t (s),x (um)\n" + good + "# one\n\n# two\n0.005,1\n# three\n0.005,2\n"
	if _, err := readString(t, text, Options{}); placeOf(err) != "12:1" {
		t.Errorf("repeated stamp: %v, want line 12", err)
	}
	mixed := strings.Replace(strings.ReplaceAll(text, "\n", "\r\n"), "\r\n", "\r", 1)
	if _, err := readString(t, mixed, Options{}); placeOf(err) != "12:1" {
		t.Errorf("with mixed line ends: %v, want line 12", err)
	}
	swapped := "x (um),t (s)\n" + positions(5, func(i int, x float64) string { return fmt.Sprintf("%g,0.00%d\n", x, i) }) + "1,0.004\n"
	if _, err := readString(t, swapped, Options{}); err == nil || !strings.Contains(err.Error(), ":7") {
		t.Errorf("time in the second column: %v, want line 7", err)
	}
}

func TestOneStrayStampIsRefused(t *testing.T) {
	stamps := stampsAt(1000, 1000, 0, 6)
	stamps[500] += 0.6e-3 // 0.6 of a step: 2 % of a step in the root mean square
	if _, fault := fitGrid(stamps, resolution{step: 1e-6}, 0); fault == nil || fault.row != 500 {
		t.Errorf("got %+v, want a refusal of row 500", fault)
	}
}

// RateU is the scatter of the rate over recordings with the same jitter.
func TestRateUncertainty(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 9))
	const n, trials = 400, 300
	squares, stated := 0.0, 0.0
	for range trials {
		text := "t (s),x (um)\n" + positions(n, func(i int, x float64) string {
			return fmt.Sprintf("%.9f,%g\n", 1+float64(i)/2000+0.02/2000*rng.NormFloat64(), x)
		})
		list, err := readString(t, text, Options{NoHash: true})
		if err != nil {
			t.Fatal(err)
		}
		d := list[0].Rate - 2000
		squares += d * d
		stated += list[0].RateU / trials
	}
	// The root mean square of 300 deviations scatters by 1/sqrt(600) = 4 %; four of those.
	if ratio := math.Sqrt(squares/trials) / stated; math.Abs(ratio-1) > 0.16 {
		t.Errorf("the rate scatters by %.3g times its stated uncertainty", ratio)
	}
}

func TestDetailsOfUnits(t *testing.T) {
	for name, c := range map[string]struct {
		factor float64 // ToMetre
		value  float64 // of the cell 3
	}{"m": {1, 3}, "cm": {1e-2, 3e-2}, "mm": {1e-3, 3e-3}, "um": {1e-6, 3e-6}, "nm": {1e-9, 3e-9}, "pm": {1e-12, 3e-12},
		"V": {math.NaN(), 3}, "mV": {math.NaN(), 3e-3}, "uV": {math.NaN(), 3e-6}, "px": {math.NaN(), 3}, "counts": {math.NaN(), 3}, "1": {math.NaN(), 3}} {
		list, err := readString(t, "t (ms),x ("+name+")\n1,3\n2,4\n3,5.5\n", Options{})
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		a := list[0].Axes[0]
		if a.Unit != name || a.Values[0] != c.value || a.ToMetre != c.factor && (a.ToMetre == a.ToMetre || c.factor == c.factor) || list[0].Rate != 1000 {
			t.Errorf("%s: %s, %v, factor %v, %v Hz; want %v, %v", name, a.Unit, a.Values[0], a.ToMetre, list[0].Rate, c.value, c.factor)
		}
	}
}

func TestDetailsOfLayout(t *testing.T) {
	row := func(format string) string {
		return positions(40, func(i int, x float64) string { return fmt.Sprintf(format, float64(i)/1000, x, x/3) })
	}
	pairs := func(format string) string {
		return positions(40, func(i int, x float64) string { return fmt.Sprintf(format, float64(i)/1000, x) })
	}
	comma := func(s string) string { return strings.ReplaceAll(s, ".", ",") }
	for name, c := range map[string]struct {
		text string
		opt  Options
		code string
		rate float64
	}{
		"20 Hz without a unit":      {"t,x (um)\n" + positions(40, func(i int, x float64) string { return fmt.Sprintf("%.2f,%g\n", float64(i)/20, x) }), Options{}, CodeUnit, 0},
		"40 Hz without a unit":      {"t,x (um)\n" + positions(40, func(i int, x float64) string { return fmt.Sprintf("%.3f,%g\n", float64(i)/40, x) }), Options{}, "", 40},
		"past midnight":             {"time,x (um)\n" + positions(40, func(i int, x float64) string { return midnight(i) + fmt.Sprintf(",%g\n", x) }), Options{}, "", 100},
		"three decimals, zeros":     {comma("t (s);x (nm)\n" + positions(40, func(i int, x float64) string { return fmt.Sprintf("%d.5;0.%03d\n", i, i*37%19) })), Options{TimeUnit: ""}, "", 1},
		"only groups and zeros":     {"x (nm);y (nm)\n" + positions(40, func(i int, x float64) string { return fmt.Sprintf("0,%03d;0,%03d\n", i*37%19, i*31%17) }), Options{Rate: 7}, "", 7},
		"no names, four columns":    {positions(40, func(i int, x float64) string { return fmt.Sprintf("%g,%g,%g,%g\n", x, -x, x/2, x/3) }), Options{Unit: "um", Rate: 9}, CodeColumns, 0},
		"no names, uneven rise":     {positions(40, func(i int, x float64) string { return fmt.Sprintf("%d.5,%g\n", i*i, x) }), Options{Unit: "um", Rate: 9}, "", 9},
		"interval in milliseconds":  {"dt: 0.5 ms\nx (um),y (um)\n" + row("%[2]g,%[3]g\n"), Options{}, "", 2000},
		"interval with unit in key": {"increment (us),500\nx (um),y (um)\n" + row("%[2]g,%[3]g\n"), Options{}, "", 2000},
		"raw and filtered":          {"t (s),x_raw (um),x_filtered (um)\n" + row("%.3f,%g,%g\n"), Options{}, CodeColumns, 0},
		"plain and raw":             {"t (s),x (um),x_raw (um)\n" + row("%.3f,%g,%g\n"), Options{}, "", 1000},
		"header again after a gap":  {"x (um),y (um)\n" + row("%[2]g,%[3]g\n") + "\nx (um),y (um)\n" + row("%[2]g,%[3]g\n"), Options{Rate: 5}, CodeLayout, 0},
		"header again":              {"x (um),y (um)\n" + row("%[2]g,%[3]g\n") + "x (um),y (um)\n" + row("%[2]g,%[3]g\n"), Options{Rate: 5}, "", 5},
		"text under a named axis":   {"t (s),x (um)\n" + pairs("%.3f,%g±0.1\n"), Options{}, CodeCell, 0},
		"brackets":                  {row("[%.3f, %g, %g]\n"), Options{Unit: "um", Rate: 5}, CodeColumns, 0},
		"wide blanks":               {"time (s)  x position (um)  y position (um)\n" + row("%.3f  %g  %g\n"), Options{}, "", 1000},
		"header that does not fit":  {"t x y z\n" + row("%.3f  %g  %g\n"), Options{Unit: "um"}, CodeLayout, 0},
		"minutes":                   {"t (min),x (um)\n" + pairs("%.3f,%g\n"), Options{}, "", 1000. / 60},
		"hours by a setting":        {"t,x (um)\n" + pairs("%.3f,%g\n"), Options{TimeUnit: "h"}, "", 1000. / 3600},
		"least and largest":         {"t (s),x (um),x_min (um),h,d\n" + pairs("%.3f,%g,1.5,2,3\n"), Options{}, "", 1000},
		"weeks":                     {"t (weeks),x (um)\n" + pairs("%.3f,%g\n"), Options{}, CodeUnit, 0},
		"beyond all reach":          {"t (s),x (um)\n" + pairs("%.3f,%g\n") + "5,1e300\n", Options{}, CodeCell, 0},
		"beyond all reach, quoted":  {"t (s),x (um)\n" + pairs("%.3f,%g\n") + "5,\"-1e300\"\n", Options{}, CodeCell, 0},
		"far away":                  {"t (s),x (um)\n" + pairs("%.3f,%g\n") + "0.040,1e30\n", Options{}, "", 1000},
		"footer too long":           {"t (s),x (um)\n" + pairs("%.3f,%g\n") + strings.Repeat("more text\n", 41), Options{}, CodeRow, 0},
		"two beads, one with loss": {"bead,t (s),x (um)\n" + positions(200, func(i int, x float64) string {
			s := fmt.Sprintf("a,%.3f,%g\n", float64(i)/1000, x)
			if i%10 != 3 {
				s += strings.Replace(s, "a", "b", 1)
			}
			return s
		}), Options{}, "", 1000},
	} {
		list, err := readString(t, c.text, c.opt)
		if code(err) != c.code || (err == nil) != (c.code == "") {
			t.Errorf("%s: %v, want code %q", name, err, c.code)
			continue
		}
		for _, rec := range list {
			if rec.Rate != c.rate {
				t.Errorf("%s: %v Hz from the %s, want %v", name, rec.Rate, rec.RateOrigin, c.rate)
			}
		}
	}
}

// midnight is a time of day without a date, 10 ms apart, that passes midnight.
func midnight(i int) string {
	s := (8639980 + i) % 8640000 // hundredths of a second
	return fmt.Sprintf("%02d:%02d:%02d.%02d", s/360000, s/6000%60, s/100%60, s%100)
}
