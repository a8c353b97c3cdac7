package session

import "fmt"

// Origin is where a setting came from; a larger one has precedence.
type Origin int

// The origins, in rising precedence.
const (
	FromDefault Origin = iota // the program's own
	FromHeader                // the header or the time column of the recording
	FromSession               // session.toml
	FromTracks                // a row of tracks.csv
	FromFlag                  // the command line
	originCount
)

// String names the origin as results do.
func (o Origin) String() string {
	switch o {
	case FromDefault:
		return "default"
	case FromHeader:
		return "header"
	case FromSession:
		return "session file"
	case FromTracks:
		return "track list"
	case FromFlag:
		return "flag"
	}
	return fmt.Sprintf("origin %d", int(o))
}

// ParseOrigin is the inverse of String; a stored result names origins so.
func ParseOrigin(name string) (Origin, error) {
	for o := range originCount {
		if o.String() == name {
			return o, nil
		}
	}
	return FromDefault, fmt.Errorf("%q is not an origin of settings", name)
}
