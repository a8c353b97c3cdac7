package cli

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"math"

	"github.com/spf13/cobra"

	"beadwell/calib"
	"beadwell/calib/session"
	"beadwell/calib/track"
	"beadwell/cmd/beadwell/internal/figure"
	"beadwell/cmd/beadwell/internal/report"
)

// forceOptions is what the command line of force says.
type forceOptions struct {
	track, with, centre, estimate string
	session, format, out          string
	overrule, force, quiet        bool
	flags                         settingFlags
}

const forceLong = `force turns the positions of a bead into forces with the stiffness of a stored calibration:
displacement from the centre of the trap times stiffness. The force is that which
holds the bead out of the centre, positive towards positive positions.

The track is read as calibrate reads it, with session.toml and tracks.csv beside it and with
flags. A pixel size or a sensitivity that is not stated is taken from the calibration. A
calibration whose verdict is not consistent is refused unless --overrule-verdict is given.

--centre says where the trap has its centre; there is no default:

    mean               mean of the whole recording
    mean 0 s to 2 s    mean of a stretch without a force, by the time stamps
    calibration        mean position of the recording that was calibrated
    x=1.20(1) um       the position itself, for each axis

Two uncertainties are given, and are not to be mixed up: localisation noise, which is new in each
sample, and that of stiffness and centre, one error that all samples share. The thermal motion of
the bead stays in the trace, and the blur of the exposure is not corrected.

--format csv and force.csv in --out have one row a sample: time_s, and for each axis its
displacement_m, force_N, force_noise_u_N and force_calibration_u_N.`

// forceSettings are the settings that have an effect on forces.
var forceSettings = []string{"recording.rate", "recording.unit", "recording.pixel", "recording.noise", "recording.columns", "recording.sensitivity",
	"recording.bead", "recording.time_unit", "recording.delimiter", "recording.decimal", "recording.max_text"}

func (a *app) forceCommand(run func(context.Context, *app, forceOptions) error) *cobra.Command {
	var o forceOptions
	cmd := &cobra.Command{
		Use:   "force TRACK --with RESULT.json --centre CENTRE",
		Short: "Positions to forces with a stored calibration",
		Long:  forceLong,
		Example: `  beadwell force run8.csv --with results/run7/result.json --centre mean
  beadwell force run8.csv --with results/run7/result.json --centre 'mean 0 s to 10 ms' --format csv > forces.csv`,
		Args: oneArgument("one track"),
		RunE: func(cmd *cobra.Command, args []string) error {
			o.track = args[0]
			if err := notEmpty(cmd, "with", "centre", "estimate", "out", "session"); err != nil {
				return err
			}
			if err := o.validate(); err != nil {
				return err
			}
			return run(cmd.Context(), a, o)
		},
	}
	flags := cmd.Flags()
	flags.StringVar(&o.with, "with", "", "stored result of the calibration, a JSON `FILE`")
	flags.StringVar(&o.centre, "centre", "", "centre of the trap: `mean 0 s to 2 s`, mean, calibration, or a position")
	flags.StringVar(&o.estimate, "estimate", "", "take this stiffness in place of the adopted one: `NAME` as in the JSON")
	flags.BoolVar(&o.overrule, "overrule-verdict", false, "use a calibration whose verdict is not consistent")
	flags.StringVar(&o.session, "session", "", "settings `FILE` in place of session.toml beside the track")
	flags.StringVar(&o.format, "format", "text", "form on standard output: `text|json|csv`; csv is the trace, the others its summary")
	flags.StringVar(&o.out, "out", "", "also write trace, summary and figures into `FOLDER`")
	flags.BoolVar(&o.force, "force", false, "with --out: replace files that are there")
	flags.BoolVarP(&o.quiet, "quiet", "q", false, "no warnings on standard error")
	addSettingFlags(flags, &o.flags, forceSettings...)
	completeSettings(cmd)
	completeWords(cmd, "format", formats...)
	completeWords(cmd, "estimate", calib.LegSpectrum, calib.LegEquipartition, calib.LegDisplacement, calib.LegSpectrumAmplitude, calib.LegDisplacementTime)
	return cmd
}

func (o forceOptions) validate() error {
	if err := oneOf("format", o.format, formats...); err != nil {
		return err
	}
	if o.with == "" {
		return usageError("add --with RESULT.json, which calibrate --out writes", "no calibration is given")
	}
	if o.force && o.out == "" {
		return usageError("leave it out, or add --out FOLDER", "--force has no effect without --out")
	}
	if o.with == "-" && o.track == "-" {
		return usageError("give one of them as a file", "track and calibration cannot both come from standard input")
	}
	_, err := parseCentre(o.centre)
	return err
}

