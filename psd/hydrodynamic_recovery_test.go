package psd

import (
	"fmt"
	"math"
	"testing"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
)

// cell is a kind of recording that is simulated and fitted.
type cell struct {
	bead
	corner, rate, exposure float64 // [Hz], [Hz], share of the interval
	noise                  float64 // q/V
	known                  bool    // the noise is
	diode                  *simulate.Photodiode
	free                   bool // fit the photodiode
	samples                int
}

func (c cell) String() string {
	return fmt.Sprintf("R %g um, h %g um, fc %g Hz, rate %g kHz, exposure %g, noise %g known %t, diode %v free %t, %d samples",
		c.radius*1e6, c.height*1e6, c.corner, c.rate/1e3, c.exposure, c.noise, c.known, c.diode != nil, c.free, c.samples)
}

func (c cell) truth() simulate.Truth {
	const variance = 1e-16 // m2
	return simulate.Truth{
		Samples: c.samples, Rate: c.rate, Exposure: c.exposure / c.rate, Photodiode: c.diode,
		Axes: []simulate.Axis{{Corner: c.corner, Variance: variance, Noise: math.Sqrt(c.noise * variance),
			WallFactor: c.frequency().StaticFactor, Perpendicular: c.perpendicular}},
		Hydrodynamics: &simulate.Hydrodynamics{Radius: c.radius, Height: c.height, Viscosity: waterViscosity, Density: waterDensity, BeadDensity: beadDensity},
	}
}

// outcome sums up fits of one cell. z is (estimate - truth)/standard uncertainty.
type outcome struct {
	mean, square [3]float64 // of z of ln fc, ln D, ln V
	alpha, f3dB  [2]float64 // mean and mean square of z, alpha as its square
	covered      [2]int     // 95 % profile intervals of ln fc and ln V that hold the truth
	precision    float64    // standard uncertainty of ln fc
	failed       int
}

// fit simulates and fits records of a cell: z of ln fc, ln D, ln V.
func (c cell) fit(records int, seed uint64, intervals bool) (o outcome) {
	h := c.spectrum()
	if c.diode != nil {
		h.Alpha, h.F3dB, h.FitAlpha, h.FitF3dB = c.diode.Alpha, c.diode.F3dB, c.free, c.free
	}
	truth := c.truth()
	variance := truth.Axes[0].Variance
	for i := range records {
		x := simulate.Record(truth, seed+uint64(i))[0]
		r, err := Prepare(x, c.rate)
		if err != nil {
			panic(err)
		}
		f, err := Estimate(r, Options{Exposure: c.exposure / c.rate, KeepLines: true,
			Noise: Noise{Known: c.known, Variance: c.noise * variance}, Form: h.Form(c.rate, c.exposure/c.rate)})
		if err != nil {
			o.failed++
			continue
		}
		errors := relaxation.Parameters{math.Log(f.Corner / c.corner), 0, math.Log(f.Variance / variance)}
		errors[1] = errors[0] + errors[2]
		for a, weights := range []relaxation.Parameters{{1, 0, 0}, {1, 1, 0}, {0, 1, 0}} {
			_, sd := f.SD(weights)
			z := errors[a] / sd
			o.mean[a] += z / float64(records)
			o.square[a] += z * z / float64(records)
			if a == 0 {
				o.precision = sd
			}
			if intervals && a != 1 {
				p := f.Problem.Profile(f.Maximum, weights, sd)
				if errors[a] < p.Low95 && errors[a] > -p.High95 {
					o.covered[a/2]++
				}
			}
		}
		if d, ok := f.Diode(); ok {
			for _, v := range []struct {
				to       *[2]float64
				error, u float64
			}{{&o.alpha, d.Share - h.Alpha*h.Alpha, d.ShareU}, {&o.f3dB, d.F3dB - h.F3dB, d.F3dBU}} {
				v.to[0] += v.error / v.u / float64(records)
				v.to[1] += v.error * v.error / (v.u * v.u) / float64(records)
			}
		}
	}
	return o
}

