package cli

import (
	"context"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure"
	"beadwell/cmd/beadwell/internal/report"
)

// defaultFigures are the forms of the figures when nobody chooses.
const defaultFigures = "svg,png"

// noFigures is the choice of none.
const noFigures = "none"

// drawing is how the figures of a recording are written. The zero value stands for
// the default.
type drawing struct {
	figures string // of --figures: "none", or a list of svg, png and pdf with commas between
	data    bool   // the numbers behind each figure as CSV too
}

// addDrawingFlags adds --figures and --figure-data to a command that has --out.
func addDrawingFlags(cmd *cobra.Command, into *drawing) {
	cmd.Flags().StringVar(&into.figures, "figures", defaultFigures, "with --out: forms of the figures, `svg,png,pdf|none`")
	cmd.Flags().BoolVar(&into.data, "figure-data", false, "with --out: also write the numbers that each figure shows, as CSV")
	completeWords(cmd, "figures", defaultFigures, "svg", "png", "pdf", "svg,png,pdf", noFigures)
}

// check refuses forms that are not known, and flags that have no effect without a folder.
func (d drawing) check(cmd *cobra.Command, out string) error {
	for _, name := range []string{"figures", "figure-data"} {
		if out == "" && cmd.Flags().Changed(name) {
			return usageError("leave it out, or add --out FOLDER", "--%s has no effect without --out", name)
		}
	}
	_, err := d.formats()
	return err
}

// formats reads the list of forms.
func (d drawing) formats() ([]figure.Format, error) {
	text := d.figures
	if text == "" {
		text = defaultFigures
	}
	if text == noFigures {
		return nil, nil
	}
	known := []figure.Format{figure.SVG, figure.PNG, figure.PDF}
	var formats []figure.Format
	for word := range strings.SplitSeq(text, ",") {
		format := figure.Format(strings.TrimSpace(word))
		switch {
		case !slices.Contains(known, format):
			return nil, usageError("write a list such as --figures svg,pdf, or --figures none", "--figures %q: %q is not svg, png or pdf", d.figures, string(format))
		case slices.Contains(formats, format):
			return nil, usageError("name each form once", "--figures %q names %s twice", d.figures, format)
		}
		formats = append(formats, format)
	}
	return formats, nil
}

// all makes the content of every file of a recording.
func (d drawing) all(ctx context.Context, r *calib.Result) ([]file, error) {
	var names []string
	for _, form := range forms {
		names = append(names, form.name)
	}
	return d.outputs(ctx, r, names...)
}

// outputs makes the content of the named files of a recording, and of its figures, from its result alone.
func (d drawing) outputs(ctx context.Context, r *calib.Result, texts ...string) ([]file, error) {
	formats, err := d.formats()
	if err != nil {
		return nil, err
	}
	made := report.Prepare(r)
	files, err := reports(made, texts)
	if err != nil || len(formats) == 0 && !d.data {
		return files, err
	}
	drawn, err := figureFiles(ctx, made.Figures(), formats)
	if err != nil || !d.data {
		return append(files, drawn...), err
	}
	numbers, err := figureNumbers(made.Figures())
	return append(append(files, drawn...), numbers...), err
}

// figureNumbers makes the CSV of every figure.
func figureNumbers(figures []figure.Figure) ([]file, error) {
	var files []file
	for _, f := range figures {
		table, err := figure.Data(f)
		if err != nil {
			return nil, err
		}
		files = append(files, file{f.Name + ".csv", table})
	}
	return files, nil
}