func runForce(ctx context.Context, a *app, o forceOptions) error {
	where, err := parseCentre(o.centre)
	if err != nil {
		return err
	}
	created, err := a.created()
	if err != nil {
		return err
	}
	result, err := a.readResult(o.with)
	if err != nil {
		return err
	}
	if err := trusted(result, o); err != nil {
		return err
	}
	folder, err := openSheets(o.out, stem(o.track), o.force)
	if err != nil {
		return err
	}
	defer folder.close()
	if err := folder.check("force.csv", "force.json", "force.txt"); err != nil {
		return err
	}
	one, err := a.forceTrack(ctx, o)
	if err != nil {
		return err
	}
	traces, findings, err := forceTraces(one, result, o, where)
	if err != nil {
		return err
	}
	summary := forceSummary(one.recording, result, traces, where)
	summary.Program = calib.Program{Name: "beadwell", Version: a.Version, Command: a.command()}
	summary.Created, summary.Input.Name = created, o.track
	summary.Findings = append(findings, summary.Findings...)
	return a.writeForces(ctx, o, folder, one.recording, traces, summary)
}

// trusted refuses a calibration that should not be used.
func trusted(result *calib.Result, o forceOptions) error {
	if result.Verdict.Status == calib.Consistent || result.Verdict.Status == calib.Unchecked || o.overrule {
		return nil
	}
	return &failure{status: StatusDistrust, code: codeDistrust, err: fmt.Errorf("%s: the calibration is %s: %s", o.with, result.Verdict.Status, result.Verdict.Text),
		remedy: "calibrate again, or add --overrule-verdict, and --estimate when the adopted stiffness is withheld"}
}

// forceTrack reads the one recording.
func (a *app) forceTrack(ctx context.Context, o forceOptions) (loaded, error) {
	src := &source{app: a, file: o.session, flags: &o.flags, samples: true}
	all, err := src.load(ctx, o.track)
	if err != nil {
		return loaded{}, err
	}
	if len(all) > 1 {
		return loaded{}, usageError("choose the bead that was calibrated with --bead "+all[0].recording.Bead, "%s holds %d beads", o.track, len(all))
	}
	return all[0], nil
}

// forceTraces joins the recording and the calibration, axis by axis.
func forceTraces(one loaded, result *calib.Result, o forceOptions, where centre) ([]calib.ForceTrace, []calib.Finding, error) {
	var traces []calib.ForceTrace
	var findings []calib.Finding
	rec := one.recording
	for _, axis := range rec.Axes {
		trap, err := result.Trap(axis.Name, o.estimate)
		if err != nil {
			var refused *calib.TrapError
			if errors.As(err, &refused) {
				err = usageError(refused.Remedy, "%s: axis %s: %s", o.with, refused.Axis, refused.Problem)
			}
			return nil, nil, err
		}
		values, finding, err := inMetres(axis, one.settings, result)
		if err != nil {
			return nil, nil, err
		}
		if finding != nil {
			findings = append(findings, *finding)
		}
		t := calib.ForceTrace{Trap: trap, Noise: trap.Noise, Positions: values, Rate: rec.Rate}
		if noise, ok := one.settings.Lookup("recording.noise", axis.Name); ok {
			t.Noise = noise.Value.SI
		}
		if t.Centre, t.CentreU, err = where.of(trap, result, values, rec.Start, rec.Rate); err != nil {
			return nil, nil, err
		}
		traces = append(traces, t)
	}
	return traces, findings, nil
}

// inMetres returns the positions of an axis in metres. The length of a pixel or of a unit
// of the detector is that of the settings, else that of the calibration; where the two
// differ a finding says so.
func inMetres(axis track.Axis, settings *session.Settings, result *calib.Result) ([]float64, *calib.Finding, error) {
	if !math.IsNaN(axis.ToMetre) {
		return axis.Values, nil, nil
	}
	key, flag := "recording.sensitivity", "--sensitivity '1.31(4) um/V'"
	if axis.Unit == "px" {
		key, flag = "recording.pixel", "--pixel '65.0(3) nm'"
	}
	calibrated := math.NaN()
	for _, s := range result.Settings {
		if s.Key == key && (s.Axis == "" || s.Axis == axis.Name) {
			calibrated = float64(s.Value)
		}
	}
	for _, a := range result.Axes {
		if a.Name == axis.Name && a.Sensitivity != nil && a.Sensitivity.Used.Known() {
			calibrated = float64(a.Sensitivity.Used.Value)
		}
	}
	scale := calibrated
	var finding *calib.Finding
	if stated, ok := settings.Lookup(key, axis.Name); ok {
		scale = stated.Value.SI
		if scale != calibrated && !math.IsNaN(calibrated) {
			finding = &calib.Finding{Code: calib.CodeOtherLengthUnit, Severity: calib.Doubtful, Axis: axis.Name, Value: calib.Float(scale), Limit: calib.Float(calibrated),
				Text:   fmt.Sprintf("%s is %g m here and %g m in the calibration.", key, scale, calibrated),
				Remedy: "use the same, unless the magnification was changed on purpose"}
		}
	}
	if !(scale > 0) {
		return nil, nil, usageError("give it with "+flag, "axis %s: the positions are in %s, and neither the settings nor the calibration say how long one is", axis.Name, axis.Unit)
	}
	values := make([]float64, len(axis.Values))
	for i, v := range axis.Values {
		values[i] = v * scale
	}
	return values, finding, nil
}

