package cli

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"

	"github.com/spf13/cobra"

	"beadwell/calib"
	"beadwell/calib/session"
	"beadwell/cmd/beadwell/internal/report"
)

// rerunOptions is what the command line of rerun says.
type rerunOptions struct {
	result string
	track  string // empty: as the result names it
	format string
}

const rerunLong = `rerun calibrates the recording of a stored result again, with the settings that the
result lists, and compares every number. The recording is found by the name in the
result, or given as TRACK; it must be the same file, by SHA-256. Settings files
beside it are not read; those beside a background that the settings name are.

It prints "same" when all numbers, codes and settings are the same to the last bit,
or a table of what differs:

    key                  path in the JSON of a result
    stored, now          the two values, in SI units
    relative difference  (now - stored) / |stored|; - when one is no number

Another version of the program is told. Sentences that are worded otherwise are
counted, and are no difference. So are the clock and the command line.

Exit status: 0 the same, 3 something differs, 4 the recording is missing or is
another one.`

func (a *app) rerunCommand(run func(context.Context, *app, rerunOptions) error) *cobra.Command {
	var o rerunOptions
	cmd := &cobra.Command{
		Use:   "rerun RESULT.json [TRACK]",
		Short: "Same input, same settings: same numbers?",
		Long:  rerunLong,
		Example: `  beadwell rerun results/run7/result.json
  beadwell rerun results/run7/result.json tonight/run7.csv`,
		Args: func(cmd *cobra.Command, args []string) error {
			if len(args) < 1 || len(args) > 2 {
				return usageError("write: "+cmd.UseLine(), "%s needs a stored result, and at most one track", cmd.CommandPath())
			}
			return nil
		},
		RunE: func(cmd *cobra.Command, args []string) error {
			o.result, o.track = args[0], ""
			if len(args) == 2 {
				o.track = args[1]
			}
			if o.result == "-" && o.track == "-" {
				return usageError("give one of them as a file", "result and track cannot both be standard input")
			}
			if err := oneOf("format", o.format, formats...); err != nil {
				return err
			}
			return run(cmd.Context(), a, o)
		},
	}
	cmd.Flags().StringVar(&o.format, "format", "text", "form of the comparison on standard output: `text|json|csv`")
	completeWords(cmd, "format", formats...)
	completeEndings(cmd, "json")
	return cmd
}

func runRerun(ctx context.Context, a *app, o rerunOptions) error {
	stored, err := a.readResult(o.result)
	if err != nil {
		return err
	}
	path := o.track
	if path == "" {
		path = stored.Input.Name
	}
	if path == "-" && o.track == "" {
		return fileError(o.result, rerunRemedy, errors.New("the recording came from standard input, and has no name"))
	}
	now, err := a.calibrateAgain(ctx, stored, path)
	if err != nil {
		return err
	}
	comparison, err := report.Compare(stored, now)
	if err != nil {
		return err
	}
	if err := a.printComparison(comparison, o.format); err != nil {
		return err
	}
	if !comparison.Same {
		return quiet{StatusDistrust}
	}
	return nil
}

const rerunRemedy = "give the recording that was calibrated: beadwell rerun RESULT.json TRACK"

func (a *app) printComparison(c report.Comparison, format string) error {
	switch format {
	case "json":
		return report.ComparisonJSON(a.Out, c)
	case "csv":
		return report.ComparisonCSV(a.Out, c)
	}
	return report.ComparisonText(a.Out, c)
}

// calibrateAgain calibrates the recording at path with the settings and choices of
// a stored result.
func (a *app) calibrateAgain(ctx context.Context, stored *calib.Result, path string) (*calib.Result, error) {
	settings, err := storedSettings(stored)
	if err != nil {
		return nil, err
	}
	if path != "-" {
		if err := sameFile(path, stored.Input.SHA256); err != nil {
			return nil, err
		}
	}
	again, err := a.readAgain(ctx, stored, path, settings)
	if err != nil {
		return nil, err
	}
	options, err := stored.Choices.Options()
	if err != nil {
		return nil, err
	}
	options = again.options(options)
	options.Program = calib.Program{Name: stored.Program.Name, Version: a.Version}
	return a.Calibrate(ctx, again.recording, again.settings, options)
}

// readAgain reads the recording as it was read for the stored result, and returns it
// with the settings in force: those stored, and what the recording says of itself. The
// background that they name is read as it was then, with the same flags.
func (a *app) readAgain(ctx context.Context, stored *calib.Result, path string, settings *session.Settings) (loaded, error) {
	flags := settings.Without(session.FromDefault).Without(session.FromHeader).Without(session.FromSession).Without(session.FromTracks)
	src := &source{app: a, flags: &settingFlags{settings: *flags}}
	before := settings.Without(session.FromHeader)
	again := loaded{path: path}
	options, err := src.readOptions(stored.Input.Name, before)
	if err != nil {
		return again, err
	}
	gathered := src.keepTo(&options, before)
	recordings, err := src.readWithStage(ctx, path, options, before)
	if err != nil {
		return again, err
	}
	for _, one := range recordings {
		switch {
		case one.SHA256 != stored.Input.SHA256:
			return again, changedInput(path, one.SHA256, stored.Input.SHA256)
		case one.Bead == stored.Input.Bead:
			again.recording, again.settings = one, before.With(headerSettings(one, before))
			if one.InParts {
				again.gathered = gathered
			}
			if err = src.addOthers(ctx, path, &again); err == nil {
				again.freeBead, err = src.freeBeads(ctx, path, one.Bead, again.settings)
			}
			return again, err
		}
	}
	return again, fileError(path, "calibrate the recording again, and look at how it is read", fmt.Errorf("has no bead %q, which the result is of", stored.Input.Bead))
}

// storedSettings rebuilds the settings that a result lists.
func storedSettings(r *calib.Result) (*session.Settings, error) {
	list := make([]session.Stored, len(r.Settings))
	for i, s := range r.Settings {
		list[i] = session.Stored{Key: s.Key, Axis: s.Axis, Text: s.Text, Origin: s.Origin, Where: s.Where}
	}
	settings, err := session.Restore(list)
	if err != nil {
		return nil, inputError("give a result as beadwell wrote it", fmt.Errorf("the settings of the stored result: %w", err))
	}
	return settings, nil
}

// sameFile makes sure that a file has the SHA-256 of the recording that was
// calibrated, before it is read with settings that are not its own.
func sameFile(path, want string) error {
	f, err := openPlain(path)
	if err != nil {
		return fileError(path, rerunRemedy, err)
	}
	defer f.Close()
	hash := sha256.New()
	if _, err := io.Copy(hash, f); err != nil {
		return fileError(path, rerunRemedy, err)
	}
	if got := hex.EncodeToString(hash.Sum(nil)); got != want {
		return changedInput(path, got, want)
	}
	return nil
}

func changedInput(path, got, want string) error {
	return fileError(path, rerunRemedy, fmt.Errorf("is not the file that was calibrated: its SHA-256 is %s, and the result names %s", got, want))
}
