package main

import (
	"bytes"
	"fmt"
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/integrate/quad"
)

// The reaction of one wall on an oscillating force is tabulated in panels of ln y
// between these ends; outside it has expansions. The last coefficients of each panel
// are some 1e-6.
const (
	reactionLow    = 0.003
	reactionHigh   = 30
	reactionPanels = 6
	reactionNodes  = 16
)

// reactions returns F(x), x = (1-i) y with y = h/delta, for forces parallel and
// perpendicular to a wall at distance h: the flow that the wall sends back to an
// oscillating point force, relative to the steady one. delta is the penetration depth
// sqrt(nu/(pi f)).
//
// It is the Hankel integral over wave number k (in units of 1/h) of the linearised
// Navier-Stokes flow without slip on the wall. With q = sqrt(k^2 + x^2), d = q - k and
// p = 1 - exp(-d) every cancellation between viscous and pressure modes is done by hand:
//
//	F_parallel      = (4/3) int k dk {[k p + ((2k+d)p - d)((k+d)p - d)/d] e^(-2k)/(d(2k+d)) + e^(-2q)/q}
//	F_perpendicular = (4/3) int k dk k e^(-2k) [d + k p + (k p/d)(d + (2k+d)p)]/((k+d) d (2k+d))
//
// Both are 1 at x = 0 and tend to 1/(3 x^2), which is the added mass of potential flow
// near a wall.
func reactions(y float64) (parallel, perpendicular complex128) {
	x := complex(y, -y)
	nodes, weights := make([]float64, 16), make([]float64, 16)
	const largest = 25 // e^(-2k) is below rounding there
	for low, high := 0.0, math.Min(1, y+1e-6)/64; low < largest; low, high = high, 2*high {
		quad.Legendre{}.FixedLocations(nodes, weights, low, math.Min(high, largest))
		for i, node := range nodes {
			k := complex(node, 0)
			q := cmplx.Sqrt(k*k + x*x)
			d := x * x / (q + k)
			p := -expm1(-d)
			decay := complex(math.Exp(-2*node), 0)
			weight := complex(4.0/3*weights[i]*node, 0)
			parallel += weight * (decay*(k*p+((2*k+d)*p-d)*((k+d)*p-d)/d)/(d*(2*k+d)) + cmplx.Exp(-2*q)/q)
			perpendicular += weight * k * decay * (d + k*p + k*p/d*(d+(2*k+d)*p)) / ((k + d) * d * (2*k + d))
		}
	}
	return parallel, perpendicular
}

// expm1 is exp(z) - 1 without cancellation at small z.
func expm1(z complex128) complex128 {
	sin, half := math.Sin(imag(z)), math.Sin(imag(z)/2)
	growth := math.Expm1(real(z))
	return complex(growth*math.Cos(imag(z))-2*half*half, (growth+1)*sin)
}

// reactionTable writes, for each panel, Chebyshev coefficients in ln y of the reactions
// times 1 + c x + 3 x^2, c = 16/9 and 8/9, a product that tends to 1 at both ends.
func reactionTable() string {
	var text bytes.Buffer
	fmt.Fprintf(&text, "\nconst (\nreactionLow = %v\nreactionHigh = %v\n)\n", reactionLow, reactionHigh)
	fmt.Fprintln(&text, "\n// parallelReaction and perpendicularReaction hold Chebyshev coefficients of the reaction of a")
	fmt.Fprintln(&text, "// wall on an oscillating force, one row a panel of ln y; method: gen/reaction.go.")
	fmt.Fprintln(&text, "var (")
	for direction, name := range []string{"parallelReaction", "perpendicularReaction"} {
		fmt.Fprintf(&text, "%s = [][]complex128{\n", name)
		for panel := range reactionPanels {
			fmt.Fprint(&text, "{")
			for _, c := range panelCoefficients(panel, direction) {
				fmt.Fprintf(&text, "complex(%.8f, %.8f), ", real(c), imag(c))
			}
			fmt.Fprintln(&text, "},")
		}
		fmt.Fprintln(&text, "}")
	}
	fmt.Fprintln(&text, ")")
	return text.String()
}

// panelCoefficients returns the coefficients of one panel, direction 0 parallel and 1
// perpendicular.
func panelCoefficients(panel, direction int) []complex128 {
	re, im := matrix(reactionNodes, 1), matrix(reactionNodes, 1)
	for i := range reactionNodes {
		position := (float64(panel) + (1+chebyshevNode(i, reactionNodes))/2) / reactionPanels
		y := reactionLow * math.Pow(reactionHigh/reactionLow, position)
		x := complex(y, -y)
		parallel, perpendicular := reactions(y)
		value := parallel * (1 + 16.0/9*x + 3*x*x)
		if direction == 1 {
			value = perpendicular * (1 + 8.0/9*x + 3*x*x)
		}
		re[i][0], im[i][0] = real(value), imag(value)
	}
	re, im = chebyshev(re), chebyshev(im)
	out := make([]complex128, reactionNodes)
	for a := range out {
		out[a] = complex(re[a][0], im[a][0])
	}
	return out
}
