package session

import (
	"beadwell/calib/medium"
	"beadwell/calib/quantity"
)

// rateTolerance is how far a stated rate or scale may be from another statement of it,
// relative: labels carry three or four digits, and a nominal 30 frames a second is 29.97.
const rateTolerance = 2e-3

// checkPairs looks for settings of one origin that exclude each other, and
// for values that cannot hold together.
func checkPairs(s *Settings) []*Error {
	var problems []*Error
	for _, pair := range exclusive {
		a, hasA := s.highest(pair[0])
		b, hasB := s.highest(pair[1])
		if hasA && hasB && a.Origin == b.Origin && a.Origin != FromDefault {
			problems = append(problems, &Error{Where: b.Where, Key: b.Key, Text: b.Text,
				Problem: "is given beside " + a.Key + " " + quoted(a.Text) + from(a), Hint: "keep one of the two"})
		}
	}
	return append(append(problems, checkExposure(s)...), checkDepth(s)...)
}

// exclusive lists pairs of settings that replace each other.
var exclusive = [][2]string{
	{"medium.fluid", "medium.viscosity"},
	{"recording.noise", "recording.background"},
}

// highest returns the setting of a key with the highest origin on any axis.
func (s *Settings) highest(key string) (best Setting, found bool) {
	for _, axis := range s.axesOf(key) {
		if setting, ok := s.top(slot{key, axis}); ok && (!found || setting.Origin > best.Origin) {
			best, found = setting, true
		}
	}
	return best, found
}

// from names the place of a setting, to stand behind its text.
func from(s Setting) string {
	if s.Where == "" {
		return " (" + s.Origin.String() + ")"
	}
	return " (" + printable(s.Where) + ")"
}

// checkExposure refuses a shutter that is open for longer than a frame.
func checkExposure(s *Settings) []*Error {
	rate, ok := s.Lookup("recording.rate", "")
	if !ok {
		return nil
	}
	var problems []*Error
	for _, axis := range s.axesOf("recording.exposure") {
		exposure, ok := s.Lookup("recording.exposure", axis)
		if !ok || exposure.Axis != axis || exposure.Value.SI*rate.Value.SI <= 1+rateTolerance {
			continue
		}
		problems = append(problems, &Error{Where: exposure.Where, Key: withAxis(exposure.Key, axis), Text: exposure.Text,
			Problem: "is longer than the " + quantity.Format(1/rate.Value.SI, 0, "ms") + " between samples at recording.rate " + quoted(rate.Text) + from(rate),
			Hint:    "correct the exposure or the rate; a camera that averages frames has its full frame as exposure"})
	}
	return problems
}

// checkDepth refuses a bead above the second surface.
func checkDepth(s *Settings) []*Error {
	height, okHeight := s.Lookup("chamber.height", "")
	depth, okDepth := s.Lookup("chamber.depth", "")
	if !okHeight || !okDepth || height.Word != "" || height.Value.SI < depth.Value.SI {
		return nil
	}
	return []*Error{{Where: height.Where, Key: height.Key, Text: height.Text,
		Problem: "is not below chamber.depth " + quoted(depth.Text) + from(depth),
		Hint:    "give the height of the bead's centre above the nearer surface, and the depth from surface to surface"}}
}

// checkUse refuses settings that would have no effect without another one.
func checkUse(s *Settings) []*Error {
	var problems []*Error
	needs := func(key, other, hint string) {
		a, has := s.Lookup(key, "")
		if _, ok := s.Lookup(other, ""); has && !ok {
			problems = append(problems, &Error{Where: a.Where, Key: a.Key, Text: a.Text, Problem: "has no effect without " + other, Hint: hint})
		}
	}
	needs("medium.density", "medium.viscosity", "give the viscosity too, or leave the density to the fluid")
	if role, _ := s.Lookup("role", ""); role.Word == "trapped" || role.Word == "driven" {
		needs("laser.heating", "laser.power", "give the power at the sample")
	}
	return append(problems, checkFluid(s)...)
}

// checkFluid refuses a temperature at which the fluid's correlation does not hold.
func checkFluid(s *Settings) []*Error {
	name, hasFluid := s.Lookup("medium.fluid", "")
	temperature, hasTemperature := s.Lookup("medium.temperature", "")
	if !hasFluid || !hasTemperature {
		return nil
	}
	known, err := medium.ParseFluid(name.Word)
	if err == nil {
		_, err = known.At(temperature.Value.SI)
	}
	if err == nil {
		return nil
	}
	problem, hint, _ := cutLast(err.Error(), ": ")
	return []*Error{{Where: temperature.Where, Key: temperature.Key, Text: temperature.Text,
		Problem: "does not fit medium.fluid " + quoted(name.Text) + from(name) + ": " + problem, Hint: hint}}
}
