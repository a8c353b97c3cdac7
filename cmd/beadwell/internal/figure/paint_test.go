package figure

import (
	"math"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg"
)

var pathElement = regexp.MustCompile(`<path class="(bw-[a-z-]+)"([^>]*) d="([^"]+)"`)
var strokeWidth = regexp.MustCompile(`stroke-width="([0-9.]+)"`)
var coordinate = regexp.MustCompile(`[ML](-?[0-9.]+) (-?[0-9.]+)`)

// drawn is one path of an SVG: its class, line width and the box of its points.
type drawn struct {
	class                    string
	width                    float64
	left, right, top, bottom float64
}

func pathsOf(svg string) []drawn {
	var out []drawn
	for _, m := range pathElement.FindAllStringSubmatch(svg, -1) {
		d := drawn{class: m[1], left: math.Inf(1), right: math.Inf(-1), top: math.Inf(1), bottom: math.Inf(-1)}
		if w := strokeWidth.FindStringSubmatch(m[2]); w != nil {
			d.width, _ = strconv.ParseFloat(w[1], 64)
		}
		for _, c := range coordinate.FindAllStringSubmatch(m[3], -1) {
			x, _ := strconv.ParseFloat(c[1], 64)
			y, _ := strconv.ParseFloat(c[2], 64)
			d.left, d.right = min(d.left, x), max(d.right, x)
			d.top, d.bottom = min(d.top, y), max(d.bottom, y)
		}
		out = append(out, d)
	}
	return out
}

// TestPaintedPlaces paints one series of each mark on axes from 0 to 10 and
// looks for it on the page, whose y runs down.
func TestPaintedPlaces(t *testing.T) {
	axis := scale{quantity: "q", unit: "u", factor: 1, low: 0, high: 10}
	one := func(v float64) []float64 { return []float64{v} }
	p := panel{name: "p", share: 1, x: axis, y: axis, series: []series{
		{mark: span, ink: band, low: one(2), high: one(4)},
		{mark: columns, ink: record, y: one(5), low: one(6), high: one(7)},
		{mark: curve, ink: model, x: []float64{0, 5, 20}, y: []float64{1, 6, 6}},
		{mark: level, ink: alarm, y: one(2.5)},
		{mark: upright, ink: adopted, x: one(7.5)},
		{mark: whisker, ink: ampl, glyph: squares, x: one(5), y: one(8), low: one(3), high: one(9), innerLow: one(4), inHigh: one(6.5)},
		{mark: squares, ink: left, x: one(1), y: one(9), low: one(8), high: one(9.5)},
	}}
	f := Figure{Name: "f", panels: []panel{p}, height: 60}
	svg := string(renderSVG(f, Light, true))

	_, h := f.size()
	area := vg.Rectangle{Min: vg.Point{X: edge + leftMargin(p), Y: edge}, Max: vg.Point{X: columnWidth - edge, Y: h - edge}}
	area.Max.X -= rightMargin(p, area.Max.X-area.Min.X)
	inside := stack(f.panels, area)[0]
	x := func(v float64) float64 { return float64(inside.Min.X) + v/10*float64(inside.Max.X-inside.Min.X) }
	y := func(v float64) float64 {
		return float64(h) - float64(inside.Min.Y) - v/10*float64(inside.Max.Y-inside.Min.Y)
	}
	// Coordinates are rounded to a hundredth of a point; a square reaches 0.9 of
	// its radius to either side.
	const rounding = 0.011
	for _, want := range []drawn{
		{"bw-band-f", 0, x(2), x(4), y(10), y(0)},
		{"bw-record-f", 0, x(6), x(7), y(5), y(0)},
		{"bw-model-s", curveWidth, x(0), x(10), y(6), y(1)},
		{"bw-alarm-s", 0.7, x(0), x(10), y(2.5), y(2.5)},
		{"bw-adopted-s", 0.8, x(7.5), x(7.5), y(10) - 3, y(0)},
		{"bw-amplitude-s", thinBar, x(3), x(9), y(8), y(8)},
		{"bw-amplitude-s", thickBar, x(4), x(6.5), y(8), y(8)},
		{"bw-amplitude-f", 0, x(5) - 2.52, x(5) + 2.52, y(8) - 2.52, y(8) + 2.52},
		{"bw-left-f", 0, x(1) - 0.9*dotRadius, x(1) + 0.9*dotRadius, y(9) - 0.9*dotRadius, y(9) + 0.9*dotRadius},
		{"bw-soft-s", hairline, x(1), x(1), y(9.5), y(8)},
		{"bw-text-s", hairline, x(0), x(10), y(10), y(0)},   // the axes
		{"bw-text-s", hairline, x(4), x(4), y(0), y(0) + 3}, // the tick of 4 below, of 6 at the left
		{"bw-text-s", hairline, x(0) - 3, x(0), y(6), y(6)},
	} {
		found := false
		for _, got := range pathsOf(svg) {
			near := func(a, b float64) bool { return math.Abs(a-b) <= rounding }
			found = found || got.class == want.class && near(got.width, want.width) && near(got.left, want.left) &&
				near(got.right, want.right) && near(got.top, want.top) && near(got.bottom, want.bottom)
		}
		if !found {
			t.Errorf("nothing is drawn as %+v", want)
		}
	}
}

