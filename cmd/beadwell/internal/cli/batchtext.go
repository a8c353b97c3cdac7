package cli

import (
	"fmt"
	"path/filepath"

	"beadwell/cmd/beadwell/internal/batch"
)

// printSummary writes the summary to standard output.
func (a *app) printSummary(s *batch.Summary, format, out string) error {
	var content []byte
	var err error
	switch format {
	case "json":
		content, err = s.JSON()
	case "csv":
		content, err = s.CSV()
	default:
		content = []byte(s.Text())
		content = fmt.Appendf(content, "\nwritten to %s\n", filepath.Join(out, batch.IndexName))
	}
	if err != nil {
		return err
	}
	_, err = a.Out.Write(content)
	return err
}
