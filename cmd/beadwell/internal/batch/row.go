package batch

import (
	"encoding/hex"
	"fmt"
	"math"
	"slices"
	"unicode/utf8"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/report"
)

// The statuses of a row beside those of a verdict.
const (
	Failed   = "failed"    // there is no result
	SetAside = "set aside" // a recording of another role, or one that is still being written
)

// FitWord as the height scale asks for it to be fitted.
const FitWord = "fit"

// Row is one recording in the summary: one bead of one file.
type Row struct {
	File        string          `json:"file"`
	FileBytes   string          `json:"file_bytes,omitempty"` // hexadecimal; of a name that is no UTF-8, which JSON cannot carry
	Bead        string          `json:"bead,omitempty"`
	Role        string          `json:"role,omitempty"` // of the recording, where there is a result
	Status      string          `json:"status"`         // a verdict, "failed" or "set aside"
	Reason      string          `json:"reason,omitempty"`
	Folder      string          `json:"folder,omitempty"` // of its outputs, in the folder of results
	Report      string          `json:"report,omitempty"` // its report, or its result, in the folder of results
	SHA256      string          `json:"sha256,omitempty"` // of the file
	Problem     *report.Problem `json:"problem,omitempty"`
	Diameter    Number          `json:"diameter_m"`
	Height      Number          `json:"height_m"`
	HeightScale Number          `json:"height_scale"` // travel of the bead over travel of the stage
	// FitScale asks for the height scale to be fitted to series over heights.
	FitScale    bool   `json:"fit_height_scale,omitempty"`
	Power       Number `json:"power_W"`
	Temperature Number `json:"temperature_K"`
	Viscosity   Number `json:"viscosity_Pa_s"`
	// FreeBead are the recordings of the free bead whose drag was used.
	FreeBead []string `json:"free_bead,omitempty"`
	// FreeBeadBytes are their names in hexadecimal, "" where a name is UTF-8; absent where all are.
	FreeBeadBytes []string    `json:"free_bead_bytes,omitempty"`
	FamilyWiseP   calib.Float `json:"family_wise_p_value"`
	Axes          []RowAxis   `json:"axes"`
	// Flow is what a stage at constant speed gives to a line through several recordings.
	Flow []calib.FlowPart `json:"flow,omitempty"`
}

// Number is a value with its uncertainties; null where there is none.
type Number struct {
	Value       calib.Float `json:"value"`
	Statistical calib.Float `json:"statistical"` // standard uncertainty, inputs taken as exact
	Combined    calib.Float `json:"combined"`    // standard uncertainty with the inputs'
}

// RowAxis is one axis of a row.
type RowAxis struct {
	Axis          string `json:"axis"`
	Perpendicular bool   `json:"perpendicular"` // to the surface
	Stiffness     Number `json:"stiffness_N_per_m"`
	Corner        Number `json:"corner_frequency_Hz"`
	Drag          Number `json:"measured_drag_N_s_per_m"`
	DragRatio     Number `json:"drag_ratio"`      // measured over computed
	FreeDragRatio Number `json:"free_drag_ratio"` // the same of the free bead, where it was used
	Sensitivity   Number `json:"sensitivity_m_per_V"`
	WallFactor    Number `json:"wall_factor"` // computed
}

var unknown = Number{calib.Float(math.NaN()), calib.Float(math.NaN()), calib.Float(math.NaN())}

func number(q calib.Quantity) Number {
	n := Number{Value: q.Value, Statistical: unknown.Value, Combined: unknown.Value}
	if !q.Known() {
		return unknown
	}
	if q.Statistical != nil {
		n.Statistical = q.Statistical.Standard
	}
	if q.Combined != nil {
		n.Combined = q.Combined.Standard
	}
	return n
}

// holdsTrap tells that the recording is one of a trapped bead.
func (r Row) holdsTrap() bool { return r.Role != calib.RoleFree && r.Role != calib.RoleBackground }

// word is the status for a person, with the role of a recording without a trap.
func (r Row) word() string {
	if r.holdsTrap() {
		return r.Status
	}
	return r.Status + ", " + r.Role
}

// emptyRow is a recording without a result.
func emptyRow(file, status, reason string) Row {
	return Row{File: file, FileBytes: nameBytes(file), Status: status, Reason: reason, Diameter: unknown, Height: unknown, HeightScale: unknown, Power: unknown, Temperature: unknown,
		Viscosity: unknown, FamilyWiseP: unknown.Value, Axes: []RowAxis{}}
}

