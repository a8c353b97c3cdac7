package figure

import (
	"math"
	"strings"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// series draws one series.
func (b brush) series(c draw.Canvas, p panel, s series) {
	switch s.mark {
	case dots, rings, squares:
		b.points(c, p, s)
	case curve, dashes:
		b.curve(c, p, s)
	case columns:
		b.columns(c, p, s)
	case envelope:
		b.envelope(c, p, s)
	case span, strip:
		b.spans(c, p, s)
	case level, upright:
		b.lines(c, p, s)
	case whisker:
		b.whiskers(c, p, s)
	}
}

// place is the spot of a point on the canvas; false when the axes do not hold it.
func place(c draw.Canvas, p panel, x, y float64) (vg.Point, bool) {
	nx, ny := p.x.normalised(x), p.y.normalised(y)
	inside := nx >= 0 && nx <= 1 && ny >= 0 && ny <= 1
	return vg.Point{X: c.X(nx), Y: c.Y(ny)}, inside
}

// bound is a place on an axis, moved to the nearer end when it lies outside.
// What a logarithmic axis cannot hold, for it is not positive, is at the low end.
func bound(s scale, v float64) float64 {
	n := s.normalised(v)
	if !(n >= 0) {
		return 0
	}
	return min(n, 1)
}

// points draws marks with their error bars, the bars first.
func (b brush) points(c draw.Canvas, p panel, s series) {
	bars, glyphs := make(vg.Path, 0, 2*len(s.x)), make(vg.Path, 0, 3*len(s.x))
	for i := range s.x {
		at, inside := place(c, p, s.x[i], s.y[i])
		if !inside {
			continue
		}
		if s.low != nil && finite(s.low[i], s.high[i]) {
			bars.Move(vg.Point{X: at.X, Y: c.Y(bound(p.y, s.low[i]))})
			bars.Line(vg.Point{X: at.X, Y: c.Y(bound(p.y, s.high[i]))})
		}
		glyph(&glyphs, s.mark, at, dotRadius)
	}
	b.canvas.SetLineDash(nil, 0)
	b.canvas.SetLineWidth(hairline)
	b.canvas.SetColor(b.color(soft))
	strokeIf(b.canvas, bars)
	b.canvas.SetColor(b.color(s.ink))
	if s.mark == rings {
		strokeIf(b.canvas, glyphs)
		return
	}
	if len(glyphs) > 0 {
		b.canvas.Fill(glyphs)
	}
}

func strokeIf(c vg.Canvas, p vg.Path) {
	if len(p) > 0 {
		c.Stroke(p)
	}
}

// glyph appends a circle or a square to a path.
func glyph(path *vg.Path, m mark, at vg.Point, r vg.Length) {
	if m == squares {
		r *= 0.9 // the area of the circle
		path.Move(vg.Point{X: at.X - r, Y: at.Y - r})
		path.Line(vg.Point{X: at.X + r, Y: at.Y - r})
		path.Line(vg.Point{X: at.X + r, Y: at.Y + r})
		path.Line(vg.Point{X: at.X - r, Y: at.Y + r})
		path.Close()
		return
	}
	path.Move(vg.Point{X: at.X + r, Y: at.Y})
	path.Arc(at, r, 0, 2*math.Pi)
	path.Close()
}

// curve draws a line, cut at the axes and where a value is missing.
func (b brush) curve(c draw.Canvas, p panel, s series) {
	style := b.line(s.ink, curveWidth)
	if s.mark == dashes {
		style.Dashes = []vg.Length{4, 2}
	}
	var run []vg.Point
	flush := func() {
		if len(run) > 1 {
			for _, piece := range c.ClipLinesXY(run) {
				strokePieces(c, style, piece)
			}
		}
		run = nil
	}
	for i := range s.x {
		nx, ny := p.x.normalised(s.x[i]), p.y.normalised(s.y[i])
		if !finite(nx, ny) {
			flush()
			continue
		}
		// Far outside is outside: huge coordinates would cost the clipping its digits.
		run = append(run, vg.Point{X: c.X(min(max(nx, -10), 11)), Y: c.Y(min(max(ny, -10), 11))})
	}
	flush()
}

// strokePieces strokes a polyline in pieces that share their end points: the
// rasterisers of gonum/plot take a time that grows faster than the length.
func strokePieces(c draw.Canvas, style draw.LineStyle, line []vg.Point) {
	for len(line) > 1 {
		n := min(len(line), pieceLength)
		c.StrokeLines(style, line[:n])
		line = line[n-1:]
	}
}

// columns draws a histogram: filled bars and the steps of their tops.
func (b brush) columns(c draw.Canvas, p panel, s series) {
	var steps []vg.Point
	for i := range s.y {
		left, right := c.X(bound(p.x, s.low[i])), c.X(bound(p.x, s.high[i]))
		top := c.Y(bound(p.y, s.y[i]))
		if right <= left {
			continue
		}
		steps = append(steps, vg.Point{X: left, Y: top}, vg.Point{X: right, Y: top})
		if top > c.Min.Y {
			c.FillPolygon(b.color(s.ink), box(left, right, c.Min.Y, top))
		}
	}
	strokePieces(c, b.line(soft, 0.4), steps)
}

// envelope fills between low and high, stretch by stretch of known values.
func (b brush) envelope(c draw.Canvas, p panel, s series) {
	up, down := make([]vg.Point, 0, 2*pieceLength), make([]vg.Point, 0, pieceLength)
	flush := func() {
		if len(up) > 0 {
			for i := len(down) - 1; i >= 0; i-- {
				up = append(up, down[i])
			}
			b.fillBetween(c, s, up, len(down))
		}
		up, down = up[:0], down[:0]
	}
	const half = 0.3 // of the thinnest envelope [pt], so that a flat one shows
	for i := range s.x {
		if !finite(s.x[i], s.low[i], s.high[i]) {
			flush()
			continue
		}
		x := c.X(bound(p.x, s.x[i]))
		up = append(up, vg.Point{X: x, Y: c.Y(bound(p.y, s.high[i])) + half})
		down = append(down, vg.Point{X: x, Y: c.Y(bound(p.y, s.low[i])) - half})
		if len(up) >= pieceLength {
			// Pieces share a stretch, or a seam would show between them.
			lastUp, lastDown := up[len(up)-2:], down[len(down)-2:]
			flush()
			up, down = append(up, lastUp...), append(down, lastDown...)
		}
	}
	flush()
}

// fillBetween fills an outline whose first n points are its upper edge, and
// draws both edges, which stand out where the fill is pale against the paper.
func (b brush) fillBetween(c draw.Canvas, s series, outline []vg.Point, n int) {
	c.FillPolygon(b.color(s.ink), outline)
	c.StrokeLines(b.line(edgeOf(s.ink), 0.5), outline[:n], outline[n:])
}

// edgeOf is the ink for the edge of an area.
func edgeOf(i ink) ink {
	if i == record {
		return drag
	}
	return i
}

// lines draws levels across, each with its label below the right end, and
// uprights, whose labels stand above the panel.
func (b brush) lines(c draw.Canvas, p panel, s series) {
	if s.mark == level {
		if n := p.y.normalised(s.y[0]); n >= 0 && n <= 1 {
			y := c.Y(n)
			c.StrokeLine2(b.line(s.ink, 0.7, 5, 2.5), c.Min.X, y, c.Max.X, y)
			b.write(s.label, vg.Point{X: c.Max.X - 2, Y: y - 4}, text, smallSize, -1, -1, 0)
		}
		return
	}
	if n := p.x.normalised(s.x[0]); n >= 0 && n <= 1 {
		c.StrokeLine2(b.line(s.ink, 0.8, 1.2, 1.8), c.X(n), c.Min.Y, c.X(n), c.Max.Y+3)
	}
}

// wrap breaks text into lines no wider than the width.
func wrap(s string, width vg.Length) string {
	var lines []string
	line := ""
	for _, word := range strings.Fields(s) {
		longer := strings.TrimSpace(line + " " + word)
		if line != "" && widthOf(longer, smallSize) > width {
			lines = append(lines, line)
			longer = word
		}
		line = longer
	}
	return strings.Join(append(lines, line), "\n")
}
