package relaxation

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"
)

// relativeGap is |got - want| in units of want.
func relativeGap(got, want float64) float64 { return math.Abs(got-want) / math.Abs(want) }

// Spectra of a process of unit variance, fc = 300 Hz, sampled at 2 kHz. The first four:
// Berg-Sorensen and Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594, section on aliasing,
// recomputed by an explicit alias sum; the others recomputed from the ARMA(1,1) form.
func TestSpectrumValues(t *testing.T) {
	clean := Process{Corner: 300, Variance: 1, Interval: 5e-4}
	full := Process{Corner: 300, Variance: 1, Interval: 5e-4, Exposure: 5e-4, Noise: 0.04}
	half := Process{Corner: 300, Variance: 1, Interval: 5e-4, Exposure: 2.5e-4, Noise: 0.04}
	for _, c := range []struct {
		p       Process
		f, want float64
	}{
		{clean, 0, 0.0011384340916776603},
		{clean, 100, 0.0010326935823591408},
		{clean, 500, 0.0003681792997582135},
		{clean, 1000, 0.00021959988885398362},
		{full, 0, 0.0010810329539459684},
		{full, 250, 0.0006155138531511063},
		{full, 1000, 9.21387021054606e-05},
		{half, 0, 0.0011002414646163383},
		{half, 250, 0.000659639097917062},
		{half, 1000, 0.00016427740421092103},
	} {
		// the values carry 16 digits; the cancellation in S - B costs two
		if got := c.p.Spectrum(c.f); relativeGap(got, c.want) > 1e-13 {
			t.Errorf("%+v: Spectrum(%g) = %.17g, want %.17g", c.p, c.f, got, c.want)
		}
	}
}

// aliasSum adds up the continuous spectrum V fc/(pi (fc^2 + f^2)) times the blur
// (sin(pi f W)/(pi f W))^2 at f + m/dt; without blur what is beyond the sum is its integral, to
// third order in 1/m; with blur it is below 1e-14.
func aliasSum(p Process, f float64) float64 {
	const reach = 20000
	term := func(m int) float64 {
		g := f + float64(m)/p.Interval
		s := p.Variance * p.Corner / (math.Pi * (p.Corner*p.Corner + g*g))
		if y := math.Pi * g * p.Exposure; y != 0 {
			s *= math.Sin(y) / y * math.Sin(y) / y
		}
		return s
	}
	sum := 0.0
	if p.Exposure == 0 {
		for _, side := range []float64{f, -f} {
			edge := side + (reach+0.5)/p.Interval
			sum += p.Variance / math.Pi * math.Atan(p.Corner/edge) * p.Interval
		}
	}
	for m := reach; m > 0; m-- {
		sum += term(m) + term(-m)
	}
	return sum + term(0) + p.Noise*p.Interval
}

// The spectrum is the sinc^2-weighted alias sum. Tolerance: 4e4 terms added up from the
// small end keep a rounding error of some 1e-14; S - B cancels by up to 20 at fc/fs = 1.
func TestSpectrumIsAliasSum(t *testing.T) {
	for _, corner := range []float64{0.001, 0.02, 0.4, 1} {
		for _, exposure := range []float64{0, 0.25, 0.5, 1} {
			for _, noise := range []float64{0, 0.04} {
				p := Process{Corner: corner, Variance: 1.3, Noise: noise, Interval: 1, Exposure: exposure}
				for _, f := range []float64{0, 1e-3, 0.1, 0.37, 0.5} {
					got, want := p.Spectrum(f), aliasSum(p, f)
					if relativeGap(got, want) > 1e-12 {
						t.Errorf("%+v: Spectrum(%g) = %.16g, want %.16g (alias sum), relative gap %.1e", p, f, got, want, relativeGap(got, want))
					}
				}
			}
		}
	}
}

