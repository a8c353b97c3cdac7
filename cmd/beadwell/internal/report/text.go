package report

import (
	"fmt"
	"io"
	"slices"
	"strings"
	"text/tabwriter"

	"beadwell/calib"
)

// TextOptions are the choices of Text. The zero value writes without colour.
type TextOptions struct {
	Colour bool // mark the verdict by colour too
}

// Text writes the calibration of one recording for a person: the answer
// first, then the estimates side by side, the comparison of the drag, the
// p-values, how the file was read, and what there is to say about it as footnotes.
func Text(w io.Writer, r *calib.Result, opt TextOptions) error {
	p := newPrinter(r, opt)
	p.headline()
	p.answer()
	p.kinds()
	if holdsTrap(r) {
		p.estimates()
	}
	if r.Role != calib.RoleBackground {
		p.drag()
	}
	p.diagnosis()
	p.budget()
	if holdsTrap(r) {
		p.fits()
	}
	p.readAs()
	p.assumed()
	p.footnotes()
	_, err := io.WriteString(w, p.String())
	return err
}

// printer gathers the text of one result.
type printer struct {
	strings.Builder
	result *calib.Result
	colour bool
	notes  []footnote
	marks  map[string]string // of each axis, and of "" for the recording: "[1] [3]"
}

// footnote is a finding, and the axes that share it.
type footnote struct {
	calib.Finding
	axes []string
}

// footnotes gathers the findings; one that says the same of several axes is one.
func footnotes(findings []calib.Finding) []footnote {
	var notes []footnote
	for _, f := range findings {
		same := slices.IndexFunc(notes, func(n footnote) bool {
			return f.Axis != "" && n.Axis != "" && n.Code == f.Code && n.Severity == f.Severity && n.Text == f.Text && n.Remedy == f.Remedy
		})
		if same >= 0 {
			notes[same].axes = append(notes[same].axes, f.Axis)
			continue
		}
		notes = append(notes, footnote{f, []string{f.Axis}})
	}
	return notes
}

func newPrinter(r *calib.Result, opt TextOptions) *printer {
	p := &printer{result: r, colour: opt.Colour, notes: footnotes(r.Findings), marks: map[string]string{}}
	for i, note := range p.notes {
		for _, axis := range note.axes {
			p.marks[axis] = strings.TrimSpace(fmt.Sprintf("%s [%d]", p.marks[axis], i+1))
		}
	}
	return p
}

func (p *printer) headline() {
	r := p.result
	title := InputName(r.Input)
	fmt.Fprintf(p, "%s: %s%s\n", Plain(title), p.painted(r.Verdict), spaced(p.marks[""]))
	p.paragraph("  ", r.Verdict.Text)
	if r.Verdict.Reason != "" {
		p.paragraph("  ", r.Verdict.Reason)
	}
	p.WriteString("\n")
}

// InputName is the name of the recording as people say it: the file, and the
// bead when the file holds several.
func InputName(in calib.Input) string {
	if in.Bead == "" {
		return in.Name
	}
	return in.Name + "#" + in.Bead
}

// Colours of the terminal, by verdict; the word itself always stands there too.
var paint = map[string]string{
	calib.Consistent:   "\x1b[1;34m", // blue, not green: red and green are hard to tell apart for many
	calib.Inconsistent: "\x1b[1;33m",
	calib.Unfit:        "\x1b[1;31m",
}

func (p *printer) painted(v calib.Verdict) string {
	colour, known := paint[v.Status]
	if !p.colour || !known {
		return Plain(v.Status)
	}
	return colour + Plain(v.Status) + "\x1b[0m"
}

// answer prints the adopted stiffness of each axis.
func (p *printer) answer() {
	p.table(func(row func(...string)) {
		row("axis", "stiffness", "95 % interval", "statistical", "rests on")
		for _, axis := range p.result.Axes {
			q := axis.Adopted.Stiffness
			if !q.Known() {
				row(axis.Name, "withheld"+spaced(p.marks[axis.Name]), "", "", "")
				continue
			}
			row(axis.Name, withUnit(combined(q, stiffnessUnit), stiffnessUnit)+spaced(p.marks[axis.Name]),
				interval95(q), standard(q.Statistical), axis.Adopted.Basis)
		}
	})
	for _, axis := range p.result.Axes {
		if reason := withheldReason(axis.Adopted); reason != "" {
			p.paragraph("  ", axis.Name+" withheld: "+reason)
		}
	}
	p.WriteString("\n")
}

func withheldReason(a calib.Adopted) string {
	switch {
	case a.Stiffness.Known():
		return ""
	case a.Withheld != "":
		return a.Withheld
	}
	return a.Stiffness.Reason
}

// stiffnessUnit is the unit in which stiffness is printed.
const stiffnessUnit = "pN/um"

func interval95(q calib.Quantity) string {
	u := q.Combined
	if u == nil {
		u = q.Statistical
	}
	if u == nil {
		return dash
	}
	return interval(u.Interval95, stiffnessUnit)
}

// standard prints a standard uncertainty of a stiffness with two digits.
func standard(u *calib.Uncertainty) string {
	if u == nil || !u.Standard.Known() {
		return dash
	}
	return twoDigits(float64(u.Standard) / 1e-6) // 1 pN/um = 1e-6 N/m
}

// table prints aligned columns; cells are made safe for the terminal.
func (p *printer) table(fill func(row func(cells ...string))) {
	w := tabwriter.NewWriter(&p.Builder, 0, 0, 3, ' ', tabwriter.DiscardEmptyColumns)
	var lines strings.Builder
	fill(func(cells ...string) {
		for i, text := range cells {
			cells[i] = Plain(text)
		}
		lines.WriteString(strings.TrimRight(strings.Join(cells, "\t"), "\t") + "\n")
	})
	io.WriteString(w, lines.String()) // a Builder takes everything
	w.Flush()
}

// lineWidth is where paragraphs are broken, in characters.
const lineWidth = 92

// paragraph prints text broken at spaces, each line behind the indent.
func (p *printer) paragraph(indent, text string) {
	line := ""
	for _, word := range strings.Fields(PlainLines(text)) {
		if line != "" && len([]rune(indent+line))+1+len([]rune(word)) > lineWidth {
			p.WriteString(indent + line + "\n")
			line = ""
		}
		line = strings.TrimSpace(line + " " + word)
	}
	if line != "" {
		p.WriteString(indent + line + "\n")
	}
}

func spaced(mark string) string {
	if mark == "" {
		return ""
	}
	return " " + mark
}
