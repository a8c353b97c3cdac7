package cli

import (
	"context"
	"errors"
	"path/filepath"
	"slices"

	"github.com/spf13/cobra"

	"beadwell/calib"
	"beadwell/calib/session"
	"beadwell/cmd/beadwell/internal/report"
)

// formats are the forms in which results are printed.
var formats = []string{"text", "json", "csv"}

// calibrateOptions is what the command line of calibrate says.
type calibrateOptions struct {
	tracks  []string
	session string
	format  string
	out     string
	force   bool
	quiet   bool
	choices choices
	drawing drawing
	flags   settingFlags
}

const calibrateLong = `calibrate reads recordings of a trapped bead, estimates the stiffness of the
trap on every axis in several ways, compares them, and prints the stiffness to
use, or why there is none.

Settings come from session.toml and tracks.csv beside each track, and from
flags, which go before both. The bead's diameter has no default. TRACK is a text
file or a NumPy array, compressed by gzip or zstd or not; - is standard input.

Several recordings of one trap with a stage at constant speed (--role driven) are
also joined into one line of displacement against speed, whose slope is drag over
stiffness.

The table on standard output, for each axis:

    stiffness            adopted value in pN/um; in brackets the combined standard
                         uncertainty of its last digits: 52.3(11) is 52.3 with 1.1.
                         A lopsided one is shown as its 68 % interval: 52.3 [51.4, 53.9]
    95 % interval        of the adopted value, pN/um, with the inputs' uncertainties
    statistical          standard uncertainty when the inputs are exact, pN/um
    corner frequency     stiffness through drag: 2 pi x drag x corner frequency, pN/um
    relaxation time      stiffness through drag: drag / relaxation time, pN/um
    variance             stiffness through amplitude: kT / variance, pN/um
    MSD plateau          stiffness through amplitude: 2 kT / plateau, pN/um
    spectrum             stiffness through amplitude: kT / variance of the fitted spectrum, pN/um
    computed, measured   drag coefficient: Stokes x wall factor, and kT / D, nN s/m
    ratio                measured over computed drag
    p                    chance of a larger disagreement: between the two routes, between
                         the estimates through amplitude, between all`

func (a *app) calibrateCommand(run func(context.Context, *app, calibrateOptions) error) *cobra.Command {
	var o calibrateOptions
	cmd := &cobra.Command{
		Use:   "calibrate TRACK...",
		Short: "Stiffness of each axis, cross-checked",
		Long:  calibrateLong,
		Example: `  beadwell calibrate run7.csv
  beadwell calibrate --diameter '1.02(3) um' --temperature '24.5(5) C' run7.csv
  beadwell calibrate --format json run7.csv > run7.json
  beadwell calibrate --out results run7.csv run8.csv
  beadwell calibrate --use good run7.csv
  beadwell calibrate --monte-carlo 100000 --seed 7 run7.csv
  beadwell calibrate --out results --figures pdf --figure-data run7.csv`,
		Args: someArguments("a track"),
		RunE: func(cmd *cobra.Command, args []string) error {
			o.tracks = args
			if err := notEmpty(cmd, "out", "session", "adopt", "use"); err != nil {
				return err
			}
			if err := o.validate(); err != nil {
				return err
			}
			if err := o.drawing.check(cmd, o.out); err != nil {
				return err
			}
			if cmd.Flags().Changed("height-scale") {
				return usageError("leave it out, or give it to beadwell batch", "--height-scale has no effect on single recordings: it is for series over heights")
			}
			if err := o.choices.check(cmd); err != nil {
				return err
			}
			o.tracks = withoutLists(o.tracks)
			return run(cmd.Context(), a, o)
		},
	}
	flags := cmd.Flags()
	flags.StringVar(&o.session, "session", "", "settings `FILE` in place of session.toml beside the track")
	flags.StringVar(&o.format, "format", "text", "form of the result on standard output: `text|json|csv`")
	flags.StringVar(&o.out, "out", "", "also write text, JSON, CSV, report and figures of each recording into `FOLDER`")
	flags.BoolVar(&o.force, "force", false, "with --out: replace files of another recording")
	o.choices.add(cmd)
	flags.BoolVarP(&o.quiet, "quiet", "q", false, "no progress and no warnings on standard error")
	addDrawingFlags(cmd, &o.drawing)
	addSettingFlags(flags, &o.flags)
	completeSettings(cmd)
	completeWords(cmd, "format", formats...)
	return cmd
}

func (o calibrateOptions) validate() error {
	if err := oneOf("format", o.format, formats...); err != nil {
		return err
	}
	if o.force && o.out == "" {
		return usageError("leave it out, or add --out FOLDER", "--force has no effect without --out")
	}
	return checkTracks(o.tracks)
}

