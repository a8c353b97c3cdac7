package drag

import (
	"fmt"
	"math"
)

// Chamber is where a sphere is and how it moves. Lengths are in metres.
type Chamber struct {
	Radius        float64 // radius R of the sphere [m]
	Height        float64 // height h of its centre above the wall that heights refer to [m]; +Inf for far from walls
	Depth         float64 // distance H between the two walls [m]; 0 or +Inf when there is no second one
	Perpendicular bool    // motion at right angles to the walls; else parallel
}

// Wall is the effect of the walls on drag: gamma = Factor 6 pi eta R.
type Wall struct {
	Factor float64 // lambda
	// FactorU is the standard uncertainty of the model, relative to Factor. That of
	// radius, height and depth is not in it: see the slopes.
	FactorU float64

	LogSlopeHeight float64 // d ln(Factor)/d ln(Height)
	LogSlopeRadius float64 // d ln(Factor)/d ln(Radius)
	LogSlopeDepth  float64 // d ln(Factor)/d ln(Depth); 0 without a second wall

	// Faxen is Faxen's factor for the nearer wall alone, and FaxenError its error
	// relative to Factor. Both are NaN for perpendicular motion.
	Faxen      float64
	FaxenError float64

	Method string // how Factor was computed, in words
}

// Model uncertainties of Factor, relative and standard.
const (
	// oneWallU covers every form of the one-wall factors, whose error is below 1e-5.
	oneWallU = 1e-5
	// twoWallU is for parallel motion at h/R >= 2 and H/R >= 10, where the table, the
	// published series and an independent computation agree within 3e-4.
	twoWallU = 1e-3
	// unguardedU is for the rest, for which no published values were at hand.
	// Superposition alone is up to 2.3 % high there for parallel motion, and up
	// to 16 % high for perpendicular motion; the table agrees with its generator to 1e-5.
	unguardedU = 0.03
	// smallestPart: where the second wall adds less than this to the factor, what
	// it adds is all that can be wrong with it.
	smallestPart = 0.003
)

// Limits of the ratios for two walls.
const (
	leastDepth    = 6  // H/R below it is refused
	guardedDepth  = 10 // H/R
	guardedHeight = 2  // h/R

	// rounding is what two lengths lose when their ratio is taken.
	rounding = 1e-12
)

// Wall returns the drag factor of the sphere in its chamber.
//
// One wall: the exact solutions (Parallel, Perpendicular). Two walls: superposition
// lambda(h) + lambda(H-h) - 1 times a correction from a table, computed by collocation with
// the flow of point forces between two walls (Liron and Mochon, J. Eng. Math. 10 (1976)
// 287); FactorU is 0.1 % for parallel motion at h/R >= 2 and H/R >= 10, and 3 %
// elsewhere unless the second wall matters less than 0.3 %.
//
// Wall returns an error that names both lengths when the sphere would touch a wall,
// when H/R is below 6, when a depth comes without a height, and when a length is not a
// positive number.
func (c Chamber) Wall() (Wall, error) {
	if err := c.check(); err != nil {
		return Wall{}, err
	}
	if math.IsInf(c.Height, 1) {
		wall := Wall{Factor: 1, Faxen: 1, Method: "no wall"}
		return c.withoutFaxen(wall), nil
	}
	if !c.twoWalls() {
		return c.oneWall(), nil
	}
	return c.bothWalls(), nil
}

func (c Chamber) twoWalls() bool { return c.Depth > 0 && !math.IsInf(c.Depth, 1) }

