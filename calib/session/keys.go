package session

import (
	"slices"
	"strings"

	"beadwell/calib/quantity"
)

// Form is the shape of a setting's text.
type Form int

// The forms.
const (
	Quantity  Form = iota // a number with its unit
	Choice                // one of a few words
	Text                  // any text
	Range                 // "10 Hz to 8 kHz"
	RangeList             // ranges, separated by commas or semicolons
)

// Key describes one setting.
type Key struct {
	Name        string               // section and key of the session file: "bead.diameter"
	Flag        string               // its flag, without the dashes
	Form        Form                 // shape of its text
	Dimensions  []quantity.Dimension // what a Quantity or a Range may be
	Words       []string             // the words of a Choice; for other forms, words in place of a value
	aliases     map[string]string    // other spellings of Words
	PerAxis     bool                 // may differ between x, y and z
	Axes        []string             // what it may be given for, when PerAxis
	AxisOnly    bool                 // has no form without an axis
	Limits      string               // lowest and highest possible value, both included; "" when there are none
	bareZero    bool                 // 0 needs no unit
	Default     string               // text of the default, "" when there is none
	Assumed     bool                 // the default changes the answer: mark it and warn
	Stated      bool                 // the recording's header may state it too, and must not be contradicted
	TrackOnly   bool                 // belongs to one recording: not in the session file
	Placeholder string               // an example of its text, for help
	Meaning     string               // one line of documentation
}

// Section returns the table of the session file that holds the key.
func (k Key) Section() string {
	section, _, _ := strings.Cut(k.Name, ".")
	return section
}

// Short returns the last part of the name: "diameter".
func (k Key) Short() string { return k.Name[strings.LastIndex(k.Name, ".")+1:] }

var (
	spatial = []string{"x", "y", "z"}
	columns = []string{"time", "x", "y", "z", "stage"}
)