// checkTracks refuses a track that is given twice, and a track list alone.
func checkTracks(tracks []string) error {
	seen := map[string]bool{}
	for _, path := range tracks {
		if filepath.Base(path) == session.TracksName && len(tracks) == 1 {
			return usageError("give the recordings that it lists", "%s is the track list, not a recording", path)
		}
		if seen[path] {
			return usageError("give each track once", "%s is given twice", path)
		}
		seen[path] = true
	}
	return nil
}

// withoutLists leaves out track lists, which a pattern such as *.csv brings along.
func withoutLists(tracks []string) []string {
	return slices.DeleteFunc(slices.Clone(tracks), func(path string) bool { return filepath.Base(path) == session.TracksName })
}

// outcome is what became of one recording: a result, or an error.
type outcome struct {
	path   string
	result *calib.Result
	err    error
}

func runCalibrate(ctx context.Context, a *app, o calibrateOptions) error {
	created, err := a.created()
	if err != nil {
		return err
	}
	writer, err := newResultWriter(o.out, o.force, o.tracks)
	if err != nil {
		return err
	}
	defer writer.close()
	writer.files = o.drawing.all
	src := &source{app: a, file: o.session, flags: &o.flags}
	if !o.quiet {
		src.tellMissing(o.tracks)
	}
	var outcomes []outcome
	var unwritten []error
	progress := a.newProgress(len(o.tracks), o.quiet)
	defer progress.end()
	for _, path := range o.tracks {
		found := a.calibrateTrack(ctx, src, path, o.choices.options(), created)
		if err := ctx.Err(); err != nil {
			return err
		}
		unwritten = append(unwritten, writer.writeAll(ctx, found))
		outcomes = append(outcomes, found...)
		progress.step()
	}
	progress.end()
	if err := a.printOutcomes(outcomes, o); err != nil {
		return err
	}
	if err := errors.Join(unwritten...); err != nil {
		return err
	}
	return conclude(outcomes)
}

// calibrateTrack reads and calibrates the recordings of one file.
func (a *app) calibrateTrack(ctx context.Context, src *source, path string, options calib.Options, created string) []outcome {
	recordings, err := src.load(ctx, path)
	if err != nil {
		return []outcome{{path: path, err: err}}
	}
	boundMemory(recordings)
	options.Program = calib.Program{Name: "beadwell", Version: a.Version, Command: a.command()}
	outcomes := make([]outcome, len(recordings))
	for i, one := range recordings {
		outcomes[i] = outcome{path: path}
		result, err := a.Calibrate(ctx, one.recording, one.settings, one.options(options))
		if err != nil {
			outcomes[i].err = err
			continue
		}
		result.Created = created
		result.Input.Name = path // the bead stands beside it
		outcomes[i].result = result
	}
	return outcomes
}

// printOutcomes writes all results to standard output, and warnings to standard error.
func (a *app) printOutcomes(outcomes []outcome, o calibrateOptions) error {
	set := report.Set{}
	for _, one := range outcomes {
		if one.err != nil {
			p := problemOf(one.err)
			p.Input = one.path
			set.Failures = append(set.Failures, p)
			continue
		}
		set.Results = append(set.Results, one.result)
		if o.format == "csv" && !o.quiet {
			a.warn(one.result)
		}
	}
	set.Join()
	single := len(outcomes) == 1
	switch {
	case single && len(set.Failures) == 1:
		return nil // conclude returns its error
	case o.format == "csv":
		return report.CSV(a.Out, set)
	case o.format == "json" && single:
		return report.JSON(a.Out, set.Results[0])
	case o.format == "json":
		return report.SetJSON(a.Out, set)
	case single:
		return report.Text(a.Out, set.Results[0], report.TextOptions{Colour: a.Colour})
	}
	return report.SetText(a.Out, set, report.TextOptions{Colour: a.Colour})
}

// warn tells on standard error what CSV has no room for.
func (a *app) warn(r *calib.Result) {
	for _, note := range r.ReadAs.Notes {
		a.say("beadwell: %s: %s", report.InputName(r.Input), note)
	}
	for _, f := range r.Findings {
		a.say("beadwell: %s: %s, %s: %s", report.InputName(r.Input), f.Severity, f.Code, f.Text)
	}
}

// conclude turns the outcomes into the error of the whole run.
func conclude(outcomes []outcome) error {
	if len(outcomes) == 1 && outcomes[0].err != nil {
		return outcomes[0].err
	}
	var failed []error
	distrust := false
	for _, one := range outcomes {
		switch {
		case one.err != nil:
			failed = append(failed, one.err)
		case one.result.Verdict.Status != calib.Consistent && one.result.Verdict.Status != calib.Unchecked:
			distrust = true
		}
	}
	switch {
	case len(failed) > 0:
		return partial(failed, len(outcomes))
	case distrust:
		return quiet{StatusDistrust}
	}
	return nil
}
