package equipartition

import (
	"math"

	"beadwell/calib/transform"
)

// Potential is the potential of mean force from the histogram of positions.
type Potential struct {
	Width                            float64 // of a bin [m]
	Bins                             []Bin
	Sigma                            float64 // standard deviation of the recorded positions [m]
	Curvature                        float64 // second derivative at the minimum, in kT/m2, as recorded
	CurvatureSD                      float64
	Skewness, SkewnessSD             float64
	ExcessKurtosis, ExcessKurtosisSD float64
}

// Bin is one bin of the histogram.
type Bin struct {
	Centre  float64 // relative to the mean [m]
	Count   int
	Density float64 // 1/m
	Energy  float64 // -ln(density/highest) [kT]; NaN in an empty bin
	EnergyU float64 // standard uncertainty [kT], from the effective number of counts
}

// binCount is the number of bins over plus or minus four standard deviations.
const binCount = 49

// NewPotential makes the histogram of x [m] (mean removed, NaN where missing) with a
// standard deviation sigma [m]. Effective is the number of independent samples for the
// variance, relaxation c the correlation of neighbouring samples: higher moments lose their correlation faster, the n-th one
// n times as fast (Hermite polynomials of an Ornstein-Uhlenbeck process; Risken, The Fokker-Planck Equation, 1989, 5.5).
//
// The curvature is that of the parabola of the potential, weighted by counts, within 1.5 sigma.
func NewPotential(x []float64, sigma, effective, c float64) Potential {
	return Count(x, sigma).Potential(sigma, effective, c)
}

// Histogram counts positions in bins, and sums powers of them. The zero value is empty.
type Histogram struct {
	Sigma  float64       // what the width of the bins is made from [m]
	counts [binCount]int // over plus or minus four times Sigma
	n      int
	m3, m4 float64 // sums of powers of positions over Sigma
}

// Count makes the histogram of x [m] (mean removed, NaN where missing) with bins for a standard deviation of
// about sigma [m].
func Count(x []float64, sigma float64) Histogram {
	pieces := make([]Histogram, transform.Pieces(len(x)))
	transform.InPieces(len(x), func(piece, from, to int) {
		pieces[piece].Sigma = sigma
		pieces[piece].count(x[from:to])
	})
	all := Histogram{Sigma: sigma}
	for i := range pieces {
		all.Add(&pieces[i])
	}
	return all
}

func (h *Histogram) count(x []float64) {
	perBin, perSigma := binCount/(8*h.Sigma), 1/h.Sigma
	for _, v := range x {
		if v != v {
			continue
		}
		h.n++
		u := v * perSigma
		u2 := u * u
		h.m3 += u2 * u
		h.m4 += u2 * u2
		if i := v*perBin + binCount/2.0; i >= 0 && i < binCount {
			h.counts[int(i)]++
		}
	}
}

// Add adds the counts of another histogram of the same Sigma.
func (h *Histogram) Add(o *Histogram) {
	h.n += o.n
	h.m3 += o.m3
	h.m4 += o.m4
	for i, k := range o.counts {
		h.counts[i] += k
	}
}

// Scaled returns the histogram of the positions times a factor.
func (h Histogram) Scaled(factor float64) Histogram {
	h.Sigma *= factor
	return h
}

// Potential is NewPotential of the positions that were counted.
func (h Histogram) Potential(sigma, effective, c float64) Potential {
	p := Potential{Width: 8 * h.Sigma / binCount, Sigma: sigma}
	n, counts := h.n, h.counts
	ratio := h.Sigma / sigma
	m3, m4 := h.m3*ratio*ratio*ratio, h.m4*ratio*ratio*ratio*ratio
	top := 0
	for _, k := range counts {
		top = max(top, k)
	}
	share := math.Min(1, effective/float64(n)) // independent part of a count
	for i, k := range counts {
		b := Bin{Centre: (float64(i) + 0.5 - binCount/2.0) * p.Width, Count: k,
			Density: float64(k) / float64(n) / p.Width, Energy: math.NaN(), EnergyU: math.NaN()}
		if k > 0 {
			b.Energy = -math.Log(float64(k) / float64(top))
			b.EnergyU = 1 / math.Sqrt(math.Max(share*float64(k), 1e-300))
		}
		p.Bins = append(p.Bins, b)
	}
	p.Skewness, p.ExcessKurtosis = m3/float64(n), m4/float64(n)-3
	p.SkewnessSD = math.Sqrt(6 / independent(n, c, 3))
	p.ExcessKurtosisSD = math.Sqrt(24 / independent(n, c, 4))
	p.fitCurvature(share)
	return p
}

// independent returns the number of independent samples among n for a moment whose
// correlation is c^order per sample: n (1-c^k)/(1+c^k).
func independent(n int, c float64, order int) float64 {
	z := math.Pow(c, float64(order))
	return math.Max(2, float64(n)*(1-z)/(1+z))
}

// fitCurvature fits a + b x + k x^2/2 to the energies within 1.5 sigma.
func (p *Potential) fitCurvature(share float64) {
	var s [5]float64
	var r [3]float64
	for _, b := range p.Bins {
		if b.Count == 0 || math.Abs(b.Centre) > 1.5*p.Sigma {
			continue
		}
		w := share * float64(b.Count)
		u := b.Centre / p.Sigma
		pow := 1.0
		for k := range s {
			s[k] += w * pow
			if k < 3 {
				r[k] += w * pow * b.Energy
			}
			pow *= u
		}
	}
	det := s[0]*(s[2]*s[4]-s[3]*s[3]) - s[1]*(s[1]*s[4]-s[3]*s[2]) + s[2]*(s[1]*s[3]-s[2]*s[2])
	top := s[0]*(s[2]*r[2]-r[1]*s[3]) - s[1]*(s[1]*r[2]-r[1]*s[2]) + r[0]*(s[1]*s[3]-s[2]*s[2])
	p.Curvature = 2 * top / det / (p.Sigma * p.Sigma)
	p.CurvatureSD = 2 * math.Sqrt((s[0]*s[2]-s[1]*s[1])/det) / (p.Sigma * p.Sigma)
}
