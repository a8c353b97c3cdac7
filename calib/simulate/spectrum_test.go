package simulate

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"beadwell/calib/medium"
)

// sampledDensity is the one-sided density [m²/Hz] of the sampled, blurred process without
// noise: 2 dt [V B (1-c²)/(1+c²-2c cos th) + V(S-B)].
func sampledDensity(a Axis, rate, exposure, f float64) float64 {
	blur := 2 * math.Pi * a.Corner * exposure
	c := math.Exp(-2 * math.Pi * a.Corner / rate)
	b := blurLag(blur)
	return 2 / rate * a.Variance * (b*(1-c*c)/(1+c*c-2*c*math.Cos(2*math.Pi*f/rate)) + blurVariance(blur) - b)
}

// The alias sum against the closed form of the Ornstein-Uhlenbeck process, at exposures
// that put the zeros of sinc² on the aliases, between them, and far above them.
func TestAliasesClosedForm(t *testing.T) {
	const rate = 1000
	for _, corner := range []float64{1, 20, 150, 400, 1000} {
		a := Axis{Corner: corner, Variance: 1}
		for _, exposure := range []float64{0, 1e-7, 1e-5, 3.3e-4, 5e-4, 1e-3} {
			s := Spectrum{Density: func(f float64) float64 { return lorentzian(a, f) }, Rate: rate, Exposure: exposure}
			folded := newAliases(s)
			for _, f := range []float64{0, 3, 111, 250, 333, 499, 500} {
				// 2e-6 of the sum: the midpoint rule for the tail, 1/aliasTerms³ = 1e-6 of the aliases, and
				// as much again where sinc² swings inside it.
				got, want := folded.density(f), sampledDensity(a, rate, exposure, f)
				if !near(got, want, 2e-6) {
					t.Errorf("fc %v Hz, exposure %v s: density(%v Hz) = %v, want %v (off by %.1g)", corner, exposure, f, got, want, got/want-1)
				}
			}
		}
	}
}

// Synthesised records have the covariances of the same process updated exactly. The
// scatter is that of TestRecordAutocovariance.
func TestSynthesisAutocovariance(t *testing.T) {
	const records, samples, rate, exposure = 60, 1000, 1000.0, 6e-4
	a := Axis{Corner: 80, Variance: 2e-16}
	s := Spectrum{Density: func(f float64) float64 { return lorentzian(a, f) }, Rate: rate, Exposure: exposure, Memory: 4 / a.Corner}
	sums := make([]float64, 4)
	lags := []int{0, 1, 3, 10}
	ends := 0.0
	for seed := range uint64(records) {
		x := SpectralSynthesis(samples, s, rand.NewPCG(seed, 77))
		for j, lag := range lags {
			for i := lag; i < samples; i++ {
				sums[j] += x[i] * x[i-lag]
			}
		}
		ends += x[0] * x[samples-1]
	}
	covariance := func(n int) float64 { return expected(a, rate, exposure, max(n, -n)) }
	for j, lag := range lags {
		pairs := samples - lag
		spread := 0.0
		for d := -pairs + 1; d < pairs; d++ {
			spread += (covariance(d)*covariance(d) + covariance(d+lag)*covariance(d-lag)) * float64(pairs-max(d, -d))
		}
		got, want := sums[j]/float64(records*pairs), covariance(lag)
		if sd := math.Sqrt(spread/records) / float64(pairs); !(math.Abs(got-want) <= limit*sd) {
			t.Errorf("lag %d: covariance %v, want %v within %v", lag, got, want, limit*sd)
		}
	}
	// The two ends of a record must not know that they were neighbours on no circle.
	if r := ends / records / covariance(0); !(math.Abs(r) <= limit/math.Sqrt(records)) {
		t.Errorf("correlation of the two ends = %v, want 0 within %v", r, limit/math.Sqrt(records))
	}
}

// polystyrene is a bead of 1 um in water at 25 °C: density 997.05 kg/m³ and viscosity
// 889.996774 uPa s (IAPWS SR6-08).
var polystyrene = Hydrodynamics{Radius: 0.5e-6, Viscosity: 889.996774e-6, Density: 997.0476, BeadDensity: 1050}

// Published form, absolute scale: fc = 500 Hz in bulk gives P(100) .. P(100k) below, in
// m²/Hz one-sided (Berg-Sorensen & Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594; recomputed).
func TestHydrodynamicDensityPublished(t *testing.T) {
	drag := 6 * math.Pi * polystyrene.Viscosity * polystyrene.Radius
	stiffness := 2 * math.Pi * drag * 500
	a := Axis{Corner: 500, Variance: medium.Boltzmann * 298.15 / stiffness}
	for _, row := range []struct{ f, want float64 }{
		{100, 1.93598798e-19}, {1000, 3.99719164e-20}, {10000, 4.53647319e-22}, {100000, 3.57109162e-24},
	} {
		// 1e-6: the density of water behind the printed values is known to seven digits.
		if got := polystyrene.spectrum(a)(row.f); !near(got, row.want, 1e-6) {
			t.Errorf("density(%v Hz) = %v, want %v (off by %.1g)", row.f, got, row.want, got/row.want-1)
		}
	}
}

