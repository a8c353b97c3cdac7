package psd

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Regression is the least-squares fit of known shapes to a record.
type Regression struct {
	Coefficients []float64 // of each shape [m per unit of the shape]
	// Inverse is the inverse of the normal matrix, mean and line included as free terms: times the
	// variance of white samples it is the covariance of the coefficients.
	Inverse [][]float64
	Mean    float64 // that was subtracted with the shapes, beside Record.Mean [m]
	Slope   float64 // of the line that was subtracted with them, beside Record.Slope [m/s]
}

// ErrShapes tells that shapes cannot be told apart, or from a mean and a straight line.
var ErrShapes = errors.New("the shapes cannot be told apart")

// TakeOut fits known shapes, one value a sample, to the record by least squares together with a
// mean and a straight line, and subtracts them. Missing samples count in no sum.
//
// The samples need not be white for the fit to be unbiased. For a sinusoid its
// covariance is Inverse times the two-sided spectrum at its frequency times the rate, as long as the
// spectrum is even over 1/T. The error is ErrShapes, or says that lengths differ.
func (r *Record) TakeOut(shapes ...[]float64) (Regression, error) {
	out, err := regress(r.X, shapes)
	if err != nil {
		return out, err
	}
	r.reshape = true
	out.Slope *= r.Rate
	return out, r.transform()
}

// regress fits shapes to x with a mean and a line, and subtracts them all.
func regress(x []float64, shapes [][]float64) (Regression, error) {
	p := len(shapes) + 2
	middle := float64(len(x)-1) / 2
	row := make([]float64, p)
	at := func(i int) []float64 {
		row[0], row[1] = 1, (float64(i)-middle)/middle
		for k, s := range shapes {
			row[k+2] = s[i]
		}
		return row
	}
	for _, s := range shapes {
		if len(s) != len(x) {
			return Regression{}, fmt.Errorf("a shape of %d values for %d samples", len(s), len(x))
		}
	}
	normal, right := mat.NewSymDense(p, nil), mat.NewVecDense(p, nil)
	for i, value := range x {
		if value != value {
			continue
		}
		v := at(i)
		for a := range v {
			right.SetVec(a, right.AtVec(a)+v[a]*value)
			for b := a; b < p; b++ {
				normal.SetSym(a, b, normal.At(a, b)+v[a]*v[b])
			}
		}
	}
	inverse, solution, err := solveScaled(normal, right)
	if err != nil {
		return Regression{}, err
	}
	for i := range x {
		v := at(i)
		for a := range v {
			x[i] -= v[a] * solution[a]
		}
	}
	out := Regression{Coefficients: solution[2:], Mean: solution[0], Slope: solution[1] / middle}
	for a := 2; a < p; a++ {
		out.Inverse = append(out.Inverse, inverse[a][2:])
	}
	return out, nil
}

// worstCondition is the condition number of normal equations, every shape scaled to one, at
// which a shape is all but a sum of others: eight of sixteen digits are left.
const worstCondition = 1e8

// solveScaled solves normal equations after scaling their diagonal to one.
func solveScaled(normal *mat.SymDense, right *mat.VecDense) (inverse [][]float64, solution []float64, err error) {
	p := normal.SymmetricDim()
	size := make([]float64, p)
	for a := range size {
		if size[a] = math.Sqrt(normal.At(a, a)); !(size[a] > 0) {
			return nil, nil, ErrShapes
		}
	}
	scaled := mat.NewSymDense(p, nil)
	for a := range p {
		for b := a; b < p; b++ {
			scaled.SetSym(a, b, normal.At(a, b)/(size[a]*size[b]))
		}
	}
	var c mat.Cholesky
	if !c.Factorize(scaled) || c.Cond() > worstCondition {
		return nil, nil, ErrShapes
	}
	var inv mat.SymDense
	if err := c.InverseTo(&inv); err != nil {
		return nil, nil, ErrShapes
	}
	inverse, solution = make([][]float64, p), make([]float64, p)
	for a := range p {
		inverse[a] = make([]float64, p)
		for b := range p {
			inverse[a][b] = inv.At(a, b) / (size[a] * size[b])
			solution[a] += inverse[a][b] * right.AtVec(b)
		}
	}
	return inverse, solution, nil
}

