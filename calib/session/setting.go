package session

import (
	"cmp"
	"maps"
	"regexp"
	"slices"
	"strings"

	"beadwell/calib/quantity"
)

// Setting is one setting from one origin.
type Setting struct {
	Key     string         // full name: "bead.diameter"
	Axis    string         // "x", "y", "z", also "time" and "stage" for columns; "" for all axes
	Text    string         // as it was given
	Value   quantity.Value // of a quantity, SI units; zero when Word or Bands are set
	Word    string         // of a choice or a text, in its canonical spelling; "" otherwise
	Bands   []Interval     // of a range (one) or of a list of ranges
	Origin  Origin         // where it came from
	Where   string         // the place: "session.toml:4:12", "tracks.csv:3:7", "--diameter"
	Assumed bool           // a default that changes the answer
}

// Files are the paths that a setting names, separated by semicolons.
func (s Setting) Files() []string {
	var files []string
	for part := range strings.SplitSeq(s.Word, ";") {
		if part = strings.TrimSpace(part); part != "" {
			files = append(files, part)
		}
	}
	return files
}

// slot is a setting's place: a key, and the axis it is for.
type slot struct{ key, axis string }

// Settings holds settings from any number of origins. The zero value is empty
// and ready for use; a nil pointer reads as empty.
type Settings struct {
	layers map[slot]map[Origin]Setting
}

// Set reads the text of one setting and keeps it under its origin, in place of
// one that this origin gave before. where is the place for messages and
// results: "session.toml:4:12", or "--diameter". A setting that may differ between axes
// takes an axis, or a text that names them: "x=4(1) nm, y=5 nm". A flag that is
// repeated is set once for each value, but a list (fit.exclude) once, joined by semicolons.
//
// The error is an *Error; the settings are unchanged then.
func (s *Settings) Set(key, axis, text string, origin Origin, where string) error {
	if problem := s.set(key, axis, text, origin, where); problem != nil {
		return problem
	}
	return nil
}

func (s *Settings) set(name, axis, text string, origin Origin, where string) *Error {
	key, ok := Find(name)
	if !ok {
		return unknown(name, where)
	}
	if axis == "" && key.PerAxis {
		if parts := splitAxes(text); parts != nil {
			return s.setAxes(key, parts, origin, where)
		}
	}
	if problem := key.checkAxis(axis, where); problem != nil {
		return problem
	}
	setting, problem := interpret(key, axis, text, origin)
	if problem != nil {
		return at(where, name, axis, problem)
	}
	setting.Where = where
	s.put(setting)
	return nil
}

// setAxes keeps one setting for each axis, all or none.
func (s *Settings) setAxes(key Key, parts [][2]string, origin Origin, where string) *Error {
	var staged Settings
	for _, part := range parts {
		if _, twice := staged.layers[slot{key.Name, part[0]}]; twice {
			return &Error{Where: where, Key: withAxis(key.Name, part[0]), Problem: "is given twice", Hint: "keep one of the two"}
		}
		if problem := staged.set(key.Name, part[0], part[1], origin, where); problem != nil {
			return problem
		}
	}
	s.merge(&staged)
	return nil
}

func (k Key) checkAxis(axis, where string) *Error {
	switch {
	case axis == "" && k.AxisOnly:
		return &Error{Where: where, Key: k.Name, Problem: "does not say which column is which", Hint: "write it like " + k.Placeholder}
	case axis == "":
		return nil
	case !k.PerAxis:
		return &Error{Where: where, Key: withAxis(k.Name, axis), Problem: "is given for one axis, but holds for the whole recording", Hint: "write " + k.Name + " without an axis"}
	case !slices.Contains(k.Axes, axis):
		return &Error{Where: where, Key: withAxis(k.Name, axis), Problem: "names an axis that is not known", Hint: "the axes are " + strings.Join(k.Axes, ", ")}
	}
	return nil
}

func (s *Settings) put(setting Setting) {
	if s.layers == nil {
		s.layers = map[slot]map[Origin]Setting{}
	}
	place := slot{setting.Key, setting.Axis}
	if s.layers[place] == nil {
		s.layers[place] = map[Origin]Setting{}
	}
	s.layers[place][setting.Origin] = setting
}

