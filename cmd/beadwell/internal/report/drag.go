package report

import (
	"encoding/csv"
	"fmt"
	"io"
	"strings"

	"beadwell/calib"
)

// DragVersion names the layout of a stored Drag.
const DragVersion = "beadwell-drag/1"

// Drag is the drag of a bead in a fluid at some heights, in SI units.
type Drag struct {
	Schema        string         `json:"schema"`          // layout of this object, with its version
	Fluid         string         `json:"fluid,omitempty"` // absent when the viscosity was stated
	Source        string         `json:"source"`          // of the viscosity
	Diameter      calib.Quantity `json:"diameter"`        // m
	Temperature   calib.Quantity `json:"temperature"`     // K
	Viscosity     calib.Quantity `json:"viscosity"`       // Pa s
	Density       calib.Quantity `json:"density"`         // kg/m3; null when it is not known
	ThermalEnergy calib.Quantity `json:"thermal_energy"`  // kT, J
	Stokes        calib.Quantity `json:"stokes_drag"`     // N s/m
	Stiffness     calib.Quantity `json:"stiffness"`       // N/m; null when none was given
	Rows          []DragRow      `json:"rows"`            // one for each height and direction
}

// DragRow is the drag at one height in one direction.
type DragRow struct {
	Height    calib.Quantity `json:"height"`                // of the centre above the nearer surface, m; null: far from any
	Direction string         `json:"direction"`             // "parallel" or "perpendicular" to the surface
	Factor    calib.Quantity `json:"wall_factor"`           // drag over Stokes drag, 1
	Drag      calib.Quantity `json:"drag"`                  // N s/m
	Diffusion calib.Quantity `json:"diffusion_coefficient"` // kT over drag, m2/s
	Corner    calib.Quantity `json:"corner_frequency"`      // for the stiffness, Hz; null without one
	Method    string         `json:"method"`                // of the wall factor
}

// DragJSON writes the drag as indented JSON.
func DragJSON(w io.Writer, d Drag) error {
	d.Schema = DragVersion
	return WriteJSON(w, d)
}

// DragText writes the drag for a person.
func DragText(w io.Writer, d Drag) error {
	p := &printer{}
	liquid := "a liquid"
	if d.Fluid != "" {
		liquid = d.Fluid
	}
	p.paragraph("", fmt.Sprintf("bead of %s in %s at %s", withUnit(combined(d.Diameter, "um"), "um"), liquid, withUnit(combined(d.Temperature, "C"), "C")))
	facts := []string{"viscosity " + withUnit(combined(d.Viscosity, "mPa s"), "mPa s") + " (" + d.Source + ")"}
	if d.Density.Known() {
		facts = append(facts, "density "+withUnit(combined(d.Density, "kg/m3"), "kg/m3"))
	}
	facts = append(facts, "Stokes drag "+withUnit(combined(d.Stokes, dragUnit), dragUnit))
	if d.Stiffness.Known() {
		facts = append(facts, "stiffness "+withUnit(combined(d.Stiffness, stiffnessUnit), stiffnessUnit))
	}
	p.paragraph("", strings.Join(facts, ", "))
	p.WriteString("\n")
	p.table(func(row func(...string)) {
		header := []string{"height, um", "direction", "wall factor", "drag, " + dragUnit, "D, um2/s"}
		if d.Stiffness.Known() {
			header = append(header, "corner, Hz")
		}
		row(header...)
		for _, r := range d.Rows {
			height := "far"
			if r.Height.Known() {
				height = combined(r.Height, "um")
			}
			cells := []string{height, r.Direction, combined(r.Factor, "1"), combined(r.Drag, dragUnit), combined(r.Diffusion, "um2/s")}
			if d.Stiffness.Known() {
				cells = append(cells, combined(r.Corner, "Hz"))
			}
			row(cells...)
		}
	})
	_, err := io.WriteString(w, p.String())
	return err
}

// DragCSV writes one row for each height and direction, in SI units at full
// precision; a height far from any surface is an empty cell.
func DragCSV(w io.Writer, d Drag) error {
	out := csv.NewWriter(w)
	out.Write([]string{"height_m", "direction", "wall_factor", "wall_factor_u", "drag_N_s_per_m", "drag_u_N_s_per_m",
		"diffusion_m2_per_s", "diffusion_u_m2_per_s", "corner_Hz", "corner_u_Hz", "method"}) // errors stay until Flush
	for _, r := range d.Rows {
		cells := []string{exactCell(r.Height.Value), r.Direction}
		for _, q := range []calib.Quantity{r.Factor, r.Drag, r.Diffusion, r.Corner} {
			u := ""
			if q.Combined != nil {
				u = exactCell(q.Combined.Standard)
			}
			cells = append(cells, exactCell(q.Value), u)
		}
		out.Write(append(cells, cell(r.Method)))
	}
	out.Flush()
	return out.Error()
}
