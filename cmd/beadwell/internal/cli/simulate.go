package cli

import (
	"bytes"
	"context"
	"encoding/json"
	"path/filepath"

	"github.com/spf13/cobra"

	"beadwell/calib/session"
	"beadwell/calib/simulate"
)

// simulateOptions is what the command line of simulate says, as texts.
type simulateOptions struct {
	axes, stiffness, quartic                      string
	duration, centre, drift                       string
	lines                                         []string
	seed                                          uint64
	jump, secondBead, escape, stuck               string
	crossTalk, rotation                           string
	rail, rounding, jitter, blank, dropped, twice string
	header                                        string
	digits                                        int
	noTime                                        bool
	out                                           string
	force                                         bool
	flags                                         settingFlags
}

const simulateLong = `simulate makes a recording whose truth is known: a bead in an optical trap, moving by
the exact law of Brownian motion in a harmonic trap, blurred by the exposure, with white
localisation noise. Settings have the names and forms that calibrate has; the
uncertainties in them are read, and the values are the truth.

  --role free        no trap: the bead diffuses
  --role background  no bead, or a stuck one: noise and lines alone
  --role driven      the stage moves as --drive-waveform, --drive-amplitude and
                     --drive-frequency say, along the first axis, in a column of its own
  --drag frequency-dependent
                     the drag of an oscillating sphere, and the inertia of bead and fluid;
                     auto and constant are the constant drag

The same command line makes the same bytes. With --out two files are written: the
recording, and beside it, with the ending .truth.json, the command line and
the truth in SI units. Without --out the recording goes to standard output.`

const simulateExample = `  beadwell simulate --stiffness 'x=52 pN/um, y=47 pN/um' --diameter '1.02 um' --rate '20 kHz' --duration '5 s' --height '8 um' --out fast.csv
  beadwell simulate --stiffness '6 pN/um' --diameter '2 um' --rate '500 Hz' --exposure '2 ms' --noise '4 nm' --duration '20 s' --unit nm`

// simulateSettings are the settings that have an effect on a simulated recording.
var simulateSettings = []string{"bead.diameter", "bead.density", "medium.fluid", "medium.viscosity", "medium.density", "medium.temperature",
	"chamber.height", "chamber.depth", "recording.rate", "recording.exposure", "recording.unit", "recording.pixel", "recording.noise",
	"recording.sensitivity", "recording.delimiter", "recording.decimal", "detector.alpha", "detector.f3db", "fit.perpendicular", "fit.drag",
	"drive.waveform", "drive.amplitude", "drive.frequency", "role"}

