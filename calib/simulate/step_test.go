package simulate

import (
	"math"
	"testing"
)

// blurVariance is S(a), the variance of the exposure mean over the thermal variance:
// 2/a - 2(1-exp(-a))/a² (Wong & Halvorsen, Opt. Express 14 (2006) 12517, Eq. 7), by its
// power series where the closed form would lose digits.
func blurVariance(a float64) float64 {
	if a > 1 {
		return 2/a - 2*(1-math.Exp(-a))/(a*a)
	}
	sum, term := 0.0, 1.0
	for n := 0; n < 30; n++ {
		sum += term
		term *= -a / float64(n+3)
	}
	return sum
}

// blurLag is B(a) = (sinh(a/2)/(a/2))².
func blurLag(a float64) float64 {
	if a == 0 {
		return 1
	}
	return math.Pow(math.Sinh(a/2)/(a/2), 2)
}

// Values of S and B guard the formulas that the other tests compare with.
func TestBlurFunctionsPublished(t *testing.T) {
	for _, row := range []struct{ a, s, b float64 }{
		// S: Wong & Halvorsen 2006, Eq. 7; Savin & Doyle, Biophys. J. 88 (2005) 623. B: its definition. Both recomputed to 1e-15.
		{0.01, 0.9966749833610715, 1.0000083333611114},
		{0.1, 0.967483607191916, 1.00083361116072},
		{1, 0.7357588823428847, 1.0861612696304876},
		{5, 0.32053903575992687, 5.856795881983027},
	} {
		// 1e-13: a few units of rounding in the closed forms.
		if !near(blurVariance(row.a), row.s, 1e-13) || !near(blurLag(row.a), row.b, 1e-13) {
			t.Errorf("S(%v), B(%v) = %v, %v, want %v, %v", row.a, row.a, blurVariance(row.a), blurLag(row.a), row.s, row.b)
		}
	}
}

// The coefficients alone fix the covariances of the recorded positions: with x the
// position in equilibrium, variance held²V + shared² + own² and, at lag n,
// held c^(n-1) (c held V + kick shared). They must equal the closed forms.
func TestStepReproducesClosedForms(t *testing.T) {
	const variance, noise = 3e-16, 4e-9
	for _, theta := range []float64{1e-9, 1e-6, 1e-3, 0.05, 0.0999, 0.1001, 0.3, 1, 2 * math.Pi, 30} { // 2 pi fc/fs
		for _, fraction := range []float64{0, 1e-6, 0.2, 0.5, 0.999, 1} {
			a := theta * fraction
			s := trappedStep(variance, noise, theta, a)
			c := math.Exp(-theta)
			// 3e-12: the series limit of bridge (3e-13 of a/6) and the rounding of 1-c² through
			// kick, with a margin for products of a dozen rounded factors.
			recorded := s.held*s.held*variance + s.shared*s.shared + s.own*s.own
			if want := variance*blurVariance(a) + noise*noise; !near(recorded, want, 3e-12) {
				t.Errorf("theta %v, a %v: variance %v, want %v", theta, a, recorded, want)
			}
			lag := s.held * (s.decay*s.held*variance + s.kick*s.shared)
			// c is known to a rounding unit of 1, which matters where nothing is left of it.
			if want := variance * blurLag(a) * c; !(math.Abs(lag-want) <= 3e-12*want+2e-16*variance) {
				t.Errorf("theta %v, a %v: covariance at lag 1 %v, want %v", theta, a, lag, want)
			}
			if equilibrium := s.decay*s.decay*variance + s.kick*s.kick; !near(equilibrium, variance, 1e-14) {
				t.Errorf("theta %v: stationary variance %v, want %v", theta, equilibrium, variance)
			}
		}
	}
}

// The variances above hide the small terms of a weak blur under the large ones. For a
// small exposure the increment y(1)-y(0) shows them: its variance is 2V(S - Bc) + 2q,
// and tends to that of a free bead, 2D(dt - W/3), with D = V theta/dt.
func TestStepTendsToFreeBead(t *testing.T) {
	const variance, theta = 2e-16, 1e-7
	for _, fraction := range []float64{0, 0.1, 0.5, 1} {
		trapped := trappedStep(variance, 0, theta, theta*fraction)
		free := freeStep(variance*theta, 0, 1, fraction)
		// 1e-6: the next order in theta, with a coefficient of order 1 over the smallest ratio.
		for _, pair := range [][2]float64{{trapped.kick, free.kick}, {trapped.held, free.held}, {trapped.shared, free.shared}, {trapped.own, free.own}} {
			if !(math.Abs(pair[0]-pair[1]) <= 1e-6*math.Abs(pair[1])) {
				t.Errorf("exposure %v: trapped %v, free %v", fraction, trapped, free)
			}
		}
		increment := increment(free)
		if want := 2 * variance * theta * (1 - fraction/3); !near(increment, want, 1e-14) {
			t.Errorf("exposure %v: free increment variance %v, want %v", fraction, increment, want)
		}
	}
}

// increment returns the variance of the difference of two neighbouring samples of a free bead.
func increment(s step) float64 {
	first := s.kick - s.shared // y1 - y0 = (kick - shared) z0 - own y0 + shared z1 + own y1
	return first*first + s.shared*s.shared + 2*s.own*s.own
}

func TestBridgeBranchesMeet(t *testing.T) {
	below, above := bridge(bridgeSeries*(1-1e-12)), bridge(bridgeSeries*(1+1e-12))
	// 2e-12 apart in a, and 12/a² rounding units of the closed form.
	if !near(below, above, 3e-12) {
		t.Errorf("bridge below and above the switch: %v, %v", below, above)
	}
}

func near(got, want, relative float64) bool {
	return math.Abs(got-want) <= relative*math.Abs(want)
}
