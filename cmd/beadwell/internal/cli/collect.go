package cli

import (
	"context"
	"path/filepath"

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

const collectLong = `collect joins folders of results, which beadwell batch wrote, into one: the shards of
one list (--shard i/n), in one folder or in several, and whole batches of other
recordings. They may come in any order; the files are the same bytes as those of one
batch over all of the recordings. It refuses to join a list of which recordings are
missing.`

func (a *app) collectCommand(run func(context.Context, *app, collectOptions) error) *cobra.Command {
	var o collectOptions
	cmd := &cobra.Command{
		Use:   "collect FOLDER...",
		Short: "Join the results of split batches into one summary",
		Long:  collectLong,
		Example: `  beadwell collect --out results shard-1 shard-2 shard-3
  beadwell collect --out results results
  beadwell collect --out week monday tuesday`,
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
	cmd.Flags().StringVar(&o.series.scale, "height-scale", "", "in place of the setting of the recordings: travel of the bead over travel of the stage, such as `0.82(2)`, or fit")
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
		return inputError("give the folders that beadwell batch wrote to, all shards of a list among them", err)
	}
	if err := a.printSummary(summary, o.format, filepath.Join(o.out, batch.IndexName)); err != nil {
		return err
	}
	return concludeBatch(summary, seeReasons(o.out))
}
