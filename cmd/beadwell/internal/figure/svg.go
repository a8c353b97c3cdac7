package figure

import (
	"bytes"
	"encoding/xml"
	"fmt"
	"image"
	"image/color"
	"math"
	"strconv"
	"unicode/utf8"

	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
)

// svgCanvas is a canvas of gonum/plot that writes SVG. It exists beside vgsvg
// because that one writes style attributes, which a strict content security
// policy forbids, a white background, raw control characters and no classes to
// hang a dark theme on.
type svgCanvas struct {
	out   bytes.Buffer
	w, h  vg.Length
	now   pen
	stack []pen
}

// pen is the drawing state: colour, line and the affine map to the page.
type pen struct {
	color color.Color
	width vg.Length
	dash  []vg.Length
	at    affine
}

// affine maps (x, y) to (a x + c y + e, b x + d y + f).
type affine struct{ a, b, c, d, e, f float64 }

var _ vg.CanvasSizer = (*svgCanvas)(nil)

func newSVG(w, h vg.Length) *svgCanvas {
	// The page of vg has its origin at the bottom left, that of SVG at the top.
	c := &svgCanvas{w: w, h: h, now: pen{at: affine{1, 0, 0, -1, 0, float64(h)}}}
	c.out.Grow(48 << 10) // the larger figures of a recording
	vg.Initialize(c)
	return c
}

func (m affine) apply(p vg.Point) (x, y float64) {
	px, py := float64(p.X), float64(p.Y)
	return m.a*px + m.c*py + m.e, m.b*px + m.d*py + m.f
}

// then returns the map that applies n first and m after it.
func (m affine) then(n affine) affine {
	return affine{
		m.a*n.a + m.c*n.b, m.b*n.a + m.d*n.b,
		m.a*n.c + m.c*n.d, m.b*n.c + m.d*n.d,
		m.a*n.e + m.c*n.f + m.e, m.b*n.e + m.d*n.f + m.f,
	}
}

func (c *svgCanvas) Size() (w, h vg.Length)                    { return c.w, c.h }
func (c *svgCanvas) SetLineWidth(w vg.Length)                  { c.now.width = w }
func (c *svgCanvas) SetLineDash(dash []vg.Length, _ vg.Length) { c.now.dash = dash }
func (c *svgCanvas) SetColor(col color.Color)                  { c.now.color = col }
func (c *svgCanvas) Push()                                     { c.stack = append(c.stack, c.now) }

func (c *svgCanvas) Pop() {
	c.now = c.stack[len(c.stack)-1]
	c.stack = c.stack[:len(c.stack)-1]
}

func (c *svgCanvas) Rotate(rad float64) {
	sin, cos := math.Sincos(rad)
	c.now.at = c.now.at.then(affine{cos, sin, -sin, cos, 0, 0})
}

func (c *svgCanvas) Translate(p vg.Point) {
	c.now.at = c.now.at.then(affine{1, 0, 0, 1, float64(p.X), float64(p.Y)})
}

func (c *svgCanvas) Scale(x, y float64) {
	c.now.at = c.now.at.then(affine{x, 0, 0, y, 0, 0})
}

// Stroke draws the outline of a path.
func (c *svgCanvas) Stroke(p vg.Path) {
	if c.now.width <= 0 {
		return
	}
	c.open("path", "stroke", "-s")
	fmt.Fprintf(&c.out, ` fill="none" stroke-width="%s"`, number(float64(c.now.width)))
	if len(c.now.dash) > 0 {
		c.out.WriteString(` stroke-dasharray="`)
		for i, d := range c.now.dash {
			if i > 0 {
				c.out.WriteByte(' ')
			}
			c.out.WriteString(number(float64(d)))
		}
		c.out.WriteByte('"')
	}
	c.path(p)
}

// Fill fills a path.
func (c *svgCanvas) Fill(p vg.Path) {
	c.open("path", "fill", "-f")
	c.path(p)
}

// open begins an element with its class and its colour as an attribute, which
// any rule for the class overrides.
func (c *svgCanvas) open(element, attribute, suffix string) {
	c.out.WriteString("<" + element)
	if t, ok := c.now.color.(tinted); ok {
		c.out.WriteString(` class="` + classOf(t.ink) + suffix + `"`)
	}
	n := color.NRGBAModel.Convert(c.now.color).(color.NRGBA)
	if t, ok := c.now.color.(tinted); ok {
		n = t.NRGBA
	}
	c.out.WriteString(" " + attribute + `="` + hex(n) + `"`)
	if n.A != 255 {
		c.out.WriteString(" " + attribute + `-opacity="` + opacity(n) + `"`)
	}
}

