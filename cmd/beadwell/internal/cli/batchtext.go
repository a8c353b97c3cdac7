package cli

import (
	"fmt"

	"beadwell/cmd/beadwell/internal/batch"
)

// printSummary writes the summary to standard output; written is what else there is to
// look at, and where.
func (a *app) printSummary(s *batch.Summary, format, written string) error {
	var content []byte
	var err error
	switch format {
	case "json":
		content, err = s.JSON()
	case "csv":
		content, err = s.CSV()
	default:
		content = []byte(s.Text())
		content = fmt.Appendf(content, "\nwritten to %s\n", written)
	}
	if err != nil {
		return err
	}
	_, err = a.Out.Write(content)
	return err
}
