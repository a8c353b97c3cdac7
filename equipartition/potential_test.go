package equipartition

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"
)

// Positions at the quantiles of a normal distribution: the histogram is the Gaussian, the
// potential its parabola, the curvature 1/sigma^2 in kT, the moments those of a Gaussian. The finite
// number of quantiles cuts the tails: 1e-3 of the fourth moment at 1e5 of them.
func TestPotentialOfGaussian(t *testing.T) {
	const n, sigma = 100000, 2e-8
	x := make([]float64, n)
	for i := range x {
		x[i] = sigma * distuv.UnitNormal.Quantile((float64(i)+0.5)/n)
	}
	p := NewPotential(x, sigma, n, 0)
	count, integral := 0, 0.0
	for _, b := range p.Bins {
		count += b.Count
		integral += b.Density * p.Width
		u := b.Centre / sigma
		if math.Abs(u) > 3 {
			continue
		}
		// A bin of 0.163 sigma: the mean over it differs by its square over 24 times u^2-1, here
		// allowed with u^2+1 for the next order, and the count is a whole number. The highest bin, the
		// zero of the energy, is lowered by its own share, 0.0011.
		bound := 0.163*0.163/24*(u*u+1) + 1/float64(b.Count)
		if want := math.Exp(-u*u/2) / math.Sqrt(2*math.Pi) / sigma; math.Abs(b.Density/want-1) > bound {
			t.Errorf("density at %.2f sigma = %.5g, want %.5g", u, b.Density, want)
		}
		if math.Abs(b.Energy-u*u/2) > bound+0.002 {
			t.Errorf("energy at %.2f sigma = %.4f kT, want %.4f", u, b.Energy, u*u/2)
		}
		if want := 1 / math.Sqrt(float64(b.Count)); math.Abs(b.EnergyU/want-1) > 1e-12 {
			t.Errorf("uncertainty at %.2f sigma = %.5f kT, want %.5f", u, b.EnergyU, want)
		}
	}
	outside := int(math.Round(2 * distuv.UnitNormal.CDF(-4) * n))
	if got := n - count; got < outside-1 || got > outside+1 || math.Abs(integral-float64(count)/n) > 1e-12 {
		t.Errorf("%d positions within 4 sigma of integral %.8f, want all but %d", count, integral, outside)
	}
	// the mean over a bin lowers the curvature by the bin's square over 12, 0.2 %
	if got := p.Curvature * sigma * sigma; math.Abs(got-1) > 0.004 {
		t.Errorf("curvature = %.5f kT/sigma2, want 1", got)
	}
	if math.Abs(p.Skewness) > 1e-9 || math.Abs(p.ExcessKurtosis) > 3e-3 {
		t.Errorf("skewness, excess kurtosis = %.2g, %.2g, want 0", p.Skewness, p.ExcessKurtosis)
	}
}

// A potential u^2/2 + 0.2 u^4/4 has the curvature that it has, not the Gaussian's; the fitted
// parabola within 1.5 sigma lies above that at the bottom.
func TestPotentialSeesStiffening(t *testing.T) {
	// positions from the density exp(-U) by inversion on a fine grid
	const n = 50000
	cumulative := []float64{0}
	const steps, reach = 8000, 4.0
	at := func(i int) float64 { return reach * (2*float64(i)/steps - 1) }
	density := func(u float64) float64 { return math.Exp(-u*u/2 - 0.05*u*u*u*u) }
	for i := 1; i <= steps; i++ {
		cumulative = append(cumulative, cumulative[i-1]+(density(at(i))+density(at(i-1)))/2)
	}
	x := make([]float64, n)
	square, k := 0.0, 1
	for i := range x {
		want := (float64(i) + 0.5) / n * cumulative[steps]
		for cumulative[k] < want {
			k++
		}
		x[i] = at(k-1) + (at(k)-at(k-1))*(want-cumulative[k-1])/(cumulative[k]-cumulative[k-1])
		square += x[i] * x[i] / n
	}
	p := NewPotential(x, math.Sqrt(square), n, 0)
	if p.Curvature < 1 || p.Curvature > 1.5 {
		t.Errorf("curvature = %.3f, want between 1 (bottom) and 1.5", p.Curvature)
	}
	if p.ExcessKurtosis > -0.2 {
		t.Errorf("excess kurtosis = %.3f of a stiffening trap, want below -0.2", p.ExcessKurtosis)
	}
}

// Skewness, excess kurtosis and curvature of correlated Gaussian records scatter as stated.
// 1500 records: 3/sqrt(3000) = 0.055 by chance, and the same again since the record's own standard deviation, of
// some 600 independent samples, lowers a fourth moment, and its distribution is skewed.
func TestMomentsScatterAsStated(t *testing.T) {
	const records, n, c = 1500, 4000, 0.85
	rng := rand.New(rand.NewPCG(5, 6))
	var skew, kurt, curve [2]float64
	for range records {
		x := make([]float64, n)
		z := rng.NormFloat64()
		mean, square := 0.0, 0.0
		for i := range x {
			x[i] = z
			mean += z / n
			z = c*z + math.Sqrt(1-c*c)*rng.NormFloat64()
		}
		for i := range x {
			x[i] -= mean
			square += x[i] * x[i] / n
		}
		p := NewPotential(x, math.Sqrt(square), n*(1-c*c)/(1+c*c), c)
		for _, q := range []struct {
			into *[2]float64
			z    float64
		}{{&skew, p.Skewness / p.SkewnessSD}, {&kurt, p.ExcessKurtosis / p.ExcessKurtosisSD}, {&curve, (p.Curvature*square - 1) / (p.CurvatureSD * square)}} {
			q.into[0] += q.z / records
			q.into[1] += q.z * q.z / records
		}
	}
	for _, q := range []struct {
		what string
		m    [2]float64
	}{{"skewness", skew}, {"excess kurtosis", kurt}} {
		sd := math.Sqrt(q.m[1] - q.m[0]*q.m[0])
		if math.Abs(q.m[0]) > 0.11 || math.Abs(sd-1) > 0.11 {
			t.Errorf("%s over its standard uncertainty: mean %.3f, spread %.3f, want 0 and 1", q.what, q.m[0], sd)
		}
	}
	// The curvature counts every bin as having as few independent samples as the variance, which is
	// cautious: about the middle, positions are forgotten faster.
	if sd := math.Sqrt(curve[1] - curve[0]*curve[0]); sd > 1.1 || sd < 0.3 {
		t.Errorf("curvature over its standard uncertainty has the spread %.3f, want 0.3 to 1.1", sd)
	}
}

func TestPotentialDegenerate(t *testing.T) {
	for what, x := range map[string][]float64{"empty": nil, "one": {1e-9}, "constant": {0, 0, 0, 0}, "NaN": {math.NaN(), math.NaN()}} {
		for _, sigma := range []float64{0, 1e-8} {
			if p := NewPotential(x, sigma, 1, 0.5); len(p.Bins) != binCount {
				t.Errorf("%s, sigma %g: %d bins, want %d", what, sigma, len(p.Bins), binCount)
			}
		}
	}
}
