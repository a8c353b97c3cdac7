package health

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
)

// TestStepInflation compares the closed sum with a direct one. The sum is geometric: rounding only.
func TestStepInflation(t *testing.T) {
	h := newNull(process, 1000, 1000)
	r := func(k int) float64 { return process.Autocovariance(k) }
	want := 0.0
	for k := -300; k <= 300; k++ {
		want += math.Pow((2*r(k)-r(k-1)-r(k+1))/(2*r(0)-2*r(1)), 4)
	}
	if got := h.stepInflation(); math.Abs(got-want) > 1e-12*want {
		t.Errorf("stepInflation() = %v, want %v (direct sum)", got, want)
	}
}

// TestGapsThinOut: when half of the samples are there, a sample has half as many
// neighbours, in the sums and in the spectral density.
func TestGapsThinOut(t *testing.T) {
	all, half := newNull(process, 1000, 1000), newNull(process, 500, 1000)
	for power := 1; power <= 4; power++ {
		got, want := half.inflation(power, 400)-1, (all.inflation(power, 400)-1)/2
		if math.Abs(got-want) > 1e-12 { // rounding
			t.Errorf("order %d: %v, want %v", power, got, want)
		}
	}
	if got, want := half.density(0)-half.r0, (all.density(0)-all.r0)/2; math.Abs(got-want) > 1e-12*want {
		t.Errorf("density: %v, want %v", got, want)
	}
}

// TestMeanLoss averages the corrected variance of short stretches of a slow process.
// 4000 stretches of ten relaxation times have a standard error of 0.44/sqrt(4000) = 0.7 %
// and the uncorrected variance would be 18 % low.
func TestMeanLoss(t *testing.T) {
	const length, count = 100, 4000
	p := process
	p.Corner, p.Noise, p.Exposure = 1/(2*math.Pi*10*p.Interval), 0, 0
	h := newNull(p, length*count, length*count)
	truth := simulate.Truth{Samples: length * count, Rate: 1 / p.Interval, Axes: []simulate.Axis{{Corner: p.Corner, Variance: 1}}}
	x := simulate.Record(truth, 4)[0]
	sum := 0.0
	for k := range count {
		s := summary{scale: 1}
		b, _, _ := s.read(x[k*length:(k+1)*length], 0, math.NaN(), 0)
		v := b.variance() / (1 - h.meanLoss(b.n).taken)
		sum += v / count
	}
	if math.Abs(sum-1) > 0.03 {
		t.Errorf("mean corrected variance %v, want 1", sum)
	}
}

// TestWanderSize adds a cosine of two half-periods and known rms to white samples: the
// excess is its mean square, within four standard deviations of the cross term,
// 4 x 2 x 0.5/sqrt(N) = 0.04. Without it the excess is that of 8 squared cosines over
// their expectation, with a standard deviation of sqrt(2 x 8)/N = 0.0004.
func TestWanderSize(t *testing.T) {
	const n = 10000
	x := white(n, 1, 6)
	clean := summarise(x)
	h := null{n: n, observed: 1, r0: 1, rho: 50}
	if _, p, excess := wander(points(clean.blocks, clean.length, n), h, clean.scale); p < 1e-3 || excess*clean.scale*clean.scale > 0.0004 {
		t.Errorf("white samples: p = %v, excess %v", p, excess)
	}
	for i := range x {
		x[i] += 0.5 * math.Sqrt2 * math.Cos(math.Pi*2*(float64(i)+0.5)/n)
	}
	s := summarise(x)
	if _, p, excess := wander(points(s.blocks, s.length, n), h, s.scale); p > 1e-10 || math.Abs(excess*s.scale*s.scale-0.25) > 0.04 {
		t.Errorf("waves of 0.5 rms: p = %v, excess %v, want 0.25", p, excess*s.scale*s.scale)
	}
}

// TestHeldPlace holds the bead from 0.7 on, then turns the record round: held until
// 0.3. The place is known to a 128th of the record and what the bead does by itself.
func TestHeldPlace(t *testing.T) {
	tr := trial{regime: camera, spoil: event(simulate.Stuck, 0.7, nil)}
	in, checks := tr.run(1, 2)
	length := float64(len(in.Axes[0].X)) / in.Rate
	near := func(name string, c Check, from, to float64) {
		t.Helper()
		if len(c.Ranges) != 1 || math.Abs(c.Ranges[0][0]-from*length) > 0.02*length || math.Abs(c.Ranges[0][1]-to*length) > 0.02*length {
			t.Errorf("%s: held during %v of %v s, want %v to %v", name, c.Ranges, length, from*length, to*length)
		}
	}
	near("forward", find(t, checks, "held-bead", "x"), 0.7, 1)
	slices.Reverse(in.Axes[0].X)
	near("backward", find(t, Run(in), "held-bead", "x"), 0, 0.3)
}

// TestQuieter halves the variance of white samples from the middle on: that is not a bead
// held fast, though both parts are as white as noise.
func TestQuieter(t *testing.T) {
	x := white(10000, rms, 3)
	for i := 5000; i < len(x); i++ {
		x[i] *= math.Sqrt(0.5)
	}
	checks := Run(Input{Axes: []Axis{axis("x", x)}, Rate: 1000})
	if c := find(t, checks, "held-bead", "x"); c.Level != OK {
		t.Errorf("half the variance: %s", c.Text)
	}
	if c := find(t, checks, "unsteady-motion", "x"); c.Level != Bad {
		t.Errorf("half the variance: %v %s, want bad", c.Level, c.Text)
	}
}

