package cli

import (
	"context"
	"fmt"
	"slices"

	"github.com/spf13/cobra"

	"beadwell/calib"
	"beadwell/calib/quantity"
	"beadwell/calib/track"
	"beadwell/cmd/beadwell/internal/report"
)

// checkOptions is what the command line of check says.
type checkOptions struct {
	tracks  []string
	session string
	format  string
	flags   settingFlags
}

func (a *app) checkCommand(run func(context.Context, *app, checkOptions) error) *cobra.Command {
	var o checkOptions
	cmd := &cobra.Command{
		Use:   "check TRACK...",
		Short: "How a file is read, and whether the recording is fit to use",
		Long: `check reads recordings and tells how: delimiter, decimal mark, columns, units,
sampling rate, rows, what is missing, which settings would be used, and what the
health checks that need no fit say. A unit or a rate that nobody stated is a
remark here, not an error. A bad check gives the exit status 3. As CSV there is one
row for each check.`,
		Example: "  beadwell check run7.csv\n  beadwell check --unit nm run7.csv\n  beadwell check --format json run7.csv run8.csv",
		Args:    someArguments("a track"),
		RunE: func(cmd *cobra.Command, args []string) error {
			if err := notEmpty(cmd, "session"); err != nil {
				return err
			}
			if err := oneOf("format", o.format, formats...); err != nil {
				return err
			}
			if err := checkTracks(args); err != nil {
				return err
			}
			o.tracks = withoutLists(args)
			return run(cmd.Context(), a, o)
		},
	}
	cmd.Flags().StringVar(&o.session, "session", "", "settings `FILE` in place of session.toml beside the track")
	cmd.Flags().StringVar(&o.format, "format", "text", "form of what is found, on standard output: `text|json|csv`")
	addSettingFlags(cmd.Flags(), &o.flags)
	completeSettings(cmd)
	completeWords(cmd, "format", formats...)
	return cmd
}

func runCheck(ctx context.Context, a *app, o checkOptions) error {
	src := &source{app: a, file: o.session, flags: &o.flags, inspect: true}
	src.tellMissing(o.tracks)
	var failed []error
	set := report.LookSet{}
	distrust := false
	for i, path := range o.tracks {
		recordings, err := src.load(ctx, path)
		switch {
		case ctx.Err() != nil:
			return ctx.Err()
		case err != nil && len(o.tracks) == 1:
			return err
		case err != nil:
			p := problemOf(err)
			p.Input = path
			failed, set.Failures = append(failed, err), append(set.Failures, p)
			continue
		}
		for j, one := range recordings {
			look := calib.LookAt(one.recording, one.settings)
			look.Input.Name = path // the bead stands beside it
			distrust = distrust || slices.ContainsFunc(look.Checks, func(c calib.Check) bool { return c.Level == calib.Bad })
			set.Looks = append(set.Looks, look)
			if o.format != "text" {
				continue
			}
			if i+j > 0 {
				fmt.Fprintln(a.Out)
			}
			a.printCheck(one, look.Checks)
		}
	}
	if err := a.printLooks(set, o.format); err != nil {
		return err
	}
	if len(failed) > 0 {
		return partial(failed, len(o.tracks))
	}
	if distrust {
		return quiet{StatusDistrust}
	}
	return nil
}

// printLooks prints what was found in a form for programs.
func (a *app) printLooks(set report.LookSet, format string) error {
	switch format {
	case "json":
		return report.LooksJSON(a.Out, set)
	case "csv":
		return report.LooksCSV(a.Out, set)
	}
	return nil
}

// printCheck prints what there is to say of one recording.
func (a *app) printCheck(one loaded, checks []calib.Check) {
	r := one.recording
	fmt.Fprintf(a.Out, "%s\n", report.Plain(r.Name))
	fmt.Fprintf(a.Out, "  read as: %s\n", report.Plain(r.ReadAs.String()))
	fmt.Fprintf(a.Out, "  samples: %s\n", samples(r))
	for _, axis := range r.Axes {
		fmt.Fprintf(a.Out, "  axis %s: %s\n", report.Plain(axis.Name), report.Plain(axisFacts(axis)))
	}
	for _, note := range r.Notes {
		fmt.Fprintf(a.Out, "  note: %s\n", report.Plain(note.Text))
	}
	a.printHealth(checks)
	fmt.Fprintln(a.Out, "  settings:")
	for _, s := range one.settings.All() {
		fmt.Fprintf(a.Out, "    %s\n", report.Plain(settingLine(s)))
	}
}

// jitterShown is the jitter over the sampling interval from which on it is told:
// below it is the rounding of the stamps.
const jitterShown = 1e-4

func samples(r *track.Recording) string {
	text := fmt.Sprintf("%d", r.Samples)
	if r.Missing > 0 {
		text += fmt.Sprintf(", %d of them missing", r.Missing)
	}
	if r.Rate > 0 {
		text += fmt.Sprintf(", %s, %s from the %s", quantity.Format(float64(r.Samples)/r.Rate, 0, "s"), quantity.Format(r.Rate, 0, "Hz"), r.RateOrigin)
	} else {
		text += ", at a rate that nobody stated"
	}
	if r.JitterRMS*r.Rate > jitterShown {
		text += ", stamps off the grid by " + quantity.Format(r.JitterRMS, 0, "us") + " (rms)"
	}
	return text
}
