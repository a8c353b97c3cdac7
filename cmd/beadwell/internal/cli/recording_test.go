package cli

import (
	"testing"

	"github.com/google/go-cmp/cmp"

	"beadwell/calib/session"
	"beadwell/calib/track"
)

// settingsOf are settings of one origin.
func settingsOf(t *testing.T, origin session.Origin, texts map[string]string) *session.Settings {
	t.Helper()
	settings := &session.Settings{}
	for key, text := range texts {
		if err := settings.Set(key, "", text, origin, "here"); err != nil {
			t.Fatal(err)
		}
	}
	return settings
}

// Every setting that matters for reading reaches the reader. A rate and a unit
// win over the file only when a flag states them.
func TestReadOptions(t *testing.T) {
	texts := map[string]string{
		"recording.rate": "2 kHz", "recording.unit": "nm", "recording.time_unit": "frames", "recording.decimal": "comma",
		"recording.delimiter": "tab", "recording.bead": "7", "recording.columns": "time=t, x=2, z=Z", "recording.max_text": "2 GB",
	}
	want := track.Options{Name: "run.csv", Rate: 2000, Unit: "nm", TimeUnit: "frame", Decimal: "comma", Delimiter: "tab", Bead: "7", MaxBytes: 2e9,
		Columns: map[string]string{"time": "t", "x": "2", "z": "Z"}}
	for origin, forced := range map[session.Origin]bool{session.FromSession: false, session.FromTracks: false, session.FromFlag: true} {
		want.RateForced, want.UnitForced = forced, forced
		got, err := (&source{}).readOptions("run.csv", settingsOf(t, origin, texts))
		if err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(want, got); diff != "" {
			t.Errorf("options by %v (-want +got):\n%s", origin, diff)
		}
	}
}

// What the recording says of itself becomes a setting; what a setting told the
// reader does not come back as if the recording said it.
func TestHeaderSettings(t *testing.T) {
	recording := &track.Recording{Rate: 1000.5, RateOrigin: "time column", Axes: []track.Axis{{Name: "x", Header: "x", Unit: "um"}, {Name: "y", Header: "y", Unit: "um"}}}
	header := headerSettings(recording, settingsOf(t, session.FromSession, map[string]string{"recording.unit": "y=um"}))
	if rate, ok := header.Lookup("recording.rate", ""); !ok || rate.Value.SI != 1000.5 || rate.Where != "time column" || rate.Origin != session.FromHeader {
		t.Errorf("rate of the time column: %+v", rate)
	}
	if unit, ok := header.Lookup("recording.unit", "x"); !ok || unit.Word != "um" {
		t.Errorf("unit of x: %+v", unit)
	}
	if unit, ok := header.Lookup("recording.unit", "y"); ok {
		t.Errorf("the unit of y, which a setting states, came back as %+v", unit)
	}
	recording.RateOrigin = "setting"
	if rate, ok := headerSettings(recording, nil).Lookup("recording.rate", ""); ok {
		t.Errorf("the rate of a setting came back as %+v", rate)
	}
}
