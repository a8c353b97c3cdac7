package simulate

import (
	"math"
	"testing"
)

var twoAxes = Truth{Samples: 40000, Rate: 1000, Exposure: 5e-4, Axes: []Axis{
	{Name: "x", Corner: 60, Variance: 1e-16, Noise: 2e-9}, {Name: "y", Corner: 40, Variance: 2e-16, Noise: 1e-9, Mean: 1e-6}}}

func with(t Truth, change func(*Truth)) Truth {
	t.Axes = append([]Axis(nil), t.Axes...)
	change(&t)
	return t
}

func variance(x []float64) float64 {
	mean := 0.0
	for _, v := range x {
		mean += v / float64(len(x))
	}
	sum := 0.0
	for _, v := range x {
		sum += (v - mean) * (v - mean)
	}
	return sum / float64(len(x))
}

// A jump leaves the record before it and the motion after it as they were.
func TestJump(t *testing.T) {
	plain := Record(twoAxes, 4)
	jumped := Record(with(twoAxes, func(t *Truth) {
		t.Events = []Event{{Kind: Jump, Time: 10.0005, Offset: []float64{1e-7, -2e-7}}}
	}), 4)
	for axis, by := range []float64{1e-7, -2e-7} {
		for i := range plain[axis] {
			want := plain[axis][i]
			if i > 10000 { // the first sample that begins after 10.0005 s
				want += by
			}
			if !(math.Abs(jumped[axis][i]-want) <= 1e-21) { // rounding of 1e-6 m
				t.Fatalf("axis %d, sample %d: %v, want %v", axis, i, jumped[axis][i], want)
			}
		}
	}
}

// A second bead: stiffness x 0.5 and drag x 2 double the variance and divide the corner
// frequency by 4; the mean moves. Scatter of a variance: sqrt(2(1+c²)/(1-c²)/N) of it.
func TestSecondBead(t *testing.T) {
	x := Record(with(twoAxes, func(t *Truth) {
		t.Events = []Event{{Kind: SecondBead, Time: 20, Offset: []float64{2e-7, 0}, Stiffness: 0.5, Drag: 2}}
	}), 4)[0]
	// The bead cannot jump: its increments keep to 7 of their standard deviations.
	if step := x[20000] - x[19999]; !(math.Abs(step) <= 7*9e-9) {
		t.Errorf("the bead jumped by %v m", step)
	}
	after := Axis{Corner: 15, Variance: 2e-16, Noise: 2e-9}
	tail := x[20100:]
	c := math.Exp(-2 * math.Pi * after.Corner / 1000)
	sd := math.Sqrt(2 * (1 + c*c) / (1 - c*c) / float64(len(tail)))
	if got, want := variance(tail), expected(after, 1000, 5e-4, 0); !(math.Abs(got/want-1) <= limit*sd) {
		t.Errorf("variance after %v, want %v within %.3f of it", got, want, limit*sd)
	}
	mean := 0.0
	for _, v := range tail {
		mean += v / float64(len(tail))
	}
	lagged := 0.0
	for i := range tail[1:] {
		lagged += (tail[i] - mean) * (tail[i+1] - mean) / float64(len(tail)-1)
	}
	// The variance and this covariance err together: their difference, 3e-17, shows the corner frequency. The
	// difference is half the mean square of increments, which are nearly independent: sqrt(2/N), 1.5 for what correlation they have.
	difference := expected(after, 1000, 5e-4, 0) - expected(after, 1000, 5e-4, 1)
	if got := variance(tail) - lagged; !(math.Abs(got/difference-1) <= limit*1.5*math.Sqrt(2/float64(len(tail)))) {
		t.Errorf("variance less covariance at lag 1 after %v, want %v", got, difference)
	}
	if sd := math.Sqrt(2e-16 * (1 + c) / (1 - c) / float64(len(tail))); !(math.Abs(mean-2e-7) <= limit*sd) {
		t.Errorf("mean after %v m, want 2e-7 within %v", mean, limit*sd)
	}
}