// nameBytes is the hexadecimal form of a name that is no UTF-8; empty for others.
func nameBytes(name string) string {
	if utf8.ValidString(name) {
		return ""
	}
	return hex.EncodeToString([]byte(name))
}

// nameOf is the name that JSON kept, with its bytes where it is no UTF-8.
func nameOf(name, stored string) (string, error) {
	if stored == "" {
		return name, nil
	}
	whole, err := hex.DecodeString(stored)
	return string(whole), err
}

// namesBytes are those of each name; nil when every name is UTF-8.
func namesBytes(names []string) []string {
	all, any := make([]string, len(names)), false
	for i, name := range names {
		all[i] = nameBytes(name)
		any = any || all[i] != ""
	}
	if !any {
		return nil
	}
	return all
}

// restoreNames gives a row that was read from JSON the names that JSON could not carry.
func (r *Row) restoreNames() (err error) {
	if r.File, err = nameOf(r.File, r.FileBytes); err != nil {
		return err
	}
	for i := range r.Flow {
		r.Flow[i].Name = r.File
	}
	for i := range min(len(r.FreeBead), len(r.FreeBeadBytes)) {
		if r.FreeBead[i], err = nameOf(r.FreeBead[i], r.FreeBeadBytes[i]); err != nil {
			return err
		}
	}
	return nil
}

// failedRow is a recording with a problem.
func failedRow(file string, p report.Problem) Row {
	reason := p.Message
	switch {
	case p.Line > 0 && p.Column > 0:
		reason = fmt.Sprintf("line %d, column %d: %s", p.Line, p.Column, reason)
	case p.Line > 0:
		reason = fmt.Sprintf("line %d: %s", p.Line, reason)
	}
	if p.File != "" && p.File != file { // a background, say
		reason = p.File + ": " + reason
	}
	row := emptyRow(file, Failed, reason)
	row.Problem = &p
	return row
}

// resultRow is what the summary keeps of a result.
func resultRow(file, folder string, r *calib.Result) Row {
	row := emptyRow(file, r.Verdict.Status, r.Verdict.Reason)
	row.Role, row.Bead, row.Folder, row.SHA256, row.FamilyWiseP = r.Role, r.Input.Bead, folder, r.Input.SHA256, r.Verdict.FamilyWiseP
	row.Diameter, row.Height = number(r.Bead.Diameter), number(r.Bead.Height)
	row.Temperature, row.Viscosity = number(r.Medium.Temperature), number(r.Medium.Viscosity)
	row.Power, row.HeightScale = settingNumber(r, "laser.power", ""), settingNumber(r, "chamber.height_scale", "")
	row.FitScale = slices.ContainsFunc(r.Settings, func(s calib.Setting) bool { return s.Key == "chamber.height_scale" && s.Text == FitWord })
	row.Flow = calib.FlowParts(r)
	for i := range row.Flow {
		row.Flow[i].Name = file
	}
	for _, a := range r.Axes {
		free := unknown
		if f := a.FreeDrag; f != nil {
			free = number(f.Ratio)
			for _, used := range f.Recordings {
				if !slices.Contains(row.FreeBead, used.Name) {
					row.FreeBead = append(row.FreeBead, used.Name)
				}
			}
		}
		row.Axes = append(row.Axes, RowAxis{Axis: a.Name, Perpendicular: a.Orientation == "perpendicular",
			Stiffness: number(a.Adopted.Stiffness), Corner: number(a.Spectrum.Corner), Drag: number(a.MeasuredDrag),
			DragRatio: number(a.DragRatio), FreeDragRatio: free, Sensitivity: settingNumber(r, "recording.sensitivity", a.Name), WallFactor: number(a.Wall.Factor)})
	}
	row.FreeBeadBytes = namesBytes(row.FreeBead)
	return row
}

// settingNumber is a setting of the result, that of the axis before that of all.
func settingNumber(r *calib.Result, key, axis string) Number {
	found := unknown
	for _, s := range r.Settings {
		if s.Key == key && (s.Axis == "" || s.Axis == axis) {
			found = Number{Value: s.Value, Statistical: unknown.Value, Combined: s.StandardUncertainty}
			if s.Axis == axis {
				break
			}
		}
	}
	return found
}
