package figure

import (
	"bytes"
	"image/color"
	"math"
	"regexp"

	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/vgpdf"
)

// pdfCanvas sets text as outlines. vgpdf would embed the whole typeface, 200 kB
// a figure, and can spell only what Windows-1252 holds, which has no minus sign.
type pdfCanvas struct{ *vgpdf.Canvas }

var clock = regexp.MustCompile(`/(CreationDate|ModDate) \(D:[^)]*\)`)

// withoutClock blanks the dates in a PDF, which are the only bytes that differ
// from run to run. The length stays, for the file holds offsets into itself.
func withoutClock(pdf []byte) []byte {
	return clock.ReplaceAllFunc(pdf, func(date []byte) []byte { return bytes.Repeat([]byte(" "), len(date)) })
}

// straight is a colour whose components are not multiplied by its opacity.
type straight color.NRGBA

// RGBA returns the components, which is what vgpdf takes them for.
func (s straight) RGBA() (r, g, b, a uint32) {
	return uint32(s.R) * 0x101, uint32(s.G) * 0x101, uint32(s.B) * 0x101, uint32(s.A) * 0x101
}

// SetColor sets the colour. vgpdf passes on components that color.Color has
// multiplied by the opacity together with the opacity, so thin colours would
// come out dark.
func (c pdfCanvas) SetColor(col color.Color) {
	if t, ok := col.(tinted); ok {
		c.Canvas.SetColor(straight(t.NRGBA))
		return
	}
	c.Canvas.SetColor(straight(color.NRGBAModel.Convert(col).(color.NRGBA)))
}

// Fill fills a path.
func (c pdfCanvas) Fill(p vg.Path) { c.Canvas.Fill(withoutArcs(p)) }

// Stroke draws the outline of a path.
func (c pdfCanvas) Stroke(p vg.Path) { c.Canvas.Stroke(withoutArcs(p)) }

// FillString sets one line of text as outlines.
func (c pdfCanvas) FillString(f font.Face, pt vg.Point, s string) {
	if outline := outlines(f, pt, s); len(outline) > 0 {
		c.Canvas.Fill(outline)
	}
}

// withoutArcs replaces circles by four cubic curves, whose control points lie
// 0.5523 r along the tangent (within 0.03 % of the radius): vgpdf draws arcs as
// paths of their own, which breaks the one they are part of.
func withoutArcs(p vg.Path) vg.Path {
	out := make(vg.Path, 0, len(p))
	for _, step := range p {
		if step.Type != vg.ArcComp {
			out = append(out, step)
			continue
		}
		const reach = 0.5523
		for i := range 4 {
			sin, cos := math.Sincos(step.Start + float64(i)*math.Pi/2)
			at := func(along, beside float64) vg.Point {
				return vg.Point{X: step.Pos.X + step.Radius*vg.Length(along*cos-beside*sin),
					Y: step.Pos.Y + step.Radius*vg.Length(along*sin+beside*cos)}
			}
			out.CubeTo(at(1, reach), at(reach, 1), at(0, 1))
		}
	}
	return out
}

// outlines returns the outlines of a line of text that starts at pt.
func outlines(f font.Face, pt vg.Point, s string) vg.Path {
	var buffer sfnt.Buffer
	var path vg.Path
	unitsPerEm := fixed.Int26_6(f.Face.UnitsPerEm())
	unit := f.Font.Size / vg.Length(unitsPerEm)
	for i, r := range s {
		glyph, err := f.Face.GlyphIndex(&buffer, r)
		if err != nil {
			continue
		}
		segments, err := f.Face.LoadGlyph(&buffer, glyph, unitsPerEm, nil)
		if err != nil {
			continue
		}
		// The place of a glyph is the width of what stands before it, kerning included.
		x := pt.X + f.Width(s[:i])
		appendGlyph(&path, segments, vg.Point{X: x, Y: pt.Y}, unit)
	}
	return path
}

func appendGlyph(path *vg.Path, segments sfnt.Segments, origin vg.Point, unit vg.Length) {
	at := func(p fixed.Point26_6) vg.Point {
		return vg.Point{X: origin.X + unit*vg.Length(p.X), Y: origin.Y - unit*vg.Length(p.Y)}
	}
	open := false
	for _, s := range segments {
		switch s.Op {
		case sfnt.SegmentOpMoveTo:
			if open {
				path.Close()
			}
			open = true
			path.Move(at(s.Args[0]))
		case sfnt.SegmentOpLineTo:
			path.Line(at(s.Args[0]))
		case sfnt.SegmentOpQuadTo:
			path.QuadTo(at(s.Args[0]), at(s.Args[1]))
		case sfnt.SegmentOpCubeTo:
			path.CubeTo(at(s.Args[0]), at(s.Args[1]), at(s.Args[2]))
		}
	}
	if open {
		path.Close()
	}
}