// forceSummary describes the traces, with what to be careful about.
func forceSummary(rec *track.Recording, result *calib.Result, traces []calib.ForceTrace, where centre) report.Force {
	s := report.Force{Input: calib.Input{Bead: rec.Bead, Size: rec.Size, SHA256: rec.SHA256}, Calibration: result.Input,
		Verdict: result.Verdict, Centre: where.words(), Rate: calib.Float(rec.Rate), Start: calib.Float(rec.Start), Duration: calib.Float(float64(rec.Samples) / rec.Rate)}
	if result.Verdict.Status != calib.Consistent && result.Verdict.Status != calib.Unchecked {
		s.Findings = append(s.Findings, calib.Finding{Code: calib.CodeVerdictIgnored, Severity: calib.Doubtful, Value: result.Verdict.FamilyWiseP, Limit: calib.Float(math.NaN()),
			Text: "The verdict on the calibration is " + result.Verdict.Status + ", and was overruled.", Remedy: "calibrate again before these forces are used"})
	}
	if where.kind == "calibration" {
		s.Findings = append(s.Findings, calib.Finding{Code: calib.CodeOldCentre, Severity: calib.Note, Value: calib.Float(math.NaN()), Limit: calib.Float(math.NaN()),
			Text: "The centre is the mean position of the calibration; a drift since then is a force that is not there.", Remedy: "take the mean of a stretch without a force"})
	}
	for i := range traces {
		one := traces[i].Summary()
		s.Axes = append(s.Axes, one)
		if farOut(one) {
			s.Findings = append(s.Findings, beyondLinear(one))
		}
	}
	return s
}

// Limits beyond which displacements outside of the linear range are told. A long recording
// sees rarer thermal displacements than the calibration did; these are neither many nor far.
const (
	manyBeyond = 0.01 // share of the samples
	farBeyond  = 2    // largest displacement over the end of the range
)

func farOut(a calib.ForceSummary) bool {
	end := a.Linear[1]
	if a.Furthest < 0 {
		end = a.Linear[0]
	}
	return float64(a.Beyond) > manyBeyond*float64(a.Samples-a.Missing) || a.Beyond > 0 && a.Furthest/end > farBeyond
}

func beyondLinear(a calib.ForceSummary) calib.Finding {
	return calib.Finding{Code: calib.CodeBeyondLinear, Severity: calib.Doubtful, Axis: a.Axis, Value: a.Furthest, Limit: a.Linear[1], Unit: "m",
		Text: fmt.Sprintf("%d of %d samples lie beyond the displacements over which the calibration saw a harmonic potential, from %.3g nm to %.3g nm (%s); the furthest is %.3g nm from the centre.",
			a.Beyond, a.Samples-a.Missing, 1e9*float64(a.Linear[0]), 1e9*float64(a.Linear[1]), a.LinearReason, 1e9*float64(a.Furthest)),
		Remedy: "check with a larger known force, by moving the stage, that the trap is linear so far out"}
}

// writeForces writes the trace and its summary to where they were asked for.
func (a *app) writeForces(ctx context.Context, o forceOptions, folder *sheets, rec *track.Recording, traces []calib.ForceTrace, summary report.Force) error {
	table := func(w io.Writer) error { return report.ForceCSV(untilDone{ctx, w}, rec.Start, rec.Rate, traces) }
	var text, stored bytes.Buffer
	if err := errors.Join(report.ForceText(&text, summary), report.ForceJSON(&stored, summary)); err != nil {
		return err
	}
	if folder.root != nil {
		var figures []figure.Figure
		for i := range traces {
			figures = append(figures, figure.Force(&traces[i], rec.Start))
		}
		if err := folder.write(ctx, []file{{"force.json", stored.Bytes()}, {"force.txt", text.Bytes()}}, figures...); err != nil {
			return err
		}
		if err := folder.stream("force.csv", table); err != nil {
			return err
		}
	}
	switch o.format {
	case "json":
		_, err := a.Out.Write(stored.Bytes())
		return err
	case "csv":
		for _, f := range summary.Findings {
			if !o.quiet {
				a.say("beadwell: %s, %s: %s", f.Severity, f.Code, f.Text)
			}
		}
		return table(a.Out)
	}
	_, err := a.Out.Write(text.Bytes())
	return err
}

// untilDone is a writer that stops when the context ends.
type untilDone struct {
	ctx context.Context
	w   io.Writer
}

func (u untilDone) Write(p []byte) (int, error) {
	if err := u.ctx.Err(); err != nil {
		return 0, err
	}
	return u.w.Write(p)
}
