package psd

import (
	"math"
	"math/rand/v2"
	"testing"

	"beadwell/calib/relaxation"
)

// drawn returns the blocks of a record of n samples whose periodogram values are
// independent and exponential about a spectrum P/dt [m2] of the frequency in units of the rate.
func drawn(n int, seed uint64, spectrum func(phi float64) float64) relaxation.Blocks {
	random := rand.New(rand.NewPCG(seed, 1))
	power := make([]float64, n/2+1)
	for k := 1; k <= n/2; k++ {
		power[k] = float64(n) * spectrum(float64(k)/float64(n)) * random.ExpFloat64()
	}
	power[n/2] *= math.Pow(random.NormFloat64(), 2) / random.ExpFloat64()
	return relaxation.NewBlocks(power, n, false, nil)
}

func lorentzBlocks(n int, x float64) relaxation.Blocks {
	p := relaxation.Process{Corner: x, Variance: 1, Noise: 0.01, Interval: 1}
	return drawn(n, 7, p.Spectrum)
}

// The gradient against central differences, for every part of the model: drag, mass, exposure,
// aliases, leakage, photodiode, and the response profiled out.
func TestScoreGradient(t *testing.T) {
	const rate = 50000.0
	b := lorentzBlocks(4096, 0.01)
	plain := bead{radius: 2e-6, height: 5e-6, static: 1.285}.spectrum()
	diode := plain
	diode.Alpha, diode.F3dB = 0.3, 8000
	free := diode
	free.FitAlpha, free.FitF3dB = true, true
	for name, h := range map[string]Hydrodynamic{"zero": {}, "plain": plain, "diode": diode, "free": free} {
		for _, exposure := range []float64{0, 0.4 / rate, 1 / rate} {
			l := h.Form(rate, exposure)(b, 0.9)
			for _, p := range []relaxation.Parameters{{math.Log(0.011), 0.1, 0.01}, {math.Log(0.2), -0.3, 0.3}} {
				value, grad, _ := l.Score(p)
				if value != l.Value(p) {
					t.Errorf("%s: Score gives %.17g, Value %.17g", name, value, l.Value(p))
				}
				for a := range p {
					const h = 1e-4
					up, down := p, p
					up[a] += h
					down[a] -= h
					want := (l.Value(up) - l.Value(down)) / (2 * h)
					// h^2/6 times a third derivative of the order of the weight, 2048
					if math.Abs(grad[a]-want) > 1e-4*(1+math.Abs(want)) {
						t.Errorf("%s, exposure %g, at %v: slope %d = %g, want %g", name, exposure*rate, p, a, grad[a], want)
					}
				}
			}
		}
	}
}

// With constant drag the mean of a block is that of the exact mean periodogram.
func TestLeakage(t *testing.T) {
	const n = 512
	for _, share := range []float64{0, 0.6, 1} {
		for _, x := range []float64{0.0003, 0.01, 0.2} {
			p := relaxation.Process{Corner: x, Variance: 1, Interval: 1, Exposure: share}
			power := make([]float64, n/2+1)
			b := relaxation.NewBlocks(power, n, false, nil)
			w := likelihoodOf(Hydrodynamic{}, b, 1, share)
			e := w.expected(w.model, x, true)
			for i, f := range b.Frequency {
				if b.Bins[i] > 1 {
					break
				}
				k := int(math.Round(f * n))
				want := p.ExpectedPeriodogram(n, k)
				if relative(e.value[i], want) > 1e-10 { // rounding, where leakage cancels most of the spectrum
					t.Errorf("share %g, fc dt %g, k %d: %g, want %g", share, x, k, e.value[i], want)
				}
			}
		}
	}
}