// The autocovariance is the double average of V exp(-2 pi fc |t|) over two exposures:
// V int (W-|u|)/W^2 exp(-2 pi fc |n dt + u|) du, u from -W to W. Gauss-Legendre with
// 40 points on either side of the kink is exact to rounding for these smooth integrands.
func TestAutocovarianceIsAverage(t *testing.T) {
	for _, corner := range []float64{1e-5, 0.003, 0.1, 0.5, 1} {
		for _, exposure := range []float64{0.05, 0.5, 1} {
			p := Process{Corner: corner, Variance: 0.7, Noise: 0.2, Interval: 1, Exposure: exposure}
			for _, n := range []int{0, 1, 2, 5} {
				f := func(u float64) float64 {
					return p.Variance * (exposure - math.Abs(u)) / (exposure * exposure) * math.Exp(-2*math.Pi*corner*math.Abs(float64(n)+u))
				}
				want := quad.Fixed(f, -exposure, 0, 40, nil, 0) + quad.Fixed(f, 0, exposure, 40, nil, 0)
				if n == 0 {
					want += p.Noise
				}
				if got := p.Autocovariance(n); relativeGap(got, want) > 1e-13 {
					t.Errorf("%+v: Autocovariance(%d) = %.16g, want %.16g (integral)", p, n, got, want)
				}
				if p.Autocovariance(-n) != p.Autocovariance(n) {
					t.Errorf("Autocovariance(%d) differs from that of %d", -n, n)
				}
			}
		}
	}
}

// Savin and Doyle, Biophys. J. 88 (2005) 623; Wong and Halvorsen, Opt. Express 14 (2006)
// 12517, Eq. 7; recomputed.
func TestBlurValues(t *testing.T) {
	for _, c := range []struct{ a, s, b float64 }{
		{0, 1, 1},
		{0.01, 0.9966749833610715, 1.0000083333611114},
		{0.1, 0.967483607191916, 1.00083361116072},
		{0.5, 0.8522452777010674, 1.0210077216510463},
		{1, 0.7357588823428847, 1.0861612696304876},
		{2, 0.5676676416183064, 1.3810978455418155},
		{5, 0.32053903575992687, 5.856795881983027},
		{10, 0.18000090799859525, 220.24465840206642},
	} {
		s, _ := BlurVariance(c.a)
		b, _ := BlurCovariance(c.a)
		if relativeGap(s, c.s) > 1e-13 || relativeGap(b, c.b) > 1e-13 { // a rounding of the terms 2/a and 2/a^2
			t.Errorf("a = %g: S, B = %.16g, %.16g, want %.16g, %.16g", c.a, s, b, c.s, c.b)
		}
	}
}

// The derivatives of the blur factors against central differences, on both sides of the
// change from series to closed form. A step h leaves h^2/6 of the third derivative and
// 1e-16/h of rounding: 1e-9 for h = 1e-5 a, with room for the cancellation in S near a = 0.05.
func TestBlurDerivatives(t *testing.T) {
	for _, a := range []float64{1e-3, 0.049, 0.0501, 0.06, 0.061, 0.3, 1, 3, 6.3} {
		h := 1e-4 * a
		slope := func(f func(float64) (float64, float64)) float64 {
			up, _ := f(a + h)
			down, _ := f(a - h)
			return (up - down) / (2 * h)
		}
		_, ds := BlurVariance(a)
		_, db := BlurCovariance(a)
		if want := slope(BlurVariance); math.Abs(ds-want) > 1e-6*math.Abs(want) {
			t.Errorf("a = %g: dS/da = %.10g, want %.10g (difference)", a, ds, want)
		}
		if want := slope(BlurCovariance); math.Abs(db-want) > 1e-6*math.Abs(want)+1e-9 {
			t.Errorf("a = %g: dB/da = %.10g, want %.10g (difference)", a, db, want)
		}
	}
	if _, ds := BlurVariance(0); ds != -1.0/3 { // S = 1 - a/3 + ...
		t.Errorf("dS/da at 0 = %g, want -1/3", ds)
	}
}

