package figure

import (
	"bytes"
	"context"
	"encoding/xml"
	"errors"
	"fmt"
	"image/color"
	"image/png"
	"io"
	"math"
	"strconv"
	"strings"
	"testing"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure/specimen"
)

func TestSameResultSameBytes(t *testing.T) {
	r := specimen.Result()
	for _, format := range []Format{SVG, PNG, PDF} {
		first := All(r)[:5]
		one, err := RenderAll(t.Context(), first, format, Light)
		if err != nil {
			t.Fatal(err)
		}
		again, err := RenderAll(t.Context(), All(r)[:5], format, Light)
		if err != nil {
			t.Fatal(err)
		}
		for i := range one {
			if !bytes.Equal(one[i], again[i]) {
				t.Errorf("%s as %s differs from one time to the next", first[i].Name, format)
			}
		}
	}
}

// large returns a result with the largest lists that a calibration may hold.
func large() *calib.Result {
	r := specimen.Result()
	a := &r.Axes[0]
	for i := range 20000 {
		f := 0.5 + float64(i)/4
		p := a.Spectrum.Points[40]
		p.Frequency = calib.Float(f)
		p.Power *= calib.Float(1 + 0.3*math.Sin(float64(i*i)))
		a.Spectrum.Points = append(a.Spectrum.Points, p)
		a.Spectrum.Model = append(a.Spectrum.Model, calib.Point{X: calib.Float(5000 + f), Y: 1e-20})
		a.Trace.Low = append(a.Trace.Low, calib.Float(-1e-7*math.Abs(math.Sin(float64(i*i)))))
		a.Trace.High = append(a.Trace.High, calib.Float(1e-7*math.Abs(math.Cos(float64(i*i)))))
		lag := a.Displacement.Points[3]
		lag.Lag = calib.Float(f)
		a.Displacement.Points = append(a.Displacement.Points, lag)
		a.Spectrum.Excluded = append(a.Spectrum.Excluded, calib.Excluded{Range: [2]calib.Float{calib.Float(f), calib.Float(f + 0.1)}})
	}
	return r
}

func TestFiguresAreSmall(t *testing.T) {
	const limit = 150_000 // bytes, so that a report of three axes stays below 2 MB
	for name, r := range map[string]*calib.Result{"specimen": specimen.Result(), "large": large()} {
		figures := All(r)[:5]
		for _, format := range []Format{SVG, PNG, PDF} {
			out, err := RenderAll(t.Context(), figures, format, Automatic)
			if err != nil {
				t.Fatal(err)
			}
			for i := range out {
				if len(out[i]) > limit {
					t.Errorf("%s: %s as %s has %d bytes, want at most %d", name, figures[i].Name, format, len(out[i]), limit)
				}
			}
		}
	}
}

// wellFormed reads SVG as XML and returns the elements that it holds.
func wellFormed(t *testing.T, svg []byte) map[string]int {
	t.Helper()
	elements := map[string]int{}
	for d := xml.NewDecoder(bytes.NewReader(svg)); ; {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			return elements
		}
		if err != nil {
			t.Fatalf("SVG is not well-formed: %v", err)
		}
		if e, ok := token.(xml.StartElement); ok {
			elements[e.Name.Local]++
			for _, a := range e.Attr {
				if strings.HasPrefix(strings.ToLower(a.Name.Local), "on") || a.Name.Local == "style" || a.Name.Local == "href" {
					t.Errorf("element %s has the attribute %s", e.Name.Local, a.Name.Local)
				}
				if strings.Contains(a.Value, "NaN") || strings.Contains(a.Value, "Inf") {
					t.Errorf("element %s has %s=%q", e.Name.Local, a.Name.Local, a.Value)
				}
			}
		}
	}
}

