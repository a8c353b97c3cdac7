package simulate

import (
	"math"
	"math/cmplx"
)

// pieces returns the stretches of one part of the motion, from begin to end [s], about a
// position of 0, with the steady response of a bead of the relaxation rate [1/s].
func (d Drive) pieces(begin, end, phase, relaxation float64, diode *Photodiode) []piece {
	if d.Waveform == Sine {
		return []piece{d.sine(begin, phase, relaxation, diode)}
	}
	// The triangle reverses where its phase is pi/2 + k pi.
	var all []piece
	half := 0.5 / d.Frequency
	turns := math.Floor(phase/math.Pi + 0.5)
	reversal := begin + half*(turns+0.5-phase/math.Pi)
	speed := 4 * d.Amplitude * d.Frequency
	if math.Mod(turns, 2) != 0 {
		speed = -speed
	}
	offset := d.Amplitude * triangle(phase)
	for start := begin; start < end; {
		all = append(all, piece{start: start, offset: offset, speed: speed, relaxation: relaxation})
		offset = math.Copysign(d.Amplitude, speed)
		start = reversal + half*float64(len(all)-1)
		speed = -speed
	}
	return all
}

// sine returns the one piece of a sine. The bead answers exp(i omega t) of the stage
// with i omega/(i omega + relaxation), and the detector with its own response.
func (d Drive) sine(begin, phase, relaxation float64, diode *Photodiode) piece {
	omega := 2 * math.Pi * d.Frequency
	answer := complex(0, omega) / complex(relaxation, omega)
	if diode != nil {
		answer *= diode.response(d.Frequency)
	}
	return piece{
		start: begin, relaxation: relaxation,
		amplitude: d.Amplitude, omega: omega, phase: phase,
		gain: cmplx.Abs(answer), lead: cmplx.Phase(answer),
	}
}

// steady returns the displacement [m] at a phase of a bead that has been driven for long.
func (d Drive) steady(phase, relaxation float64, diode *Photodiode) float64 {
	if d.Waveform == Sine {
		p := d.sine(0, phase, relaxation, diode)
		return p.amplitude * p.gain * math.Sin(phase+p.lead)
	}
	half := 0.5 / d.Frequency
	cycles := phase/math.Pi + 0.5
	turns := math.Floor(cycles)
	lag := 4 * d.Amplitude * d.Frequency / relaxation // gamma v/kappa
	if math.Mod(turns, 2) != 0 {
		lag = -lag
	}
	gone := math.Expm1(-relaxation * half) // exp - 1
	since := (cycles - turns) * half
	return lag * (1 - 2/(2+gone)*(1+math.Expm1(-relaxation*since)))
}

// triangle returns the triangular wave that shares zeros, signs and extrema of ±1 with the sine.
func triangle(phase float64) float64 {
	return 2 / math.Pi * math.Asin(math.Sin(phase))
}

// link sets what relaxes at the start of each piece so that the bead, displaced by
// displacement [m] at the first start, moves without a jump.
func link(pieces []piece, displacement float64) {
	for i := range pieces {
		p := &pieces[i]
		_, steady := p.mean(p.start, 0)
		p.transient = displacement - steady
		if i+1 < len(pieces) {
			_, displacement = p.mean(pieces[i+1].start, 0)
		}
	}
}
