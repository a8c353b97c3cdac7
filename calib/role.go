package calib

import (
	"beadwell/calib/session"
	"beadwell/calib/track"
)

// The roles of a recording.
const (
	RoleTrapped    = "trapped"
	RoleFree       = "free"       // laser off
	RoleDriven     = "driven"     // stage moving
	RoleBackground = "background" // no bead, or a stuck one
)

// roleOf returns the role of a recording; trapped when it is not set.
func roleOf(set *session.Settings) string {
	if s, ok := set.Lookup("role", ""); ok && s.Word != "" {
		return s.Word
	}
	return RoleTrapped
}

// assignDrive gives the axis that follows the stage the motion of the stage.
func assignDrive(rec *track.Recording, set *session.Settings, works []*work) error {
	d, err := newDrive(rec, set)
	if err != nil {
		return err
	}
	at, err := drivenAxis(rec, d)
	if err != nil {
		return err
	}
	d.axis = rec.Axes[at].Name
	works[at].drive = d
	return works[at].checkFlow()
}

// undriven returns the recorded positions without the answer to the stage. Mean and line are those that were fitted
// together with the answer: strokes that are no whole number of periods have a mean and a slope of their own.
func (w *work) undriven() []float64 {
	out := make([]float64, w.record.Samples)
	middle := float64(len(out)-1) / 2
	mean, slope := w.record.Mean+w.reply.mean, w.record.Slope+w.reply.slope
	for i, v := range w.record.X {
		out[i] = v + mean + slope*(float64(i)-middle)/w.rate
	}
	return out
}
