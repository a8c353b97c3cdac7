package series

import (
	"errors"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
	"time"
)

// pearson is the data of Pearson 1901 with the weights of York 1966 (Can. J. Phys. 44, 1079,
// Table II), weights as 1/u^2.
func pearson() []Point {
	x := []float64{0, 0.9, 1.8, 2.6, 3.3, 4.4, 5.2, 6.1, 6.5, 7.4}
	wx := []float64{1000, 1000, 500, 800, 200, 80, 60, 20, 1.8, 1}
	y := []float64{5.9, 5.4, 4.4, 4.6, 3.5, 3.7, 2.8, 2.8, 2.4, 1.5}
	wy := []float64{1, 1.8, 4, 8, 20, 20, 70, 70, 100, 500}
	var p []Point
	for i := range x {
		p = append(p, Point{X: x[i], UX: 1 / math.Sqrt(wx[i]), Y: y[i], UY: 1 / math.Sqrt(wy[i])})
	}
	return p
}

func TestLineYork(t *testing.T) {
	fit, err := Line(pearson(), LineOptions{})
	if err != nil {
		t.Fatal(err)
	}
	// York 1966 and York et al. 2004; digits from memory, and the exact minimum of Eq. 1 by
	// the next test.
	for _, c := range []struct {
		name      string
		got, want float64
		tolerance float64 // half of the last digit
	}{
		{"intercept", fit.Intercept.Value, 5.47991022, 5e-9},
		{"slope", fit.Slope.Value, -0.480533407, 5e-10},
		{"u(intercept)", fit.Intercept.Statistical, 0.294970735, 5e-8},
		{"u(slope)", fit.Slope.Statistical, 0.0579850090, 5e-9},
		{"chi-square/8", fit.Goodness.ChiSquare / 8, 1.483294149, 5e-9},
	} {
		if math.Abs(c.got-c.want) > c.tolerance {
			t.Errorf("%s = %.10g, want %.10g (York 2004)", c.name, c.got, c.want)
		}
	}
	if fit.Goodness.Freedom != 8 {
		t.Errorf("degrees of freedom %d, want 8", fit.Goodness.Freedom)
	}
}

// yorkSum is Eq. 1 for a line in closed form.
func yorkSum(p []Point, a, b float64) float64 {
	sum := 0.0
	for _, q := range p {
		d := q.Y - a - b*q.X
		sum += d * d / (q.UY*q.UY + b*b*q.UX*q.UX)
	}
	return sum
}

func TestLineIsTheMinimum(t *testing.T) {
	for _, origin := range []bool{false, true} {
		p := pearson()
		fit, err := Line(p, LineOptions{ThroughOrigin: origin})
		if err != nil {
			t.Fatal(err)
		}
		a, b := fit.Intercept.Value, fit.Slope.Value
		best := yorkSum(p, a, b)
		if d := math.Abs(best-fit.Goodness.ChiSquare) / best; d > 1e-12 { // rounding of 10 terms
			t.Errorf("chi-square %.15g, direct sum %.15g", fit.Goodness.ChiSquare, best)
		}
		for _, s := range []float64{-1e-4, 1e-4} {
			if !(yorkSum(p, a, b+s) > best) || !origin && !(yorkSum(p, a+s, b) > best) {
				t.Errorf("through the origin %v: a step of %g lowers chi-square", origin, s)
			}
		}
	}
}

// Scaling x by p and y by q scales the slope by q/p; exchange of the axes inverts it. Powers of
// two change no digit, so the results agree to the last steps of the search.
func TestLineScales(t *testing.T) {
	one, _ := Line(pearson(), LineOptions{})
	scaled, swapped := pearson(), pearson()
	for i, p := range pearson() {
		scaled[i] = Point{X: 1024 * p.X, UX: 1024 * p.UX, Y: p.Y / 4096, UY: p.UY / 4096}
		swapped[i] = Point{X: p.Y, UX: p.UY, Y: p.X, UY: p.UX}
	}
	two, err := Line(scaled, LineOptions{})
	if err != nil || math.Abs(two.Slope.Value*1024*4096/one.Slope.Value-1) > 1e-12 || math.Abs(two.Slope.Statistical*1024*4096/one.Slope.Statistical-1) > 1e-12 {
		t.Errorf("scaled slope %v, %v", two.Slope, err)
	}
	three, err := Line(swapped, LineOptions{})
	// The search ends 1e-9 of an uncertainty from the minimum, 1e-5 with the derivatives of package drag.
	if err != nil || math.Abs(three.Slope.Value*one.Slope.Value-1) > 1e-8 || math.Abs(three.Goodness.ChiSquare/one.Goodness.ChiSquare-1) > 1e-12 {
		t.Errorf("swapped slope %v, %v", three.Slope, err)
	}
}

