package simulate

import (
	"math"
	"math/rand/v2"
)

// deviates turns uniform random bits into standard normal deviates.
type deviates struct {
	source *rand.PCG
}

// purpose separates the random streams that one seed feeds, so that a fault
// switched on or off leaves the thermal motion untouched.
type purpose uint64

const (
	motion       purpose = iota + 1 // thermal motion, blur and localisation noise
	origin                          // where the bead is when the record begins
	localisation                    // localisation noise, where it is not part of the exact update
	stamps                          // time stamps
	losses                          // which samples are lost
)

// newDeviates returns the stream of one axis for one purpose.
func newDeviates(seed uint64, axis int, use purpose) deviates {
	high := mix(seed)
	low := mix(high ^ mix(uint64(use)<<32|uint64(axis)))
	return deviates{rand.NewPCG(high, low)}
}

// mix is the SplitMix64 step (Steele, Lea & Flood, ACM SIGPLAN Notices 49
// (2014) 453, with the finaliser constants of Stafford's variant 13): it spreads seeds that
// differ in one bit over all 64 bits, where a linear congruential state would
// keep such neighbours correlated.
func mix(z uint64) uint64 {
	z += 0x9e3779b97f4a7c15
	z = (z ^ (z >> 30)) * 0xbf58476d1ce4e5b9
	z = (z ^ (z >> 27)) * 0x94d049bb133111eb
	return z ^ (z >> 31)
}

// pair returns two independent standard normal deviates, by the polar method of
// Marsaglia & Bray, SIAM Rev. 6 (1964) 260: a point drawn uniformly from the
// unit disc, stretched by sqrt(-2 ln s/s) where s is its squared radius.
func (d deviates) pair() (float64, float64) {
	for {
		u := symmetric(d.source.Uint64())
		v := symmetric(d.source.Uint64())
		s := float64(u*u) + float64(v*v)
		if s < 1 && s > 0 {
			stretch := math.Sqrt(-2 * math.Log(s) / s)
			return u * stretch, v * stretch
		}
	}
}

// symmetric maps 64 random bits to one of 2^53 equally spaced numbers in [-1, 1).
func symmetric(bits uint64) float64 {
	return float64(int64(bits)>>11) * (1.0 / (1 << 52))
}
