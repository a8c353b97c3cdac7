package session

// Sources are the settings of one recording by where they came from. Any may
// be nil.
type Sources struct {
	Header  *Settings // what the recording says of itself, set FromHeader
	Session *Settings // of its folder
	Row     *Settings // of its row in the track list
	Flags   *Settings // of the command line
}

// ForTrack merges the sources with the defaults into the settings of one
// recording. The fluid (water) and the temperature (22 C, standard uncertainty 2 K) are
// marked Assumed when nobody gave them. Of two settings that replace each
// other (fluid and viscosity; noise and background) the one of the higher
// origin stays.
//
// The errors name settings that exclude each other, have no effect, or cannot hold
// together. Call it without the header to learn how to read the file, and with it
// afterwards; then see Contradictions.
func ForTrack(sources Sources) (*Settings, error) {
	merged := &Settings{}
	for _, source := range []*Settings{sources.Header, sources.Session, sources.Row, sources.Flags} {
		merged.merge(source)
	}
	if err := joined(checkPairs(merged)); err != nil {
		return nil, err
	}
	merged.settleExclusive()
	merged.addDefaults()
	if err := joined(checkUse(merged)); err != nil {
		return nil, err
	}
	return merged, nil
}

// settleExclusive takes out what a higher origin replaced by its counterpart.
func (s *Settings) settleExclusive() {
	for _, pair := range exclusive {
		a, hasA := s.highest(pair[0])
		b, hasB := s.highest(pair[1])
		switch {
		case !hasA || !hasB:
		case a.Origin > b.Origin:
			s.remove(pair[1])
		default:
			s.remove(pair[0])
		}
	}
	// A density that came with a replaced viscosity goes with it.
	fluid, hasFluid := s.Lookup("medium.fluid", "")
	density, hasDensity := s.Lookup("medium.density", "")
	if hasFluid && hasDensity && density.Origin < fluid.Origin {
		s.remove("medium.density")
	}
}

// addDefaults adds the defaults of the registry; a stated viscosity needs no fluid.
func (s *Settings) addDefaults() {
	_, own := s.Lookup("medium.viscosity", "")
	for _, key := range registry {
		if key.Default == "" || (own && key.Name == "medium.fluid") {
			continue
		}
		setting, problem := interpret(key, "", key.Default, FromDefault)
		if problem != nil {
			continue // the registry's test holds that every default can be read
		}
		setting.Assumed = key.Assumed
		s.put(setting)
	}
}