func (a *app) simulateCommand(run func(context.Context, *app, simulateOptions) error) *cobra.Command {
	var o simulateOptions
	cmd := &cobra.Command{
		Use: "simulate", Short: "A recording of known truth", Long: simulateLong, Example: simulateExample,
		Args: noArguments,
		RunE: func(cmd *cobra.Command, args []string) error {
			if err := oneOf("header", o.header, headerWords...); err != nil {
				return err
			}
			if o.force && o.out == "" {
				return usageError("add --out FILE, or leave --force out", "--force has no effect without --out")
			}
			return run(cmd.Context(), a, o)
		},
	}
	f := cmd.Flags()
	f.StringVar(&o.stiffness, "stiffness", "", "stiffness of the trap, by axis as x=... or y=...: `52 pN/um`")
	f.StringVar(&o.quartic, "quartic", "", "anharmonic trap, potential kT(u^2/2 + quartic u^4/4) with u in thermal rms, from -0.01 to 1: `0.005`")
	f.StringVar(&o.axes, "axes", "x,y", "recorded axes, when the stiffness does not name them: `x,y,z`")
	f.StringVar(&o.duration, "duration", "10 s", "length of the record: `10 s`")
	f.StringVar(&o.centre, "centre", "", "rest position of the bead, by axis as x=... or y=...: `1.2 um`")
	f.StringVar(&o.drift, "drift", "", "linear drift over the record, by axis as x=... or y=...: `20 nm`")
	f.StringArrayVar(&o.lines, "line", nil, "sinusoidal pickup on every axis, frequency and amplitude; may be repeated: `50 Hz, 3 nm`")
	f.Uint64Var(&o.seed, "seed", 1, "whole `number` that selects the recording")
	f.StringVar(&o.jump, "jump", "", "the position jumps on every axis, time and length: `5 s, 300 nm`")
	f.StringVar(&o.secondBead, "second-bead", "", "a second bead falls into the trap; the pair is off centre by half a radius, is held 1.2 times as stiffly, and has 1.4 times the drag: `12 s`")
	f.StringVar(&o.escape, "escape", "", "the bead leaves the trap: `40 s`")
	f.StringVar(&o.stuck, "stuck", "", "the bead sticks where it is: `40 s`")
	f.StringVar(&o.crossTalk, "cross-talk", "", "share of the first axis that leaks into the second: `5 %`")
	f.StringVar(&o.rotation, "rotation", "", "angle from the first axis to that of the trap: `10 deg`")
	f.StringVar(&o.rail, "rail", "", "positions farther than this from the centre read as this: `60 nm`")
	f.StringVar(&o.rounding, "rounding", "", "positions are rounded to multiples of this: `5 nm`")
	f.StringVar(&o.jitter, "jitter", "", "standard deviation of the errors of the time stamps: `20 us`")
	f.StringVar(&o.blank, "blank", "", "share of samples whose positions are empty: `2 %`")
	f.StringVar(&o.dropped, "dropped", "", "share of samples that are missing: `2 %`")
	f.StringVar(&o.twice, "repeated", "", "share of samples that are written twice: `2 %`")
	f.StringVar(&o.header, "header", "parentheses", "how the header names units: `parentheses|brackets|underscore|names|none`")
	f.IntVar(&o.digits, "digits", 7, "significant digits of the largest position, 1 to 7: `7`")
	f.BoolVar(&o.noTime, "no-time", false, "write no time column")
	f.StringVar(&o.out, "out", "", "`file` to write the recording to, with its truth beside it")
	f.BoolVar(&o.force, "force", false, "replace files that are there")
	addSettingFlags(f, &o.flags, simulateSettings...)
	return cmd
}

func runSimulate(ctx context.Context, a *app, o simulateOptions) error {
	settings, err := session.ForTrack(session.Sources{Flags: &o.flags.settings})
	if err != nil {
		return settingsError(err)
	}
	plan, err := newSimulation(o, settings)
	if err != nil {
		return err
	}
	columns, format, err := plan.table(o, settings)
	if err != nil {
		return err
	}
	var track bytes.Buffer
	recording := simulate.Make(plan.Truth, o.seed)
	if err := simulate.WriteCSV(&track, columns(recording), format); err != nil {
		return usageError("correct the flags that describe the file", "%w", err)
	}
	if o.out == "" {
		_, err := a.Out.Write(track.Bytes())
		return err
	}
	plan.Command = a.command()
	truth, err := json.MarshalIndent(plan, "", "  ")
	if err != nil {
		return err
	}
	return o.write(ctx, track.Bytes(), append(truth, '\n'))
}

// truthEnding replaces the ending of the recording's name in that of its truth.
const truthEnding = ".truth.json"

// write writes the recording and its truth; without --force it replaces nothing.
func (o simulateOptions) write(ctx context.Context, track, truth []byte) error {
	parent, name := filepath.Split(o.out)
	root, err := openParent(filepath.Clean(parent))
	if err != nil {
		return err
	}
	defer root.Close()
	folder := outputFolder{root: root, parent: parent}
	files := []file{{name, track}, {name[:len(name)-len(filepath.Ext(name))] + truthEnding, truth}}
	for _, f := range files {
		if exists, err := folder.check(f.name); err != nil {
			return err
		} else if exists && !o.force {
			return usageError("choose another --out, or add --force to replace it", "%s is there already", folder.path(f.name))
		}
	}
	for _, f := range files {
		if err := folder.write(ctx, f.name, f.content); err != nil {
			return err
		}
	}
	return nil
}