// the kinds of recordings: R from 0.25 to 2.5 um, fc from 50 Hz to 5 kHz, rates to 500 kHz,
// cameras, walls, photodiodes.
func cells() []cell {
	diode := &simulate.Photodiode{Alpha: 0.3, F3dB: 8000}
	return []cell{
		{bead: bead{radius: 0.25e-6}, corner: 500, rate: 500e3, known: true},
		{bead: bead{radius: 2.5e-6}, corner: 50, rate: 50e3, noise: 1e-3},
		{bead: bead{radius: 2.5e-6}, corner: 500, rate: 500e3, noise: 1e-4},
		{bead: bead{radius: 2.5e-6}, corner: 5000, rate: 500e3, noise: 1e-3},
		{bead: bead{radius: 0.5e-6}, corner: 5000, rate: 50e3, exposure: 1, noise: 1e-2},
		{bead: bead{radius: 0.5e-6, height: 1e-6, static: 1.382752}, corner: 500, rate: 100e3, noise: 1e-3},
		{bead: bead{radius: 1e-6, height: 2e-6, static: 2.125536, perpendicular: true}, corner: 2000, rate: 100e3, known: true},
		{bead: bead{radius: 0.5e-6}, corner: 2000, rate: 100e3, known: true, diode: diode},
	}
}

// Fits of simulated recordings are unbiased and their uncertainties are right. At a
// truth of standard normal z, the mean of n has the standard deviation 1/sqrt(n) and the mean
// square sqrt(2/n); bounds are 3.5 of them for each cell and each of fc, D and V, which
// chance exceeds in 1 % of all test programs. Over all cells the bias is below 0.2.
func TestRecovery(t *testing.T) {
	const n = 30
	var mean float64
	all := cells()
	for i, c := range all {
		c.samples = 1 << 15
		o := c.fit(n, uint64(1000*i+1), false)
		if o.failed > 0 {
			t.Errorf("%v: %d of %d fits have no maximum", c, o.failed, n)
		}
		for a, name := range []string{"fc", "D", "V"} {
			if math.Abs(o.mean[a]) > 3.5/math.Sqrt(n) || math.Abs(o.square[a]-1) > 3.5*math.Sqrt(2.0/n) {
				t.Errorf("%v: z of %s has the mean %.2f and the mean square %.2f", c, name, o.mean[a], o.square[a])
			}
		}
		mean += o.mean[0] / float64(len(all))
	}
	if math.Abs(mean) > 0.2 { // 3.1 standard deviations
		t.Errorf("mean z of fc over all cells %.2f", mean)
	}
}

// Profile intervals hold the truth in 95 %: 3.5 binomial standard deviations of 80 are 8.5 %.
func TestHydrodynamicCoverage(t *testing.T) {
	for _, i := range []int{2, 5} {
		c := cells()[i]
		c.samples = 1 << 14
		const n = 80
		o := c.fit(n, 77, true)
		for a, name := range []string{"fc", "V"} {
			if share := float64(o.covered[a]) / n; math.Abs(share-0.95) > 0.085 {
				t.Errorf("%v: 95 %% intervals of %s hold the truth in %.1f %%", c, name, 100*share)
			}
		}
	}
}

// A photodiode that is fitted too: the truth comes back with honest uncertainties.
func TestFreeDiode(t *testing.T) {
	c := cell{bead: bead{radius: 0.5e-6}, corner: 500, rate: 100e3, noise: 1e-3, samples: 1 << 16, free: true,
		diode: &simulate.Photodiode{Alpha: 0.3, F3dB: 8000}}
	const n = 16
	o := c.fit(n, 5, false)
	if o.failed > 0 {
		t.Errorf("%d of %d fits have no maximum", o.failed, n)
	}
	values := map[string][2]float64{"fc": {o.mean[0], o.square[0]}, "D": {o.mean[1], o.square[1]},
		"alpha": {o.alpha[0], o.alpha[1]}, "f3dB": {o.f3dB[0], o.f3dB[1]}}
	for name, v := range values {
		// the tails of chi-square of 16 over 16: below 0.3 and above 2.6 in one of a thousand each
		if !(math.Abs(v[0]) < 3.5/math.Sqrt(n) && v[1] > 0.3 && v[1] < 2.6) {
			t.Errorf("z of %s has the mean %.2f and the mean square %.2f", name, v[0], v[1])
		}
	}
}
