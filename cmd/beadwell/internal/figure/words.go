package figure

import (
	"strings"
	"sync"
	"unicode"

	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	gonumtext "gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
)

// fonts holds the typeface of every figure. The cache is safe for concurrent
// use and is only ever read.
var fonts = font.NewCache(liberation.Collection())

// face is Liberation Sans, whose widths are those of the sans-serif faces that
// a reader without it will see instead.
var face = font.Font{Typeface: "Liberation", Variant: "Sans"}

// Sizes of the type at column width [pt]; journals ask for 6 pt and more.
const (
	labelSize = 7.5
	smallSize = 6.8
)

// Proportions of a raised exponent to the size of its line.
const (
	raisedSize = 0.72
	raisedBy   = 0.38
)

// handler is the text handler of gonum/plot for labels with raised exponents:
// "10^{-3} nm^{2}/Hz". A hyphen before a digit is set as a minus sign.
type handler struct{}

var _ gonumtext.Handler = handler{}

// piece is a part of a label that is set in one size.
type piece struct {
	text   string
	raised bool
}

// pieces splits the markup of a label.
func pieces(label string) []piece {
	var out []piece
	for label != "" {
		before, after, found := strings.Cut(label, "^{")
		if before != "" {
			out = append(out, piece{minus(before), false})
		}
		if !found {
			break
		}
		exponent, rest, _ := strings.Cut(after, "}")
		out = append(out, piece{minus(exponent), true})
		label = rest
	}
	return out
}

// minus sets a hyphen that stands before a digit, at the start or after a
// space or bracket, as a minus sign.
func minus(s string) string {
	runes := []rune(s)
	for i, r := range runes {
		opens := i == 0 || strings.ContainsRune(" ([", runes[i-1])
		if r == '-' && opens && i+1 < len(runes) && unicode.IsDigit(runes[i+1]) {
			runes[i] = '−'
		}
	}
	return string(runes)
}

// Cache returns the fonts.
func (handler) Cache() *font.Cache { return fonts }

// Extents returns the extents of a font.
func (handler) Extents(f font.Font) font.Extents {
	at := fonts.Lookup(f, f.Size)
	return at.Extents()
}

// Lines splits a label at its line ends.
func (handler) Lines(s string) []string { return strings.Split(strings.TrimRight(s, "\n"), "\n") }

// Box returns the width, height and depth of one line.
func (h handler) Box(s string, f font.Font) (width, height, depth vg.Length) {
	for _, p := range pieces(s) {
		at := sized(f, p)
		width += textWidth(at, p.text)
	}
	extents := h.Extents(f)
	return width, extents.Ascent, extents.Descent
}

// Draw sets a label at pt with the alignment and rotation of the style.
func (h handler) Draw(c vg.Canvas, s string, style gonumtext.Style, pt vg.Point) {
	lines := h.Lines(s)
	extents := h.Extents(style.Font)
	lineHeight := extents.Ascent + extents.Descent
	c.SetColor(style.Color)
	c.Push()
	c.Translate(pt)
	if style.Rotation != 0 {
		c.Rotate(style.Rotation)
	}
	y := lineHeight*vg.Length(len(lines))*vg.Length(1+style.YAlign) - extents.Ascent
	for _, line := range lines {
		width, _, _ := h.Box(line, style.Font)
		x := width * vg.Length(style.XAlign)
		for _, p := range pieces(line) {
			at := sized(style.Font, p)
			rise := vg.Length(0)
			if p.raised {
				rise = style.Font.Size * raisedBy
			}
			c.FillString(at, vg.Point{X: x, Y: y + rise}, p.text)
			x += textWidth(at, p.text)
		}
		y -= lineHeight
	}
	c.Pop()
}

func sized(f font.Font, p piece) font.Face {
	if p.raised {
		return fonts.Lookup(f, f.Size*raisedSize)
	}
	return fonts.Lookup(f, f.Size)
}

// advances are how far the pen moves for a letter that stands behind another, in units of the typeface: its width and the kerning of the two.
// The tables of the typeface are searched once for each pair of common letters, not for each label of each figure.
var advances = struct {
	sync.RWMutex
	of map[[2]rune]vg.Length
}{of: map[[2]rune]vg.Length{}}

// commonLetters ends the letters whose pairs are remembered: those of Latin and Greek.
const commonLetters = 0x400

// textWidth is the width of a text, to the bit that of font.Face.
func textWidth(f font.Face, s string) vg.Length {
	perEm := vg.Points(float64(f.Face.UnitsPerEm()))
	whole := f
	whole.Font.Size = perEm
	width, before := vg.Length(0), rune(0)
	for _, letter := range s {
		width += advance(whole, [2]rune{before, letter})
		before = letter
	}
	return width * (f.Font.Size / perEm)
}

// advance is that of a pair; the first letter is 0 at the start of a text.
func advance(whole font.Face, pair [2]rune) vg.Length {
	advances.RLock()
	found, ok := advances.of[pair]
	advances.RUnlock()
	if ok {
		return found
	}
	if pair[0] == 0 {
		found = whole.Width(string(pair[1]))
	} else {
		found = whole.Width(string(pair[:])) - whole.Width(string(pair[0]))
	}
	if max(pair[0], pair[1]) < commonLetters {
		advances.Lock()
		advances.of[pair] = found
		advances.Unlock()
	}
	return found
}

// clean removes what XML cannot carry and what would turn text around: control
// characters, bidirectional marks and invalid UTF-8.
func clean(s string) string {
	return strings.Map(func(r rune) rune {
		switch {
		case r == '\t' || r == '\n' || r == '\r':
			return ' '
		case r == unicode.ReplacementChar, unicode.IsControl(r), unicode.Is(unicode.Cf, r):
			return -1
		case r == 0xFFFE || r == 0xFFFF:
			return -1
		}
		return r
	}, s)
}
