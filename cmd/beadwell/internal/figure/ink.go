package figure

import "image/color"

// Theme chooses the colours.
type Theme string

// The themes. Automatic is for SVG: light, and dark where the reader prefers
// that. PNG and PDF have one set of colours, and take Automatic as Light.
const (
	Light     Theme = "light"
	Dark      Theme = "dark"
	Automatic Theme = "automatic"
)

// ink is a colour with a part to play; it is a different one in a dark theme.
type ink int

const (
	text        ink = iota // axes and labels
	soft                   // minor marks, second-rank text
	rule                   // reference lines
	data                   // measured points
	record                 // the trace
	model                  // fitted curves
	drag                   // the route through drag
	ampl                   // the route through amplitude
	adopted                // the adopted value
	adoptedTint            // its band
	band                   // the fit band
	left                   // what was left out of a fit
	alarm                  // a bad stretch
	doubt                  // a doubtful stretch
	paper                  // the background, where there is one
	inkCount
)

// inks gives every ink its name and its colours. Colours other than greys are
// those of Okabe and Ito 2008; the dark theme takes the lighter neighbour of a
// hue. Text has a contrast of 4.5 and marks one of 3 or more on paper (WCAG 2.2,
// 1.4.3 and 1.4.11; TestContrast).
var inks = [inkCount]struct {
	name        string
	light, dark color.NRGBA
}{
	text:        {"text", grey(0x1b), grey(0xec)},
	soft:        {"soft", grey(0x5a), grey(0xb0)},
	rule:        {"rule", grey(0x6e), grey(0x9c)},
	data:        {"data", grey(0x1b), grey(0xec)},
	record:      {"record", skyBlue, skyBlue},
	model:       {"model", vermillion, orange},
	drag:        {"drag", blue, skyBlue},
	ampl:        {"amplitude", vermillion, orange},
	adopted:     {"adopted", green, green},
	adoptedTint: {"adopted-band", thin(green, 0x40), thin(green, 0x50)},
	band:        {"band", thin(skyBlue, 0x38), thin(skyBlue, 0x2c)},
	left:        {"left", purple, purple},
	alarm:       {"alarm", vermillion, orange},
	doubt:       {"doubt", grey(0x1b), grey(0xec)},
	paper:       {"paper", grey(0xff), color.NRGBA{0x16, 0x18, 0x1b, 0xff}},
}

// Okabe and Ito 2008, "Color Universal Design", sRGB.
var (
	orange     = color.NRGBA{230, 159, 0, 255}
	skyBlue    = color.NRGBA{86, 180, 233, 255}
	green      = color.NRGBA{0, 158, 115, 255}
	blue       = color.NRGBA{0, 114, 178, 255}
	vermillion = color.NRGBA{213, 94, 0, 255}
	purple     = color.NRGBA{204, 121, 167, 255}
)

func grey(v uint8) color.NRGBA { return color.NRGBA{v, v, v, 255} }

func thin(c color.NRGBA, alpha uint8) color.NRGBA {
	c.A = alpha
	return c
}

// in returns the colour of the ink in a theme.
func (i ink) in(t Theme) color.NRGBA {
	if t == Dark {
		return inks[i].dark
	}
	return inks[i].light
}

// tinted is a colour that remembers which ink it is, so that the SVG canvas can
// write the class of the ink beside the colour.
type tinted struct {
	color.NRGBA
	ink ink
}