// The jump x_0 - c x_{N-1} between far ends of a relaxation process has the mean square
// V (1 + c^2); by 1/(N |1-z|^2) it becomes a spectrum. Its slope by central differences.
func TestJump(t *testing.T) {
	const n, sigma, step = 100, 0.7, 1e-5
	at := func(phi float64) (float64, float64) {
		c := newClosed(math.Exp(phi), 0)
		return c.jump(c.gap+c.decay*sigma, c.dgap+c.ddecay*sigma, n)
	}
	for _, x := range []float64{1e-3, 0.03, 0.5} {
		decay := math.Exp(-2 * math.Pi * x)
		want := (1 + decay*decay) / (n * ((1-decay)*(1-decay) + decay*sigma))
		got, slope := at(math.Log(x))
		if relative(got, want) > 1e-13 { // rounding
			t.Errorf("fc dt %g: %g, want %g", x, got, want)
		}
		up, _ := at(math.Log(x) + step)
		down, _ := at(math.Log(x) - step)
		if want := (up - down) / (2 * step); math.Abs(slope-want) > 1e-9*got { // step^2, rounding/step
			t.Errorf("fc dt %g: slope %g, want %g", x, slope, want)
		}
	}
}

// Mean and variance of sigma over the blocks of Bias, by a sum over each.
func TestDesignBlocks(t *testing.T) {
	b := Design{Rate: 1000, Corner: 20}.blocks()
	low := math.Exp2(-16) // the power of two below 20/1000/1000
	growth := math.Pow(0.5/low, 1.0/biasBlocks)
	for _, i := range []int{100, 300, biasBlocks - 30} {
		from := low * math.Pow(growth, float64(i))
		const parts = 1000
		var sum, square float64
		for j := range parts {
			s := math.Sin(math.Pi * from * (1 + (growth-1)*(float64(j)+0.5)/parts))
			sum += 4 * s * s / parts
			square += 16 * s * s * s * s / parts
		}
		// to first order in the width, of 2.5 %
		if relative(b.Sigma[i], sum) > 1e-3 || relative(b.SigmaVar[i], square-sum*sum) > 1e-2 {
			t.Errorf("block %d: sigma %g with variance %g, want %g, %g", i, b.Sigma[i], b.SigmaVar[i], sum, square-sum*sum)
		}
	}
}

// The information against the sum over single frequencies, with numerical derivatives of
// Density: Whittle, Ark. Mat. 2 (1953) 423.
func TestInformation(t *testing.T) {
	const rate, n = 20000.0, 1 << 14
	h := bead{radius: 2e-6}.spectrum()
	power := make([]float64, n/2+1)
	b := relaxation.NewBlocks(power, n, false, nil)
	w := likelihoodOf(h, b, rate, 0)
	at := relaxation.Parameters{math.Log(0.02), math.Log(1.3), 0.05}
	for i, f := range b.Frequency {
		b.Power[i] = w.Density(at, f*rate) * rate / 2
	}
	_, _, info := w.Score(at)
	var want relaxation.Matrix
	const step = 1e-5
	for k := 1; k <= n/2; k++ {
		f := float64(k) / n * rate
		var d relaxation.Parameters
		for a := range d {
			up, down := at, at
			up[a] += step
			down[a] -= step
			d[a] = math.Log(w.Density(up, f)/w.Density(down, f)) / (2 * step)
		}
		weight := 1.0
		if 2*k == n {
			weight = 0.5
		}
		for i := range d {
			for j := range d {
				want[i][j] += weight * d[i] * d[j]
			}
		}
	}
	for i := range want {
		for j := range want {
			// leakage, left out of Density, is of relative order 1/(2 pi fc T) = 0.05 % and enters
			// squared; what is not known of the ends takes up to N/(2 pi fc T)^2 = 0.4 %
			if relative(info[i][j], want[i][j]) > 5e-3 {
				t.Errorf("information %d %d = %g, want %g", i, j, info[i][j], want[i][j])
			}
		}
	}
}

