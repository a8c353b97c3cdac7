package simulate

import (
	"fmt"
	"math/cmplx"
)

// Photodiode is the partial low-pass of a silicon diode in which some light is
// absorbed behind the depletion layer: of the signal, the share Alpha is prompt and the
// rest passes a first-order filter (Berg-Sorensen et al., J. Appl. Phys. 93 (2003) 3167).
type Photodiode struct {
	Alpha float64 `json:"alpha"`   // prompt share of the signal, 0 to 1
	F3dB  float64 `json:"f3dB_Hz"` // corner frequency of the filter [Hz]
}

func (p Photodiode) validate() error {
	if !(p.Alpha >= 0 && p.Alpha <= 1) {
		return fmt.Errorf("photodiode: alpha %v: a share from 0 to 1", p.Alpha)
	}
	if !positive(p.F3dB) {
		return fmt.Errorf("photodiode: f3dB %v Hz: must be positive and finite", p.F3dB)
	}
	return nil
}

// response returns the complex response to exp(2 pi i f t). Its squared modulus is
// alpha² + (1-alpha²)/(1 + (f/f3dB)²).
func (p Photodiode) response(f float64) complex128 {
	return complex(p.Alpha, 0) + complex(1-p.Alpha, 0)/complex(1, f/p.F3dB)
}

// power returns the squared modulus of the response at f [Hz].
func (p Photodiode) power(f float64) float64 {
	size := cmplx.Abs(p.response(f))
	return size * size
}
