package figure

import (
	"bytes"
	"context"
	"encoding/xml"
	"fmt"
	"image"
	"image/draw"
	"image/png"
	"runtime"
	"strings"

	"golang.org/x/sync/errgroup"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/vgimg"
	"gonum.org/v1/plot/vg/vgpdf"
)

// Format is a file format of a figure.
type Format string

// The formats.
const (
	SVG Format = "svg"
	PNG Format = "png"
	PDF Format = "pdf"
)

// pngResolution of a figure [dots per inch]; 85 mm are 1004 dots.
const pngResolution = 300

// Render draws a figure. The error names the figure and tells what is wrong
// with the format or what the plot library objected to.
func Render(f Figure, format Format, theme Theme) (out []byte, err error) {
	defer func() {
		if r := recover(); r != nil {
			out, err = nil, fmt.Errorf("figure %s cannot be drawn as %s: %v", f.Name, format, r)
		}
	}()
	switch format {
	case SVG:
		return renderSVG(f, theme, true), nil
	case PNG:
		return renderPNG(f, theme)
	case PDF:
		return renderPDF(f, theme)
	}
	return nil, fmt.Errorf("figure format %q is not known: use svg, png or pdf", format)
}

// RenderAll draws figures on all processors and returns them in their order.
// It stops at the first error and when ctx is done.
func RenderAll(ctx context.Context, figures []Figure, format Format, theme Theme) ([][]byte, error) {
	out := make([][]byte, len(figures))
	group, ctx := errgroup.WithContext(ctx)
	group.SetLimit(runtime.GOMAXPROCS(0))
	for i, f := range figures {
		group.Go(func() (err error) {
			if err := ctx.Err(); err != nil {
				return err
			}
			out[i], err = Render(f, format, theme)
			return err
		})
	}
	if err := group.Wait(); err != nil {
		return nil, err
	}
	return out, nil
}

// Inline draws a figure as an SVG element for an HTML page. Its colours are
// those of the light theme as attributes, which the rules of StyleSheet
// override; it holds no style of its own, so that a strict content security
// policy can stand.
func Inline(f Figure) string { return string(renderSVG(f, Automatic, false)) }

// StyleSheet returns the rules that give inline figures their dark colours.
func StyleSheet() string {
	var dark strings.Builder
	for i := range inks {
		light, col := inks[i].light, inks[i].dark
		if light == col {
			continue
		}
		for _, side := range []struct{ suffix, property string }{{"-f", "fill"}, {"-s", "stroke"}} {
			fmt.Fprintf(&dark, ".%s%s{%s:%s", classOf(ink(i)), side.suffix, side.property, hex(col))
			if col.A != 255 {
				fmt.Fprintf(&dark, ";%s-opacity:%s", side.property, opacity(col))
			}
			dark.WriteByte('}')
		}
	}
	return "@media screen and (prefers-color-scheme:dark){" + dark.String() + "}"
}

func (f Figure) size() (w, h vg.Length) {
	height := f.height
	if f.Reason != "" || height == 0 {
		height = 40
	}
	return columnWidth, vg.Length(height) * millimetre
}

// renderSVG draws an SVG with title, description and role. One that stands
// alone has its own namespace, size and, when automatic, dark rules.
func renderSVG(f Figure, theme Theme, alone bool) []byte {
	w, h := f.size()
	var inside []byte
	if f.drawn != nil && theme != Dark { // the automatic theme has the colours of the light one
		inside = f.drawn()
	} else {
		inside = f.elements(theme)
	}
	id := "figure-" + f.Name + "-" // a name is safe in an attribute
	var out bytes.Buffer
	out.Grow(len(inside) + 4096)
	out.WriteString("<svg")
	if alone {
		fmt.Fprintf(&out, ` xmlns="http://www.w3.org/2000/svg" width="%smm" height="%smm"`,
			number(float64(w/millimetre)), number(float64(h/millimetre)))
	}
	fmt.Fprintf(&out, ` viewBox="0 0 %s %s" role="img" aria-labelledby="%stitle %sdesc"`,
		number(float64(w)), number(float64(h)), id, id)
	out.WriteString(" font-family=\"'Liberation Sans',Arial,Helvetica,sans-serif\">\n")
	element(&out, "title", id+"title", f.Title)
	element(&out, "desc", id+"desc", f.Description)
	if alone && theme == Automatic {
		out.WriteString("<style>:root{color-scheme:light dark}" + StyleSheet() + "</style>\n")
	}
	out.Write(inside)
	out.WriteString("</svg>\n")
	return out.Bytes()
}

// elements draws what lies inside an SVG.
func (f Figure) elements(theme Theme) []byte {
	w, h := f.size()
	canvas := newSVG(w, h)
	brush{canvas, theme}.paint(f, w, h)
	return canvas.out.Bytes()
}

func element(out *bytes.Buffer, name, id, content string) {
	fmt.Fprintf(out, `<%s id="%s">`, name, id)
	_ = xml.EscapeText(out, []byte(clean(content))) // a bytes.Buffer takes every write
	fmt.Fprintf(out, "</%s>\n", name)
}

func renderPNG(f Figure, theme Theme) ([]byte, error) {
	w, h := f.size()
	canvas := vgimg.NewWith(vgimg.UseWH(w, h), vgimg.UseDPI(pngResolution), vgimg.UseBackgroundColor(paper.in(theme)))
	brush{canvas, theme}.paint(f, w, h)
	var out bytes.Buffer
	drawn := canvas.Image()
	pixels := image.NewRGBA(drawn.Bounds())
	draw.Draw(pixels, pixels.Bounds(), drawn, drawn.Bounds().Min, draw.Src)
	if err := png.Encode(&out, fewColours(pixels)); err != nil {
		return nil, fmt.Errorf("figure %s: %w", f.Name, err)
	}
	return out.Bytes(), nil
}

func renderPDF(f Figure, theme Theme) ([]byte, error) {
	w, h := f.size()
	canvas := vgpdf.New(w, h)
	brush{pdfCanvas{canvas}, theme}.paint(f, w, h)
	var out bytes.Buffer
	if _, err := canvas.WriteTo(&out); err != nil {
		return nil, fmt.Errorf("figure %s: %w", f.Name, err)
	}
	return withoutClock(out.Bytes()), nil
}