// A fit of constant drag to the exact spectrum: R = 0.5 um, fc = 500 Hz, bulk. The
// values were computed by an independent program from the formula of Berg-Sorensen and
// Flyvbjerg, Rev. Sci. Instrum. 75 (2004) 594, without aliasing: a rate of 40 MHz has none.
func TestBiasKnown(t *testing.T) {
	h := bead{radius: 0.5e-6}.spectrum()
	for _, r := range []struct{ high, corner, diffusion float64 }{{5e3, 0.962, 0.967}, {20e3, 0.914, 0.917}, {100e3, 0.809, 0.809}} {
		got, err := h.Bias(Design{Rate: 4e7, Corner: 500, Band: Range{High: r.high}})
		if err != nil {
			t.Fatal(err)
		}
		// three digits are given
		if math.Abs(1+got.Corner-r.corner) > 1e-3 || math.Abs(1+got.Diffusion-r.diffusion) > 1e-3 {
			t.Errorf("to %g Hz: fc %.4f, D %.4f, want %g, %g", r.high, 1+got.Corner, 1+got.Diffusion, r.corner, r.diffusion)
		}
		if math.Abs((1+got.Corner)*(1+got.Variance)/(1+got.Diffusion)-1) > 1e-12 {
			t.Errorf("D is not 2 pi fc V in %+v", got)
		}
	}
	for _, noiseFree := range []bool{false, true} {
		got, err := Hydrodynamic{}.Bias(Design{Rate: 1000, Exposure: 5e-4, Corner: 100, Noise: 0.02, NoiseFree: noiseFree})
		// the search ends within 1e-10/(weight of 5e8): square root of it
		if err != nil || got.Size() > 1e-8 {
			t.Errorf("constant drag has the bias %+v, %v", got, err)
		}
	}
	if _, err := (Hydrodynamic{Alpha: 2}).Bias(Design{Rate: 1000, Corner: 10}); err == nil {
		t.Error("Bias took an alpha of 2")
	}
}

func BenchmarkHydrodynamicScore(b *testing.B) {
	blocks := lorentzBlocks(1<<20, 0.01)
	b.Logf("%d blocks", len(blocks.Sigma))
	l := bead{radius: 1e-6}.spectrum().Form(100e3, 0)(blocks, 1)
	for b.Loop() {
		l.Score(relaxation.Parameters{math.Log(0.01), 0, 0.01})
	}
}

func BenchmarkHydrodynamicForm(b *testing.B) {
	blocks := lorentzBlocks(1<<20, 0.01)
	h := bead{radius: 1e-6, height: 3e-6, static: 1.2, perpendicular: true}.spectrum()
	for b.Loop() {
		h.Form(100e3, 0)(blocks, 1)
	}
}

func BenchmarkHydrodynamicFreeDiode(b *testing.B) {
	blocks := lorentzBlocks(1<<16, 0.01)
	h := bead{radius: 1e-6}.spectrum()
	h.FitAlpha, h.FitF3dB = true, true
	l := h.Form(100e3, 0)(blocks, 1)
	for b.Loop() {
		l.Score(relaxation.Parameters{math.Log(0.01), 0, 0.01})
	}
}

// Records of one drag share a lattice, those of another drag or other frequencies have their own, and
// what comes out is the same to the last bit.
func TestLatticesAreShared(t *testing.T) {
	b := Design{Rate: 50e3, Corner: 800}.blocks()
	h := Hydrodynamic{Drag: func(f float64) complex128 { return complex(1, -f/1e6) }, DragKey: "a", MassCorner: 1e6}
	first := h.lattice(b, 50e3, 0)
	if h.lattice(b, 50e3, 0) != first {
		t.Error("the same drag at the same frequencies has two lattices")
	}
	other := h
	other.DragKey, other.Drag = "b", func(f float64) complex128 { return complex(1, -f/1e5) }
	narrow := Design{Rate: 50e3, Corner: 800, Band: Range{Low: 10, High: 5e3}}.blocks()
	for what, l := range map[string]*lattice{"another drag": other.lattice(b, 50e3, 0), "another exposure": h.lattice(b, 50e3, 1e-5), "other blocks": h.lattice(narrow, 50e3, 0)} {
		if l == first {
			t.Errorf("%s has the lattice of the first", what)
		}
	}
	fresh := h
	fresh.DragKey = nil
	p := relaxation.Parameters{math.Log(0.016), 0, 0.01}
	if got, want := h.Form(50e3, 0)(b, 1).Value(p), fresh.Form(50e3, 0)(b, 1).Value(p); got != want {
		t.Errorf("log-likelihood %v on a shared lattice, %v on a fresh one", got, want)
	}
}
