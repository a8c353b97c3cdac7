package figure

import (
	"strings"

	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/vgpdf"
)

// pdfCanvas spells text in the code page of vgpdf, Windows-1252, which has no
// minus sign: an en dash has its width and height.
type pdfCanvas struct{ *vgpdf.Canvas }

// FillString sets one line of text.
func (c pdfCanvas) FillString(f font.Face, pt vg.Point, s string) {
	c.Canvas.FillString(f, pt, strings.ReplaceAll(s, "−", "–"))
}
