package session

// Stored is a setting as a stored result names it.
type Stored struct {
	Key, Axis string // full name; "" for all axes
	Text      string // as it was given
	Origin    string // as Origin.String names it
	Where     string // the place it was given at
}

// Restore rebuilds settings from those that a result lists, each with its origin, so
// that a recording can be calibrated again as it was. The defaults are those that were
// in force then. The error is an *Error that names the first setting that
// cannot be read.
func Restore(list []Stored) (*Settings, error) {
	restored := &Settings{}
	for _, one := range list {
		origin, err := ParseOrigin(one.Origin)
		if err != nil {
			return nil, &Error{Key: withAxis(one.Key, one.Axis), Problem: "has an origin that is not known: " + err.Error(), Hint: "give a result as beadwell wrote it"}
		}
		if problem := restored.set(one.Key, one.Axis, one.Text, origin, one.Where); problem != nil {
			return nil, problem
		}
		if key, _ := Find(one.Key); origin == FromDefault && key.Assumed {
			setting, _ := restored.From(FromDefault, one.Key, one.Axis)
			setting.Assumed = true
			restored.put(setting)
		}
	}
	return restored, nil
}

// Without returns a copy that lacks what one origin gave.
func (s *Settings) Without(origin Origin) *Settings {
	copied := s.Clone()
	for _, origins := range copied.layers {
		delete(origins, origin)
	}
	return copied
}

// Lacking returns a copy that lacks some keys, whatever gave them.
func (s *Settings) Lacking(keys ...string) *Settings {
	out := s.Clone()
	for _, key := range keys {
		out.remove(key)
	}
	return out
}

// With returns a copy that has the settings of another beside its own; where both
// have one of the same origin, that of the other.
func (s *Settings) With(other *Settings) *Settings {
	copied := s.Clone()
	copied.merge(other)
	return copied
}