// registry is the one table of settings, in the order of the session file.
var registry = []Key{
	{Name: "bead.diameter", Flag: "diameter", Dimensions: dims(quantity.Length), Limits: "1 nm to 1 mm",
		Placeholder: "1.02(3) um", Meaning: "diameter of the bead; it has no default"},
	{Name: "bead.density", Flag: "bead-density", Dimensions: dims(quantity.Density), Limits: "0.1 g/cm3 to 25 g/cm3",
		Placeholder: "1.05 g/cm3", Meaning: "density of the bead; only matters for fast detectors"},

	{Name: "medium.fluid", Flag: "fluid", Form: Text, Default: "water", Assumed: true,
		Placeholder: "glycerol 20 %", Meaning: "water, heavy water, glycerol or sucrose with a mass fraction, saline with a molality"},
	{Name: "medium.viscosity", Flag: "viscosity", Dimensions: dims(quantity.Viscosity), Limits: "0.01 mPa s to 1000 Pa s",
		Placeholder: "0.95(2) mPa s", Meaning: "viscosity at the trap, instead of a fluid"},
	{Name: "medium.density", Flag: "fluid-density", Dimensions: dims(quantity.Density), Limits: "0.1 g/cm3 to 25 g/cm3",
		Placeholder: "0.998 g/cm3", Meaning: "density of a fluid that is given by its viscosity"},
	// The limits are those of liquid water at 0.1 MPa in IAPWS SR6-08(2011), 253.15 K to 383.15 K.
	{Name: "medium.temperature", Flag: "temperature", Dimensions: dims(quantity.Temperature), Limits: "-20 C to 110 C",
		Default: "22(2) C", Assumed: true,
		Placeholder: "24.5(5) C", Meaning: "temperature of the chamber; at the trap when no heating is given"},

	{Name: "chamber.height", Flag: "height", Dimensions: dims(quantity.Length), Words: []string{"far"}, Limits: "1 nm to 10 mm",
		Placeholder: "8.0(5) um", Meaning: "centre of the bead above the nearer surface; far when no surface matters"},
	{Name: "chamber.depth", Flag: "depth", Dimensions: dims(quantity.Length), Limits: "10 nm to 100 mm",
		Placeholder: "110 um", Meaning: "from surface to surface, when the second one matters"},

	{Name: "chamber.height_scale", Flag: "height-scale", Dimensions: dims(quantity.Dimensionless), Words: []string{"fit"}, Limits: "0.1 to 10",
		Placeholder: "0.82(2)", Meaning: "travel of the bead over travel of the stage, where heights are stage readings; for series over heights, which assume 1 without it"},

	{Name: "recording.rate", Flag: "rate", Dimensions: dims(quantity.Frequency), Limits: "0.001 Hz to 1 GHz", Stated: true,
		Placeholder: "2 kHz", Meaning: "sampling rate, when the file has no time column"},
	{Name: "recording.exposure", Flag: "exposure", Dimensions: dims(quantity.Time), Limits: "0 s to 1000 s", bareZero: true, PerAxis: true, Axes: spatial,
		Placeholder: "0.4 ms", Meaning: "exposure of a camera; 0 for a detector"},
	{Name: "recording.unit", Flag: "unit", Form: Choice, Stated: true, PerAxis: true, Axes: spatial,
		Words:       []string{"nm", "um", "mm", "m", "px", "V", "mV", "counts", "1"},
		aliases:     map[string]string{"µm": "um", "μm": "um", "count": "counts", "pixel": "px", "pixels": "px"},
		Placeholder: "um", Meaning: "unit of the positions, when the header does not say; 1 is a normalised difference"},
	{Name: "recording.pixel", Flag: "pixel", Dimensions: dims(quantity.Length, quantity.LengthPerPixel), Limits: "0.1 nm to 1 mm", Stated: true, PerAxis: true, Axes: spatial,
		Placeholder: "65.0(3) nm", Meaning: "length of a pixel in the sample"},
	{Name: "recording.noise", Flag: "noise", Dimensions: dims(quantity.Length), Limits: "0 m to 1 mm", bareZero: true, PerAxis: true, Axes: spatial,
		Placeholder: "4(1) nm", Meaning: "standard deviation of the localisation noise, if known"},
	{Name: "recording.background", Flag: "background", Form: Text,
		Placeholder: "stuck.csv", Meaning: "recording without a bead, or with a stuck one, that holds the noise"},
	{Name: "recording.free_bead", Flag: "free-bead", Form: Text, Words: []string{"none"},
		Placeholder: "free.csv", Meaning: "recordings of the same bead with the laser off, separated by semicolons, whose drag is used beside the computed one; else those of the role free in the track list"},
	{Name: "recording.companions", Flag: "companions", Form: Text,
		Placeholder: "free.csv; high.csv", Meaning: "recordings of the same bead, free, driven or at other heights, that join the diagnosis when the routes disagree"},
	{Name: "recording.columns", Flag: "columns", Form: Text, PerAxis: true, Axes: columns, AxisOnly: true,
		Placeholder: "time=t, x=X, y=Y", Meaning: "names or numbers (from 1) of the columns"},
	{Name: "recording.sensitivity", Flag: "sensitivity", PerAxis: true, Axes: spatial, Stated: true,
		Dimensions:  dims(quantity.LengthPerVoltage, quantity.LengthPerCount, quantity.Length),
		Placeholder: "1.31(4) um/V", Meaning: "length per unit of the detector: V, mV or counts; a plain length for a normalised difference"},
	{Name: "recording.bead", Flag: "bead", Form: Text,
		Placeholder: "2", Meaning: "which bead of a file that holds several"},
	{Name: "recording.time_unit", Flag: "time-unit", Form: Choice, Stated: true,
		Words:       []string{"s", "ms", "us", "ns", "min", "h", "d", "frames"},
		aliases:     map[string]string{"µs": "us", "μs": "us", "frame": "frames"},
		Placeholder: "ms", Meaning: "unit of the time column, when the header does not say; frames need a rate"},
	{Name: "recording.delimiter", Flag: "delimiter", Form: Choice,
		Words:       []string{"comma", "semicolon", "tab", "space", "pipe"},
		aliases:     map[string]string{",": "comma", ";": "semicolon", "\t": "tab", `\t`: "tab", " ": "space", "|": "pipe"},
		Placeholder: "semicolon", Meaning: "what separates the columns; else found from the file"},
	{Name: "recording.decimal", Flag: "decimal", Form: Choice, Words: []string{"point", "comma"},
		aliases:     map[string]string{".": "point", ",": "comma"},
		Placeholder: "comma", Meaning: "decimal mark; else found from the file"},

	{Name: "recording.max_memory", Flag: "max-memory", Dimensions: dims(quantity.Memory), Limits: "200 MB to 1000000 GB",
		Placeholder: "4 GB", Meaning: "memory to keep to; a recording that needs more is analysed in parts"},
	{Name: "recording.max_text", Flag: "max-text", Dimensions: dims(quantity.Memory), Limits: "1 kB to 1000000 GB",
		Placeholder: "200 GB", Meaning: "longest text of a recording, decompressed, that is read; 64 GiB when not stated"},

	{Name: "detector.alpha", Flag: "alpha", Dimensions: dims(quantity.Dimensionless), Words: []string{"fit"}, Limits: "0 to 1",
		Placeholder: "0.25", Meaning: "share of the signal that a photodiode passes without delay; fit to find it"},
	{Name: "detector.f3db", Flag: "f3db", Dimensions: dims(quantity.Frequency), Words: []string{"fit"}, Limits: "1 Hz to 1 GHz",
		Placeholder: "8 kHz", Meaning: "corner frequency of the photodiode's low-pass; fit to find it, and alpha unless that is stated"},

	{Name: "fit.band", Flag: "band", Form: Range, Dimensions: dims(quantity.Frequency), Words: []string{"auto"}, Default: "auto",
		Placeholder: "10 Hz to 8 kHz", Meaning: "band of the spectrum that is fitted; auto chooses one and shows it"},
	{Name: "fit.exclude", Flag: "exclude", Form: RangeList, Dimensions: dims(quantity.Frequency), Words: []string{"none"},
		Placeholder: "49 Hz to 51 Hz", Meaning: "bands that are left out"},
	{Name: "fit.perpendicular", Flag: "perpendicular", Form: Choice, Words: spatial, Default: "z",
		Placeholder: "z", Meaning: "axis normal to the surface"},
	{Name: "fit.drag", Flag: "drag", Form: Choice, Words: []string{"auto", "constant", "frequency-dependent"}, Default: "auto",
		Placeholder: "auto", Meaning: "drag in the model of the spectrum"},

	{Name: "laser.power", Flag: "power", Dimensions: dims(quantity.Power), Limits: "0 W to 100 W", bareZero: true,
		Placeholder: "48 mW", Meaning: "power at the sample, not at the laser head"},
	{Name: "laser.heating", Flag: "heating", Dimensions: dims(quantity.HeatingPerPower), Limits: "0 K/W to 10000 K/W", bareZero: true,
		Placeholder: "36(4) K/W", Meaning: "rise of the temperature at the trap per power"},

	{Name: "drive.waveform", Flag: "drive-waveform", Form: Choice, Words: []string{"sine", "triangle"},
		Placeholder: "sine", Meaning: "motion of the stage"},
	{Name: "drive.amplitude", Flag: "drive-amplitude", Dimensions: dims(quantity.Length), Limits: "0.1 nm to 10 mm",
		Placeholder: "150(2) nm", Meaning: "amplitude of the stage's motion, from its centre to its end"},
	{Name: "drive.frequency", Flag: "drive-frequency", Dimensions: dims(quantity.Frequency), Limits: "0.0001 Hz to 1 MHz",
		Placeholder: "28 Hz", Meaning: "frequency of the stage's motion"},

	{Name: "role", Flag: "role", Form: Choice, Words: []string{"trapped", "free", "driven", "background"}, Default: "trapped", TrackOnly: true,
		Placeholder: "free", Meaning: "trapped; free (laser off); driven (stage moving); background (no bead, or a stuck one)"},
}

func dims(d ...quantity.Dimension) []quantity.Dimension { return d }

// Keys returns every setting in the order of the session file. The slices
// inside are shared: do not change them.
func Keys() []Key { return slices.Clone(registry) }

// Find returns the setting of that full name.
func Find(name string) (Key, bool) {
	i := slices.IndexFunc(registry, func(k Key) bool { return k.Name == name })
	if i < 0 {
		return Key{}, false
	}
	return registry[i], true
}

// findShort returns the settings that a short name or a flag's name may mean.
func findShort(short string) []Key {
	var found []Key
	for _, key := range registry {
		if key.Short() == short || key.Flag == short {
			found = append(found, key)
		}
	}
	return found
}

// order is the place of a key in the registry.
func order(name string) int {
	return slices.IndexFunc(registry, func(k Key) bool { return k.Name == name })
}
