package series

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// curve is a model f(x; theta) with its derivatives.
type curve interface {
	// at gives f and df/dx at x for point i, and writes df/dtheta into gradient; ok is false
	// where the model has no value.
	at(i int, x float64, theta, gradient []float64) (value, slope float64, ok bool)
}

// solution is the minimum of Eq. 1 of the package.
type solution struct {
	theta      []float64
	chiSquare  float64
	design     *mat.Dense // df/dtheta over the effective uncertainty of each point
	residuals  []float64  // over the effective uncertainty
	abscissae  []float64  // estimated true x
	effective  []float64  // uncertainty of each point: root of u(y)^2 + (slope u(x))^2
	covariance *mat.SymDense
	condition  float64
}

const (
	maxSteps = 500
	// maxMoves bounds the search for one true abscissa; it converges in 2 or 3.
	maxMoves = 20
	// nearEnough, against u(x), ends it: chi-square is then known to its square. Shorter than
	// noisy, a move that raises chi-square does so by the error of a derivative.
	nearEnough, noisy = 1e-9, 1e-5
	// flat is the relative offset that counts as a minimum: the parameters are then within
	// 1e-5 of their uncertainties, times the root of the degrees of freedom. The derivatives of
	// package drag have an error of 1e-6. The search goes on to flattest as long as it can.
	flat, flattest = 1e-5, 1e-9
	// rounding is that of a chi-square, relative.
	rounding = 1e-13
)

// fitCurve minimises Eq. 1 from a start. u(y) = 0 counts as 1. It returns ErrNotIdentifiable
// when the derivatives are dependent at the minimum, and ErrNotConverged.
func fitCurve(model curve, points []Point, start []float64) (*solution, error) {
	now, ok := evaluate(model, points, start, nil)
	if !ok {
		return nil, ErrNotConverged
	}
	damping := 0.0
	for range maxSteps {
		step, solved := leastSquares(now.design, now.residuals, damping)
		if !solved {
			if damping = raise(damping); damping > 1e12 {
				return nil, ErrNotIdentifiable
			}
			continue
		}
		next, ok := evaluate(model, points, added(now.theta, step), now.abscissae)
		away, slack := math.Inf(1), 0.0
		if damping == 0 {
			away = offset(now, step)
		}
		if away <= flat {
			slack = rounding // the step is right where chi-square no longer tells
		}
		better := ok && next.chiSquare <= now.chiSquare*(1+slack)
		if better {
			now, damping = next, lower(damping)
		}
		if away <= flattest || !better && (away <= flat || damping > 1e12) {
			break
		}
		if !better {
			damping = raise(damping)
		}
	}
	return finish(now)
}

func raise(damping float64) float64 { return math.Max(10*damping, 1e-4) }

// lower takes the damping away once it is small, so that the last steps are those of Gauss
// and Newton.
func lower(damping float64) float64 {
	if damping < 1e-6 {
		return 0
	}
	return damping / 10
}

func finish(s *solution) (*solution, error) {
	s.covariance, s.condition = inverseInformation(s.design)
	if s.covariance == nil {
		return nil, ErrNotIdentifiable
	}
	step, ok := leastSquares(s.design, s.residuals, 0)
	if !ok || offset(s, step) > flat {
		return nil, ErrNotConverged
	}
	return s, nil
}

// offset is the length of what the undamped step would take away of the residuals,
// against that of the residuals (Bates and Watts, Technometrics 23 (1981) 179); 0 when the residuals are
// lost in rounding.
func offset(s *solution, step []float64) float64 {
	rows, columns := s.design.Dims()
	size, largest := math.Sqrt(s.chiSquare), 0.0
	for j, length := range columnLengths(s.design) {
		largest = math.Max(largest, math.Abs(s.theta[j])*length)
	}
	if size <= 1e-11*largest {
		return 0
	}
	taken := 0.0
	for i := range rows {
		sum := 0.0
		for j := range columns {
			sum += s.design.At(i, j) * step[j]
		}
		taken = math.Hypot(taken, sum)
	}
	return taken / size
}

func added(theta, step []float64) []float64 {
	sum := make([]float64, len(theta))
	for j := range sum {
		sum[j] = theta[j] + step[j]
	}
	return sum
}

// evaluate finds the best true abscissae for theta and linearises there.
func evaluate(model curve, points []Point, theta, before []float64) (*solution, bool) {
	n, parameters := len(points), len(theta)
	s := &solution{theta: theta, design: mat.NewDense(n, parameters, nil), residuals: make([]float64, n),
		abscissae: make([]float64, n), effective: make([]float64, n)}
	gradient := make([]float64, parameters)
	for i, p := range points {
		first := p.X
		if before != nil {
			first = before[i]
		}
		c, ok := closest(model, i, p, theta, gradient, first)
		if !ok && first != p.X {
			c, ok = closest(model, i, p, theta, gradient, p.X)
		}
		if !ok {
			return nil, false
		}
		s.chiSquare += c.distance
		s.abscissae[i], s.residuals[i], s.effective[i] = c.x, c.residual, c.uncertainty
		for j, g := range gradient {
			s.design.Set(i, j, g/c.uncertainty)
		}
	}
	return s, finite(s.chiSquare)
}

// place is the point of the curve that is closest to a measured one.
type place struct {
	x           float64 // abscissa
	distance    float64 // share of chi-square
	residual    float64 // of the model made straight there, over uncertainty
	uncertainty float64 // effective: root of u(y)^2 + (slope u(x))^2
}

// closest follows the curve to the place closest to p by the steps of Gauss and
// Newton, halved where they would lead away.
func closest(model curve, i int, p Point, theta, gradient []float64, x float64) (place, bool) {
	uy := p.UY
	if uy == 0 {
		uy = 1
	}
	look := func(x float64) (c place, move float64, ok bool) {
		value, slope, ok := model.at(i, x, theta, gradient)
		if !ok || !finite(value) {
			return c, 0, false
		}
		c = place{x: x, uncertainty: math.Hypot(uy, slope*p.UX)}
		direct, sideways := (p.Y-value)/uy, 0.0
		straight := p.Y - value
		if p.UX > 0 {
			sideways = (p.X - x) / p.UX
			straight -= slope * (p.X - x)
		}
		c.distance = direct*direct + sideways*sideways
		c.residual = straight / c.uncertainty
		move = p.X + c.residual/c.uncertainty*slope*p.UX*p.UX - x
		return c, move, true
	}
	c, move, ok := look(x)
	if !ok {
		return c, false
	}
	for range maxMoves {
		if math.Abs(move) <= nearEnough*p.UX {
			break
		}
		next, onward, ok := look(c.x + move)
		if !ok || next.distance > c.distance*(1+1e-14) {
			if move /= 2; math.Abs(move) < noisy*p.UX {
				break
			}
			continue
		}
		c, move = next, onward
	}
	_, _, ok = look(c.x) // the gradient of the place that is returned
	return c, ok
}
