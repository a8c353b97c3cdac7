package batch

import (
	"fmt"
	"strings"
	"text/tabwriter"

	"beadwell/cmd/beadwell/internal/report"
)

// Text is the summary for a person: a row for each recording, then the series.
func (s *Summary) Text() string {
	var b strings.Builder
	w := tabwriter.NewWriter(&b, 0, 0, 3, ' ', 0)
	axes := s.axes()
	head := append([]string{"recording, pN/um", "status"}, axes...)
	fmt.Fprintln(w, strings.Join(head, "\t"))
	for _, row := range s.Rows {
		shown := indexRowOf(row, axes)
		cells := []string{shown.File, shown.Status}
		if len(row.Axes) > 0 {
			cells = append(cells, shown.Stiffness...)
		}
		fmt.Fprintln(w, strings.Join(cells, "\t"))
	}
	w.Flush()
	for _, row := range s.Rows {
		if len(row.Axes) == 0 && row.Reason != "" {
			fmt.Fprintf(&b, "\n%s: %s", report.Plain(row.File), report.Plain(row.Reason))
		}
	}
	good, distrusted, failed, aside := s.Counts()
	fmt.Fprintf(&b, "\n%d recordings: %d consistent, %d not to be trusted, %d failed, %d set aside\n", len(s.Rows), good, distrusted, failed, aside)
	for i, one := range s.Series {
		b.WriteString(indexSeriesOf(i, one).text())
	}
	for _, note := range s.Notes {
		fmt.Fprintf(&b, "\nnote: %s\n", note)
	}
	return trimmed(b.String())
}

func (s indexSeries) text() string {
	var b strings.Builder
	fmt.Fprintf(&b, "\n%s\n", s.Title)
	if s.Reason != "" {
		fmt.Fprintf(&b, "  not fitted: %s\n", s.Reason)
	}
	for _, v := range s.Values {
		fmt.Fprintf(&b, "  %s: %s\n", v[0], v[1])
	}
	if s.Fit != "" {
		fmt.Fprintf(&b, "  fit: %s\n", s.Fit)
	}
	if len(s.Outliers) > 0 {
		fmt.Fprintf(&b, "  outliers: %s\n", strings.Join(s.Outliers, ", "))
	}
	return b.String()
}

// trimmed takes blanks from the ends of lines.
func trimmed(text string) string {
	lines := strings.Split(text, "\n")
	for i, line := range lines {
		lines[i] = strings.TrimRight(line, " ")
	}
	return strings.Join(lines, "\n")
}
