package session

import "math"

// Contradiction is a unit, a rate or a scale that was stated otherwise than the
// recording states it of itself.
type Contradiction struct {
	Stated     Setting // what is in force
	Header     Setting // what the recording says
	Overridden bool    // a flag was given, so the contradiction is only worth a warning
}

// Error names both statements and the ways out.
func (c Contradiction) Error() string {
	e := Error{Where: c.Stated.Where, Key: withAxis(c.Stated.Key, c.Stated.Axis), Text: c.Stated.Text,
		Problem: "contradicts the recording, which says " + quoted(c.Header.Text) + from(c.Header)}
	if !c.Overridden {
		key, _ := Find(c.Stated.Key)
		e.Hint = "correct the one that is wrong, or insist with --" + key.Flag
	}
	return e.Error()
}

// Contradictions compares what the session file, the track list and the flags
// state with what the recording's header and time column say (origin
// FromHeader): units as words; rates and scales within three standard
// uncertainties and 0.2 %, the rounding of a label. A contradiction that is
// not Overridden is an error for the caller to return.
func (s *Settings) Contradictions() []Contradiction {
	var all []Contradiction
	for _, key := range registry {
		if !key.Stated {
			continue
		}
		for _, axis := range s.axesOf(key.Name) {
			stated, _ := s.Lookup(key.Name, axis)
			header, ok := s.From(FromHeader, key.Name, axis)
			if !ok && axis != "" {
				header, ok = s.From(FromHeader, key.Name, "")
			}
			repeated := stated.Axis != axis && header.Axis != axis
			if !ok || repeated || stated.Origin <= FromHeader || agree(stated, header) {
				continue
			}
			all = append(all, Contradiction{stated, header, stated.Origin == FromFlag})
		}
	}
	return all
}

// agree tells whether two settings say the same.
func agree(a, b Setting) bool {
	if a.Word != "" || b.Word != "" {
		return a.Word == b.Word
	}
	if a.Value.Dimension != b.Value.Dimension {
		return false
	}
	allowed := float64(rateTolerance*math.Max(math.Abs(a.Value.SI), math.Abs(b.Value.SI))) + float64(3*math.Hypot(a.Value.U, b.Value.U))
	return math.Abs(a.Value.SI-b.Value.SI) <= allowed
}
