package cli

import (
	"errors"
	"math"
	"slices"
	"strconv"
	"strings"

	"beadwell/calib/quantity"
	"beadwell/calib/simulate"
)

// byAxis holds a value for each axis that was named, and under "" one for all.
type byAxis map[string]float64

// of returns the value of an axis; 0 when it has none.
func (b byAxis) of(axis string) float64 {
	if v, ok := b[axis]; ok {
		return v
	}
	return b[""]
}

// spatialAxes are the axes that a recording can have, in order.
var spatialAxes = []string{"x", "y", "z"}

// parseByAxis reads a flag such as "52 pN/um" or "x=52 pN/um, y=47 pN/um" in SI units.
func parseByAxis(flag, text string, dimension quantity.Dimension) (byAxis, error) {
	values := byAxis{}
	if text == "" {
		return values, nil
	}
	for _, part := range strings.Split(text, ",") {
		axis, value, named := strings.Cut(part, "=")
		if !named {
			axis, value = "", part
		}
		axis = strings.TrimSpace(axis)
		if named && !slices.Contains(spatialAxes, axis) {
			return nil, usageError("name the axes x, y and z, as in --"+flag+" 'x="+dimension.Example()+"'", "--%s %q: %q is not an axis", flag, text, axis)
		}
		if _, twice := values[axis]; twice || axis == "" && len(values) > 0 || named && hasAll(values) {
			return nil, usageError("write one value for all axes, or one for each, separated by commas", "--%s %q gives an axis twice", flag, text)
		}
		v, err := parseOne(flag, value, dimension)
		if err != nil {
			return nil, err
		}
		values[axis] = v
	}
	return values, nil
}

// parseFor is parseByAxis for a flag that may only name recorded axes.
func (p *simulation) parseFor(flag, text string, dimension quantity.Dimension) (byAxis, error) {
	values, err := parseByAxis(flag, text, dimension)
	for axis := range values {
		recorded := slices.ContainsFunc(p.Axes, func(a simulatedFor) bool { return a.Name == axis })
		if axis != "" && !recorded {
			return nil, usageError("name recorded axes only, or add the axis", "--%s %q: the axis %s is not recorded", flag, text, axis)
		}
	}
	return values, err
}

func hasAll(values byAxis) bool {
	_, all := values[""]
	return all
}

// parseOne reads one quantity of a flag in SI units; an empty text is 0.
func parseOne(flag, text string, dimension quantity.Dimension) (float64, error) {
	if strings.TrimSpace(text) == "" {
		return 0, nil
	}
	v, err := quantity.Parse(text, dimension)
	if err != nil {
		var wrong *quantity.Error
		if errors.As(err, &wrong) {
			return 0, usageError(wrong.Hint, "--%s %q %s", flag, wrong.Text, wrong.Problem)
		}
		return 0, settingsError(err)
	}
	return v.SI, nil
}

// parsePair reads two quantities separated by a comma, such as "50 Hz, 3 nm".
func parsePair(flag, text string, first, second quantity.Dimension) (a, b float64, err error) {
	left, right, found := strings.Cut(text, ",")
	if !found {
		return 0, 0, usageError("write --"+flag+" '"+first.Example()+", "+second.Example()+"'", "--%s %q: two values are needed, with a comma between them", flag, text)
	}
	if a, err = parseOne(flag, left, first); err != nil {
		return 0, 0, err
	}
	b, err = parseOne(flag, right, second)
	return a, b, err
}

// parseAxes reads the list of recorded axes.
func parseAxes(text string) ([]string, error) {
	var axes []string
	for _, axis := range strings.Split(text, ",") {
		axis = strings.TrimSpace(axis)
		if !slices.Contains(spatialAxes, axis) || slices.Contains(axes, axis) {
			return nil, usageError("write some of x, y and z, separated by commas", "--axes %q: %q is not an axis, or there twice", text, axis)
		}
		axes = append(axes, axis)
	}
	return axes, nil
}

// parseLines reads the sinusoids of --line.
func parseLines(texts []string) ([]simulate.Line, error) {
	var lines []simulate.Line
	for _, text := range texts {
		frequency, amplitude, err := parsePair("line", text, quantity.Frequency, quantity.Length)
		if err != nil {
			return nil, err
		}
		lines = append(lines, simulate.Line{Frequency: frequency, Amplitude: amplitude})
	}
	return lines, nil
}

// parseAngle reads an angle in degrees [rad].
func parseAngle(text string) (float64, error) {
	if text == "" {
		return 0, nil
	}
	number, found := strings.CutSuffix(text, "deg")
	degrees, err := strconv.ParseFloat(strings.TrimSpace(number), 64)
	if !found || err != nil || math.IsNaN(degrees) || math.IsInf(degrees, 0) {
		return 0, usageError("write --rotation '10 deg'", "--rotation %q is not an angle in degrees", text)
	}
	return degrees * math.Pi / 180, nil
}

// parseFaults reads the faults of the detector and of the computer.
func (o simulateOptions) parseFaults() (simulate.Faults, error) {
	var f simulate.Faults
	for _, row := range []struct {
		flag, text string
		dimension  quantity.Dimension
		into       *float64
	}{
		{"rail", o.rail, quantity.Length, &f.Rail},
		{"rounding", o.rounding, quantity.Length, &f.Rounding},
		{"jitter", o.jitter, quantity.Time, &f.Jitter},
		{"blank", o.blank, quantity.Fraction, &f.Blank},
		{"dropped", o.dropped, quantity.Fraction, &f.Dropped},
		{"repeated", o.twice, quantity.Fraction, &f.Repeated},
	} {
		value, err := parseOne(row.flag, row.text, row.dimension)
		if err != nil {
			return f, err
		}
		*row.into = value
	}
	return f, nil
}

// parseEvents reads what happens to a bead of the radius [m], in order of time.
func (o simulateOptions) parseEvents(axes int, radius float64) ([]simulate.Event, error) {
	var events []simulate.Event
	all := func(length float64) []float64 { return slices.Repeat([]float64{length}, axes) }
	if o.jump != "" {
		time, length, err := parsePair("jump", o.jump, quantity.Time, quantity.Length)
		if err != nil {
			return nil, err
		}
		events = append(events, simulate.Event{Kind: simulate.Jump, Time: time, Offset: all(length)})
	}
	for _, row := range []struct {
		flag, text string
		event      simulate.Event
	}{
		{"second-bead", o.secondBead, simulate.Event{Kind: simulate.SecondBead, Offset: all(radius / 2), Stiffness: 1.2, Drag: 1.4}},
		{"escape", o.escape, simulate.Event{Kind: simulate.Escape}},
		{"stuck", o.stuck, simulate.Event{Kind: simulate.Stuck}},
	} {
		if row.text == "" {
			continue
		}
		time, err := parseOne(row.flag, row.text, quantity.Time)
		if err != nil {
			return nil, err
		}
		row.event.Time = time
		events = append(events, row.event)
	}
	slices.SortStableFunc(events, func(a, b simulate.Event) int {
		switch {
		case a.Time < b.Time:
			return -1
		case a.Time > b.Time:
			return 1
		}
		return 0
	})
	return events, nil
}