func (c Chamber) check() error {
	switch {
	case !(c.Radius > 0) || math.IsInf(c.Radius, 1):
		return fmt.Errorf("radius %s is not a positive length", length(c.Radius))
	case !(c.Height > c.Radius):
		return fmt.Errorf("height %s of the centre is not above the radius %s: the sphere would touch the wall", length(c.Height), length(c.Radius))
	case math.IsNaN(c.Depth) || c.Depth < 0:
		return fmt.Errorf("depth %s is not a positive length: leave it out when there is no second wall", length(c.Depth))
	case !c.twoWalls():
		return nil
	case math.IsInf(c.Height, 1):
		return fmt.Errorf("depth %s is given without a height: give the height of the centre, or leave out the depth", length(c.Depth))
	case !(c.Depth-c.Height > c.Radius):
		return fmt.Errorf("height %s leaves %s to the second wall at depth %s, not more than the radius %s: the sphere would touch it",
			length(c.Height), length(c.Depth-c.Height), length(c.Depth), length(c.Radius))
	case c.Depth < leastDepth*c.Radius*(1-rounding):
		return fmt.Errorf("depth %s is %.3g times the radius %s: drag between two walls is known here from %d times the radius",
			length(c.Depth), c.Depth/c.Radius, length(c.Radius), leastDepth)
	}
	return nil
}

// length writes a length as people do: in micrometres below a millimetre.
func length(metres float64) string {
	if size := math.Abs(metres); size > 0 && size < 1e-3 {
		return fmt.Sprintf("%.6g um", 1e6*metres)
	}
	return fmt.Sprintf("%g m", metres)
}

// withoutFaxen takes Faxen's value out of a result for perpendicular motion.
func (c Chamber) withoutFaxen(wall Wall) Wall {
	if c.Perpendicular {
		wall.Faxen, wall.FaxenError = math.NaN(), math.NaN()
	}
	return wall
}

func (c Chamber) oneWall() Wall {
	ratio := c.Height / c.Radius
	wall := Wall{FactorU: oneWallU, Faxen: faxen(ratio)}
	if c.Perpendicular {
		wall.Factor, wall.LogSlopeHeight = perpendicular(ratio), perpendicularSlope(ratio)
		wall.Method = "one wall, perpendicular, exact (Brenner 1961)"
	} else {
		wall.Factor, wall.LogSlopeHeight = parallel(ratio), parallelSlope(ratio)
		wall.Method = "one wall, parallel, exact (O'Neill 1964)"
		if ratio > farRatio {
			wall.Method = "one wall, parallel, series of Faxen 1923"
		}
	}
	wall.LogSlopeRadius = -wall.LogSlopeHeight
	wall.FaxenError = wall.Faxen/wall.Factor - 1
	return c.withoutFaxen(wall)
}

func (c Chamber) bothWalls() Wall {
	h, depth := c.Height/c.Radius, c.Depth/c.Radius
	nearer := math.Min(h, depth-h)
	wall := Wall{
		Factor:  twoWalls(c.Perpendicular, h, depth),
		FactorU: twoWallU,
		Faxen:   faxen(nearer),
		Method:  "two walls, parallel, superposition with computed correction",
	}
	if c.Perpendicular {
		wall.Method = "two walls, perpendicular, superposition with computed correction"
	}
	if c.Perpendicular || nearer < guardedHeight*(1-rounding) || depth < guardedDepth*(1-rounding) {
		wall.FactorU = c.unguarded(nearer, depth)
	}
	wall.LogSlopeHeight, wall.LogSlopeDepth = c.slopes(h, depth)
	// Factor depends on ratios of lengths alone, so that the three slopes add up to 0.
	wall.LogSlopeRadius = -wall.LogSlopeHeight - wall.LogSlopeDepth
	wall.FaxenError = wall.Faxen/wall.Factor - 1
	return c.withoutFaxen(wall)
}

// unguarded is the model uncertainty where no published values were at hand.
func (c Chamber) unguarded(nearer, depth float64) float64 {
	part := parallel(depth-nearer) - 1
	if c.Perpendicular {
		part = perpendicular(depth-nearer) - 1
	}
	if part < smallestPart {
		return math.Max(part, oneWallU)
	}
	return unguardedU
}

// slopes are the logarithmic derivatives with respect to height and depth, by central
// differences over a thousandth of the smaller gap.
func (c Chamber) slopes(h, depth float64) (height, deep float64) {
	step := 1e-3 * (math.Min(h, depth-h) - 1)
	log := func(h, depth float64) float64 { return math.Log(twoWalls(c.Perpendicular, h, depth)) }
	height = h * (log(h+step, depth) - log(h-step, depth)) / (2 * step)
	deep = depth * (log(h, depth+step) - log(h, depth-step)) / (2 * step)
	return height, deep
}
