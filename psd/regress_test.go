package psd

import (
	"errors"
	"math"
	"math/rand/v2"
	"testing"
)

// swing is a sinusoid on a line, with or without missing samples.
func swing(n int, rate, hz, amplitude, phase float64, every int) []float64 {
	x := make([]float64, n)
	for i := range x {
		t := float64(i) / rate
		x[i] = 3e-6 + 2e-8*t + amplitude*math.Sin(2*math.Pi*hz*t+phase)
		if every > 0 && i%every == 0 {
			x[i] = math.NaN()
		}
	}
	return x
}

// Without noise the sinusoid comes back exactly, for periods that are whole or not, few or many, with samples missing.
func TestTakeSinusoid(t *testing.T) {
	const rate, amplitude, phase = 1000.0, 40e-9, 0.8
	for _, hz := range []float64{2.5, 2.9, 28.37, 333.3} {
		for _, every := range []int{0, 7} {
			r, err := Prepare(swing(1000, rate, hz, amplitude, phase, every), rate)
			if err != nil {
				t.Fatal(err)
			}
			s, err := r.TakeSinusoid(hz)
			if err != nil {
				t.Fatal(err)
			}
			// rounding of a mean of 3 um: 4e-22 m, times a condition number of at most 1e4
			if math.Abs(s.Amplitude/amplitude-1) > 1e-9 || math.Abs(math.Remainder(s.Phase-phase, 2*math.Pi)) > 1e-9 || r.MeanSquare() > 1e-30 {
				t.Errorf("%g Hz, gap %d: amplitude %.12g, phase %.12g, left %.2g", hz, every, s.Amplitude, s.Phase, r.MeanSquare())
			}
			if n := float64(r.Observed()); hz > 20 && math.Abs(s.Scatter*n/2-1) > 0.01 { // 2/n for many periods
				t.Errorf("%g Hz: scatter %.4g, want %.4g", hz, s.Scatter, 2/n)
			}
			if len(r.Lines) != 1 || r.Lines[0].Low >= hz || r.Lines[0].High <= hz {
				t.Errorf("%g Hz: lines %+v", hz, r.Lines)
			}
		}
	}
}

// The scatter of the coefficients in white noise is what the inverse matrix says: 400 records, mean square within four times sqrt(2/800).
func TestTakeSinusoidScatter(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 2))
	const records, amplitude = 400, 5.0
	sum := 0.0
	for range records {
		x := swing(300, 1000, 9.3, 0, 0, 0)
		for i := range x {
			x[i] = random.NormFloat64() + amplitude*math.Sin(2*math.Pi*9.3*float64(i)/1000)
		}
		r, err := Prepare(x, 1000)
		if err != nil {
			t.Fatal(err)
		}
		s, err := r.TakeSinusoid(9.3)
		if err != nil {
			t.Fatal(err)
		}
		a, b := s.Amplitude*math.Sin(s.Phase), s.Amplitude*math.Cos(s.Phase)-amplitude
		sum += (a*a + b*b) / (2 * s.Scatter * records)
	}
	if math.Abs(sum-1) > 4*math.Sqrt(2.0/(2*records)) {
		t.Errorf("mean square of z = %.3f, want 1", sum)
	}
}

// The frequency is found from one that is up to 0.4 periods off over the record.
func TestNearFrequency(t *testing.T) {
	for _, hz := range []float64{3.2, 28.37} {
		r, err := Prepare(swing(2000, 1000, hz, 40e-9, 0.8, 0), 1000)
		if err != nil {
			t.Fatal(err)
		}
		for _, off := range []float64{-0.4, 0, 0.25} { // periods over 2 s
			if got := r.NearFrequency(hz + off/2); math.Abs(got-hz) > 1e-6*hz { // four steps, each of which squares an error of 0.1
				t.Errorf("NearFrequency(%g) = %.9g, want %g", hz+off/2, got, hz)
			}
		}
		if got := r.Tallest(); math.Abs(got-hz) > 0.5 {
			t.Errorf("Tallest() = %g, want near %g", got, hz)
		}
	}
}

// What cannot be told apart is refused.
func TestTakeOutRefusals(t *testing.T) {
	r, err := Prepare(swing(100, 1000, 28, 1e-9, 0, 0), 1000)
	if err != nil {
		t.Fatal(err)
	}
	line := make([]float64, 100)
	for i := range line {
		line[i] = float64(i)
	}
	for name, shape := range map[string][]float64{"a line": line, "nothing": make([]float64, 100)} {
		if _, err := r.TakeOut(shape); !errors.Is(err, ErrShapes) {
			t.Errorf("%s: %v, want ErrShapes", name, err)
		}
	}
	if _, err := r.TakeOut(line[:50]); err == nil {
		t.Error("a shape of half the length passes")
	}
}
