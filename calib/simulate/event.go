package simulate

import (
	"fmt"
	"math"
)

// EventKind names what can happen to the bead during a record.
type EventKind string

const (
	// Jump moves the recorded position by Offset at once and leaves the motion about it as it was.
	Jump EventKind = "jump"
	// SecondBead, of a bead that is still trapped, changes the rest position by Offset, and stiffness and drag by their factors; the bead relaxes to the new place.
	SecondBead EventKind = "second bead"
	// Escape lets the bead diffuse freely from where it is.
	Escape EventKind = "escape"
	// Stuck holds the bead where it is.
	Stuck EventKind = "stuck"
)

// Event is something that happens to the bead at a time, on all axes at once.
type Event struct {
	Kind      EventKind `json:"kind"`
	Time      float64   `json:"time_s"`                     // time from the start of the record [s]
	Offset    []float64 `json:"offset_m,omitempty"`         // displacement of each axis [m]; nil is none
	Stiffness float64   `json:"stiffness_factor,omitempty"` // of SecondBead: stiffness after over before; 0 means 1
	Drag      float64   `json:"drag_factor,omitempty"`      // of SecondBead: drag after over before; 0 means 1
}

func (t Truth) validateEvents() error {
	if len(t.Events) == 0 {
		return nil
	}
	for i, a := range t.Axes {
		if !a.trapped() || t.synthesised() {
			return fmt.Errorf("axis %d: events need a bead in a harmonic trap, with constant drag and no photodiode", i+1)
		}
	}
	last := 0.0
	for i, e := range t.Events {
		if err := e.validate(len(t.Axes)); err != nil {
			return fmt.Errorf("event %d: %w", i+1, err)
		}
		if e.Time < last {
			return fmt.Errorf("event %d: at %v s, before the one at %v s; put events in order of time", i+1, e.Time, last)
		}
		last = e.Time
	}
	return nil
}

func (e Event) validate(axes int) error {
	switch e.Kind {
	case Jump, SecondBead, Escape, Stuck:
	default:
		return fmt.Errorf("kind %q: use %q, %q, %q or %q", e.Kind, Jump, SecondBead, Escape, Stuck)
	}
	switch {
	case !(e.Time >= 0) || !finite(e.Time):
		return fmt.Errorf("time %v s: must be 0 or positive", e.Time)
	case e.Offset != nil && len(e.Offset) != axes:
		return fmt.Errorf("%d offsets for %d axes", len(e.Offset), axes)
	case e.Stiffness != 0 && !positive(e.Stiffness), e.Drag != 0 && !positive(e.Drag):
		return fmt.Errorf("factors %v of stiffness and %v of drag: must be positive and finite", e.Stiffness, e.Drag)
	}
	for _, v := range e.Offset {
		if !finite(v) {
			return fmt.Errorf("offset %v m: must be finite", v)
		}
	}
	return nil
}

// harmonic returns the motion [m] of an axis by exact updates, events and noise included.
func (t Truth) harmonic(a Axis, index int, seed uint64) []float64 {
	x := make([]float64, t.Samples)
	random := newDeviates(seed, index, motion)
	s := newStep(a, 1/t.Rate, t.Exposure)
	position := start(a, index, seed)
	begin, rest := 0, 0.0
	for _, e := range t.Events {
		end := min(max(begin, int(math.Ceil(math.Min(e.Time*t.Rate, float64(t.Samples))))), t.Samples)
		position = thermal(x[begin:end], s, position, random)
		shift(x[begin:end], rest)
		begin = end
		if e.Offset != nil {
			rest += e.Offset[index]
		}
		if e.Kind == SecondBead && e.Offset != nil {
			position -= e.Offset[index]
		}
		a = e.apply(a)
		s = newStep(a, 1/t.Rate, t.Exposure)
	}
	thermal(x[begin:], s, position, random)
	shift(x[begin:], rest)
	return x
}

// apply returns the axis as it is after the event.
func (e Event) apply(a Axis) Axis {
	switch e.Kind {
	case Escape:
		if a.Corner != 0 {
			return Axis{Diffusion: 2 * math.Pi * a.Corner * a.Variance, Noise: a.Noise}
		}
	case Stuck:
		return Axis{Fixed: true, Noise: a.Noise}
	case SecondBead:
		stiffness, drag := e.Stiffness, e.Drag
		if stiffness == 0 {
			stiffness = 1
		}
		if drag == 0 {
			drag = 1
		}
		a.Variance /= stiffness
		a.Corner *= stiffness / drag
	}
	return a
}

func shift(x []float64, by float64) {
	if by == 0 {
		return
	}
	for i := range x {
		x[i] += by
	}
}