// Mean-square displacements of unit variance, fc = 300 Hz, 2 kHz, noise 0.04; recomputed.
func TestMSDValues(t *testing.T) {
	for _, c := range []struct {
		exposure float64
		lag      int
		want     float64
	}{
		{5e-4, 1, 0.736931294232378},
		{5e-4, 2, 1.24884978048618},
		{5e-4, 5, 1.5563394810539781},
		{5e-4, 20, 1.5756759802526767},
		{2.5e-4, 1, 1.0057688903457773},
		{2.5e-4, 2, 1.490287132917158},
		{2.5e-4, 5, 1.7813185633665076},
		{2.5e-4, 20, 1.7996200837468272},
	} {
		p := Process{Corner: 300, Variance: 1, Noise: 0.04, Interval: 5e-4, Exposure: c.exposure}
		if got := p.MSD(c.lag); relativeGap(got, c.want) > 1e-13 {
			t.Errorf("exposure %g: MSD(%d) = %.16g, want %.16g", c.exposure, c.lag, got, c.want)
		}
	}
	if got := (Process{Corner: 300, Variance: 1, Noise: 0.04, Interval: 5e-4}).MSD(0); got != 0 {
		t.Errorf("MSD(0) = %g, want 0", got)
	}
}

// A bead that hardly feels the trap diffuses: MSD = 2 D (t - W/3) + 2 q, D = 2 pi fc V
// (Savin and Doyle 2005). The relative deviation is of first order in 2 pi fc t.
func TestMSDOfFreeBead(t *testing.T) {
	const diffusion = 0.8
	p := Process{Corner: 1e-7, Interval: 1, Exposure: 0.6, Noise: 0.3}
	p.Variance = diffusion / (2 * math.Pi * p.Corner)
	for _, n := range []int{1, 3, 10} {
		want := 2*diffusion*(float64(n)-0.2) + 0.6
		if got := p.MSD(n); relativeGap(got, want) > 2*math.Pi*p.Corner*float64(n) {
			t.Errorf("MSD(%d) = %.12g, want %.12g", n, got, want)
		}
	}
}

func TestMSDIsTwiceAutocovarianceGap(t *testing.T) {
	for i, p := range processes {
		for _, n := range []int{1, 2, 7, 50, -7} {
			want := 2 * (p.Autocovariance(0) - p.Autocovariance(n))
			if got := p.MSD(n); math.Abs(got-want) > 1e-14*p.Autocovariance(0)*20 { // B is up to 13 at fc/fs = 1
				t.Errorf("process %d: MSD(%d) = %.16g, want %.16g", i, n, got, want)
			}
			q := p
			const h = 1e-5
			q.Corner = p.Corner * math.Exp(h)
			up := q.MSD(n)
			q.Corner = p.Corner * math.Exp(-h)
			slope := (up - q.MSD(n)) / (2 * h)
			// rounding 1e-16 x 13 / 1e-5 and a third derivative of h^2
			if got := p.MSDSlope(n); math.Abs(got-slope) > 1e-8*p.Variance {
				t.Errorf("process %d: MSDSlope(%d) = %.10g, want %.10g (difference)", i, n, got, slope)
			}
		}
	}
}

// Means of the periodogram of 256 samples of unit variance, fc = 300 Hz, 2 kHz; recomputed.
func TestExpectedPeriodogramValues(t *testing.T) {
	p := Process{Corner: 300, Variance: 1, Interval: 5e-4}
	for _, c := range []struct {
		k    int
		want float64
	}{{1, 0.0011336401082215407}, {10, 0.001067986338185896}, {64, 0.00036907339353344426}, {128, 0.0002203880759196684}} {
		if got := p.ExpectedPeriodogram(256, c.k); relativeGap(got, c.want) > 1e-13 {
			t.Errorf("ExpectedPeriodogram(256, %d) = %.16g, want %.16g", c.k, got, c.want)
		}
	}
}

