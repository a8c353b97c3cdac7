package series

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// conditionLimit is the condition number of the scaled design from which on columns
// count as dependent: a tenth of what float64 carries, so that Filip's polynomial
// (1e10 when scaled) passes and a column that repeats another does not.
const conditionLimit = 1e14

// leastSquares solves min |A d - b|, A with its columns scaled to length 1, by
// Householder QR. damping >= 0 adds damping |scaled d|^2 (Levenberg, Q. Appl. Math. 2 (1944)
// 164; Marquardt, SIAM J. Appl. Math. 11 (1963) 431). ok is false when the columns
// are dependent.
func leastSquares(a *mat.Dense, b []float64, damping float64) (step []float64, ok bool) {
	rows, columns := a.Dims()
	lengths := columnLengths(a)
	extra := 0
	if damping > 0 {
		extra = columns
	}
	scaled := mat.NewDense(rows+extra, columns, nil)
	for i := range rows {
		for j := range columns {
			scaled.Set(i, j, a.At(i, j)/lengths[j])
		}
	}
	right := mat.NewVecDense(rows+extra, nil)
	for i, v := range b {
		right.SetVec(i, v)
	}
	for j := range extra {
		scaled.Set(rows+j, j, math.Sqrt(damping))
	}
	var qr mat.QR
	qr.Factorize(scaled)
	if !(qr.Cond() < conditionLimit) {
		return nil, false
	}
	var d mat.VecDense
	if err := qr.SolveVecTo(&d, false, right); err != nil {
		if _, bad := err.(mat.Condition); !bad { // ill-conditioned, judged above
			return nil, false
		}
	}
	step = make([]float64, columns)
	for j := range step {
		step[j] = d.AtVec(j) / lengths[j]
	}
	return step, true
}

// columnLengths gives the length of each column; 1 for a column of zeros.
func columnLengths(a *mat.Dense) []float64 {
	rows, columns := a.Dims()
	lengths := make([]float64, columns)
	for j := range columns {
		for i := range rows {
			lengths[j] = math.Hypot(lengths[j], a.At(i, j))
		}
		if lengths[j] == 0 {
			lengths[j] = 1
		}
	}
	return lengths
}

// inverseInformation is (A'A)^-1, and condition the condition number of the scaled A;
// nil when the columns are dependent.
func inverseInformation(a *mat.Dense) (covariance *mat.SymDense, condition float64) {
	rows, columns := a.Dims()
	lengths := columnLengths(a)
	scaled := mat.NewDense(rows, columns, nil)
	for i := range rows {
		for j := range columns {
			scaled.Set(i, j, a.At(i, j)/lengths[j])
		}
	}
	var qr mat.QR
	qr.Factorize(scaled)
	condition = qr.Cond()
	if !(condition < conditionLimit) {
		return nil, condition
	}
	var upper, inverse mat.Dense
	qr.RTo(&upper)
	triangle := mat.NewTriDense(columns, mat.Upper, nil)
	for i := range columns {
		for j := i; j < columns; j++ {
			triangle.SetTri(i, j, upper.At(i, j))
		}
	}
	identity := mat.NewDiagDense(columns, ones(columns))
	if err := inverse.Solve(triangle, identity); err != nil {
		if _, bad := err.(mat.Condition); !bad {
			return nil, condition
		}
	}
	covariance = mat.NewSymDense(columns, nil)
	for i := range columns {
		for j := i; j < columns; j++ {
			sum := 0.0
			for k := range columns {
				sum += inverse.At(i, k) * inverse.At(j, k)
			}
			covariance.SetSym(i, j, sum/(lengths[i]*lengths[j]))
		}
	}
	return covariance, condition
}

func ones(n int) []float64 {
	v := make([]float64, n)
	for i := range v {
		v[i] = 1
	}
	return v
}
