package simulate

import (
	"fmt"
	"math"
)

// Waveform is the shape of the motion of a stage.
type Waveform string

const (
	Sine     Waveform = "sine"
	Triangle Waveform = "triangle" // constant speed, 4 x Amplitude x Frequency, reversed twice a period
)

// Stage is a stage that carries the fluid past the trap along one axis. The drag is
// the static one, and the bead is in the steady state when the record begins.
type Stage struct {
	Axis  int     `json:"axis"`                // index of the driven axis, from 0
	Phase float64 `json:"phase_rad,omitempty"` // phase of the first part when the record begins [rad]
	Parts []Drive `json:"parts"`               // one after the other
}

// Drive is one part of the motion of a stage.
type Drive struct {
	Waveform  Waveform `json:"waveform"`
	Amplitude float64  `json:"amplitude_m"`          // half of the peak-to-peak excursion [m]
	Frequency float64  `json:"frequency_Hz"`         // [Hz]
	Duration  float64  `json:"duration_s,omitempty"` // [s]; 0 is until the end of the record
}

func (t Truth) validateStage() error {
	s := t.Stage
	if s == nil {
		return nil
	}
	switch {
	case !t.has(s.Axis):
		return fmt.Errorf("stage: axis %d, counted from 0: there are %d axes", s.Axis, len(t.Axes))
	case !t.Axes[s.Axis].trapped():
		return fmt.Errorf("stage: axis %d: only a bead in a harmonic trap can be driven", s.Axis)
	case t.eventful() || t.mixed():
		return fmt.Errorf("stage: a driven recording can have neither events other than an escape, nor leaks, nor a rotation")
	case t.Photodiode != nil && (len(s.Parts) != 1 || s.Parts[0].Waveform != Sine):
		return fmt.Errorf("stage: with a photodiode it can only follow one sine for the whole record")
	case len(s.Parts) == 0:
		return fmt.Errorf("stage: no parts: at least one is needed")
	case !finite(s.Phase):
		return fmt.Errorf("stage: phase %v rad: must be finite", s.Phase)
	}
	for i, d := range s.Parts {
		switch {
		case d.Waveform != Sine && d.Waveform != Triangle:
			return fmt.Errorf("stage: part %d: waveform %q: use %q or %q", i+1, d.Waveform, Sine, Triangle)
		case !positive(d.Amplitude) || !positive(d.Frequency):
			return fmt.Errorf("stage: part %d: amplitude %v m and frequency %v Hz: must be positive and finite", i+1, d.Amplitude, d.Frequency)
		case !(d.Duration >= 0) || d.Duration == 0 && i+1 < len(s.Parts):
			return fmt.Errorf("stage: part %d: duration %v s: must be positive, or 0 in the last part", i+1, d.Duration)
		}
	}
	return nil
}

// eventful tells that something other than one escape happens.
func (t Truth) eventful() bool {
	return len(t.Events) > 1 || len(t.Events) == 1 && t.Events[0].Kind != Escape
}

// release lets a bead that has escaped go with the liquid: from then on it moves as the stage does.
func (t Truth) release(stage, response []float64) {
	for _, e := range t.Events {
		at := int(math.Ceil(math.Min(e.Time*t.Rate, float64(len(response)))))
		for i := max(at, 1); i < len(response); i++ {
			response[i] = response[max(at, 1)-1] + stage[i] - stage[max(at, 1)-1]
		}
	}
}

// drive returns the position of the stage and the displacement of the bead that it causes [m],
// each averaged over the exposure; the bead's also passes the photodiode, if there is one.
//
// The bead obeys dx/dt = -2 pi fc x + ds/dt. On each stretch of constant speed or of one sine
// the solution is a steady part and an exponential, whose means are known in closed form.
func (s Stage) drive(t Truth) (stage, response []float64) {
	pieces := s.pieces(t)
	stage, response = make([]float64, t.Samples), make([]float64, t.Samples)
	at := 0
	for i := range stage {
		begin := float64(i) / t.Rate
		for at+1 < len(pieces) && pieces[at+1].start <= begin {
			at++
		}
		stage[i], response[i] = mean(pieces[at:], begin, t.Exposure)
	}
	return stage, response
}

// mean returns the means of stage and bead from begin [s] on over the exposure [s]; the
// first piece holds begin.
func mean(pieces []piece, begin, exposure float64) (stage, response float64) {
	if exposure == 0 {
		return pieces[0].mean(begin, 0)
	}
	end := begin + exposure
	for i, p := range pieces {
		until := end
		if i+1 < len(pieces) {
			until = math.Min(end, pieces[i+1].start)
		}
		share := (until - begin) / exposure
		s, x := p.mean(begin, until-begin)
		stage += float64(share * s)
		response += float64(share * x)
		if begin = until; until == end {
			break
		}
	}
	return stage, response
}

// piece is a stretch of time on which the stage has constant speed or follows one sine.
type piece struct {
	start  float64 // [s]
	offset float64 // position of the stage at start, or about which the sine goes [m]
	speed  float64 // [m/s]; 0 for a sine

	amplitude, omega, phase float64 // of the sine: [m], [rad/s], [rad] at start
	gain, lead              float64 // steady response of the bead to the sine: factor and phase [rad]

	relaxation float64 // 2 pi fc [1/s]
	transient  float64 // what relaxes of the bead's displacement, at start [m]
}

// mean returns the means of stage and bead [m] over a duration [s] from a time [s].
func (p piece) mean(begin, duration float64) (stage, response float64) {
	since := begin - p.start
	decayed := p.transient * (1 + math.Expm1(-p.relaxation*since)) * meanDecay(p.relaxation*duration)
	if p.amplitude == 0 {
		return p.offset + float64(p.speed*(since+duration/2)), p.speed/p.relaxation + decayed
	}
	blur := p.omega * duration / 2
	size := p.amplitude
	if blur > 0 {
		size *= math.Sin(blur) / blur
	}
	angle := p.phase + float64(p.omega*since) + blur
	return p.offset + float64(size*math.Sin(angle)), float64(size*p.gain*math.Sin(angle+p.lead)) + decayed
}

// pieces returns the stretches that make up the record.
func (s Stage) pieces(t Truth) []piece {
	var all []piece
	relaxation := 2 * math.Pi * t.Axes[s.Axis].Corner
	length := float64(t.Samples) / t.Rate
	begin, phase := 0.0, s.Phase
	for i, d := range s.Parts {
		end := begin + d.Duration
		if d.Duration == 0 || end > length || i+1 == len(s.Parts) {
			end = length
		}
		first := len(all) == 0
		var position, displacement float64
		if !first {
			position, displacement = all[len(all)-1].mean(begin, 0)
		}
		part := d.pieces(begin, end, phase, relaxation, t.Photodiode)
		// The stage goes on from where it was; the first part goes about 0.
		if !first {
			here, _ := part[0].mean(begin, 0)
			for j := range part {
				part[j].offset += position - here
			}
		} else {
			displacement = d.steady(phase, relaxation, t.Photodiode)
		}
		link(part, displacement)
		all = append(all, part...)
		if begin, phase = end, 0; begin >= length {
			break
		}
	}
	return all
}
