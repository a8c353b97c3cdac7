package health

import (
	"math"
	"testing"

	"beadwell/calib/relaxation"
	"beadwell/calib/simulate"
	"beadwell/calib/transform"
)

// rms is the thermal rms of simulated beads [m].
const rms = 20e-9

// regime is a way of recording.
type regime struct {
	ratio    float64 // fc/fs
	periods  float64 // T fc
	exposure float64 // W fs
	noise    float64 // localisation noise over thermal rms
}

const corner = 100.0 // Hz

func (r regime) rate() float64 { return corner / r.ratio }

func (r regime) truth(axes int) simulate.Truth {
	t := simulate.Truth{
		Samples: int(math.Round(r.periods / r.ratio)), Rate: r.rate(), Exposure: r.exposure / r.rate(),
	}
	for i := range axes {
		t.Axes = append(t.Axes, simulate.Axis{
			Name: []string{"x", "y", "z"}[i], Corner: corner, Variance: rms * rms, Noise: r.noise * rms, Mean: 1e-6 * float64(i),
		})
	}
	return t
}

// fitted returns the input of the checks with a process fitted to each axis, the noise too.
func fitted(positions [][]float64, rate, exposure float64) Input {
	in := Input{Rate: rate, Exposure: exposure}
	for i, x := range positions {
		a := Axis{Name: []string{"x", "y", "z"}[i], X: x, GoodnessP: math.NaN()}
		a.Process, a.Known = fit(x, rate, exposure)
		in.Axes = append(in.Axes, a)
	}
	missing := 0
	for i := range positions[0] {
		all := true
		for _, x := range positions {
			all = all && math.IsNaN(x[i])
		}
		if all {
			missing++
		}
	}
	in.Missing = missing
	return in
}

// fit is the spectral fit as the calibration does it, in short.
func fit(x []float64, rate, exposure float64) (relaxation.Process, bool) {
	n := transform.GoodLength(len(x))
	y := make([]float64, n)
	gaps := 0
	l := lineOf(x[:n])
	for i := range y {
		y[i] = x[i] - l.at(float64(i)/float64(n)-0.5)
		if math.IsNaN(y[i]) {
			gaps++
			y[i] = 0
		}
	}
	plan, err := transform.NewPlan(n)
	if err != nil {
		return relaxation.Process{}, false
	}
	power := plan.Power(nil, y)
	scale := 0.0
	for _, v := range y {
		scale += v * v / float64(n-gaps)
	}
	if scale == 0 {
		return relaxation.Process{}, false
	}
	b := relaxation.NewBlocks(power, n, true, nil)
	var likelihood relaxation.Likelihood = relaxation.NewSpectral(b, y, exposure*rate, scale)
	if gaps > 0 || n <= 4096 {
		z := make([]float64, len(y))
		for i := range y {
			z[i] = x[i] - l.at(float64(i)/float64(n)-0.5)
		}
		e := relaxation.NewExact(z, relaxation.RemovedLine, true, exposure*rate, scale)
		e.StartFrom(b)
		likelihood = e
	}
	pr := relaxation.Problem{Likelihood: likelihood}
	m, err := pr.Maximise(pr.Start(0, true))
	if err != nil {
		return relaxation.Process{}, false
	}
	return relaxation.Process{
		Corner: math.Exp(m.At[0]) * rate, Variance: scale * math.Exp(m.At[1]), Noise: scale * m.At[2],
		Interval: 1 / rate, Exposure: exposure,
	}, true
}

func lineOf(x []float64) line {
	p := make([]point, 0, len(x))
	for i, v := range x {
		if !math.IsNaN(v) {
			p = append(p, point{t: float64(i)/float64(len(x)) - 0.5, n: 1, y: v})
		}
	}
	return fitLine(p)
}

// find returns the check of a code and axis.
func find(t *testing.T, checks []Check, code, axis string) Check {
	t.Helper()
	for _, c := range checks {
		if c.Code == code && c.Axis == axis {
			return c
		}
	}
	t.Fatalf("no check %q of axis %q", code, axis)
	return Check{}
}
