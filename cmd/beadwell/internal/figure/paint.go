package figure

import (
	"math"

	"gonum.org/v1/plot/font"
	gonumtext "gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Lengths of the layout [pt].
const (
	millimetre   = 72 / 25.4
	columnWidth  = 85 * millimetre
	edge         = 3.5  // free at the outer edges
	keyHeight    = 13.0 // of the line that names the marks
	tickLength   = 3.0
	gap          = 3.0  // between tick and label, and label and text
	between      = 7.0  // between panels
	hairline     = 0.5  // axes
	curveWidth   = 1.3  // fits
	dotRadius    = 1.25 // measured points
	thinBar      = 0.8  // 95 % intervals
	thickBar     = 2.4  // 68 % intervals
	pieceLength  = 100  // points of a polyline that is stroked at once
	stripMinimum = 1.2  // width of the narrowest excluded strip
	hatchMinimum = 4    // width from which on a strip is hatched
)

// brush paints in one theme.
type brush struct {
	canvas vg.Canvas
	theme  Theme
}

func (b brush) color(i ink) tinted { return tinted{i.in(b.theme), i} }

func (b brush) line(i ink, width vg.Length, dash ...vg.Length) draw.LineStyle {
	return draw.LineStyle{Color: b.color(i), Width: width, Dashes: dash}
}

// write sets text; x and y align as in gonum/plot: 0 left or bottom, -0.5 centre, -1 right or top.
func (b brush) write(s string, at vg.Point, i ink, size vg.Length, x, y, rotation float64) {
	style := gonumtext.Style{
		Color: b.color(i), Font: font.From(face, size), Handler: handler{},
		XAlign: gonumtext.XAlignment(x), YAlign: gonumtext.YAlignment(y), Rotation: rotation,
	}
	handler{}.Draw(b.canvas, s, style, at)
}

func widthOf(s string, size vg.Length) vg.Length {
	w, _, _ := handler{}.Box(s, font.From(face, size))
	return w
}

// paint draws the whole figure on a canvas of its size.
func (b brush) paint(f Figure, w, h vg.Length) {
	area := vg.Rectangle{Min: vg.Point{X: edge, Y: edge}, Max: vg.Point{X: w - edge, Y: h - edge}}
	if f.Reason != "" {
		b.emptyFrame(f, area)
		return
	}
	if len(f.key) > 0 {
		b.key(f.key, vg.Point{X: area.Min.X, Y: area.Max.Y - keyHeight/2 + 1}, area.Max.X)
		area.Max.Y -= keyHeight
	}
	for _, p := range f.panels {
		area.Min.X = max(area.Min.X, edge+leftMargin(p))
	}
	full := area.Max.X
	for _, p := range f.panels {
		area.Max.X = min(area.Max.X, full-rightMargin(p, full-area.Min.X))
	}
	for i, box := range stack(f.panels, area) {
		b.panel(f.panels[i], box)
	}
}

// stack divides the area among the panels, from the top down, and returns the
// boxes inside their axes.
func stack(panels []panel, area vg.Rectangle) []vg.Rectangle {
	free, shares := area.Max.Y-area.Min.Y, 0.0
	for i, p := range panels {
		free -= headroom(p, area.Min.X, area.Max.X) + bottomMargin(p)
		if i > 0 {
			free -= between
		}
		shares += p.share
	}
	boxes := make([]vg.Rectangle, len(panels))
	top := area.Max.Y
	for i, p := range panels {
		top -= headroom(p, area.Min.X, area.Max.X)
		height := free * vg.Length(p.share/shares)
		boxes[i] = vg.Rectangle{Min: vg.Point{X: area.Min.X, Y: top - height}, Max: vg.Point{X: area.Max.X, Y: top}}
		top -= height + bottomMargin(p) + between
	}
	return boxes
}

// rightMargin is what the last label of the x axis reaches beyond the axis.
func rightMargin(p panel, width vg.Length) vg.Length {
	margin := vg.Length(2)
	for _, t := range p.x.ticks(7) {
		past := widthOf(t.label, smallSize)/2 - width*vg.Length(1-p.x.at(t.value))
		margin = max(margin, past)
	}
	return margin
}

// leftMargin is the room that the y axis needs.
func leftMargin(p panel) vg.Length {
	widest := vg.Length(0)
	for _, t := range p.y.ticks(5) {
		widest = max(widest, widthOf(t.label, smallSize))
	}
	margin := widest + tickLength + gap
	if p.y.label() != "" {
		margin += labelSize + gap
	}
	return margin
}

// bottomMargin is the room that the x axis needs.
func bottomMargin(p panel) vg.Length {
	if p.linked {
		return 0
	}
	return tickLength + gap + smallSize + gap + labelSize + 1
}

// panel draws axes and series of one panel.
func (b brush) panel(p panel, box vg.Rectangle) {
	c := draw.Canvas{Canvas: b.canvas, Rectangle: box}
	for _, s := range p.series {
		if s.behind() {
			b.series(c, p, s)
		}
	}
	b.axes(c, p)
	for _, s := range p.series {
		if !s.behind() {
			b.series(c, p, s)
		}
	}
	b.head(c, p)
	for _, n := range p.notes {
		b.note(c, n)
	}
}

// behind tells whether a series lies under the axes.
func (s series) behind() bool {
	return !s.front && (s.mark == span || s.mark == strip || s.mark == envelope || s.mark == columns)
}

func (b brush) note(c draw.Canvas, n note) {
	x := 0.0
	switch {
	case n.middle:
		x = -0.5
	case n.left:
		x = -1
	}
	b.write(n.text, vg.Point{X: c.X(n.x), Y: c.Y(n.y)}, n.ink, smallSize, x, -0.5, 0)
}

// axes draws the left and the lower axis, with their marks outside.
func (b brush) axes(c draw.Canvas, p panel) {
	line, minor := b.line(text, hairline), b.line(soft, hairline*0.8)
	c.StrokeLines(line, []vg.Point{{X: c.Min.X, Y: c.Max.Y}, c.Min, {X: c.Max.X, Y: c.Min.Y}})
	for _, t := range p.x.ticks(7) {
		x := c.X(p.x.at(t.value))
		if t.label == "" {
			c.StrokeLine2(minor, x, c.Min.Y, x, c.Min.Y-tickLength*0.55)
			continue
		}
		c.StrokeLine2(line, x, c.Min.Y, x, c.Min.Y-tickLength)
		if !p.linked {
			b.write(t.label, vg.Point{X: x, Y: c.Min.Y - tickLength - gap*0.5}, text, smallSize, -0.5, -1, 0)
		}
	}
	if !p.linked {
		at := vg.Point{X: (c.Min.X + c.Max.X) / 2, Y: c.Min.Y - bottomMargin(p)}
		b.write(p.x.label(), at, text, labelSize, -0.5, 0, 0)
	}
	b.leftAxis(c, p)
}

func (b brush) leftAxis(c draw.Canvas, p panel) {
	line, minor := b.line(text, hairline), b.line(soft, hairline*0.8)
	for _, t := range p.y.ticks(5) {
		y := c.Y(p.y.at(t.value))
		if t.label == "" {
			c.StrokeLine2(minor, c.Min.X, y, c.Min.X-tickLength*0.55, y)
			continue
		}
		c.StrokeLine2(line, c.Min.X, y, c.Min.X-tickLength, y)
		b.write(t.label, vg.Point{X: c.Min.X - tickLength - gap*0.6, Y: y}, text, smallSize, -1, -0.5, 0)
	}
	if label := p.y.label(); label != "" {
		at := vg.Point{X: edge + labelSize*0.5, Y: (c.Min.Y + c.Max.Y) / 2}
		b.write(label, at, text, labelSize, -0.5, -0.5, math.Pi/2)
	}
}

// emptyFrame draws the frame of a figure that could not be drawn.
func (b brush) emptyFrame(f Figure, area vg.Rectangle) {
	c := draw.Canvas{Canvas: b.canvas, Rectangle: area}
	c.StrokeLines(b.line(soft, hairline, 3, 2), []vg.Point{
		area.Min, {X: area.Max.X, Y: area.Min.Y}, area.Max, {X: area.Min.X, Y: area.Max.Y}, area.Min})
	centre := c.Center()
	b.write(f.Title, vg.Point{X: centre.X, Y: centre.Y + 9}, text, labelSize, -0.5, 0, 0)
	b.write(wrap("not drawn: "+f.Reason, area.Max.X-area.Min.X-16), centre, soft, smallSize, -0.5, -1, 0)
}
