package simulate

import (
	"math"
	"math/rand/v2"

	"gonum.org/v1/gonum/integrate/quad"

	"beadwell/calib/transform"
)

// Spectrum describes a stationary Gaussian motion by its power spectral density,
// and how the motion is sampled.
type Spectrum struct {
	Density  func(f float64) float64 // one-sided density [m²/Hz] of the unsampled motion, finite at f = 0 [Hz] and falling at least as 1/f² far above Rate
	Rate     float64                 // sampling rate [Hz]
	Exposure float64                 // exposure of each sample [s], from 0 to 1/Rate
	Memory   float64                 // time after which the motion has forgotten itself [s]; 0 means the length of the record
}

// SpectralSynthesis returns n samples [m] of a Gaussian motion with the given
// spectrum, blurred by the exposure and with all aliases that sampling folds into it.
//
// Each Fourier component of a circular record gets an independent complex Gaussian
// amplitude, and n samples are cut from the circle. The circle is longer than n by at least
// Memory, and at least twice n, so the two ends of the cut do not know each other. It needs about
// 100 ns a sample. The deviates come from source, by the polar method.
func SpectralSynthesis(n int, s Spectrum, source *rand.PCG) []float64 {
	return newAliases(s).draw(n, deviates{source})
}

// draw returns n samples [m] of the motion.
func (a aliases) draw(n int, random deviates) []float64 {
	rate := a.spectrum.Rate
	length := transform.GoodLengthAbove(max(2*n, n+int(a.spectrum.Memory*rate), shortestCircle))
	plan, err := transform.NewPlan(length)
	if err != nil {
		panic("simulate: " + err.Error()) // GoodLengthAbove gives only lengths that have a plan
	}
	bins := make([]complex128, length/2+1)
	for k := range bins {
		f := float64(k) * rate / float64(length)
		// E|X|² = length fs S with the two-sided density S, half of the one-sided one; half of that in each part.
		size := math.Sqrt(float64(length) * rate * a.density(f) / 4)
		z, y := random.pair()
		bins[k] = complex(float64(size*z), float64(size*y))
	}
	// The first and the last bin are real.
	bins[0] = complex(math.Sqrt2*real(bins[0]), 0)
	bins[length/2] = complex(math.Sqrt2*real(bins[length/2]), 0)
	x := make([]float64, length)
	plan.Inverse(x, bins)
	return x[:n:n]
}

// shortestCircle keeps the aliases' sampling of the spectrum finer than any structure
// a record of a few samples could show.
const shortestCircle = 64

// blurred returns the one-sided density [m²/Hz] after the exposure: times sinc²(pi f W).
func (s Spectrum) blurred(f float64) float64 {
	return s.Density(f) * squaredSinc(math.Pi*f*s.Exposure)
}

// squaredSinc returns (sin u/u)², 1 at u = 0.
func squaredSinc(u float64) float64 {
	if u == 0 {
		return 1
	}
	v := math.Sin(u) / u
	return v * v
}

// aliases evaluates the density that sampling leaves: blurred(f) itself, and the sum
// over all k != 0 of blurred(|f + k Rate|). On 0 <= f <= Rate/2 that sum is smooth, for
// its nearest singularity lies at f = Rate, and is interpolated from aliasNodes
// Chebyshev points with an error below 5.8^-aliasNodes.
type aliases struct {
	spectrum     Spectrum
	coefficients []float64 // Chebyshev coefficients of the sum over 0 .. Rate/2
}

const (
	aliasNodes = 24  // 5.8^-24 = 5e-19
	aliasTerms = 100 // pairs summed one by one; the rest is an integral, with a midpoint error of order 1/aliasTerms³
	tailNodes  = 100 // Gauss-Legendre points of that integral: enough to follow sinc² down to 1e-5 of its size
)

func newAliases(s Spectrum) aliases {
	values := make([]float64, aliasNodes)
	for i := range values {
		angle := math.Pi * (float64(i) + 0.5) / aliasNodes
		values[i] = s.aliasSum(s.Rate / 4 * (1 + math.Cos(angle)))
	}
	coefficients := make([]float64, aliasNodes)
	for k := range coefficients {
		for i, v := range values {
			coefficients[k] += 2.0 / aliasNodes * v * math.Cos(math.Pi*float64(k)*(float64(i)+0.5)/aliasNodes)
		}
	}
	coefficients[0] /= 2
	return aliases{s, coefficients}
}

// density returns the one-sided density [m²/Hz] of the sampled motion at 0 <= f <= Rate/2 [Hz].
func (a aliases) density(f float64) float64 {
	t := 4*f/a.spectrum.Rate - 1
	// Clenshaw's recurrence.
	var next, last float64
	for k := len(a.coefficients) - 1; k > 0; k-- {
		next, last = a.coefficients[k]+2*t*next-last, next
	}
	return math.Max(0, a.spectrum.blurred(f)+a.coefficients[0]+t*next-last)
}

// aliasSum returns the sum of all aliases but the zeroth at f [m²/Hz].
func (s Spectrum) aliasSum(f float64) float64 {
	sum := 0.0
	edge := (aliasTerms + 0.5) * s.Rate
	for _, sign := range []float64{-1, 1} {
		// The tail from edge to infinity, with u = edge/w.
		sum += quad.Fixed(func(w float64) float64 {
			return s.blurred(edge/w+sign*f) * edge / (w * w * s.Rate)
		}, 0, 1, tailNodes, quad.Legendre{}, 0)
		for k := aliasTerms; k > 0; k-- {
			sum += s.blurred(float64(k)*s.Rate + sign*f)
		}
	}
	return sum
}
