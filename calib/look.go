package calib

import (
	"math"

	"beadwell/calib/health"
	"beadwell/calib/session"
	"beadwell/calib/track"
)

// Look is what can be said of a recording without a fit: how it was read, and the
// checks that need no model.
type Look struct {
	Input     Input      `json:"input"`
	ReadAs    ReadAs     `json:"read_as"`
	Settings  []Setting  `json:"settings"`
	Recording Recording  `json:"recording"`
	Axes      []LookAxis `json:"axes"`
	Checks    []Check    `json:"checks"` // those that found nothing too
}

// LookAxis is one axis of a recording as it was read.
type LookAxis struct {
	Name    string `json:"axis"`
	Header  string `json:"header"`
	Unit    string `json:"unit"`    // in the file; empty when nobody stated it
	InUnit  string `json:"read_in"` // of low and high: "m", "V", or that of the file
	Low     Float  `json:"low"`     // smallest position; null when there is none
	High    Float  `json:"high"`    // largest position
	Missing int    `json:"missing"`
}

// LookAt describes a recording without a fit.
func LookAt(rec *track.Recording, set *session.Settings) Look {
	r := &Result{}
	r.describe(rec, nil)
	l := Look{Input: r.Input, ReadAs: r.ReadAs, Settings: ListSettings(set), Recording: r.Recording, Axes: []LookAxis{}, Checks: []Check{}}
	in := unfittedInput(rec, set)
	if _, stated := set.Lookup("recording.exposure", ""); stated {
		l.Recording.Exposure = Float(in.Exposure)
	}
	for _, a := range rec.Axes {
		low, high := math.Inf(1), math.Inf(-1)
		for _, v := range a.Values {
			if v-v == 0 {
				low, high = min(low, v), max(high, v)
			}
		}
		unit := readUnit(a.Unit)
		if unit == "" && a.Unit != "" {
			unit = "m"
		}
		l.Axes = append(l.Axes, LookAxis{Name: a.Name, Header: a.Header, Unit: a.Unit, InUnit: unit, Low: Float(low), High: Float(high), Missing: a.Missing})
	}
	l.Checks = checksOf(rec, set)
	return l
}

// unfittedInput is a recording for the checks, without what a fit would tell.
func unfittedInput(rec *track.Recording, set *session.Settings) health.Input {
	in := health.Input{Rate: rec.Rate, Missing: rec.Missing, JitterRMS: rec.JitterRMS, Start: rec.Start}
	for _, axis := range rec.Axes {
		exposure, _ := set.Lookup("recording.exposure", axis.Name)
		in.Exposure = max(in.Exposure, exposure.Value.SI)
		in.Axes = append(in.Axes, health.Axis{Name: axis.Name, Unit: readUnit(axis.Unit), X: axis.Values})
	}
	return in
}

// unfittedStretch is the good part of a recording by the checks that need no fit.
func unfittedStretch(rec *track.Recording, set *session.Settings) stretch {
	in := unfittedInput(rec, set)
	return goodStretch(in, health.Run(in))
}

// readUnit is the unit in which the reader gives positions of a file's unit, as the
// checks take it; empty is m.
func readUnit(unit string) string {
	switch unit {
	case "m", "mm", "um", "nm", "pm", "":
		return ""
	case "V", "mV", "uV":
		return "V"
	}
	return unit
}