func TestLineShared(t *testing.T) {
	p := []Point{{X: 1, Y: 3, UY: 0.1}, {X: 2, Y: 5, UY: 0.1}, {X: 3, Y: 7, UY: 0.1}}
	fit, err := Line(p, LineOptions{SharedX: 0.03, SharedY: 0.04})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(fit.Slope.Shared-2*0.05) > 1e-12 || math.Abs(fit.Intercept.Shared-1*0.04) > 1e-12 {
		t.Errorf("shared uncertainties %g, %g, want 0.1, 0.04", fit.Slope.Shared, fit.Intercept.Shared)
	}
	// u(slope) = u/sqrt(sum (x-2)^2) = 0.1/sqrt 2
	if math.Abs(fit.Slope.Statistical-0.1/math.Sqrt2) > 1e-12 || math.Abs(fit.Slope.Combined-math.Hypot(0.1/math.Sqrt2, 0.1)) > 1e-12 {
		t.Errorf("slope %+v", fit.Slope)
	}
}

func TestLineRefuses(t *testing.T) {
	good := Point{X: 1, Y: 1, UY: 1}
	var place *PointError
	for _, c := range []struct {
		points []Point
		origin bool
		want   error
	}{
		{nil, false, ErrTooFew},
		{[]Point{good, {X: 2, Y: 2, UY: 1}}, false, ErrTooFew},
		{[]Point{good}, true, ErrTooFew},
		{[]Point{good, good, good}, false, ErrNotIdentifiable},
		{[]Point{{UY: 1}, {UY: 1}, {UY: 1}}, true, ErrNotIdentifiable},
	} {
		if _, err := Line(c.points, LineOptions{ThroughOrigin: c.origin}); !errors.Is(err, c.want) {
			t.Errorf("%v: %v, want %v", c.points, err, c.want)
		}
	}
	for _, bad := range []Point{{X: math.NaN(), Y: 1, UY: 1}, {X: 1, Y: math.Inf(1), UY: 1}, {X: 1, Y: 1, UY: -1}, {X: 1, Y: 1}, {X: 1, Y: 1, UY: 1, UX: math.NaN()}} {
		if _, err := Line([]Point{good, good, bad}, LineOptions{}); !errors.As(err, &place) || place.Index != 2 {
			t.Errorf("%v: %v, want an error about point 3", bad, err)
		}
	}
}

// simulated draws a line with intercept a, slope b, and errors in both.
func simulated(r *rand.Rand, n int, a, b, ux, uy float64) []Point {
	p := make([]Point, n)
	for i := range p {
		x := 1 + float64(i)
		p[i] = Point{X: x + ux*r.NormFloat64(), UX: ux, Y: a + b*x + uy*r.NormFloat64(), UY: uy}
	}
	return p
}