// The mean periodogram is (dt/N) sum_ij r(i-j) cos(2 pi k (i-j)/N).
func TestExpectedPeriodogramIsDoubleSum(t *testing.T) {
	const n = 50
	for i, p := range processes {
		p.Interval = 0.25
		p.Corner, p.Exposure = p.Corner/0.25, p.Exposure*0.25
		for _, k := range []int{0, 1, 7, 25} {
			want := p.Autocovariance(0)
			for d := 1; d < n; d++ {
				want += 2 * (1 - float64(d)/n) * p.Autocovariance(d) * math.Cos(2*math.Pi*float64(k*d)/n)
			}
			want *= p.Interval
			if got := p.ExpectedPeriodogram(n, k); relativeGap(got, want) > 1e-12 { // 50 terms, cancelling by up to 100
				t.Errorf("process %d: ExpectedPeriodogram(%d, %d) = %.15g, want %.15g (double sum)", i, n, k, got, want)
			}
		}
	}
}

// Absolute scale: the spectrum integrates to the recorded variance, and the plateau is the
// textbook one. Worked case: R = 0.5 um, h = 5 um, 298.15 K, fc = 500 Hz gives rms
// 12.142480 nm and a one-sided plateau of D/(pi^2 fc^2) = 1.877262e-19 m2/Hz (recomputed).
func TestSpectrumScale(t *testing.T) {
	for i, p := range processes {
		const n = 4096 // the trapezoidal rule over a whole period converges as c^n
		sum := 0.0
		for k := range n {
			sum += p.Spectrum(float64(k)/n) / n
		}
		if relativeGap(sum, p.RecordedVariance()) > 1e-12 {
			t.Errorf("process %d: the spectrum integrates to %.15g, want %.15g", i, sum, p.RecordedVariance())
		}
	}
	p := Process{Corner: 500, Variance: 1.2142479691480684e-8 * 1.2142479691480684e-8, Interval: 1e-9}
	// at 1 GHz the alias part is (pi fc/fs)^2/3, far below the seven digits given
	if got := 2 * p.Spectrum(0); relativeGap(got, 1.87726200453832e-19) > 1e-7 {
		t.Errorf("one-sided plateau = %.9g m2/Hz, want 1.877262e-19", got)
	}
}

// Innovation of the ARMA(1,1) form, x_t = c x_{t-1} + e_t - theta e_{t-1}, of unit
// variance at fc = 300 Hz, 2 kHz, noise 0.04; recomputed. The filter's memory is theta.
func TestStationaryFilterIsARMA(t *testing.T) {
	for _, c := range []struct{ exposure, theta, innovation float64 }{
		{1, -0.201402442526456, 0.5579996874819491},
		{0.5, -0.06394429972283068, 0.7241395497637984},
	} {
		sh := newShape(300*5e-4, c.exposure)
		f := stationary(sh.c, sh.pole/(1-sh.c*sh.c), sh.level+0.04)
		if !f.ok || relativeGap(f.memory, c.theta) > 1e-12 || relativeGap(f.innovation, c.innovation) > 1e-12 {
			t.Errorf("exposure %g: theta, innovation = %.14g, %.14g, want %.14g, %.14g", c.exposure, f.memory, f.innovation, c.theta, c.innovation)
		}
	}
}

// What is left of the spectrum without its floor is the spectrum of an unblurred, noise-free bead times B.
func TestFloor(t *testing.T) {
	for i, p := range processes {
		bare := Process{Corner: p.Corner, Variance: p.Variance, Interval: p.Interval}
		b, _ := BlurCovariance(2 * math.Pi * p.Corner * p.Exposure)
		for _, f := range []float64{0, 0.1, 0.5} {
			want := p.Spectrum(f)/p.Interval - b*bare.Spectrum(f)/p.Interval
			if got := p.Floor(); math.Abs(got-want) > 1e-13*(b*p.Variance*100) { // the spectrum is up to 100 V at fc/fs = 0.02
				t.Errorf("process %d: Floor = %.14g, want %.14g at f = %g", i, got, want, f)
			}
		}
	}
}
