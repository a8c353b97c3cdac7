package figure

import (
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// spans shades stretches of the x axis. A strip, which marks what was left out,
// is edged, at least a hairline wide, and has a wedge at its top.
func (b brush) spans(c draw.Canvas, p panel, s series) {
	for i := range s.low {
		if !finite(s.low[i], s.high[i]) {
			continue
		}
		left, right := c.X(bound(p.x, s.low[i])), c.X(bound(p.x, s.high[i]))
		if s.mark == strip && right-left < stripMinimum {
			middle := (left + right) / 2
			left, right = middle-stripMinimum/2, middle+stripMinimum/2
		}
		b.shade(c, s, left, right)
	}
	if s.label != "" && len(s.low) > 0 {
		b.spanLabel(c, p, s)
	}
}

func (b brush) shade(c draw.Canvas, s series, left, right vg.Length) {
	if s.mark == span && !s.ticked {
		c.FillPolygon(b.color(s.ink), box(left, right, c.Min.Y, c.Max.Y))
		return
	}
	b.hatch(c, s.ink, left, right)
	for _, x := range []vg.Length{left, right} {
		c.StrokeLine2(b.line(s.ink, 0.6), x, c.Min.Y, x, c.Max.Y)
	}
	middle := (left + right) / 2
	c.FillPolygon(b.color(s.ink), []vg.Point{
		{X: middle - 2.2, Y: c.Max.Y + 3}, {X: middle + 2.2, Y: c.Max.Y + 3}, {X: middle, Y: c.Max.Y - 0.6}})
}

// hatch fills a stretch with slanted lines, which tell it apart without colour.
func (b brush) hatch(c draw.Canvas, i ink, left, right vg.Length) {
	const spacing = 4
	height := c.Max.Y - c.Min.Y
	inner := draw.Canvas{Canvas: c.Canvas, Rectangle: vg.Rectangle{
		Min: vg.Point{X: left, Y: c.Min.Y}, Max: vg.Point{X: right, Y: c.Max.Y}}}
	var path vg.Path
	for x := left - height; x < right; x += spacing {
		for _, line := range inner.ClipLinesXY([]vg.Point{{X: x, Y: c.Min.Y}, {X: x + height, Y: c.Max.Y}}) {
			path.Move(line[0])
			path.Line(line[len(line)-1])
		}
	}
	b.canvas.SetColor(b.color(i))
	b.canvas.SetLineWidth(0.35)
	b.canvas.SetLineDash(nil, 0)
	strokeIf(b.canvas, path)
}

func (b brush) spanLabel(c draw.Canvas, p panel, s series) {
	left, right := c.X(bound(p.x, s.low[0])), c.X(bound(p.x, s.high[0]))
	middle, half := (left+right)/2, widthOf(s.label, smallSize)/2
	middle = min(max(middle, c.Min.X+half), c.Max.X-half)
	b.write(s.label, vg.Point{X: middle, Y: c.Max.Y + 3.5}, text, smallSize, -0.5, 0, 0)
}

func box(left, right, bottom, top vg.Length) []vg.Point {
	return []vg.Point{{X: left, Y: bottom}, {X: left, Y: top}, {X: right, Y: top}, {X: right, Y: bottom}}
}

// whiskers draws horizontal estimates: a thin bar for the outer interval, a
// thick one for the inner, and the value.
func (b brush) whiskers(c draw.Canvas, p panel, s series) {
	for i := range s.x {
		at, inside := place(c, p, s.x[i], s.y[i])
		if !inside {
			continue
		}
		bar := func(low, high float64, width vg.Length) {
			if finite(low, high) {
				c.StrokeLine2(b.line(s.ink, width), c.X(bound(p.x, low)), at.Y, c.X(bound(p.x, high)), at.Y)
			}
		}
		bar(s.low[i], s.high[i], 0.8)
		bar(s.innerLow[i], s.inHigh[i], 2.4)
		var path vg.Path
		glyph(&path, s.glyph, at, 3)
		b.canvas.SetColor(b.color(s.ink))
		b.canvas.Fill(path)
	}
}

// key draws the line above the panels that names the marks.
func (b brush) key(items []keyItem, at vg.Point, right vg.Length) {
	const sample, apart = 13, 9
	for _, item := range items {
		width := sample + gap + widthOf(item.text, smallSize)
		if at.X+width > right {
			return
		}
		b.sample(item, at, sample)
		b.write(item.text, vg.Point{X: at.X + sample + gap, Y: at.Y}, text, smallSize, 0, -0.5, 0)
		at.X += width + apart
	}
}

// sample draws the mark of a key entry in a box of the given width.
func (b brush) sample(item keyItem, at vg.Point, width vg.Length) {
	c := draw.Canvas{Canvas: b.canvas, Rectangle: vg.Rectangle{
		Min: vg.Point{X: at.X, Y: at.Y - 3}, Max: vg.Point{X: at.X + width, Y: at.Y + 3}}}
	middle := c.Center()
	switch item.mark {
	case dots, rings, squares:
		b.canvas.SetColor(b.color(item.ink))
		b.canvas.SetLineWidth(hairline)
		b.canvas.SetLineDash(nil, 0)
		var path vg.Path
		glyph(&path, item.mark, middle, 1.9)
		if item.mark == rings {
			b.canvas.Stroke(path)
			return
		}
		b.canvas.Fill(path)
	case curve:
		c.StrokeLine2(b.line(item.ink, curveWidth), c.Min.X, middle.Y, c.Max.X, middle.Y)
	case dashes, level:
		c.StrokeLine2(b.line(item.ink, curveWidth*0.8, 4, 2), c.Min.X, middle.Y, c.Max.X, middle.Y)
	case columns, envelope, span:
		c.FillPolygon(b.color(item.ink), box(c.Min.X, c.Max.X, c.Min.Y, c.Max.Y))
	case strip:
		b.hatch(c, item.ink, c.Min.X, c.Max.X)
	}
}