func (c *svgCanvas) path(p vg.Path) {
	c.out.WriteString(` d="`)
	for _, step := range p {
		switch step.Type {
		case vg.MoveComp:
			c.step('M', step.Pos)
		case vg.LineComp:
			c.step('L', step.Pos)
		case vg.CurveComp:
			c.step("QC"[len(step.Control)-1], append(step.Control[:len(step.Control):len(step.Control)], step.Pos)...)
		case vg.ArcComp:
			c.arc(step)
		case vg.CloseComp:
			c.out.WriteByte('Z')
		}
	}
	c.out.WriteString("\"/>\n")
}

// arc draws a circular arc, a full circle as two halves. Circles are what most
// of a figure's bytes are, so they take the shortest form.
func (c *svgCanvas) arc(arc vg.PathComp) {
	on := func(angle float64) vg.Point {
		sin, cos := math.Sincos(angle)
		return vg.Point{X: arc.Pos.X + arc.Radius*vg.Length(cos), Y: arc.Pos.Y + arc.Radius*vg.Length(sin)}
	}
	// The map of a canvas that is not scaled keeps radii; none of ours is.
	r := number(float64(arc.Radius))
	for i := range 2 {
		x, y := c.now.at.apply(on(arc.Start + arc.Angle*float64(i+1)/2))
		sweep := "0" // counterclockwise on the page of vg
		if arc.Angle < 0 {
			sweep = "1"
		}
		c.out.WriteString("A" + r + " " + r + " 0 0 " + sweep + " ")
		c.pair(x, y)
	}
}

func (c *svgCanvas) step(command byte, points ...vg.Point) {
	c.out.WriteByte(command)
	for i, p := range points {
		if i > 0 {
			c.out.WriteByte(' ')
		}
		c.pair(c.now.at.apply(p))
	}
}

// pair writes a place on the page.
func (c *svgCanvas) pair(x, y float64) {
	text := append(appendNumber(c.out.AvailableBuffer(), x), ' ')
	c.out.Write(appendNumber(text, y))
}

// FillString sets one line of text, at the width that it was laid out with: a reader who has
// none of the fonts sees a wider or narrower one fitted to it, not one that runs into the axis.
func (c *svgCanvas) FillString(f font.Face, pt vg.Point, s string) {
	if f.Font.Size == 0 || s == "" {
		return
	}
	x, y := c.now.at.apply(pt)
	c.open("text", "fill", "-f")
	if c.now.at.b != 0 {
		// The map of vg to SVG mirrors y, so an angle changes its sign.
		angle := math.Atan2(c.now.at.b, c.now.at.a) * 180 / math.Pi
		fmt.Fprintf(&c.out, ` transform="translate(%s %s) rotate(%s)"`, number(x), number(y), number(angle))
	} else {
		fmt.Fprintf(&c.out, ` x="%s" y="%s"`, number(x), number(y))
	}
	fmt.Fprintf(&c.out, ` font-size="%s"`, number(float64(f.Font.Size)))
	if utf8.RuneCountInString(s) > 1 { // one letter alone has no spacing
		fmt.Fprintf(&c.out, ` textLength="%s" lengthAdjust="spacingAndGlyphs"`, number(float64(textWidth(f, s))))
	}
	c.out.WriteByte('>')
	_ = xml.EscapeText(&c.out, []byte(clean(s))) // a bytes.Buffer takes every write
	c.out.WriteString("</text>\n")
}

// DrawImage is part of vg.Canvas; no figure holds an image.
func (c *svgCanvas) DrawImage(vg.Rectangle, image.Image) {}

// number prints a length with two decimals, a hundredth of a point.
func number(v float64) string { return string(appendNumber(nil, v)) }

// appendNumber appends what number prints. A figure is made of some thousands of them, and whole hundredths are
// printed several times faster than the shortest digits of a float.
func appendNumber(to []byte, v float64) []byte {
	hundredths := math.Round(v * 100)
	if !(math.Abs(hundredths) < 1e15) {
		return strconv.AppendFloat(to, hundredths/100, 'f', -1, 64)
	}
	n := int64(hundredths)
	if n < 0 {
		to, n = append(to, '-'), -n
	}
	to = strconv.AppendInt(to, n/100, 10)
	switch rest := byte(n % 100); {
	case rest == 0:
		return to
	case rest%10 == 0:
		return append(to, '.', '0'+rest/10)
	default:
		return append(to, '.', '0'+rest/10, '0'+rest%10)
	}
}

func classOf(i ink) string { return "bw-" + inks[i].name }

func hex(c color.NRGBA) string { return fmt.Sprintf("#%02x%02x%02x", c.R, c.G, c.B) }

func opacity(c color.NRGBA) string { return strconv.FormatFloat(float64(c.A)/255, 'f', 2, 64) }
