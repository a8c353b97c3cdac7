package relaxation

import (
	"errors"
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
)

// parabola is a log-likelihood -(p-at)' F (p-at)/2, for which everything is known.
type parabola struct {
	at Parameters
	f  Matrix
}

func (parabola) Scale() float64 { return 1 }
func (q parabola) Value(p Parameters) float64 {
	v, _, _ := q.Score(p)
	return v
}
func (q parabola) Score(p Parameters) (float64, Parameters, Matrix) {
	var g Parameters
	v := 0.0
	for a := range g {
		for b := range g {
			g[a] -= q.f[a][b] * (p[b] - q.at[b])
		}
	}
	for a := range g {
		v += g[a] * (p[a] - q.at[a]) / 2
	}
	return v, g, q.f
}
func (q parabola) Start(float64, bool) Parameters { return Parameters{} }

var bowl = parabola{at: Parameters{-3, 0.4, 0.1}, f: Matrix{{40, -25, 10}, {-25, 60, 5}, {10, 5, 300}}}

// inverse of a matrix over the given parameters, zero elsewhere.
func inverse(t *testing.T, f Matrix, free ...int) Matrix {
	t.Helper()
	a := mat.NewDense(len(free), len(free), nil)
	for i, p := range free {
		for j, q := range free {
			a.Set(i, j, f[p][q])
		}
	}
	var inv mat.Dense
	if err := inv.Inverse(a); err != nil {
		t.Fatal(err)
	}
	var out Matrix
	for i, p := range free {
		for j, q := range free {
			out[p][q] = inv.At(i, j)
		}
	}
	return out
}

func sameMatrix(t *testing.T, what string, got, want Matrix) {
	t.Helper()
	for a := range got {
		for b := range got {
			if math.Abs(got[a][b]-want[a][b]) > 1e-12*math.Sqrt(want[a][a]*want[b][b])+1e-300 {
				t.Errorf("%s[%d][%d] = %.15g, want %.15g", what, a, b, got[a][b], want[a][b])
			}
		}
	}
}

// A parabola has its maximum at its centre, the inverse of its matrix as covariance, and normal
// intervals.
func TestProblemOfParabola(t *testing.T) {
	pr := Problem{Likelihood: bowl}
	m, err := pr.Maximise(Parameters{})
	if err != nil || !m.Converged {
		t.Fatal(err)
	}
	total, data, err := pr.Covariance(m.Information)
	if err != nil {
		t.Fatal(err)
	}
	want := inverse(t, bowl.f, 0, 1, 2)
	sameMatrix(t, "total", total, want)
	sameMatrix(t, "data", data, want)
	for k := range m.At { // settled leaves sqrt(2e-10) standard errors
		if gap := math.Abs(m.At[k]-bowl.at[k]) / math.Sqrt(want[k][k]); gap > 2e-5 {
			t.Errorf("parameter %d = %.9g, want %.9g", k, m.At[k], bowl.at[k])
		}
	}
	for _, w := range []Parameters{{1, 0, 0}, {0, 1, 0}, {1, 1, 0}, {0.5, -1, 2}} {
		sd := math.Sqrt(total.Form(w, w))
		got, normal := pr.Profile(m, w, sd), Normal(sd)
		for _, c := range []struct{ got, want float64 }{
			{got.Low68, normal.Low68}, {got.High68, normal.High68}, {got.Low95, normal.Low95}, {got.High95, normal.High95},
		} {
			if relativeGap(c.got, c.want) > 1e-4 { // the position of the maximum, 2e-5 standard errors
				t.Errorf("interval of %v: offset %.9g, want %.9g", w, c.got, c.want)
			}
		}
		ratio, at, err := pr.Ratio(m, w, w.dot(m.At)+1.7*sd)
		if err != nil || math.Abs(ratio-1.7*1.7) > 1e-3 {
			t.Errorf("likelihood ratio of %v at 1.7 standard errors = %.6f (%v), want 2.89", w, ratio, err)
		}
		if got := w.dot(at.At) - w.dot(m.At); math.Abs(got-1.7*sd) > 1e-9 {
			t.Errorf("constrained maximum at %.9g, want %.9g", got, 1.7*sd)
		}
	}
}