var axisName = regexp.MustCompile(`(?:^|[,;])\s*([A-Za-z]+)\s*=\s*`)

// splitAxes takes "x=4 nm, y=5 nm" apart into axis and text; nil when the text
// does not start with a name and an equals sign.
func splitAxes(text string) [][2]string {
	found := axisName.FindAllStringSubmatchIndex(text, -1)
	if len(found) == 0 || found[0][0] != 0 {
		return nil
	}
	parts := make([][2]string, len(found))
	for i, at := range found {
		end := len(text)
		if i+1 < len(found) {
			end = found[i+1][0]
		}
		parts[i] = [2]string{text[at[2]:at[3]], strings.TrimSpace(text[at[1]:end])}
	}
	return parts
}

// Lookup returns the setting in force for an axis; "" asks for the one that
// holds for all. The highest origin wins; within one origin the setting for the axis
// goes before the one for all axes.
func (s *Settings) Lookup(key, axis string) (Setting, bool) {
	general, ok := s.top(slot{key, ""})
	if axis == "" {
		return general, ok
	}
	own, has := s.top(slot{key, axis})
	if has && (!ok || own.Origin >= general.Origin) {
		return own, true
	}
	return general, ok
}

// From returns the setting that one origin gave, in force or not.
func (s *Settings) From(origin Origin, key, axis string) (Setting, bool) {
	if s == nil {
		return Setting{}, false
	}
	setting, ok := s.layers[slot{key, axis}][origin]
	return setting, ok
}

func (s *Settings) top(place slot) (Setting, bool) {
	for origin := originCount - 1; origin >= 0; origin-- {
		if setting, ok := s.From(origin, place.key, place.axis); ok {
			return setting, true
		}
	}
	return Setting{}, false
}

// All returns the settings in force in the order of the registry, each general
// one before those of its axes.
func (s *Settings) All() []Setting {
	var all []Setting
	if s == nil {
		return nil
	}
	for place := range s.layers {
		setting, ok := s.Lookup(place.key, place.axis)
		if ok && setting.Axis == place.axis {
			all = append(all, setting)
		}
	}
	slices.SortFunc(all, func(a, b Setting) int {
		return cmp.Or(cmp.Compare(order(a.Key), order(b.Key)), cmp.Compare(axisOrder(a.Axis), axisOrder(b.Axis)))
	})
	return all
}

func axisOrder(axis string) int { return slices.Index(columns, axis) }

// Clone returns a copy that shares nothing with s that can change.
func (s *Settings) Clone() *Settings {
	var c Settings
	c.merge(s)
	return &c
}

// merge adds everything of another, which goes before what s has of the same origin.
func (s *Settings) merge(other *Settings) {
	if other == nil {
		return
	}
	for _, origins := range other.layers {
		for _, setting := range origins {
			setting.Bands = slices.Clone(setting.Bands)
			s.put(setting)
		}
	}
}

// remove takes a key out, for all axes and origins.
func (s *Settings) remove(key string) {
	maps.DeleteFunc(s.layers, func(place slot, _ map[Origin]Setting) bool { return place.key == key })
}

// axesOf lists the axes, "" among them, for which any origin gives the key, in fixed order.
func (s *Settings) axesOf(key string) []string {
	var axes []string
	for _, axis := range append([]string{""}, columns...) {
		if _, ok := s.top(slot{key, axis}); ok {
			axes = append(axes, axis)
		}
	}
	return axes
}

// unknown is the error of a name that is no setting, with the nearest that is.
func unknown(name, where string) *Error {
	e := &Error{Where: where, Key: name, Problem: "is not a setting"}
	short := name[strings.LastIndex(name, ".")+1:]
	if found := findShort(short); len(found) > 0 {
		e.Hint = "did you mean " + found[0].Name + "?"
	} else if near := nearest(name, knownNames()); near != "" {
		e.Hint = "did you mean " + near + "?"
	} else {
		e.Hint = "the settings are listed in docs/settings.md"
	}
	return e
}