// Near a wall, with the static factor that the first-order reflection itself has, the
// density is the published one; fc = 500 Hz is that of the Stokes drag (Berg-Sorensen &
// Flyvbjerg 2004, formula recomputed; its limits f -> 0 and h -> infinity checked).
func TestHydrodynamicWallPublished(t *testing.T) {
	for _, row := range []struct{ ratio, f, density float64 }{
		{2, 1000, 3.183848305319994e-20},
		{2, 100000, 3.821155773148431e-24},
		{10, 10000, 4.642050024495897e-22},
	} {
		h := polystyrene
		h.Height = row.ratio * h.Radius
		factor := 1 / (1 - 9.0/16/row.ratio)
		diffusion := medium.Boltzmann * 298.15 / (6 * math.Pi * h.Viscosity * h.Radius)
		a := Axis{Corner: 500 / factor, Variance: diffusion / (2 * math.Pi * 500), WallFactor: factor}
		// 1e-6: the density of water, as above.
		if got := h.spectrum(a)(row.f); !near(got, row.density, 1e-6) {
			t.Errorf("h/R = %v: density(%v Hz) = %v, want %v", row.ratio, row.f, got, row.density)
		}
	}
}

// Far below f_nu the density is the Lorentzian of the static drag, on every kind of axis.
func TestHydrodynamicDensityStaticLimit(t *testing.T) {
	h := polystyrene
	h.Height = 1e-6
	for _, a := range []Axis{{Corner: 300, Variance: 1, WallFactor: 1.382752}, {Corner: 300, Variance: 1, WallFactor: 2.125536, Perpendicular: true}} {
		for _, f := range []float64{0, 1e-3} { // sqrt(f/f_nu) = 3e-5 at the second
			if got, want := h.spectrum(a)(f), lorentzian(a, f); !near(got, want, 1e-4) {
				t.Errorf("%+v: density(%v Hz) = %v, want %v", a, f, got, want)
			}
		}
	}
}

// The shape of the wall's part reaches the density: at f_nu/100 the published form and the
// shape of bulk stray from the reaction on a point force by several per cent (see package drag).
func TestHydrodynamicShapes(t *testing.T) {
	h := polystyrene
	h.Height = 1e-6
	a := Axis{Corner: 300, Variance: 1, WallFactor: 1.382752}
	density := map[WallShape]float64{}
	for _, h.Shape = range []WallShape{"", PublishedShape, PointForceShape, BulkShape} {
		density[h.Shape] = h.spectrum(a)(11365)
	}
	if density[""] != density[PublishedShape] {
		t.Errorf("without a shape %v, want the published %v along a wall", density[""], density[PublishedShape])
	}
	low, middle, high := density[PublishedShape], density[PointForceShape], density[BulkShape]
	if !(math.Abs(low/middle-1) > 0.02 && math.Abs(high/middle-1) > 0.02 && math.Abs(low/high-1) > 0.02) {
		t.Errorf("densities %v, %v, %v: want them apart by more than 2 %%", low, middle, high)
	}
}

// The area under the density is the thermal variance, whatever the drag: exactly in bulk
// and across a wall; along a wall within what the first-order reflection leaves.
func TestHydrodynamicArea(t *testing.T) {
	near := polystyrene
	near.Height = 1e-6
	for _, row := range []struct {
		h         Hydrodynamics
		a         Axis
		tolerance float64
	}{
		{polystyrene, Axis{Corner: 500, Variance: 1}, 1e-5},
		{near, Axis{Corner: 500, Variance: 1, WallFactor: 2.125536, Perpendicular: true}, 1e-5}, // the rule below
		{near, Axis{Corner: 500, Variance: 1, WallFactor: 1.382752}, 5e-4},                      // the model itself
		{near, Axis{Corner: 5000, Variance: 1, WallFactor: 1.382752}, 5e-3},
	} {
		area := 0.0
		const steps = 40000 // midpoint rule in ln f from 1e-4 Hz to 1e12 Hz
		step := math.Log(1e16) / steps
		for i := range steps {
			f := 1e-4 * math.Exp((float64(i)+0.5)*step)
			area += row.h.spectrum(row.a)(f) * f * step
		}
		if !(math.Abs(area-1) <= row.tolerance) {
			t.Errorf("area under %+v of %+v = %v, want 1 within %v", row.a, row.h, area, row.tolerance)
		}
	}
}

