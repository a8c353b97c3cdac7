package figure

import (
	"fmt"
	"math"
	"strconv"

	"gonum.org/v1/plot"
)

// scale is one axis: its quantity and unit, and the range it spans in that unit.
type scale struct {
	quantity string  // "frequency"
	unit     string  // as set on the label, "nm^{2}/Hz"
	si       string  // the unit of the series, "m2/Hz"
	factor   float64 // of the unit per SI unit
	log      bool
	low      float64 // in the unit
	high     float64
	rows     []string // labels of a nominal axis, row 0 at the top
}

// The largest and smallest numbers an axis reaches to, in its unit. The room to
// the ends of the double range keeps differences and margins finite.
const (
	largest  = 1e100
	smallest = 1e-100
)

// over returns the scale with a range that holds e (SI units) and a margin.
func (s scale) over(e extent) scale {
	low, high := e.low*s.factor, e.high*s.factor
	if s.log {
		s.low, s.high = logRange(low, high)
	} else {
		s.low, s.high = linearRange(low, high)
	}
	return s
}

// logRange leaves a twentieth of the range free at either end, and shows at
// least a factor of four.
func logRange(low, high float64) (float64, float64) {
	low = math.Min(math.Max(low, smallest), largest)
	high = math.Min(math.Max(high, low), largest*10)
	margin := math.Max(0.05*math.Log(high/low), math.Ln2-0.5*math.Log(high/low))
	return low * math.Exp(-margin), high * math.Exp(margin)
}

func linearRange(low, high float64) (float64, float64) {
	low, high = math.Min(math.Max(low, -largest), largest), math.Max(math.Min(high, largest), -largest)
	margin := 0.04 * (high - low)
	// A range that is lost in the rounding of its ends cannot be ticked.
	if tiny := 1e-9 * math.Max(math.Abs(low), math.Abs(high)); margin <= tiny {
		margin = math.Max(tiny*1e3, smallest)
	}
	return low - margin, high + margin
}

// normalised is the place of an SI value as a share of the axis; NaN where a
// logarithmic axis has no place for it.
func (s scale) normalised(si float64) float64 {
	return s.at(si * s.factor)
}

// at is the place of a value in the unit of the axis.
func (s scale) at(v float64) float64 {
	if !s.log {
		return plot.LinearScale{}.Normalize(s.low, s.high, v)
	}
	if !(v > 0) {
		return math.NaN()
	}
	return plot.LogScale{}.Normalize(s.low, s.high, v)
}

// label is the text beside the axis.
func (s scale) label() string {
	if s.unit == "" {
		return s.quantity
	}
	return s.quantity + " (" + s.unit + ")"
}

// tick is one mark of an axis; a minor one has no label.
type tick struct {
	value float64
	label string
}

// ticks returns the marks of the axis, about want of them with a label.
func (s scale) ticks(want int) []tick {
	switch {
	case s.rows != nil:
		return rowTicks(s.rows)
	case s.log:
		return logTicks(s.low, s.high, want)
	}
	return linearTicks(s.low, s.high, want)
}

func rowTicks(rows []string) []tick {
	ticks := make([]tick, len(rows))
	for i, row := range rows {
		ticks[i] = tick{-float64(i), row}
	}
	return ticks
}

// logTicks marks whole decades, every one or every few, with 2 to 9 between
// them as minor marks while there is room. Where fewer than two decades lie in
// the range 2 and 5 are labelled too, and in a range that is shorter still
// every digit.
func logTicks(low, high float64, want int) []tick {
	first, last := int(math.Floor(math.Log10(low))), int(math.Ceil(math.Log10(high)))
	within := func(v float64) bool { return v >= low && v <= high }
	decades, ones := 0, 0 // of decades, and of 1, 2 and 5 times a decade
	for d := first; d <= last; d++ {
		for _, m := range []float64{1, 2, 5} {
			if within(m * math.Pow10(d)) {
				ones++
				if m == 1 {
					decades++
				}
			}
		}
	}
	label := digitLabel
	if decades >= 2 {
		stride := (decades + max(want, 1) - 1) / max(want, 1)
		label = func(m, d int) string { return decadeLabel(m, d, stride) }
	} else if ones >= 2 {
		label = oneTwoFiveLabel
	}
	var ticks []tick
	for d := first; d <= last; d++ {
		for m := 1; m <= 9; m++ {
			if v := float64(m) * math.Pow10(d); within(v) && (m == 1 || decades <= 10) {
				ticks = append(ticks, tick{v, label(m, d)})
			}
		}
	}
	return ticks
}

// decadeLabel labels every stride-th decade as a power of ten.
func decadeLabel(m, decade, stride int) string {
	if m != 1 || decade%stride != 0 {
		return ""
	}
	return fmt.Sprintf("10^{%d}", decade)
}

func oneTwoFiveLabel(m, decade int) string {
	if m != 1 && m != 2 && m != 5 {
		return ""
	}
	return digitLabel(m, decade)
}

// digitLabel prints m times a decade, plainly from 0.01 to 9000.
func digitLabel(m, decade int) string {
	switch {
	case decade >= -2 && decade < 4:
		return strconv.FormatFloat(float64(m)*math.Pow10(decade), 'f', max(0, -decade), 64)
	case m == 1:
		return fmt.Sprintf("10^{%d}", decade)
	}
	return fmt.Sprintf("%d×10^{%d}", m, decade)
}

// linearTicks marks multiples of 1, 2 or 5 times a power of ten.
func linearTicks(low, high float64, want int) []tick {
	step := niceStep((high - low) / float64(max(want, 1)))
	decimals := max(0, -int(math.Floor(math.Log10(step)+1e-9)))
	var ticks []tick
	for k := math.Ceil(low / step); k*step <= high && len(ticks) <= 4*want; k++ {
		v := k * step
		ticks = append(ticks, tick{v, linearLabel(v, step, decimals)})
	}
	return ticks
}

// niceStep is the smallest of 1, 2, 5 times a power of ten at or above raw.
func niceStep(raw float64) float64 {
	decade := math.Pow(10, math.Floor(math.Log10(raw)))
	for _, m := range []float64{1, 2, 5} {
		if m*decade >= raw*(1-1e-9) {
			return m * decade
		}
	}
	return 10 * decade
}

// linearLabel prints a tick plainly from 0.0001 to 99 999, else with a power of ten.
func linearLabel(v, step float64, decimals int) string {
	size := math.Abs(v)
	switch {
	case size < step/2:
		return "0"
	case size < 1e5 && decimals <= 4:
		return strconv.FormatFloat(v, 'f', decimals, 64)
	}
	decade := math.Floor(math.Log10(size) + 1e-12)
	digits := max(0, int(decade-math.Floor(math.Log10(step)+1e-9)))
	mantissa := v / math.Pow(10, decade)
	return strconv.FormatFloat(mantissa, 'f', min(digits, 9), 64) + fmt.Sprintf("×10^{%d}", int(decade))
}
