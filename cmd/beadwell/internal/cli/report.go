package cli

import (
	"context"
	"errors"
	"io"
	"os"

	"github.com/spf13/cobra"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/report"
)

// reportOptions is what the command line of report says.
type reportOptions struct {
	result string
	format string
	out    string
	force  bool

	drawing drawing
}

func (a *app) reportCommand(run func(context.Context, *app, reportOptions) error) *cobra.Command {
	var o reportOptions
	cmd := &cobra.Command{
		Use:   "report RESULT.json",
		Short: "Remake the report and the figures from a stored result",
		Long: `report prints a stored result as calibrate did, and writes its outputs again with
--out: text, JSON, CSV, report and figures. It needs nothing but the result; - is
standard input. The exit status is that of the calibration.`,
		Example: "  beadwell report results/run7/result.json\n  beadwell report --out again results/run7/result.json",
		Args:    oneArgument("one stored result"),
		RunE: func(cmd *cobra.Command, args []string) error {
			o.result = args[0]
			if err := notEmpty(cmd, "out"); err != nil {
				return err
			}
			if err := oneOf("format", o.format, formats...); err != nil {
				return err
			}
			if o.force && o.out == "" {
				return usageError("leave it out, or add --out FOLDER", "--force has no effect without --out")
			}
			if err := o.drawing.check(cmd, o.out); err != nil {
				return err
			}
			return run(cmd.Context(), a, o)
		},
	}
	cmd.Flags().StringVar(&o.format, "format", "text", "form of the result on standard output: `text|json|csv`")
	cmd.Flags().StringVar(&o.out, "out", "", "also write text, JSON, CSV, report and figures into `FOLDER`")
	cmd.Flags().BoolVar(&o.force, "force", false, "with --out: replace files of another recording")
	addDrawingFlags(cmd, &o.drawing)
	completeWords(cmd, "format", formats...)
	completeEndings(cmd, "json")
	return cmd
}

func runReport(ctx context.Context, a *app, o reportOptions) error {
	result, err := a.readResult(o.result)
	if err != nil {
		return err
	}
	writer, err := newResultWriter(o.out, o.force, []string{result.Input.Name})
	if err != nil {
		return err
	}
	defer writer.close()
	writer.files = o.drawing.all
	outcomes := []outcome{{path: result.Input.Name, result: result}}
	unwritten := writer.writeAll(ctx, outcomes)
	if err := a.printOutcomes(outcomes, calibrateOptions{format: o.format, quiet: true}); err != nil {
		return err
	}
	if unwritten != nil {
		return unwritten
	}
	return conclude(outcomes)
}

// readResult reads a stored result from a file or from standard input.
func (a *app) readResult(path string) (*calib.Result, error) {
	from := a.In
	if path != "-" {
		f, err := openPlain(path)
		if err != nil {
			return nil, fileError(path, "give a result that calibrate wrote as JSON", err)
		}
		defer f.Close()
		from = f
	}
	result, err := report.ReadJSON(from)
	var problem *report.ReadError
	if errors.As(err, &problem) {
		problem.File = path
	}
	return result, err
}

// openPlain opens a plain file; a pipe or a device would block or never end.
func openPlain(path string) (io.ReadCloser, error) {
	info, err := os.Stat(path)
	if err != nil {
		return nil, err
	}
	if !info.Mode().IsRegular() {
		return nil, errors.New("is no plain file")
	}
	return os.Open(path)
}
