package cli

import (
	"beadwell/calib/session"
	"beadwell/calib/simulate"
)

// headerWords are the styles of a header, in the order of simulate.Header.
var headerWords = []string{"parentheses", "brackets", "underscore", "names", "none"}

// lengthUnits are the units of positions that need no scale.
var lengthUnits = map[string]float64{"nm": 1e9, "um": 1e6, "mm": 1e3, "m": 1}

// detectorUnits are the units of a detector, in each volt, count, or whatever the
// sensitivity is per.
var detectorUnits = map[string]float64{"V": 1, "mV": 1e3, "counts": 1, "1": 1}

// table returns the columns of the recording's file, as a function of the recording, and its dialect.
func (p *simulation) table(o simulateOptions, settings *session.Settings) (func(simulate.Recording) []simulate.Column, simulate.CSV, error) {
	units := make([]simulate.Unit, len(p.Truth.Axes))
	for i, axis := range p.Truth.Axes {
		unit, err := positionUnit(axis.Name, settings)
		if err != nil {
			return nil, simulate.CSV{}, err
		}
		units[i] = unit
	}
	columns := func(r simulate.Recording) []simulate.Column {
		var all, positions []simulate.Column
		if !o.noTime {
			all = append(all, simulate.TimeColumn(r, simulate.Second, p.Truth.Rate))
		}
		for i, x := range r.Positions {
			positions = append(positions, simulate.Column{Name: p.Truth.Axes[i].Name, Unit: units[i], Values: x})
		}
		decimals := simulate.Decimals(o.digits, positions...)
		for i := range positions {
			positions[i].Decimals = decimals
		}
		all = append(all, positions...)
		if r.Stage != nil {
			all = append(all, simulate.Column{Name: "stage", Unit: simulate.Micrometre, Values: r.Stage})
		}
		return all
	}
	format, err := o.dialect(settings)
	return columns, format, err
}

// positionUnit returns the unit of an axis: um unless --unit says otherwise.
func positionUnit(axis string, settings *session.Settings) (simulate.Unit, error) {
	word, scale := "um", 0.0
	if unit, ok := settings.Lookup("recording.unit", axis); ok {
		word = unit.Word
	}
	sensitivity, hasSensitivity := settings.Lookup("recording.sensitivity", axis)
	pixel, hasPixel := settings.Lookup("recording.pixel", axis)
	perUnit, detector := detectorUnits[word]
	switch {
	case detector && hasSensitivity:
		scale = perUnit / sensitivity.Value.SI
	case detector:
		return simulate.Unit{}, usageError("add --sensitivity '1.31 um/V'", "positions in %s need a sensitivity", word)
	case word == "px" && hasPixel:
		scale = 1 / pixel.Value.SI
	case word == "px":
		return simulate.Unit{}, usageError("add --pixel '65 nm'", "positions in px need the length of a pixel")
	default:
		scale = lengthUnits[word]
	}
	if hasSensitivity && !detector || hasPixel && word != "px" {
		return simulate.Unit{}, usageError("add --unit V, or --unit px, or leave it out", "a sensitivity or a pixel has no effect on positions in %s", word)
	}
	return simulate.Unit{Symbol: word, PerSI: scale}, nil
}

// dialect returns the form of the text.
func (o simulateOptions) dialect(settings *session.Settings) (simulate.CSV, error) {
	format := simulate.CSV{Digits: o.digits}
	if o.digits < 1 || o.digits > 7 {
		return format, usageError("write --digits 7 or fewer", "--digits %d: from 1 to 7", o.digits)
	}
	if d, ok := settings.Lookup("recording.delimiter", ""); ok {
		format.Delimiter = map[string]byte{"comma": ',', "semicolon": ';', "tab": '\t', "space": ' ', "pipe": '|'}[d.Word]
	}
	if mark, ok := settings.Lookup("recording.decimal", ""); ok && mark.Word == "comma" {
		format.DecimalComma = true
		if format.Delimiter == 0 {
			format.Delimiter = ';'
		}
		if format.Delimiter == ',' {
			return format, usageError("add --delimiter semicolon", "a comma cannot both separate columns and mark decimals")
		}
	}
	for i, word := range headerWords {
		if word == o.header {
			format.Header = simulate.Header(i)
		}
	}
	if format.Header != simulate.NoHeader {
		format.Comments = []string{"simulated recording, made by beadwell"}
	}
	return format, nil
}
