package cli

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"beadwell/calib"
	"beadwell/calib/quantity"
)

// centre is how the centre of the trap is found.
type centre struct {
	kind   string // "mean", "calibration" or "given"
	from   float64
	to     float64 // s, of the mean; +Inf for the end
	values map[string]quantity.Value
}

const centreForms = "write --centre mean, --centre 'mean 0 s to 2 s', --centre calibration, or --centre 'x=1.20(1) um, y=0.85(1) um'"

// parseCentre reads the text of --centre.
func parseCentre(text string) (centre, error) {
	words := strings.TrimSpace(text)
	switch {
	case words == "":
		return centre{}, usageError(centreForms, "the centre of the trap is not given, and has no default")
	case words == "mean":
		return centre{kind: "mean", from: math.Inf(-1), to: math.Inf(1)}, nil
	case words == "calibration":
		return centre{kind: "calibration"}, nil
	}
	if stretch, ok := strings.CutPrefix(words, "mean "); ok {
		return parseStretch(text, stretch)
	}
	c := centre{kind: "given", values: map[string]quantity.Value{}}
	for _, part := range strings.Split(words, ",") {
		axis, value, named := strings.Cut(part, "=")
		if !named {
			axis, value = "", part
		}
		axis = strings.TrimSpace(axis)
		v, err := quantity.Parse(strings.TrimSpace(value), quantity.Length)
		if _, twice := c.values[axis]; err != nil || twice || named != (axis != "") || axis != "" && !slices.Contains(spatialAxes, axis) {
			return c, usageError(centreForms, "--centre %q is no centre", text)
		}
		c.values[axis] = v
	}
	return c, nil
}

func parseStretch(text, stretch string) (centre, error) {
	first, last, found := strings.Cut(stretch, " to ")
	from, errFrom := quantity.Parse(strings.TrimSpace(first), quantity.Time)
	to, errTo := quantity.Parse(strings.TrimSpace(last), quantity.Time)
	if !found || errors.Join(errFrom, errTo) != nil || !(from.SI < to.SI) {
		return centre{}, usageError(centreForms, "--centre %q is no stretch of time", text)
	}
	return centre{kind: "mean", from: from.SI, to: to.SI}, nil
}

// words say how the centre was found.
func (c centre) words() string {
	switch {
	case c.kind == "calibration":
		return "mean position of the calibration"
	case c.kind == "given":
		return "as given"
	case math.IsInf(c.to, 1):
		return "mean of the whole recording"
	}
	return fmt.Sprintf("mean from %s to %s", quantity.Format(c.from, 0, "s"), quantity.Format(c.to, 0, "s"))
}

// of finds the centre of an axis and its standard uncertainty [m]; x are its positions
// [m], the first at start [s].
func (c centre) of(trap calib.Trap, result *calib.Result, x []float64, start, rate float64) (value, u float64, err error) {
	switch c.kind {
	case "given":
		v, ok := c.values[trap.Axis]
		if !ok {
			v, ok = c.values[""]
		}
		if !ok {
			return 0, 0, usageError(centreForms, "--centre gives no value for axis %s", trap.Axis)
		}
		return v.SI, v.U, nil
	case "calibration":
		at := slices.IndexFunc(result.Axes, func(a calib.Axis) bool { return a.Name == trap.Axis })
		if !result.Axes[at].Mean.Known() {
			return 0, 0, usageError(centreForms, "the calibration holds no mean position of axis %s", trap.Axis)
		}
		return float64(result.Axes[at].Mean), 0, nil
	}
	if !math.IsInf(c.to, 1) {
		first := max(0, int(math.Ceil((c.from-start)*rate-1e-6)))
		last := min(len(x), int(math.Floor((c.to-start)*rate+1e-6))+1)
		x = x[min(first, len(x)):max(last, min(first, len(x)))]
	}
	value, u, err = calib.Centre(x, rate, trap.Corner)
	if err != nil {
		return 0, 0, inputError(centreForms, fmt.Errorf("axis %s: --centre names a stretch, but %w", trap.Axis, err))
	}
	return value, u, nil
}
