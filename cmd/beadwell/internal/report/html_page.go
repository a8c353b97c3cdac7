package report

import (
	"fmt"
	"html/template"
	"regexp"
	"strings"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure"
)

// page is what the template shows, all of it text for a reader.
type page struct {
	Policy     string
	Style      template.CSS
	Program    string
	Name       string
	Lead       string
	Verdict    shownVerdict
	Answers    []answer
	AnswerNote string
	Contents   []jump
	Findings   []shownFinding
	Figures    []figureGroup
	Sections   []section
	JSON       template.JS
}

type shownVerdict struct{ Status, Class, Mark, Word, Text, Reason string }

// answer is the adopted stiffness of one axis.
type answer struct {
	Title    string // what it is a number of
	Axis     string
	Value    string
	Withheld bool
	Lines    []string
}

type jump struct{ ID, Title string }

type shownFinding struct{ Severity, Class, Code, Where, Text, Numbers, Remedy, Caution string }

type figureGroup struct {
	Heading string
	Figures []shownFigure
}

type shownFigure struct {
	Name, Title, Caption string
	SVG                  template.HTML
}

func (made *Prepared) page() (page, error) {
	r := made.Result
	stored, err := jsonOf(storable(r), false)
	if err != nil {
		return page{}, err
	}
	style := styleSheet()
	p := page{
		Policy: policy(style), Style: template.CSS(style), JSON: template.JS(embeddable.Replace(string(stored))),
		Program: Plain(strings.TrimSpace(r.Program.Name + " " + r.Program.Version)),
		Name:    Plain(InputName(r.Input)),
		Lead:    lead(r),
		Verdict: verdictOf(r.Verdict),
		Figures: figureGroups(made.Figures()),
	}
	for _, axis := range r.Axes {
		p.Answers = append(p.Answers, answerOf(r.Role, axis))
		if axis.Adopted.Stiffness.Known() {
			p.AnswerNote = "In brackets: the combined standard uncertainty of the last digits."
		}
	}
	for _, f := range r.Findings {
		p.Findings = append(p.Findings, findingOf(f))
	}
	p.Sections = sections(r)
	p.Contents = []jump{{"findings", fmt.Sprintf("Findings (%d)", len(p.Findings))}, {"figures", "Figures"}}
	for _, s := range p.Sections {
		p.Contents = append(p.Contents, jump{s.ID, s.Title})
	}
	return p, nil
}

// lead is the recording in one line.
func lead(r *calib.Result) string {
	var parts []string
	if r.Recording.Rate.Known() && r.Recording.Duration.Known() {
		parts = append(parts, plainNumber(r.Recording.Duration, "s")+" at "+hertz(r.Recording.Rate))
	}
	p := newPrinter(r, TextOptions{})
	if medium := p.medium(); medium != "" {
		parts = append(parts, medium)
	}
	return typeset(strings.Join(parts, ", "))
}

func verdictOf(v calib.Verdict) shownVerdict {
	shown := shownVerdict{Status: Plain(v.Status), Class: "other", Mark: "?", Word: Plain(v.Status),
		Text: typeset(v.Text), Reason: typeset(v.Reason)}
	switch v.Status {
	case calib.Consistent:
		shown.Class, shown.Mark, shown.Word = v.Status, "✓", "Yes: consistent"
	case calib.Unchecked:
		shown.Mark, shown.Word = "?", "With care: nothing could be compared"
	case calib.Inconsistent:
		shown.Class, shown.Mark, shown.Word = v.Status, "≠", "No: inconsistent"
	case calib.Unfit:
		shown.Class, shown.Mark, shown.Word = v.Status, "×", "No: unfit"
	}
	return shown
}

