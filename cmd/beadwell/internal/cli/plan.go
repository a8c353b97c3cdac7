package cli

import (
	"bytes"
	"context"
	"errors"

	"github.com/spf13/cobra"

	"beadwell/calib"
	"beadwell/calib/quantity"
	"beadwell/calib/session"
	"beadwell/cmd/beadwell/internal/figure"
	"beadwell/cmd/beadwell/internal/report"
)

// planOptions is what the command line of plan says.
type planOptions struct {
	axis, stiffness, corner, wanted string
	format, out                     string
	force                           bool
	flags                           settingFlags
}

const planLong = `plan predicts, before a recording is made, the standard uncertainty of the stiffness
that it can give: the Cramer-Rao bound for the sampled, blurred and noisy motion of the bead,
with the stated uncertainties of the inputs on top. It says how long to record for a wanted
uncertainty, from when on a longer recording gains nothing, which sampling rate is enough,
and what to look out for.

Settings have the names and forms that calibrate has. Without --noise the localisation noise
counts as unknown and fitted; --pixel or --sensitivity add the uncertainty of the length scale.

    by drag        2 pi x drag x corner frequency; needs bead, viscosity and height
    by amplitude   kT / variance; needs temperature and length scale
    both           the two combined, as calibrate adopts them
    drift          root mean square of a drift, other than a straight line, that moves the
                   amplitude route by its statistical uncertainty, nm
    without end    what the inputs leave, however long the recording`

// planSettings are the settings that have an effect on a plan.
var planSettings = []string{"bead.diameter", "bead.density", "medium.fluid", "medium.viscosity", "medium.density", "medium.temperature",
	"chamber.height", "chamber.depth", "recording.rate", "recording.exposure", "recording.pixel", "recording.noise", "recording.sensitivity",
	"fit.perpendicular", "laser.power", "laser.heating"}

func (a *app) planCommand(run func(context.Context, *app, planOptions) error) *cobra.Command {
	var o planOptions
	cmd := &cobra.Command{
		Use:   "plan",
		Short: "How long and how fast to record for a wanted uncertainty",
		Long:  planLong,
		Example: `  beadwell plan --stiffness '50 pN/um' --diameter '1.02(3) um' --temperature '24.5(5) C' --height '8.0(5) um' --rate '20 kHz' --wanted '3 %'
  beadwell plan --corner '120 Hz' --diameter '2.00(4) um' --rate '500 Hz' --exposure '1.8 ms' --noise '5(1) nm' --pixel '65.0(3) nm'`,
		Args: noArguments,
		RunE: func(cmd *cobra.Command, args []string) error {
			if err := notEmpty(cmd, "out", "stiffness", "corner", "wanted"); err != nil {
				return err
			}
			if err := o.validate(); err != nil {
				return err
			}
			return run(cmd.Context(), a, o)
		},
	}
	flags := cmd.Flags()
	flags.StringVar(&o.stiffness, "stiffness", "", "stiffness to expect: `50 pN/um`")
	flags.StringVar(&o.corner, "corner", "", "corner frequency to expect, in place of the stiffness: `500 Hz`")
	flags.StringVar(&o.wanted, "wanted", "", "combined standard uncertainty that the stiffness shall have: `2 %`")
	flags.StringVar(&o.axis, "axis", "x", "axis to plan for: `x|y|z`")
	flags.StringVar(&o.format, "format", "text", "form of the plan on standard output: `text|json|csv`")
	flags.StringVar(&o.out, "out", "", "also write text, JSON, CSV and the figure into `FOLDER`")
	flags.BoolVar(&o.force, "force", false, "with --out: replace files that are there")
	addSettingFlags(flags, &o.flags, planSettings...)
	completeSettings(cmd)
	completeWords(cmd, "format", formats...)
	completeWords(cmd, "axis", spatialAxes...)
	return cmd
}

func (o planOptions) validate() error {
	if err := oneOf("format", o.format, formats...); err != nil {
		return err
	}
	if err := oneOf("axis", o.axis, spatialAxes...); err != nil {
		return err
	}
	if (o.stiffness == "") == (o.corner == "") {
		return usageError("give --stiffness '50 pN/um' or --corner '500 Hz'", "a plan needs either the stiffness or the corner frequency to expect")
	}
	if o.force && o.out == "" {
		return usageError("leave it out, or add --out FOLDER", "--force has no effect without --out")
	}
	return nil
}

// expected reads what is expected and wanted.
func (o planOptions) expected() (calib.PlanOptions, error) {
	p := calib.PlanOptions{Axis: o.axis}
	for _, one := range []struct {
		flag, text string
		dimension  quantity.Dimension
		into       *float64
	}{{"stiffness", o.stiffness, quantity.Stiffness, &p.Stiffness}, {"corner", o.corner, quantity.Frequency, &p.Corner}, {"wanted", o.wanted, quantity.Fraction, &p.Wanted}} {
		v, err := parseOne(one.flag, one.text, one.dimension)
		if err != nil {
			return p, err
		}
		if one.text != "" && !(v > 0) {
			return p, usageError("write --"+one.flag+" '"+one.dimension.Example()+"'", "--%s %q is not positive", one.flag, one.text)
		}
		*one.into = v
	}
	return p, nil
}

func runPlan(ctx context.Context, a *app, o planOptions) error {
	settings, err := session.ForTrack(session.Sources{Flags: &o.flags.settings})
	if err != nil {
		return settingsError(err)
	}
	options, err := o.expected()
	if err != nil {
		return err
	}
	options.Program = calib.Program{Name: "beadwell", Version: a.Version, Command: a.command()}
	folder, err := openSheets(o.out, "", o.force)
	if err != nil {
		return err
	}
	defer folder.close()
	plan, err := calib.Forecast(settings, options)
	if err != nil {
		return err
	}
	var text, stored, table bytes.Buffer
	if err := errors.Join(report.PlanText(&text, plan), report.PlanJSON(&stored, plan), report.PlanCSV(&table, plan)); err != nil {
		return err
	}
	files := []file{{"plan.txt", text.Bytes()}, {"plan.json", stored.Bytes()}, {"plan.csv", table.Bytes()}}
	if err := folder.write(ctx, files, figure.Plan(plan)); err != nil {
		return err
	}
	switch o.format {
	case "json":
		_, err = a.Out.Write(stored.Bytes())
	case "csv":
		for _, f := range plan.Findings {
			a.say("beadwell: %s, %s: %s", f.Severity, f.Code, f.Text)
		}
		_, err = a.Out.Write(table.Bytes())
	default:
		_, err = a.Out.Write(text.Bytes())
	}
	return err
}