// After an escape the bead diffuses with D = 2 pi fc V from where it was; stuck, it only
// shows the localisation noise.
func TestEscapeAndStuck(t *testing.T) {
	x := Record(with(twoAxes, func(t *Truth) { t.Events = []Event{{Kind: Escape, Time: 5}} }), 4)[0]
	sum := 0.0
	for i := 5001; i < len(x); i++ {
		sum += (x[i] - x[i-1]) * (x[i] - x[i-1])
	}
	n := float64(len(x) - 5001)
	want := 2*2*math.Pi*60*1e-16*(1e-3-5e-4/3) + 2*4e-18
	if got := sum / n; !(math.Abs(got/want-1) <= limit*1.1*math.Sqrt(2/n)) { // as in TestRecordFreeBead
		t.Errorf("mean-square displacement after the escape %v, want %v", got, want)
	}
	if step := math.Abs(x[5000] - x[4999]); step > 7*math.Sqrt(want) {
		t.Errorf("the bead jumped by %v m when it escaped", step)
	}
	x = Record(with(twoAxes, func(t *Truth) { t.Events = []Event{{Kind: Stuck, Time: 5}} }), 4)[0]
	if got := variance(x[5000:]); !(math.Abs(got/4e-18-1) <= limit*math.Sqrt(2.0/35000)) {
		t.Errorf("variance of the stuck bead %v, want 4e-18", got)
	}
	if first := x[5000] - x[4999]; !(math.Abs(first) <= 7*math.Sqrt(want)) {
		t.Errorf("the bead jumped by %v m when it stuck", first)
	}
}

// A fixed bead, or none: noise and lines alone.
func TestFixed(t *testing.T) {
	truth := Truth{Samples: 40000, Rate: 1000, Axes: []Axis{{Fixed: true, Noise: 3e-9, Mean: 1e-7}}}
	x := Record(truth, 1)[0]
	if got := variance(x); !(math.Abs(got/9e-18-1) <= limit*math.Sqrt(2.0/40000)) {
		t.Errorf("variance %v, want 9e-18", got)
	}
}

// A rotation mixes covariances as a rotation of the potential does: with angle p,
// Cov(x, y) = (Vx - Vy) sin p cos p. Scatter: at most sqrt((1+c²)/(1-c²)/N) V.
func TestRotation(t *testing.T) {
	truth := with(twoAxes, func(t *Truth) { t.Rotation, t.Exposure, t.Axes[1].Mean = 0.4, 0, 0 })
	r := Record(truth, 11)
	got := 0.0
	for i := range r[0] {
		got += r[0][i] * r[1][i] / float64(len(r[0]))
	}
	c := math.Exp(-2 * math.Pi * 40 / 1000)
	want := (1e-16 - 2e-16) * math.Sin(0.4) * math.Cos(0.4)
	if sd := 2e-16 * math.Sqrt((1+c*c)/(1-c*c)/40000); !(math.Abs(got-want) <= limit*sd) {
		t.Errorf("covariance %v, want %v within %v", got, want, limit*sd)
	}
	sum := variance(r[0]) + variance(r[1])
	if sd := 2e-16 * 2 * math.Sqrt((1+c*c)/(1-c*c)/40000); !(math.Abs(sum-3e-16-5e-18) <= limit*sd) {
		t.Errorf("sum of variances %v, want 3.05e-16 within %v", sum, limit*sd)
	}
}

// A leak adds a share of the other axis' motion, before noise and mean.
func TestLeak(t *testing.T) {
	clean := with(twoAxes, func(t *Truth) { t.Leaks = []Leak{{From: 0, Into: 1, Share: 0}} })
	leaky := with(twoAxes, func(t *Truth) { t.Leaks = []Leak{{From: 0, Into: 1, Share: 0.1}} })
	noiseless := with(clean, func(t *Truth) { t.Axes[0].Noise = 0 })
	a, b, source := Record(clean, 2), Record(leaky, 2), Record(noiseless, 2)[0]
	for i := range a[0] {
		if a[0][i] != b[0][i] || math.Abs(b[1][i]-a[1][i]-0.1*source[i]) > 1e-21 { // rounding of 1e-6 m
			t.Fatalf("sample %d: %v and %v, with a leak %v and %v", i, a[0][i], a[1][i], b[0][i], b[1][i])
		}
	}
}
