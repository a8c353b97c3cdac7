package cli

import (
	"context"

	"github.com/spf13/cobra"

	"beadwell/cmd/beadwell/internal/batch"
)

// collectOptions is what the command line of collect says.
type collectOptions struct {
	folders []string
	out     string
	format  string
	series  seriesFlags
}

const collectLong = `collect joins the results of shards, which beadwell batch --shard i/n wrote, into one
folder. The shards may come in any order, from one folder or from several; the
files are the same bytes as those of one run over the whole list. It refuses to
join a list of which recordings are missing.`

func (a *app) collectCommand(run func(context.Context, *app, collectOptions) error) *cobra.Command {
	var o collectOptions
	cmd := &cobra.Command{
		Use:   "collect FOLDER...",
		Short: "Join the results of split batches into one summary",
		Long:  collectLong,
		Example: `  beadwell collect --out results shard-1 shard-2 shard-3
  beadwell collect --out results results`,
		Args: someArguments("a folder of results"),
		RunE: func(cmd *cobra.Command, args []string) error {
			o.folders = args
			if err := notEmpty(cmd, "out", "height-scale", "stiffness-slope"); err != nil {
				return err
			}
			if err := oneOf("format", o.format, formats...); err != nil {
				return err
			}
			if _, err := o.series.options(); err != nil {
				return err
			}
			return run(cmd.Context(), a, o)
		},
	}
	cmd.Flags().StringVar(&o.out, "out", defaultOut, "write the joined results into `FOLDER`")
	cmd.Flags().StringVar(&o.format, "format", "text", "form of the summary on standard output: `text|json|csv`")
	o.series.add(cmd.Flags())
	completeWords(cmd, "format", formats...)
	return cmd
}

func runCollect(_ context.Context, a *app, o collectOptions) error {
	options, err := o.series.options()
	if err != nil {
		return err
	}
	summary, err := batch.Collect(o.folders, o.out, options)
	switch {
	case batch.IsOutput(err):
		return outputError(o.out, err)
	case err != nil:
		return inputError("give the folders of all shards of one run", err)
	}
	if err := a.printSummary(summary, o.format, o.out); err != nil {
		return err
	}
	return concludeBatch(summary, o.out)
}