// TestDriftLevels: the level follows the size and its uncertainty. The slope of N white
// samples has the standard deviation sqrt(12/N) = 0.035 rms.
func TestDriftLevels(t *testing.T) {
	r := rand.New(rand.NewPCG(8, 8))
	for _, row := range []struct {
		drift float64 // rms
		want  Level
	}{{0, OK}, {0.1, OK}, {0.5, Doubtful}, {1, Doubtful}, {1.06, Doubtful}, {1.3, Bad}} {
		x := white(10000, rms, r.Uint64())
		for i := range x {
			x[i] += row.drift * rms * float64(i) / float64(len(x))
		}
		c := find(t, Run(Input{Axes: []Axis{axis("x", x)}, Rate: 1000}), "slow-drift", "x")
		if c.Level != row.want || math.Abs(c.Value-row.drift) > 4*0.035 {
			t.Errorf("drift of %v rms: %v %v, want %v", row.drift, c.Value, c.Level, row.want)
		}
	}
}

// TestWanderIsNoJump: one and a half slow waves over the record are a wander, and neither
// a jump nor a tone; a jump is neither a drift nor a wander.
func TestWanderIsNoJump(t *testing.T) {
	for _, r := range []regime{detector, camera} {
		for seed := range uint64(4) {
			duration := float64(r.truth(1).Samples) / r.rate()
			wave := trial{regime: r, spoil: eachAxis(func(a *simulate.Axis) {
				a.Lines = []simulate.Line{{Frequency: 1.5 / duration, Amplitude: 0.7 * rms, Phase: 1}}
			})}
			_, checks := wave.run(1, seed)
			// 0.7/sqrt(2) = 0.5 of the rms, less what a straight line takes up
			if c := find(t, checks, "slow-wander", "x"); c.Level != Bad {
				t.Errorf("%+v wave: wander %v %v", r, c.Level, c.Value)
			}
			for _, code := range []string{"jump", "tone", "lost-bead", "held-bead"} {
				if c := find(t, checks, code, "x"); c.Level != OK {
					t.Errorf("%+v wave: %s", r, c.Text)
				}
			}
			step := trial{regime: r, spoil: event(simulate.Jump, 0.35, func(e *simulate.Event) { e.Offset = []float64{rms} })}
			_, checks = step.run(1, seed)
			if c := find(t, checks, "jump", "x"); c.Level != Bad || math.Abs(c.Value-1) > 0.5 {
				t.Errorf("%+v step: jump %v %v", r, c.Level, c.Value)
			}
			if c := find(t, checks, "not-gaussian", "x"); c.Judged {
				t.Errorf("%+v step: the distribution was judged in spite of it", r)
			}
			for _, code := range []string{"slow-drift", "slow-wander", "unsteady-motion", "held-bead", "lost-bead"} {
				if c := find(t, checks, code, "x"); c.Level != OK {
					t.Errorf("%+v step: %s", r, c.Text)
				}
			}
		}
	}
}

// TestFreedom: for a slow process the low-frequency power is known to a variance of
// 4/(pi fc T), half of which information is given away: pi fc T/4 degrees of freedom,
// 23.6 at T fc = 30. The rest of c -> 1 at fc dt = 1e-3 is 1 %.
func TestFreedom(t *testing.T) {
	p := relaxation.Process{Corner: 1, Variance: 1, Interval: 1e-3}
	if got := newNull(p, 30000, 30000).freedom(); math.Abs(got-23.56) > 0.3 {
		t.Errorf("freedom() = %v, want 23.56", got)
	}
}

// TestMutual compares the sum over the product of two autocorrelations with a direct one:
// rounding only.
func TestMutual(t *testing.T) {
	other := process
	other.Corner, other.Noise = 30, 0
	a, b := newNull(process, 1000, 1000), newNull(other, 1000, 1000)
	want := 1.0
	for k := 1; k < 2000; k++ {
		want += 2 * process.Autocovariance(k) / process.Autocovariance(0) * other.Autocovariance(k) / other.Autocovariance(0)
	}
	if got := mutual(a, b); math.Abs(got-want) > 1e-12*want {
		t.Errorf("mutual() = %v, want %v (direct sum)", got, want)
	}
}

// TestEarlyJump: of a jump in the first tenth it is the beginning that is given up.
func TestEarlyJump(t *testing.T) {
	tr := trial{regime: detector, spoil: event(simulate.Jump, 0.06, func(e *simulate.Event) { e.Offset = []float64{3 * rms} })}
	in, checks := tr.run(1, 1)
	c := find(t, checks, "jump", "x")
	length := float64(len(in.Axes[0].X)) / in.Rate
	if len(c.Ranges) != 1 || c.Ranges[0][0] != 0 || math.Abs(c.Ranges[0][1]-0.06*length) > 0.01*length {
		t.Errorf("jump at 0.06 of %v s: %v %v", length, c.Level, c.Ranges)
	}
}