// Coverage of 95 % intervals over 2000 series: the standard error of a share of 0.95
// is 0.49 %; the bound of 1.95 % is four of them. z has mean 0 within 4/sqrt(2000) and
// variance 1 within 4 sqrt(2/2000).
func TestLineCoverage(t *testing.T) {
	const series = 2000
	for _, c := range []struct {
		name           string
		ux, uy         float64
		stated, origin bool
	}{{"stated", 0, 0.3, true, false}, {"scatter", 0, 0.3, false, false}, {"both coordinates", 0.15, 0.2, true, false}, {"origin", 0.1, 0.2, true, true}} {
		r := rand.New(rand.NewPCG(7, 1))
		hits, sum, squares := 0, 0.0, 0.0
		a := 0.5
		if c.origin {
			a = 0
		}
		for range series {
			p := simulated(r, 7, a, 2, c.ux, c.uy)
			if !c.stated {
				for i := range p {
					p[i].UY = 0
				}
			}
			fit, err := Line(p, LineOptions{ThroughOrigin: c.origin})
			if err != nil {
				t.Fatal(err)
			}
			if fit.Slope.Low <= 2 && 2 <= fit.Slope.High {
				hits++
			}
			z := (fit.Slope.Value - 2) / fit.Slope.Statistical
			sum, squares = sum+z, squares+z*z
		}
		if share := float64(hits) / series; math.Abs(share-0.95) > 0.0195 {
			t.Errorf("%s: coverage of the slope %.4f, want 0.95 within 0.0195", c.name, share)
		}
		if mean := sum / series; c.stated && math.Abs(mean) > 4/math.Sqrt(series) {
			t.Errorf("%s: mean z %.3f", c.name, mean)
		}
		if variance := squares / series; c.stated && math.Abs(variance-1) > 4*math.Sqrt(2.0/series) {
			t.Errorf("%s: variance of z %.3f", c.name, variance)
		}
	}
}

// A clean series has a point named in 5 % of cases or fewer; 4 standard errors of 1000
// series are 2.8 %.
func TestOutliersOfCleanSeries(t *testing.T) {
	const series = 1000
	for _, n := range []int{4, 6, 12} {
		for _, stated := range []bool{true, false} {
			r := rand.New(rand.NewPCG(3, uint64(n)))
			named := 0
			for range series {
				p := simulated(r, n, 1, 2, 0, 0.3)
				for i := range p {
					if !stated {
						p[i].UY = 0
					}
				}
				fit, err := Line(p, LineOptions{})
				if err != nil {
					t.Fatal(err)
				}
				if len(fit.Outliers) > 0 {
					named++
				}
			}
			t.Logf("%d points, stated %v: named in %.3f", n, stated, float64(named)/series)
			if share := float64(named) / series; share > 0.05+0.028 {
				t.Errorf("%d points, stated %v: outliers in %.3f of clean series", n, stated, share)
			}
		}
	}
}

func TestOutliersAreNamed(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 5))
	for _, stated := range []bool{true, false} {
		p := simulated(r, 12, 1, 2, 0, 0.1)
		p[10].Y += 3 // two that hide each other: next to each other at the end
		p[11].Y += 3
		if !stated {
			for i := range p {
				p[i].UY = 0
			}
		}
		fit, err := Line(p, LineOptions{})
		if err != nil {
			t.Fatal(err)
		}
		if len(fit.Outliers) != 2 || fit.Outliers[0].Index != 10 || fit.Outliers[1].Index != 11 {
			t.Fatalf("stated %v: named %+v, want points 10 and 11", stated, fit.Outliers)
		}
		if fit.Without == nil || math.Abs(fit.Without.Slope.Value-2) > 0.05 { // 4 standard uncertainties of 0.011
			t.Errorf("slope without them %+v", fit.Without)
		}
		if math.Abs(fit.Slope.Value-2) < 0.2 {
			t.Errorf("the fit to all points must keep them: slope %g", fit.Slope.Value)
		}
	}
}

// A long series takes a time that goes with its length, not with its square:
// its outliers are found as in a short one.
func TestOutliersOfLongSeries(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 4))
	var points []Point
	for i := range 4000 {
		x := 1 + float64(i%40)
		points = append(points, Point{X: x, Y: 2*x + 0.1*rng.NormFloat64(), UY: 0.1})
	}
	want := []int{5, 700, 701, 3999}
	for _, i := range want {
		points[i].Y += 1.5 // 15 standard deviations
	}
	start := time.Now()
	got := outliers(points, false, LineOptions{ThroughOrigin: true, Level: 0.01})
	var indices []int
	for _, o := range got {
		indices = append(indices, o.Index)
	}
	if !slices.Equal(indices, want) {
		t.Errorf("outliers %v, want %v", indices, want)
	}
	// patience + 4 fits of 4000 points take 0.1 s; a turn for each third point would take minutes
	if spent := time.Since(start); spent > 20*time.Second {
		t.Errorf("took %v", spent)
	}
}