// answerOf is what the recording was made for: the stiffness of an axis, the diffusion of a free
// bead, or the noise of a background.
func answerOf(role string, a calib.Axis) answer {
	switch {
	case role == calib.RoleFree && a.Free != nil && a.Free.Diffusion.Known():
		shown := answer{Title: "Free diffusion", Axis: Plain(a.Name), Value: typeset(withUnit(combined(a.Free.Diffusion, "um2/s"), "um2/s"))}
		shown.Lines = append(shown.Lines, typeset("kT over the computed drag "+withUnit(combined(a.Free.Expected, "um2/s"), "um2/s")))
		if a.DragRatio.Known() {
			shown.Lines = append(shown.Lines, typeset("measured over computed drag "+combined(a.DragRatio, "1")))
		}
		return shown
	case role == calib.RoleBackground && a.Background != nil && a.Background.Noise.Known():
		unit := a.Background.Noise.Unit
		if unit == "m" {
			unit = "nm"
		}
		return answer{Title: "Noise", Axis: Plain(a.Name), Value: typeset(withUnit(combined(a.Background.Noise, unit), unit)),
			Lines: []string{"standard deviation of the white noise"}}
	}
	q := a.Adopted.Stiffness
	shown := answer{Title: "Stiffness", Axis: Plain(a.Name)}
	if !q.Known() {
		shown.Withheld, shown.Value = true, "withheld"
		if reason := withheldReason(a.Adopted); reason != "" {
			shown.Lines = append(shown.Lines, typeset(reason))
		}
		return shown
	}
	shown.Value = typeset(withUnit(combined(q, stiffnessUnit), stiffnessUnit))
	shown.Lines = append(shown.Lines, typeset("95 % interval "+withUnit(interval95(q), stiffnessUnit)))
	if q.Statistical != nil {
		shown.Lines = append(shown.Lines, typeset("statistical part alone "+withUnit(standard(q.Statistical), stiffnessUnit)))
	}
	if a.Adopted.Basis != "" {
		shown.Lines = append(shown.Lines, typeset("rests on "+a.Adopted.Basis))
	}
	return shown
}

// laserCaution goes with every remedy that has a hand near the beam.
const laserCaution = "A trapping laser injures eyes and skin, often unseen. Set the power, open the beam path or touch the optics " +
	"only as the laser rules of your laboratory allow, with the eye protection they ask for, and with the shutter closed until you are done."

var nearTheBeam = regexp.MustCompile(`(?i)\b(lasers?|beams?|trapping light|(trap|light|optical) power|power (of|at|in) the (trap|sample|laser)|objective|shutter)\b`)

func findingOf(f calib.Finding) shownFinding {
	shown := shownFinding{Severity: Plain(f.Severity), Class: "note", Code: Plain(f.Code), Text: typeset(f.Text), Remedy: typeset(f.Remedy)}
	if f.Severity == calib.Bad || f.Severity == calib.Doubtful {
		shown.Class = f.Severity
	}
	if f.Axis != "" {
		shown.Where = "axis " + Plain(f.Axis)
	}
	var numbers []string
	if f.Value.Known() {
		numbers = append(numbers, "found "+inOwnUnit(f.Value, f.Unit))
	}
	if f.Limit.Known() {
		numbers = append(numbers, "threshold "+inOwnUnit(f.Limit, f.Unit))
	}
	if f.Range != nil && f.Range[0].Known() && f.Range[1].Known() {
		numbers = append(numbers, fmt.Sprintf("from %s to %s", plainNumber(f.Range[0], "s"), plainNumber(f.Range[1], "s")))
	}
	shown.Numbers = typeset(strings.Join(numbers, "; "))
	if nearTheBeam.MatchString(f.Remedy) {
		shown.Caution = laserCaution
	}
	return shown
}

// figureGroups puts the estimates first, and then the figures of each axis
// under its name.
func figureGroups(figures []figure.Figure) []figureGroup {
	var groups []figureGroup
	last := ""
	for _, f := range figures {
		heading := ""
		if f.Axis != "" {
			heading = "Axis " + f.Axis
		}
		// The estimates begin an axis; two axes of one name stay one group.
		if len(groups) == 0 || heading != last {
			groups = append(groups, figureGroup{Heading: heading})
			last = heading
		}
		group := &groups[len(groups)-1]
		group.Figures = append(group.Figures, shownFigure{f.Name, f.Title, f.Caption, template.HTML(figure.Inline(f))})
	}
	return groups
}
