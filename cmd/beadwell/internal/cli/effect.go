package cli

import (
	"slices"

	"beadwell/calib/session"
	"beadwell/calib/track"
)

// effect says when a setting matters for a recording, and what to say when a
// flag gives it and it does not.
type effect struct {
	key     string
	matters func(*track.Recording, *session.Settings) bool
	without string // "has no effect ...": the condition that is not met
}

var effects = []effect{
	{"recording.pixel", anyUnit("px"), "on positions that are not in px"},
	{"recording.sensitivity", anyUnit("V", "mV", "uV", "counts", "1"), "on positions that are lengths"},
	{"recording.time_unit", hasColumn("time", "frame"), "on a file without a time column"},
	{"chamber.depth", hasHeight, "without a height"},
	{"detector.alpha", hasLowPass, "without f3db"},
	{"drive.waveform", isDriven, "on a recording without a moving stage"},
	{"drive.amplitude", isDriven, "on a recording without a moving stage"},
	{"drive.frequency", isDriven, "on a recording without a moving stage"},
}

// checkEffects refuses flags that change nothing on this recording: the user
// believes that they do.
func checkEffects(recording *track.Recording, settings *session.Settings) error {
	for _, setting := range settings.All() {
		if setting.Origin != session.FromFlag {
			continue
		}
		if axis := setting.Axis; slices.Contains([]string{"x", "y", "z"}, axis) && !hasAxis(recording, axis) {
			return noEffect(setting, "on "+recording.Name+", which has no axis "+axis)
		}
		for _, e := range effects {
			if e.key == setting.Key && !e.matters(recording, settings) {
				return noEffect(setting, e.without)
			}
		}
	}
	return nil
}

func noEffect(setting session.Setting, without string) error {
	return settingsError(&session.Error{Where: setting.Where, Key: setting.Key, Text: setting.Text,
		Problem: "has no effect " + without, Hint: "leave it out, or see beadwell check for how the file is read"})
}

func hasAxis(recording *track.Recording, name string) bool {
	return slices.ContainsFunc(recording.Axes, func(a track.Axis) bool { return a.Name == name })
}

func anyUnit(units ...string) func(*track.Recording, *session.Settings) bool {
	return func(recording *track.Recording, _ *session.Settings) bool {
		return slices.ContainsFunc(recording.Axes, func(a track.Axis) bool { return slices.Contains(units, a.Unit) })
	}
}

func hasColumn(roles ...string) func(*track.Recording, *session.Settings) bool {
	return func(recording *track.Recording, _ *session.Settings) bool {
		return slices.ContainsFunc(recording.ReadAs.Columns, func(c track.ColumnUse) bool { return slices.Contains(roles, c.Role) })
	}
}

func hasHeight(_ *track.Recording, settings *session.Settings) bool {
	height, ok := settings.Lookup("chamber.height", "")
	return ok && height.Word != "far"
}

func hasLowPass(_ *track.Recording, settings *session.Settings) bool {
	alpha, _ := settings.Lookup("detector.alpha", "")
	_, ok := settings.Lookup("detector.f3db", "")
	return ok || alpha.Word != ""
}

func isDriven(_ *track.Recording, settings *session.Settings) bool {
	role, _ := settings.Lookup("role", "")
	return role.Word == "driven"
}
