package figure

import (
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// spans shades stretches of the x axis. A strip is edged and hatched, at least a
// hairline wide, and may have a wedge at its top: colour alone tells nothing.
func (b brush) spans(c draw.Canvas, p panel, s series) {
	for i := range s.low {
		if !finite(s.low[i], s.high[i]) {
			continue
		}
		left, right := c.X(bound(p.x, s.low[i])), c.X(bound(p.x, s.high[i]))
		if s.mark == span {
			c.FillPolygon(b.color(s.ink), box(left, right, c.Min.Y, c.Max.Y))
			continue
		}
		if right-left < stripMinimum {
			middle := (left + right) / 2
			left, right = middle-stripMinimum/2, middle+stripMinimum/2
		}
		b.strip(c, s, left, right)
	}
}

func (b brush) strip(c draw.Canvas, s series, left, right vg.Length) {
	if right-left > hatchMinimum {
		b.hatch(c, s.ink, left, right)
	}
	for _, x := range []vg.Length{left, right} {
		c.StrokeLine2(b.line(s.ink, 0.5), x, c.Min.Y, x, c.Max.Y)
	}
	if s.wedge {
		middle := (left + right) / 2
		c.FillPolygon(b.color(s.ink), []vg.Point{
			{X: middle - 2, Y: c.Max.Y + 3}, {X: middle + 2, Y: c.Max.Y + 3}, {X: middle, Y: c.Max.Y - 0.4}})
	}
}

// hatch fills a stretch with slanted lines.
func (b brush) hatch(c draw.Canvas, i ink, left, right vg.Length) {
	const spacing = 5
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
	b.canvas.SetLineWidth(0.25)
	b.canvas.SetLineDash(nil, 0)
	strokeIf(b.canvas, path)
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
		bar(s.low[i], s.high[i], thinBar)
		bar(s.innerLow[i], s.inHigh[i], thickBar)
		var path vg.Path
		glyph(&path, s.glyph, at, 2.8)
		b.canvas.SetColor(b.color(s.ink))
		b.canvas.Fill(path)
	}
}
