package report

import (
	"encoding/csv"
	"io"
	"strconv"

	"beadwell/calib"
)

// legAdopted stands in the column leg for the adopted stiffness.
const legAdopted = "adopted"

// column is one column of the CSV table: its name with the unit, what it
// holds, and its cell.
type column struct {
	name, meaning string
	cell          func(csvRow) string
}

// csvRow is one stiffness of one axis, or a recording that has none.
type csvRow struct {
	result    *calib.Result
	axis      calib.Axis
	leg       string
	route     string
	stiffness calib.Quantity
	problem   string
}

// columns of the CSV table, in order.
var columns = []column{
	{"file", "recording, as named on the command line", func(r csvRow) string { return cell(r.result.Input.Name) }},
	{"bead", "bead, when the file holds several", func(r csvRow) string { return cell(r.result.Input.Bead) }},
	{"axis", "x, y or z", func(r csvRow) string { return cell(r.axis.Name) }},
	{"leg", "adopted, or the estimate, named as in JSON", func(r csvRow) string { return cell(r.leg) }},
	{"route", "drag or amplitude; empty for the adopted value", func(r csvRow) string { return cell(r.route) }},
	{"stiffness_N_per_m", "stiffness; empty when withheld", func(r csvRow) string { return exactCell(r.stiffness.Value) }},
	{"statistical_u_N_per_m", "standard uncertainty, inputs taken as exact", uncertainty(statistical, standardOf)},
	{"statistical_68_low_N_per_m", "lower end of the 68 % interval, inputs taken as exact", uncertainty(statistical, low68)},
	{"statistical_68_high_N_per_m", "its upper end", uncertainty(statistical, high68)},
	{"statistical_95_low_N_per_m", "lower end of the 95 % interval, inputs taken as exact", uncertainty(statistical, low95)},
	{"statistical_95_high_N_per_m", "its upper end", uncertainty(statistical, high95)},
	{"combined_u_N_per_m", "standard uncertainty with the stated uncertainties of the inputs", uncertainty(withInputs, standardOf)},
	{"combined_68_low_N_per_m", "lower end of the 68 % interval with the inputs", uncertainty(withInputs, low68)},
	{"combined_68_high_N_per_m", "its upper end", uncertainty(withInputs, high68)},
	{"combined_95_low_N_per_m", "lower end of the 95 % interval with the inputs", uncertainty(withInputs, low95)},
	{"combined_95_high_N_per_m", "its upper end", uncertainty(withInputs, high95)},
	{"drag_computed_N_s_per_m", "Stokes drag times wall factor", func(r csvRow) string { return exactCell(r.axis.Drag.Value) }},
	{"drag_measured_N_s_per_m", "kT over the diffusion coefficient of the spectrum", func(r csvRow) string { return exactCell(r.axis.MeasuredDrag.Value) }},
	{"corner_frequency_Hz", "corner frequency of the spectrum", func(r csvRow) string { return exactCell(r.axis.Spectrum.Corner.Value) }},
	{"p_routes_statistical", "p-value of the equality of the two routes, inputs taken as exact", func(r csvRow) string { return exactCell(r.axis.CrossCheck.Routes.PValue) }},
	{"p_routes_combined", "the same with the stated uncertainties of the inputs", func(r csvRow) string { return exactCell(r.axis.CrossCheck.Routes.PValueCombined) }},
	{"verdict", "consistent, inconsistent, unfit, or failed for a recording without a result", func(r csvRow) string { return cell(r.result.Verdict.Status) }},
	{"problem", "why there is no stiffness; empty when there is one", func(r csvRow) string { return cell(r.problem) }},
}

func standardOf(u calib.Uncertainty) calib.Float { return u.Standard }
func low68(u calib.Uncertainty) calib.Float      { return u.Interval68[0] }
func high68(u calib.Uncertainty) calib.Float     { return u.Interval68[1] }
func low95(u calib.Uncertainty) calib.Float      { return u.Interval95[0] }
func high95(u calib.Uncertainty) calib.Float     { return u.Interval95[1] }

func statistical(q calib.Quantity) *calib.Uncertainty { return q.Statistical }
func withInputs(q calib.Quantity) *calib.Uncertainty  { return q.Combined }

func uncertainty(part func(calib.Quantity) *calib.Uncertainty, number func(calib.Uncertainty) calib.Float) func(csvRow) string {
	return func(r csvRow) string {
		u := part(r.stiffness)
		if u == nil {
			return ""
		}
		return exactCell(number(*u))
	}
}

// exactCell prints a number so that it reads back to the same bits; an unknown
// number is an empty cell.
func exactCell(f calib.Float) string {
	if !f.Known() {
		return ""
	}
	return strconv.FormatFloat(float64(f), 'g', -1, 64)
}

// CSV writes one row for each estimate of each axis and one for its adopted
// stiffness, in SI units at full precision, under one header line; a recording
// that failed is one row with the column problem filled in.
func CSV(w io.Writer, s Set) error {
	out := csv.NewWriter(w)
	header := make([]string, len(columns))
	for i, c := range columns {
		header[i] = c.name
	}
	out.Write(header) // errors stay in the writer until Flush
	for _, r := range s.Results {
		for _, row := range csvRows(r) {
			out.Write(cells(row))
		}
	}
	for _, failure := range s.Failures {
		out.Write(cells(failedRow(failure)))
	}
	out.Flush()
	return out.Error()
}

func csvRows(r *calib.Result) []csvRow {
	var rows []csvRow
	for _, axis := range r.Axes {
		row := csvRow{result: r, axis: axis}
		row.leg, row.stiffness, row.problem = legAdopted, axis.Adopted.Stiffness, withheldReason(axis.Adopted)
		rows = append(rows, row)
		for _, estimate := range axis.Estimates {
			row.leg, row.route, row.stiffness = estimate.Leg, estimate.Route, estimate.Stiffness
			row.problem = estimate.Stiffness.Reason
			rows = append(rows, row)
		}
	}
	return rows
}

// failedRow is the row of a recording without a result.
func failedRow(p Problem) csvRow {
	unknown := calib.Withheld("", p.Message)
	row := csvRow{result: &calib.Result{}, stiffness: unknown, problem: p.Message}
	row.result.Input.Name = p.Input
	row.result.Verdict.Status = "failed"
	row.axis.Drag, row.axis.MeasuredDrag, row.axis.Spectrum.Corner = unknown, unknown, unknown
	row.axis.CrossCheck.Routes = calib.Test{PValue: unknown.Value, PValueCombined: unknown.Value}
	return row
}

func cells(row csvRow) []string {
	out := make([]string, len(columns))
	for i, c := range columns {
		out[i] = c.cell(row)
	}
	return out
}