func TestSVGSpeaks(t *testing.T) {
	for _, f := range All(specimen.Result()) {
		for _, svg := range [][]byte{[]byte(Inline(f)), must(Render(f, SVG, Automatic))} {
			elements := wellFormed(t, svg)
			if elements["title"] != 1 || elements["desc"] != 1 || !bytes.Contains(svg, []byte(`role="img" aria-labelledby="`)) {
				t.Errorf("%s has no title, description or role: %v", f.Name, elements)
			}
		}
		if strings.Contains(Inline(f), "<style") {
			t.Errorf("%s brings a style of its own into the page, which its content security policy forbids", f.Name)
		}
	}
}

func must(b []byte, err error) []byte {
	if err != nil {
		panic(err)
	}
	return b
}

func TestThemes(t *testing.T) {
	f := All(specimen.Result())[0]
	light, dark, automatic := must(Render(f, SVG, Light)), must(Render(f, SVG, Dark)), must(Render(f, SVG, Automatic))
	blueHex, skyHex := []byte(hex(blue)), []byte(hex(skyBlue))
	if !bytes.Contains(light, blueHex) || bytes.Contains(light, skyHex) {
		t.Error("the light theme does not draw the drag route in blue")
	}
	if !bytes.Contains(dark, skyHex) || bytes.Contains(dark, blueHex) {
		t.Error("the dark theme does not draw the drag route in sky blue")
	}
	if !bytes.Contains(automatic, blueHex) || !bytes.Contains(automatic, []byte("prefers-color-scheme:dark")) || !bytes.Contains(automatic, skyHex) {
		t.Error("the automatic theme does not carry both sets of colours")
	}
}

// luminance is the relative luminance of WCAG 2.2 of a colour on a background.
func luminance(c, behind color.NRGBA) float64 {
	a := float64(c.A) / 255
	channel := func(v, b uint8) float64 {
		s := (a*float64(v) + (1-a)*float64(b)) / 255
		if s <= 0.04045 {
			return s / 12.92
		}
		return math.Pow((s+0.055)/1.055, 2.4)
	}
	return 0.2126*channel(c.R, behind.R) + 0.7152*channel(c.G, behind.G) + 0.0722*channel(c.B, behind.B)
}

func contrast(a, b float64) float64 { return (max(a, b) + 0.05) / (min(a, b) + 0.05) }

func TestContrast(t *testing.T) {
	// Of the areas only the edges and what stands on them must be told apart.
	areas := map[ink]bool{band: true, adoptedTint: true, record: true, paper: true}
	for _, theme := range []Theme{Light, Dark} {
		background := paper.in(theme)
		for i := range inkCount {
			want := 3.0 // WCAG 2.2, 1.4.11, of marks
			if i == text || i == soft {
				want = 4.5 // 1.4.3, of text
			}
			if got := contrast(luminance(i.in(theme), background), luminance(background, background)); !areas[i] && got < want {
				t.Errorf("%s, %s: contrast %.2f, want %g", theme, inks[i].name, got, want)
			}
		}
		onBand := luminance(band.in(theme), background)
		for _, i := range []ink{text, data, model} {
			if got := contrast(luminance(i.in(theme), background), onBand); got < 3 {
				t.Errorf("%s: %s has contrast %.2f on the fit band, want 3", theme, inks[i].name, got)
			}
		}
	}
}