// g = alpha² + (1-alpha²)/(1+(f/f3dB)²) at alpha = 0.3, f3dB = 8 kHz (Berg-Sorensen et al.,
// J. Appl. Phys. 93 (2003) 3167; recomputed).
func TestPhotodiodePublished(t *testing.T) {
	p := Photodiode{Alpha: 0.3, F3dB: 8000}
	for _, row := range []struct{ f, want float64 }{{1000, 0.98600}, {8000, 0.545}, {20000, 0.21552}} {
		if got := p.power(row.f); !(math.Abs(got-row.want) <= 5.1e-6) { // half of the last digit
			t.Errorf("power(%v Hz) = %v, want %v", row.f, got, row.want)
		}
	}
}

// A hydrodynamic record behind a photodiode: its periodogram, averaged over records and
// over a band, against the folded density; the sum of n exponential variables scatters by
// 1/sqrt(n). Leakage of a record of 8192 samples is below 1e-3 in these bands.
func TestRecordHydrodynamicSpectrum(t *testing.T) {
	h, p := polystyrene, Photodiode{Alpha: 0.3, F3dB: 8000}
	h.Height = 2e-6
	a := Axis{Corner: 1000, Variance: 1e-16, WallFactor: 1.165}
	truth := Truth{Samples: 8192, Rate: 65536, Axes: []Axis{a}, Hydrodynamics: &h, Photodiode: &p}
	s := Spectrum{Density: func(f float64) float64 { return h.spectrum(a)(f) * p.power(f) }, Rate: truth.Rate}
	folded := newAliases(s)
	bands := [][2]int{{20, 40}, {120, 140}, {1000, 1020}, {4000, 4020}}
	sums := make([]float64, len(bands))
	const records = 25
	for seed := range uint64(records) {
		x := Record(truth, seed)[0]
		for b, band := range bands {
			for k := band[0]; k < band[1]; k++ {
				sum := complex(0, 0)
				for i, v := range x {
					// A taper would be cleaner; sin² windows have a mean square of 3/8.
					w := math.Sin(math.Pi * (float64(i) + 0.5) / float64(len(x)))
					sum += complex(v*w*w, 0) * cmplx.Rect(1, -2*math.Pi*float64(i*k%len(x))/float64(len(x)))
				}
				f := float64(k) * truth.Rate / float64(len(x))
				power := real(sum)*real(sum) + imag(sum)*imag(sum)
				sums[b] += 2 * power / (truth.Rate * float64(len(x)) * 3 / 8) / folded.density(f)
			}
		}
	}
	for b, sum := range sums {
		n := float64(records * 20)
		// Neighbouring bins of the window are correlated: its equivalent width is 1.94 bins (35/18).
		if got, sd := sum/n, math.Sqrt(35.0/18/n); !(math.Abs(got-1) <= limit*sd) {
			t.Errorf("band %v: density over truth %v, want 1 within %v", bands[b], got, limit*sd)
		}
	}
}

// Records shorter than the relaxation time, from a circle that Memory makes long enough:
// variance and covariance between the ends as of an endless record. Both estimates, one product
// a record, scatter by at most sqrt 2 V/sqrt(records).
func TestSynthesisShortRecords(t *testing.T) {
	const records, samples = 800, 5
	a := Axis{Corner: 2, Variance: 1}
	truth := Truth{Samples: samples, Rate: 500, Axes: []Axis{a}, Photodiode: &Photodiode{Alpha: 1, F3dB: 1}} // alpha 1: no filter
	var square, product float64
	for seed := range uint64(records) {
		x := Record(truth, seed)[0]
		square += x[0] * x[0] / records
		product += x[0] * x[samples-1] / records
	}
	bound := limit * math.Sqrt(2.0/records)
	if want := math.Exp(-2 * math.Pi * 2 * 4 / 500); !(math.Abs(square-1) <= bound && math.Abs(product-want) <= bound) {
		t.Errorf("variance %v, covariance of the ends %v, want 1 and %v within %v", square, product, want, bound)
	}
}

// On the shortest circle the bin at zero frequency holds S(0)/(2 x 64 dt), a sixth of the
// variance here; the sum over the circle is sum_m R(64 m) = V(1 + 2 exp(-2 pi fc 64/fs)).
func TestSynthesisZeroFrequency(t *testing.T) {
	const records = 6000
	a := Axis{Corner: 0.03, Variance: 1}
	s := Spectrum{Density: func(f float64) float64 { return lorentzian(a, f) }, Rate: 1}
	folded := newAliases(s)
	square := 0.0
	for seed := range uint64(records) {
		x := folded.draw(2, newDeviates(seed, 0, motion))
		square += x[0] * x[0] / records
	}
	if bound := limit * math.Sqrt(2.0/records); !(math.Abs(square-1) <= bound) {
		t.Errorf("variance %v, want 1 within %v", square, bound)
	}
}
