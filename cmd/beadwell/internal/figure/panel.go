package figure

import "math"

// panel is one pair of axes with what is drawn between them.
type panel struct {
	name   string
	x, y   scale
	share  float64 // of the height that the panels divide
	series []series
	notes  []note
	linked bool // the panel below carries the labels of the x axis
}

// mark is a way to draw a series.
type mark int

const (
	dots     mark = iota // filled circles at (x, y), with vertical bars from low to high
	rings                // open circles, likewise
	squares              // filled squares, likewise
	curve                // a line through (x, y)
	dashes               // a dashed line through (x, y)
	columns              // bars of a histogram: from low to high on the x axis, y tall
	envelope             // the area between low and high over x
	span                 // the stretch of the x axis from low to high, shaded
	strip                // likewise, edged and hatched: left out of a fit, or found wanting
	level                // a dashed line across at y
	upright              // a dotted line up at x, named above the panel
	whisker              // a horizontal estimate: x at row y, bars low to high and inner
	bar68                // in the key: the thick bar of a whisker
	bar95                // in the key: the thin one
)

// series is one set of numbers that is drawn, in SI units.
type series struct {
	name             string
	mark             mark
	ink              ink
	glyph            mark // of a whisker: dots, rings or squares
	x, y             []float64
	low, high        []float64
	innerLow, inHigh []float64
	label            string // below a level at its right, above the panel otherwise
	wedge            bool   // a wedge at the top of each strip
	front            bool   // above the other series, not below the axes
}

// note is text at a place given as shares of the panel's width and height.
type note struct {
	text   string
	x, y   float64
	ink    ink
	left   bool // the text ends at x
	middle bool
}

// keyItem is one entry of the line above the panels that names the marks.
type keyItem struct {
	text string
	mark mark
	ink  ink
}

// add appends a series that has any points.
func (p *panel) add(s series) {
	if len(s.x) > 0 || len(s.y) > 0 || len(s.low) > 0 {
		p.series = append(p.series, s)
	}
}

// finite tells whether every value is a number.
func finite(values ...float64) bool {
	for _, v := range values {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return false
		}
	}
	return true
}

// extent is a range that grows to hold what it is shown.
type extent struct{ low, high float64 }

func newExtent() extent { return extent{math.Inf(1), math.Inf(-1)} }

func (e *extent) show(values ...float64) {
	for _, v := range values {
		if finite(v) {
			e.low, e.high = math.Min(e.low, v), math.Max(e.high, v)
		}
	}
}

// showPositive shows what a logarithmic axis can hold.
func (e *extent) showPositive(values ...float64) {
	for _, v := range values {
		if v > 0 {
			e.show(v)
		}
	}
}

func (e extent) empty() bool { return e.low > e.high }

// magnitude is the largest absolute value.
func (e extent) magnitude() float64 { return math.Max(math.Abs(e.low), math.Abs(e.high)) }
