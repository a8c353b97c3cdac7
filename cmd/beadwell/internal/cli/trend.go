package cli

import (
	"context"
	"os"
	"path/filepath"

	"github.com/spf13/cobra"

	"beadwell/cmd/beadwell/internal/batch"
)

// trendOptions is what the command line of trend says.
type trendOptions struct {
	results []string
	format  string
	html    string
}

const trendLong = `trend joins the summaries of sessions into control charts of the stiffness per
watt, the sensitivity and the drag ratio of each axis. RESULT is a folder that
batch wrote, or its summary.json. Sessions stand in natural order of their names,
so that dates such as 2026-03-01 sort by time.

A session with several recordings counts by their mean. The limits are 3 standard
deviations from the centre: the stated uncertainty of the session, and the scatter
between neighbours beyond that. Named are sessions outside, nine in a row on one
side, and a change of the mean that steady sessions show in less than 1 % of cases.`

func (a *app) trendCommand(run func(context.Context, *app, trendOptions) error) *cobra.Command {
	var o trendOptions
	cmd := &cobra.Command{
		Use:   "trend RESULT...",
		Short: "The trap over months: control charts",
		Long:  trendLong,
		Example: `  beadwell trend results/2026-*
  beadwell trend --html trend.html results/2026-*`,
		Args: someArguments("folders of results"),
		RunE: func(cmd *cobra.Command, args []string) error {
			o.results = args
			if err := notEmpty(cmd, "html"); err != nil {
				return err
			}
			if err := oneOf("format", o.format, formats...); err != nil {
				return err
			}
			return run(cmd.Context(), a, o)
		},
	}
	cmd.Flags().StringVar(&o.format, "format", "text", "form of the trend on standard output: `text|json|csv`")
	cmd.Flags().StringVar(&o.html, "html", "", "also write a page with the charts to `FILE`")
	completeWords(cmd, "format", formats...)
	return cmd
}

func runTrend(ctx context.Context, a *app, o trendOptions) error {
	trend, err := batch.NewTrend(o.results)
	if err != nil {
		return inputError("give folders that beadwell batch wrote, or their summary.json", err)
	}
	content := []byte(trend.Text())
	switch o.format {
	case "csv":
		content, err = trend.CSV()
	case "json":
		content, err = trend.JSON()
	}
	if err != nil {
		return err
	}
	if _, err := a.Out.Write(content); err != nil {
		return err
	}
	if o.html == "" {
		return nil
	}
	page, err := trend.HTML()
	if err != nil {
		return err
	}
	root, err := os.OpenRoot(filepath.Dir(o.html))
	if err != nil {
		return outputError(o.html, err)
	}
	defer root.Close()
	return outputFolder{root: root, parent: filepath.Dir(o.html), name: "."}.write(ctx, filepath.Base(o.html), page)
}
