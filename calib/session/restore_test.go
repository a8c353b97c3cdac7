package session

import (
	"errors"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// listed is what a result keeps of settings.
func listed(s *Settings) []Stored {
	var list []Stored
	for _, one := range s.All() {
		list = append(list, Stored{Key: one.Key, Axis: one.Axis, Text: one.Text, Origin: one.Origin.String(), Where: one.Where})
	}
	return list
}

// Settings that are restored from their list are the same, with origin, place and
// the mark of an assumption.
func TestRestore(t *testing.T) {
	var header, folder, row, flags Settings
	for _, one := range []struct {
		into            *Settings
		key, axis, text string
		origin          Origin
		where           string
	}{
		{&header, "recording.unit", "x", "um", FromHeader, `column "x (um)"`},
		{&header, "recording.rate", "", "1000 Hz", FromHeader, "time column"},
		{&folder, "recording.columns", "time", "t", FromSession, "session.toml:9:3"},
		{&folder, "recording.noise", "", "x=4(1) nm, y=5 nm", FromSession, "session.toml:4:1"},
		{&row, "chamber.height", "", "8.0(5) um", FromTracks, "tracks.csv:3:7"},
		{&flags, "bead.diameter", "", " 1.02(3) um", FromFlag, "--diameter"},
		{&flags, "fit.exclude", "", "49 to 51 Hz; 1 kHz to 1.1 kHz", FromFlag, "--exclude"},
		{&flags, "chamber.depth", "", "110 um", FromFlag, "--depth"},
	} {
		if err := one.into.Set(one.key, one.axis, one.text, one.origin, one.where); err != nil {
			t.Fatal(err)
		}
	}
	want, err := ForTrack(Sources{Header: &header, Session: &folder, Row: &row, Flags: &flags})
	if err != nil {
		t.Fatal(err)
	}
	got, err := Restore(listed(want))
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(want.All(), got.All()); diff != "" {
		t.Errorf("restored settings differ (-want +got):\n%s", diff)
	}
	if s, ok := got.Lookup("medium.temperature", ""); !ok || !s.Assumed {
		t.Error("the assumed temperature is not marked as assumed")
	}
	again := got.Without(FromHeader)
	if _, ok := again.Lookup("recording.rate", ""); ok {
		t.Error("Without(FromHeader) keeps the rate of the header")
	}
	if diff := cmp.Diff(want.All(), again.With(&header).All()); diff != "" {
		t.Errorf("without and with the header (-want +got):\n%s", diff)
	}
}

// A list that no version wrote is refused, with the setting named.
func TestRestoreRefuses(t *testing.T) {
	for _, test := range []struct {
		one  Stored
		want string
	}{
		{Stored{Key: "bead.diameter", Text: "1 um", Origin: "rumour"}, "bead.diameter has an origin that is not known"},
		{Stored{Key: "bead.colour", Text: "red", Origin: "flag"}, "bead.colour is not a setting"},
		{Stored{Key: "bead.diameter", Text: "big", Origin: "flag"}, `bead.diameter "big"`},
		{Stored{Key: "bead.diameter", Axis: "x", Text: "1 um", Origin: "flag"}, "bead.diameter.x is given for one axis"},
	} {
		_, err := Restore([]Stored{test.one})
		var problem *Error
		if !errors.As(err, &problem) || !strings.HasPrefix(err.Error(), test.want) {
			t.Errorf("Restore(%+v) = %v, want %q", test.one, err, test.want)
		}
	}
}