func TestLabelsAboveKeepApart(t *testing.T) {
	p := panel{x: scale{factor: 1, low: 0, high: 10}}
	for i := range 8 {
		at := float64(i) * 0.3
		p.series = append(p.series, series{mark: strip, label: "finding", low: []float64{at}, high: []float64{at + 0.1}})
	}
	labels, rows := labelsAbove(p, 20, 220)
	if rows < 2 || rows > 3 {
		t.Errorf("%d rows, want 2 or 3", rows)
	}
	for i, a := range labels {
		if a.left < 20 || a.right > 220 {
			t.Errorf("label %d reaches from %g to %g, out of the panel", i, a.left, a.right)
		}
		for _, b := range labels[:i] {
			if a.row == b.row && a.left < b.right && b.left < a.right {
				t.Errorf("labels from %g and %g overlap", a.left, b.left)
			}
		}
	}
}

func TestWrapBreaksBetweenWords(t *testing.T) {
	const words = "the result holds no point of the power spectrum above zero"
	got := wrap(words, 80)
	if strings.ReplaceAll(got, "\n", " ") != words {
		t.Errorf("wrap lost words: %q", got)
	}
	for _, line := range strings.Split(got, "\n") {
		if widthOf(line, smallSize) > 80 {
			t.Errorf("line %q is wider than 80 pt", line)
		}
	}
}

var textElement = regexp.MustCompile(`<text [^>]*?(?:x="([0-9.]+)" y="([0-9.]+)"|rotate\((-?[0-9.]+)\)"[^>]*?) font-size="([0-9.]+)"(?: textLength="([0-9.]+)" lengthAdjust="spacingAndGlyphs")?>([^<]*)<`)

func TestWordsOnThePage(t *testing.T) {
	axis := scale{quantity: "density", unit: "nm^{2}", factor: 1, log: true, low: 1, high: 1e4}
	f := Figure{Name: "f", panels: []panel{{share: 1, x: axis, y: axis}}, height: 60}
	base, raised, upright := 0.0, 0.0, false
	for _, m := range textElement.FindAllStringSubmatch(string(renderSVG(f, Light, true)), -1) {
		y, _ := strconv.ParseFloat(m[2], 64)
		// Every text of more than a letter keeps the width that it was laid out with, in any font.
		size, _ := strconv.ParseFloat(m[4], 64)
		width, _ := strconv.ParseFloat(m[5], 64)
		if laidOut := float64(widthOf(m[6], vg.Length(size))); len(m[6]) > 1 && math.Abs(width-laidOut) > 0.1 {
			t.Errorf("%q has the width %s, want %g", m[6], m[5], laidOut)
		}
		switch {
		case m[6] == "10" && base == 0:
			base = y
		case m[6] == "0" && raised == 0:
			raised = y
			if want := number(smallSize * raisedSize); m[4] != want {
				t.Errorf("an exponent has size %s, want %s", m[4], want)
			}
		case m[3] != "":
			// A quarter turn to the left, as on every y axis.
			upright = m[3] == "-90"
		}
	}
	if got := base - raised; math.Abs(got-smallSize*raisedBy) > 0.011 { // two roundings to a hundredth
		t.Errorf("the exponent of the first label stands %g pt above its line, want %g", got, smallSize*raisedBy)
	}
	if !upright {
		t.Error("the label of the y axis does not read upwards")
	}
}

func TestPDFCirclesAreRound(t *testing.T) {
	var circle vg.Path
	centre := vg.Point{X: 3, Y: 4}
	glyph(&circle, dots, centre, 2)
	from := vg.Point{}
	for _, step := range withoutArcs(circle) {
		if step.Type == vg.CurveComp {
			// The middle of a cubic curve: (p0 + 3 p1 + 3 p2 + p3) / 8.
			a, b := step.Control[0], step.Control[1]
			x := (from.X+3*a.X+3*b.X+step.Pos.X)/8 - centre.X
			y := (from.Y+3*a.Y+3*b.Y+step.Pos.Y)/8 - centre.Y
			if r := math.Hypot(float64(x), float64(y)); math.Abs(r/2-1) > 5e-4 { // 0.03 % is the curve's own error
				t.Errorf("radius %g half way along a quarter, want 2", r)
			}
		}
		if step.Type == vg.ArcComp {
			t.Error("an arc is left")
		}
		from = step.Pos
	}
}

func TestPDFHasNoClock(t *testing.T) {
	out := must(Render(Figure{Name: "f"}.empty("nothing"), PDF, Light))
	if regexp.MustCompile(`/(Creation|Mod)Date`).Match(out) {
		t.Error("the PDF holds the time of day")
	}
}
