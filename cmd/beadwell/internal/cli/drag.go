package cli

import (
	"context"
	"math"

	"github.com/spf13/cobra"

	"beadwell/calib/quantity"
	"beadwell/calib/session"
	"beadwell/cmd/beadwell/internal/report"
)

// dragOptions is what the command line of drag says.
type dragOptions struct {
	heights   []string
	stiffness string
	format    string
	flags     settingFlags
}

func (a *app) dragCommand(run func(context.Context, *app, dragOptions) error) *cobra.Command {
	var o dragOptions
	cmd := &cobra.Command{
		Use:   "drag",
		Short: "Viscosity, drag and wall factors for a bead, a fluid and heights",
		Long: `drag computes, without a recording, what calibrate uses: viscosity and density of
the fluid, Stokes drag, and for each height the wall factor, the drag and the
diffusion coefficient, for motion parallel and perpendicular to the surface. With a
stiffness it gives the corner frequency to expect.

    height       of the bead's centre above the nearer surface, um
    wall factor  drag over Stokes drag
    drag         6 pi x viscosity x radius x wall factor, nN s/m
    D            kT / drag, um2/s
    corner       stiffness / (2 pi x drag), Hz`,
		Example: `  beadwell drag --diameter '1.02(3) um' --temperature '24.5(5) C' --height '8.0(5) um' --height far
  beadwell drag --diameter '2 um' --fluid 'glycerol 20 %' --height '5 um' --stiffness '50(1) pN/um'`,
		Args: noArguments,
		RunE: func(cmd *cobra.Command, args []string) error {
			if err := oneOf("format", o.format, formats...); err != nil {
				return err
			}
			return run(cmd.Context(), a, o)
		},
	}
	cmd.Flags().StringArrayVar(&o.heights, "height", nil, "height above the nearer surface, or far; once for each: `8.0(5) um`")
	cmd.Flags().StringVar(&o.stiffness, "stiffness", "", "stiffness of the trap, for its corner frequency: `50(1) pN/um`")
	cmd.Flags().StringVar(&o.format, "format", "text", "form of the result on standard output: `text|json|csv`")
	addSettingFlags(cmd.Flags(), &o.flags, "bead.diameter", "medium.fluid", "medium.viscosity", "medium.density", "medium.temperature", "chamber.depth")
	completeWords(cmd, "format", formats...)
	return cmd
}

func runDrag(_ context.Context, a *app, o dragOptions) error {
	settings, err := session.ForTrack(session.Sources{Flags: &o.flags.settings})
	if err != nil {
		return settingsError(err)
	}
	stiffness := measure{math.NaN(), math.NaN()}
	if o.stiffness != "" {
		v, err := quantity.Parse(o.stiffness, quantity.Stiffness)
		if err != nil {
			return settingsError(err)
		}
		stiffness = measure{v.SI, v.U}
	}
	heights, err := parseHeights(o.heights)
	if err != nil {
		return err
	}
	in, err := newDragInput(settings, stiffness)
	if err != nil {
		return err
	}
	var rows []dragRow
	for _, height := range heights {
		for _, perpendicular := range []bool{false, true} {
			row, err := in.row(height, perpendicular)
			if err != nil {
				return err
			}
			rows = append(rows, row)
		}
	}
	for _, s := range settings.All() {
		if s.Assumed && o.format != "json" {
			a.say("beadwell: assumed, for nobody stated it: %s = %s", s.Key, s.Text)
		}
	}
	switch o.format {
	case "json":
		return report.DragJSON(a.Out, dragReport(in, rows))
	case "csv":
		return report.DragCSV(a.Out, dragReport(in, rows))
	}
	return report.DragText(a.Out, dragReport(in, rows))
}

// dragReport puts the numbers into the form that is printed and stored.
func dragReport(in dragInput, rows []dragRow) report.Drag {
	d := report.Drag{
		Fluid: in.fluid, Source: in.source,
		Diameter: in.diameter.quantity("m"), Temperature: in.temperature.quantity("K"),
		Viscosity: in.viscosity.quantity("Pa s"), Density: in.density.quantity("kg/m3"),
		ThermalEnergy: in.thermalEnergy().quantity("J"), Stokes: in.stokes().quantity("N s/m"),
		Stiffness: in.stiffness.quantity("N/m"),
	}
	for _, r := range rows {
		direction := "parallel"
		if r.perpendicular {
			direction = "perpendicular"
		}
		d.Rows = append(d.Rows, report.DragRow{Height: r.height.quantity("m"), Direction: direction, Factor: r.factor.quantity("1"),
			Drag: r.drag.quantity("N s/m"), Diffusion: r.diffusion.quantity("m2/s"), Corner: r.corner.quantity("Hz"), Method: r.method})
	}
	return d
}