// Sinusoid is a fitted sinusoid Amplitude sin(2 pi Frequency t + Phase), t counted from the first sample.
type Sinusoid struct {
	Frequency float64 // Hz
	Amplitude float64 // half of the peak-to-peak excursion [m]
	Phase     float64 // rad
	// Scatter is the variance of the coefficient of the sine or the cosine, mean of the two, for white samples of
	// variance one. Near it the variance of the amplitude is Scatter times the two-sided spectrum times the rate.
	Scatter     float64
	Mean, Slope float64 // subtracted with it [m, m/s], as in Regression
}

// TakeSinusoid takes a sinusoid of known frequency [Hz] out of the record, as a line that the fit leaves
// out. It is right for any number of periods, whole or not, that is large enough
// to tell a sinusoid from a straight line. The error is that of TakeOut.
func (r *Record) TakeSinusoid(hz float64) (Sinusoid, error) {
	cosine, sine := make([]float64, len(r.X)), make([]float64, len(r.X))
	rotate(hz/r.Rate, len(r.X), func(i int, c, s float64) { cosine[i], sine[i] = c, s })
	fit, err := r.TakeOut(cosine, sine)
	if err != nil {
		return Sinusoid{}, err
	}
	a, b := fit.Coefficients[0], fit.Coefficients[1]
	s := Sinusoid{Frequency: hz, Amplitude: math.Hypot(a, b), Phase: math.Atan2(a, b), Scatter: (fit.Inverse[0][0] + fit.Inverse[1][1]) / 2,
		Mean: fit.Mean, Slope: fit.Slope}
	step := r.Rate / float64(r.Length)
	r.blocked = nil
	r.Lines = append(r.Lines, Line{Frequency: hz, Amplitude: s.Amplitude, Low: hz - (halfGap+0.25)*step, High: hz + (halfGap+0.25)*step})
	return s, nil
}

// frequencySteps is the number of Gauss-Newton steps for a frequency; each squares its error in periods over the record.
const frequencySteps = 4

// NearFrequency returns the frequency [Hz] near the given one at which a sinusoid fits the record best, together with a mean and
// a line, so that few periods do no harm. The given one is to lie within half of 1/T. When the search
// leads away, or the sinusoid cannot be fitted, it returns the given frequency.
func (r *Record) NearFrequency(hz float64) float64 {
	n := len(r.X)
	middle := float64(n-1) / 2
	shapes := make([][]float64, 4) // cosine, sine, and both times the time from the middle
	for k := range shapes {
		shapes[k] = make([]float64, n)
	}
	f := hz / r.Rate
	for range frequencySteps {
		rotate(f, n, func(i int, c, s float64) {
			t := (float64(i) - middle) / middle
			shapes[0][i], shapes[1][i], shapes[2][i], shapes[3][i] = c, s, t*c, t*s
		})
		fit, err := regress(append([]float64(nil), r.X...), shapes)
		if err != nil {
			return hz
		}
		a, b, da, db := fit.Coefficients[0], fit.Coefficients[1], fit.Coefficients[2], fit.Coefficients[3]
		f += (da*b - db*a) / (a*a + b*b) / (2 * math.Pi * middle)
		if math.Abs(f-hz/r.Rate)*float64(n) > 1 {
			return hz
		}
	}
	return f * r.Rate
}

// Tallest returns the frequency [Hz] of the largest periodogram value above zero frequency.
func (r *Record) Tallest() float64 {
	best := 0
	for k := 1; k < len(r.Power)-1; k++ {
		if best == 0 || r.Power[k] > r.Power[best] {
			best = k
		}
	}
	return float64(best) * r.Rate / float64(r.Length)
}
