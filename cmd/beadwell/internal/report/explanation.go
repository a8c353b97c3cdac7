package report

import (
	"io"
	"strings"

	"beadwell/calib"
)

// Explanation returns the long form of a finding as text.
func Explanation(e calib.Explanation) string {
	p := &printer{}
	p.paragraph("", e.Code+": "+e.Title)
	for paragraph := range strings.SplitSeq(e.Long, "\n") {
		p.WriteString("\n")
		p.paragraph("", paragraph)
	}
	return p.String()
}

// ExplanationList writes the codes of all findings with their titles.
func ExplanationList(w io.Writer, all []calib.Explanation) error {
	p := &printer{}
	p.table(func(row func(...string)) {
		for _, e := range all {
			row(e.Code, e.Title)
		}
	})
	_, err := io.WriteString(w, p.String())
	return err
}
