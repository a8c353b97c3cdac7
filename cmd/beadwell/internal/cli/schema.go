package cli

import (
	"github.com/spf13/cobra"

	"beadwell/cmd/beadwell/internal/report"
)

func (a *app) schemaCommand() *cobra.Command {
	return &cobra.Command{
		Use:   "schema",
		Short: "Print the JSON schema of a result",
		Long: `schema prints the JSON schema (draft 2020-12) of the result that calibrate
writes with --format json and as result.json. The keys are described in
docs/output.md. Keys are added in later versions; none changes its meaning or unit.`,
		Example: "  beadwell schema > result.schema.json",
		Args:    noArguments,
		RunE: func(*cobra.Command, []string) error {
			_, err := a.Out.Write(report.Schema())
			return err
		},
	}
}