// TestPNGHasTheInks looks at the pixels: paper in the corner, and of each ink
// as much as the figure must have of it at least.
func TestPNGHasTheInks(t *testing.T) {
	a := specimen.Result().Axes[0]
	f := spectrum(&a)
	for _, theme := range []Theme{Light, Dark} {
		img, err := png.Decode(bytes.NewReader(must(Render(f, PNG, theme))))
		if err != nil {
			t.Fatal(err)
		}
		if w := img.Bounds().Dx(); w != 1004 { // 85 mm at 300 dots per inch
			t.Errorf("%d dots wide, want 1004", w)
		}
		counts := map[color.NRGBA]int{}
		for y := range img.Bounds().Dy() {
			for x := range img.Bounds().Dx() {
				counts[color.NRGBAModel.Convert(img.At(x, y)).(color.NRGBA)]++
			}
		}
		if got := color.NRGBAModel.Convert(img.At(0, 0)).(color.NRGBA); got != paper.in(theme) {
			t.Errorf("%s: the corner is %v, want paper %v", theme, got, paper.in(theme))
		}
		// The fit alone crosses 800 dots, four wide; axes and points have thousands.
		if counts[model.in(theme)] < 1500 || counts[text.in(theme)] < 1500 {
			t.Errorf("%s: %d dots of the fit and %d of axes and points, want 1500 of each", theme, counts[model.in(theme)], counts[text.in(theme)])
		}
		if len(counts) > 256 {
			t.Errorf("%s: %d colours, want at most 256", theme, len(counts))
		}
	}
}

func TestPaletteKeepsTheCommonest(t *testing.T) {
	counts := map[color.RGBA]int{{1, 2, 3, 255}: 1e6, {255, 255, 255, 255}: 1e7}
	for i := range 5000 {
		counts[color.RGBA{uint8(i), uint8(i >> 4), uint8(i * 7), 255}]++
	}
	palette, index := paletteOf(counts)
	if len(palette) > 256 || len(index) != len(counts) {
		t.Fatalf("%d colours for %d of %d", len(palette), len(index), len(counts))
	}
	for _, c := range []color.RGBA{{1, 2, 3, 255}, {255, 255, 255, 255}} {
		if palette[index[c]] != c {
			t.Errorf("%v became %v", c, palette[index[c]])
		}
	}
}

func TestRenderStopsWhenTold(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	cancel()
	if _, err := RenderAll(ctx, All(specimen.Result()), SVG, Light); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want context.Canceled", err)
	}
}

func TestUnknownFormat(t *testing.T) {
	_, err := Render(All(specimen.Result())[0], "gif", Light)
	if want := `figure format "gif" is not known: use svg, png or pdf`; fmt.Sprint(err) != want {
		t.Errorf("error %v, want %s", err, want)
	}
}

func BenchmarkSetSVG(b *testing.B) {
	r := specimen.Result()
	for b.Loop() {
		if _, err := RenderAll(b.Context(), All(r), SVG, Automatic); err != nil {
			b.Fatal(err)
		}
	}
}

// Lengths have the shortest form with at most two decimals.
func TestNumber(t *testing.T) {
	for v, want := range map[float64]string{
		0: "0", -0.001: "0", 0.004: "0", 0.005: "0.01", 1: "1", -1.5: "-1.5", 12.34: "12.34", 0.07: "0.07", -0.99: "-0.99", 100.1: "100.1",
		99.995: "100", 1e14: "100000000000000", 1e18: "1000000000000000000", math.Inf(1): "+Inf",
	} {
		if got := number(v); got != want {
			t.Errorf("number(%v) = %q, want %q", v, got, want)
		}
	}
	for i := -2000; i < 2000; i++ {
		v := float64(i) / 100
		if got, want := number(v), strconv.FormatFloat(v, 'f', -1, 64); got != want {
			t.Errorf("number(%v) = %q, want %q", v, got, want)
		}
	}
}

// A figure that is drawn once has the bytes of one that is drawn each time, in every theme.
func TestDrawnOnce(t *testing.T) {
	for _, f := range All(specimen.Result()) {
		if f.drawn == nil {
			t.Fatalf("%s is drawn anew each time", f.Name)
		}
		afresh := f
		afresh.drawn = nil
		for _, theme := range []Theme{Light, Dark, Automatic, Light} {
			for _, alone := range []bool{true, false} {
				if !bytes.Equal(renderSVG(f, theme, alone), renderSVG(afresh, theme, alone)) {
					t.Errorf("%s in the theme %s, alone %v: other bytes", f.Name, theme, alone)
				}
			}
		}
	}
}
