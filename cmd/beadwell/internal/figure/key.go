package figure

import (
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// headline is the height of a row of labels above a panel [pt].
const headline = 8.5

// placedLabel is a label above a panel.
type placedLabel struct {
	text  string
	left  vg.Length
	row   int
	right vg.Length
}

// labelsAbove places the labels of uprights and strips above a panel, each
// centred on its mark as far as the panel reaches, in as few rows as keep them
// apart. Where three rows do not do, a label is left out; the description of the
// figure names every one.
func labelsAbove(p panel, left, right vg.Length) (labels []placedLabel, rows int) {
	const mostRows, apart = 3, 4
	var ends [mostRows]vg.Length
	for i := range ends {
		ends[i] = left - apart
	}
	for _, s := range p.series {
		at, ok := anchor(p, s)
		if !ok {
			continue
		}
		width := widthOf(s.label, smallSize)
		start := left + vg.Length(at)*(right-left) - width/2
		start = max(min(start, right-width), left)
		for row := range ends {
			if start >= ends[row]+apart {
				ends[row] = start + width
				labels = append(labels, placedLabel{s.label, start, row, start + width})
				rows = max(rows, row+1)
				break
			}
		}
	}
	return labels, rows
}

// anchor is where a labelled series stands, as a share of the x axis.
func anchor(p panel, s series) (float64, bool) {
	switch {
	case s.label == "":
		return 0, false
	case s.mark == upright:
		n := p.x.normalised(s.x[0])
		return n, n >= 0 && n <= 1
	case s.mark == strip && len(s.low) > 0:
		return (bound(p.x, s.low[0]) + bound(p.x, s.high[0])) / 2, true
	}
	return 0, false
}

// headroom is the room above a panel for wedges and labels.
func headroom(p panel, left, right vg.Length) vg.Length {
	_, rows := labelsAbove(p, left, right)
	room := headline * vg.Length(rows)
	for _, s := range p.series {
		if s.wedge || s.mark == upright {
			return room + 3
		}
	}
	return room
}

// head writes the labels above a panel.
func (b brush) head(c draw.Canvas, p panel) {
	labels, _ := labelsAbove(p, c.Min.X, c.Max.X)
	for _, l := range labels {
		at := vg.Point{X: l.left, Y: c.Max.Y + 3 + headline*vg.Length(l.row)}
		b.write(l.text, at, text, smallSize, 0, 0, 0)
	}
}

// key draws the line above the panels that names the marks.
func (b brush) key(items []keyItem, at vg.Point, right vg.Length) {
	const apart = 9
	for _, item := range items {
		sample := vg.Length(13)
		if item.mark == dots || item.mark == rings || item.mark == squares {
			sample = 5
		}
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
	case bar68:
		c.StrokeLine2(b.line(item.ink, thickBar), c.Min.X, middle.Y, c.Max.X, middle.Y)
	case bar95:
		c.StrokeLine2(b.line(item.ink, thinBar), c.Min.X, middle.Y, c.Max.X, middle.Y)
	case dashes, level:
		c.StrokeLine2(b.line(item.ink, curveWidth*0.8, 4, 2), c.Min.X, middle.Y, c.Max.X, middle.Y)
	case columns, envelope, span:
		c.FillPolygon(b.color(item.ink), box(c.Min.X, c.Max.X, c.Min.Y, c.Max.Y))
	case strip:
		b.hatch(c, item.ink, c.Min.X, c.Max.X)
	}
}
