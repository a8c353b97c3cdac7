package report

import (
	"strings"

	"beadwell/calib"
)

// whySections is the diagnosis, where there is one.
func whySections(r *calib.Result) []section {
	d := r.Diagnosis
	if d == nil {
		return nil
	}
	t := table{Caption: "Single causes: the tie first, by the change needed; then the others, by likelihood",
		Head: heads("cause", "stated", "needed", "change in stated uncertainties", "likelihood", "p-value left", "what would decide")}
	tie, rest := rowGroup{Title: "Cannot be told apart"}, rowGroup{Title: "Less likely"}
	cautions := map[string]bool{}
	for _, c := range d.Causes {
		row := tableRow{Name: Plain(causeName(c))}
		for _, text := range causeRow(c)[1:] {
			row.Cells = append(row.Cells, cellText{Text: typeset(text), Number: true})
		}
		row.Cells[1].Part = typeset(c.Needed.Reason)
		row.Cells = append(row.Cells, cellText{Text: typeset(orDash(c.Measurement)), Part: Plain(c.Code)})
		if c.Tied {
			tie.Rows = append(tie.Rows, row)
			cautions[c.Caution] = true
		} else {
			rest.Rows = append(rest.Rows, row)
		}
	}
	for i := range t.Head[1:6] {
		t.Head[i+1].Number = true
	}
	for _, g := range []rowGroup{tie, rest} {
		if g.Span = len(t.Head); len(g.Rows) > 0 {
			t.Groups = append(t.Groups, g)
		}
	}
	s := section{ID: "why", Title: "What would reconcile the routes", Paragraphs: []string{typeset(d.Text)}, Tables: []table{t}}
	delete(cautions, "")
	for caution := range cautions {
		s.Paragraphs = append(s.Paragraphs, typeset(strings.TrimSpace(caution)))
	}
	return []section{s}
}

// budgetFacts are the expanded uncertainty, the way to halve it, and what was drawn.
func budgetFacts(r *calib.Result) []string {
	var adopted []calib.Axis
	for _, a := range r.Axes {
		if len(a.Adopted.Budget) > 0 {
			adopted = append(adopted, a)
		}
	}
	lines := axisLines(adopted, expandedText)
	lines = append(lines, axisLines(adopted, halvingText)...)
	lines = append(lines, drawnLines(r)...)
	for i := range lines {
		lines[i] = typeset(lines[i])
	}
	return lines
}
