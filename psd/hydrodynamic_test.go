package psd

import (
	"math"
	"testing"

	"beadwell/calib/drag"
	"beadwell/calib/relaxation"
)

// bead is a polystyrene sphere in water at 25 C; viscosity and density are those of
// IAPWS SR6-08(2011) at 298.15 K, D = kT/gamma(0) with k = 1.380649e-23 J/K.
type bead struct {
	radius, height float64 // [m]; height 0 is bulk
	perpendicular  bool
	static         float64 // wall factor; 0: first order of Faxen 1923, as the published form has it
}

const (
	waterViscosity = 889.9968e-6 // Pa s
	waterDensity   = 997.047013  // kg/m3
	beadDensity    = 1050.0      // kg/m3
	thermal        = 1.380649e-23 * 298.15
)

func (b bead) frequency() drag.Frequency {
	d := drag.Frequency{Radius: b.radius, Height: math.Inf(1), Viscosity: waterViscosity, Density: waterDensity, StaticFactor: 1, Perpendicular: b.perpendicular}
	if b.height > 0 {
		d.Height = b.height
		d.StaticFactor = b.static
		if b.static == 0 {
			d.StaticFactor = 1 / (1 - 9.0/16*b.radius/b.height)
		}
	}
	return d
}

func (b bead) gamma() float64 {
	return 6 * math.Pi * waterViscosity * b.radius * b.frequency().StaticFactor
}

// spectrum is the bead's, in terms of gamma(0), the wall included.
func (b bead) spectrum() Hydrodynamic {
	d := b.frequency()
	mass := 4.0 / 3 * math.Pi * b.radius * b.radius * b.radius * beadDensity
	return Hydrodynamic{
		Drag:       func(f float64) complex128 { return d.Factor(f) / complex(d.StaticFactor, 0) },
		MassCorner: b.gamma() / (2 * math.Pi * mass),
	}
}

func relative(got, want float64) float64 { return math.Abs(got-want) / math.Abs(want) }

// The formula of Berg-Sorensen and Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594,
// recomputed by an independent program: R = 0.5 um, fc of the Stokes drag in bulk 500 Hz.
func TestPositionPublished(t *testing.T) {
	const radius, corner = 0.5e-6, 500.0
	rows := []struct{ heightOverRadius, f, want float64 }{
		{0, 10, 1.9942609801492125e-19},
		{0, 100, 1.9359879750842814e-19},
		{0, 500, 1.0151769536913462e-19},
		{0, 1000, 3.997191635678159e-20},
		{0, 5000, 1.8636735298668714e-21},
		{0, 10000, 4.536473194930153e-22},
		{0, 30000, 4.6598697432948304e-23},
		{0, 100000, 3.571091624304084e-24},
		{2, 1000, 3.183848305319994e-20},
		{2, 10000, 3.772711559454899e-22},
		{2, 100000, 3.821155773148431e-24},
		{5, 1000, 3.7123073123474916e-20},
		{5, 10000, 4.529093208924577e-22},
		{5, 100000, 3.7939460789986025e-24},
		{10, 1000, 3.883181995641428e-20},
		{10, 10000, 4.642050024495897e-22},
		{10, 100000, 3.662798311119665e-24},
	}
	for _, r := range rows {
		b := bead{radius: radius, height: r.heightOverRadius * radius}
		stokes := 6 * math.Pi * waterViscosity * radius
		variance := thermal / (2 * math.Pi * corner * stokes)
		got := b.spectrum().Position(r.f, corner*stokes/b.gamma(), variance)
		// the digits of the sources, which round viscosity and density to 1e-8
		if relative(got, r.want) > 1e-8 {
			t.Errorf("h/R %g: Position(%g) = %g, want %g (relative gap %.1e)", r.heightOverRadius, r.f, got, r.want, relative(got, r.want))
		}
	}
}

// Berg-Sorensen et al., J. Appl. Phys. 93 (2003) 3167: the formula, recomputed.
func TestResponsePublished(t *testing.T) {
	rows := []struct{ f, alpha, f3dB, want float64 }{
		{100, 0.3, 8000, 0.999857834713326},
		{1000, 0.3, 8000, 0.986},
		{8000, 0.3, 8000, 0.545},
		{20000, 0.3, 8000, 0.21551724137931036},
		{100000, 0.3, 8000, 0.09578696343402225},
		{100, 0.5, 6000, 0.9997917245209663},
		{1000, 0.5, 6000, 0.9797297297297298},
		{6000, 0.5, 6000, 0.625},
		{20000, 0.5, 6000, 0.3119266055045872},
		{100000, 0.5, 6000, 0.2526903148664807},
	}
	for _, r := range rows {
		got := Hydrodynamic{Alpha: r.alpha, F3dB: r.f3dB}.Response(r.f)
		if relative(got, r.want) > 1e-12 { // digits of the table
			t.Errorf("Response(%g), alpha %g, f3dB %g = %.15g, want %.15g", r.f, r.alpha, r.f3dB, got, r.want)
		}
	}
}