// Directions hold the other parameters where they are; priors add their precision, and the
// part of the covariance that is due to the data is C F C.
func TestProblemWithPriorsAndDirections(t *testing.T) {
	pr := Problem{Likelihood: bowl, Directions: []Parameters{{1, 0, 0}, {0, 1, 0}}}
	start := Parameters{0, 0, 0.3}
	m, err := pr.Maximise(start)
	if err != nil {
		t.Fatal(err)
	}
	if m.At[2] != start[2] {
		t.Errorf("parameter 2 moved from %g to %g", start[2], m.At[2])
	}
	total, _, err := pr.Covariance(m.Information)
	if err != nil {
		t.Fatal(err)
	}
	sameMatrix(t, "total", total, inverse(t, bowl.f, 0, 1))

	w := Parameters{1, 1, 0}
	pr = Problem{Likelihood: bowl, Priors: []Prior{{Weights: w, Mean: -2, SD: 0.05}}}
	if m, err = pr.Maximise(Parameters{}); err != nil {
		t.Fatal(err)
	}
	z := (w.dot(m.At) + 2) / 0.05
	want := bowl.Value(m.At) - z*z/2
	if v := pr.Value(m.At); math.Abs(v-want) > 1e-12*math.Abs(want) || math.Abs(m.Value-want) > 1e-12*math.Abs(want) {
		t.Errorf("value with a prior = %.15g at the maximum, %.15g by the search, want %.15g", v, m.Value, want)
	}
	var precise Matrix
	shift := Parameters{}
	for a := range precise {
		for b := range precise {
			precise[a][b] = bowl.f[a][b] + w[a]*w[b]/(0.05*0.05)
		}
		shift[a] = w[a] * (-2 - w.dot(bowl.at)) / (0.05 * 0.05)
	}
	c := inverse(t, precise, 0, 1, 2)
	for k := range m.At {
		want := bowl.at[k]
		for a := range shift {
			want += c[k][a] * shift[a]
		}
		if math.Abs(m.At[k]-want) > 2e-5*math.Sqrt(c[k][k]) {
			t.Errorf("with a prior, parameter %d = %.9g, want %.9g", k, m.At[k], want)
		}
	}
	total, data, err := pr.Covariance(m.Information)
	if err != nil {
		t.Fatal(err)
	}
	sameMatrix(t, "total", total, c)
	var cfc Matrix
	for a := range c {
		for b := range c {
			for i := range c {
				for j := range c {
					cfc[a][b] += c[a][i] * bowl.f[i][j] * c[j][b]
				}
			}
		}
	}
	sameMatrix(t, "data", data, cfc)
}

func TestProblemWithoutMaximum(t *testing.T) {
	flat := bowl
	flat.f = Matrix{{1, 1, 0}, {1, 1, 0}, {0, 0, 1}}
	if _, _, err := (Problem{Likelihood: flat}).Covariance(flat.f); !errors.Is(err, ErrNoMaximum) {
		t.Errorf("covariance of a ridge: error %v, want %v", err, ErrNoMaximum)
	}
	rising := make([]float64, 40) // a record that never turns round has no relaxation
	for i := range rising {
		rising[i] = float64(i)
	}
	pr := Problem{Likelihood: NewExact(rising, RemovedMean, true, 0, 1)}
	if m, err := pr.Maximise(Parameters{math.NaN(), 0, 0}); err == nil {
		t.Errorf("search from NaN ended at %v, want an error", m.At)
	}
	if v := pr.Likelihood.Value(Parameters{2, 0, 0}); !math.IsInf(v, -1) { // fc/fs = 7
		t.Errorf("log-likelihood outside the domain = %g, want -Inf", v)
	}
}

// The ends of the profile intervals of a real record are where twice the log-likelihood has
// fallen by the squared quantile; the search settles within 2e-3 of the quantile.
func TestProfileOfRecord(t *testing.T) {
	p := processes[2]
	x := record(p, 400, 77)
	pr := Problem{Likelihood: NewExact(x, RemovedLine, true, p.Exposure, 1), Directions: []Parameters{{1, 0, 0}, {0, 1, 0}}}
	m, err := pr.Maximise(pr.Start(0, false))
	if err != nil {
		t.Fatal(err)
	}
	total, _, err := pr.Covariance(m.Information)
	if err != nil {
		t.Fatal(err)
	}
	for _, w := range []Parameters{{1, 0, 0}, {0, 1, 0}} {
		sd := math.Sqrt(total.Form(w, w))
		o := pr.Profile(m, w, sd)
		for _, c := range []struct{ offset, z float64 }{{-o.Low95, z95}, {o.High95, z95}, {-o.Low68, 1}, {o.High68, 1}} {
			ratio, _, err := pr.Ratio(m, w, w.dot(m.At)+c.offset)
			if err != nil || math.Abs(math.Sqrt(ratio)-c.z) > 5e-3 {
				t.Errorf("weights %v, offset %.4f: root of the likelihood ratio = %.5f (%v), want %.5f", w, c.offset, math.Sqrt(ratio), err, c.z)
			}
		}
		// a variance estimate is skewed to the right in its logarithm too
		if w[1] == 1 && !(o.High95 > o.Low95) {
			t.Errorf("95 %% offsets of ln V: -%.4f, +%.4f, want the upper one longer", o.Low95, o.High95)
		}
	}
}

func TestOffsets(t *testing.T) {
	o := Offsets{1, 2, 3, 4}
	if got := o.Mirrored(); got != (Offsets{2, 1, 4, 3}) {
		t.Errorf("Mirrored = %v", got)
	}
	if got := o.Scaled(2); got != (Offsets{2, 4, 6, 8}) {
		t.Errorf("Scaled(2) = %v", got)
	}
	got := Normal(3).Widened(4)
	for _, c := range []struct{ got, want float64 }{{got.Low68, 5}, {got.High68, 5}, {got.Low95, 5 * z95}, {got.High95, 5 * z95}} {
		if relativeGap(c.got, c.want) > 1e-15 {
			t.Errorf("Normal(3).Widened(4) = %v, want 5 and %g", got, 5*z95)
		}
	}
	if got := math.Erf(z95 / math.Sqrt2); math.Abs(got-0.95) > 1e-15 {
		t.Errorf("a normal variable is within z95 with probability %.16g, want 0.95", got)
	}
}