// Equipartition: the spectrum integrates to V. Panels of Simpson's rule in ln f.
func TestPositionIntegral(t *testing.T) {
	for _, b := range []bead{{radius: 0.25e-6}, {radius: 2.5e-6}, {radius: 0.5e-6, height: 2.5e-6, perpendicular: true, static: 1.285087}} {
		h := b.spectrum()
		for _, corner := range []float64{50, 5000} {
			const low, high, n = 1e-6, 1e12, 40000
			step := math.Log(high/low) / n
			sum := low * h.Position(0, corner, 1) // below low it is flat
			for i := 0; i <= n; i++ {
				f := low * math.Exp(float64(i)*step)
				w := 2.0
				if i%2 == 1 {
					w = 4
				}
				if i == 0 || i == n {
					w = 1
				}
				sum += w * step / 3 * f * h.Position(f, corner, 1)
			}
			// Simpson's error is (1e-3)^4; near the wall the drag is a first-order
			// form whose reaction is tabulated to 2e-5
			limit := 1e-9
			if b.height > 0 {
				limit = 2e-5
			}
			if math.Abs(sum-1) > limit {
				t.Errorf("%+v, fc %g: integral %.12f V", b, corner, sum)
			}
		}
	}
}

func likelihoodOf(h Hydrodynamic, b relaxation.Blocks, rate, exposure float64) *whittle {
	return h.Form(rate, exposure)(b, 1).(*whittle)
}

// The slope of the response with ln f3dB against central differences.
func TestResponseSlope(t *testing.T) {
	const step = 1e-5
	at := newDiode(0.2, math.Log(8000))
	for _, f := range []float64{100, 8000, 90000} {
		want := (newDiode(0.2, at.log+step).power(f) - newDiode(0.2, at.log-step).power(f)) / (2 * step)
		// step^2 = 1e-10 of curvature, and rounding 1e-16/step
		if got := at.byLog(f); math.Abs(got-want) > 1e-9 {
			t.Errorf("slope at %g Hz = %g, want %g", f, got, want)
		}
	}
}

// With constant drag it is the relaxation process, whatever the exposure.
func TestConstantDrag(t *testing.T) {
	const rate = 1000.0
	for _, g := range []func(float64) complex128{nil, func(float64) complex128 { return 1 }} {
		for _, share := range []float64{0, 1e-3, 0.03, 0.3, 0.77, 0.999, 1} {
			for _, x := range []float64{1e-4, 0.01, 0.3, 2} {
				w := likelihoodOf(Hydrodynamic{Drag: g}, relaxation.Blocks{}, rate, share/rate)
				p := relaxation.Process{Corner: x * rate, Variance: 3, Noise: 0.2, Interval: 1 / rate, Exposure: share / rate}
				for _, f := range []float64{0, 1, 33, 250, 499, 500} {
					got := w.Density(relaxation.Parameters{math.Log(x), math.Log(3), 0.2}, f)
					if want := 2 * p.Spectrum(f); relative(got, want) > 1e-9 { // asked for; rounding alone is left
						t.Errorf("share %g, fc dt %g, f %g: %g, want %g", share, x, f, got, want)
					}
				}
			}
		}
	}
}

// brute sums the aliases one by one, 4000 on each side, and integrates the rest by
// Simpson's rule in ln f, with the mean of sin^2 if there is exposure.
func brute(h Hydrodynamic, f, rate, exposure, corner float64) float64 {
	const last = 4000
	sum := 0.0
	one := func(f float64) float64 {
		f = math.Abs(f)
		u := math.Pi * f * exposure
		blur := 1.0
		if u != 0 {
			blur = math.Sin(u) * math.Sin(u) / (u * u)
		}
		return blur * h.Position(f, corner, 1) * h.Response(f)
	}
	const steps, step = 1400, 0.01
	for i := 0; i <= steps; i++ {
		x := (last + 0.5) * math.Exp(float64(i)*step)
		w := 2.0 / 3
		if i%2 == 1 {
			w = 4.0 / 3
		}
		value := h.Position(x*rate, corner, 1) * h.Response(x*rate)
		if u := math.Pi * x * rate * exposure; u > 0 {
			value /= 2 * u * u
		}
		if i == 0 {
			w /= 2
		}
		if i == steps {
			w = 1 / step // what falls as 1/f^2 from here on
		}
		sum += 2 * w * step * x * value
	}
	for k := last; k > 0; k-- {
		sum += one(f+float64(k)*rate) + one(f-float64(k)*rate)
	}
	return sum + one(f)
}

// The aliases against brute force, for slow cameras and fast detectors, photodiodes,
// and every kind of exposure.
func TestAliases(t *testing.T) {
	worst := 0.0
	for _, h := range []Hydrodynamic{
		bead{radius: 2.5e-6}.spectrum(),
		bead{radius: 0.25e-6, height: 0.5e-6, static: 1.382752}.spectrum(),
		{Drag: bead{radius: 1e-6}.spectrum().Drag, Alpha: 0.3, F3dB: 8000},
		{Alpha: 0.5, F3dB: 6000},
	} {
		for _, rate := range []float64{2000, 5e5} {
			for _, share := range []float64{0, 0.003, 0.02, 0.05, 0.3, 0.7, 0.98, 1} {
				for _, corner := range []float64{50, 5000} {
					w := likelihoodOf(h, relaxation.Blocks{}, rate, share/rate)
					for _, phi := range []float64{0.001, 0.43, 0.5} {
						want := brute(h, phi*rate, rate, share/rate, corner)
						got := w.Density(relaxation.Parameters{math.Log(corner / rate), 0, 0}, phi*rate)
						gap := relative(got, want)
						worst = math.Max(worst, gap)
						limit := 1e-6 // far below the 1e-4 that a record of 1e8 samples could see
						if share == 0 {
							limit = 1e-7 // no turns of sinc^2: interpolation is left
						}
						if gap > limit {
							t.Errorf("rate %g, share %g, fc %g, f %g: %g, want %g (relative gap %.1e)", rate, share, corner, phi, got, want, gap)
						}
					}
				}
			}
		}
	}
	t.Logf("largest gap %.1e", worst)
}
