package report

import (
	"fmt"
	"math"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure"
)

// perAxis makes a table with a column for each axis.
func perAxis(r *calib.Result, caption, first string, groups ...rowGroup) table {
	head := []cellText{{Text: first}}
	for _, a := range r.Axes {
		head = append(head, cellText{Text: Plain(a.Name), Number: true})
	}
	for i := range groups {
		groups[i].Span = len(head)
	}
	return table{Caption: caption, Head: head, Groups: groups}
}

// rowOf makes a row with what f says of each axis.
func rowOf(r *calib.Result, name string, f func(calib.Axis) cellText) tableRow {
	row := tableRow{Name: name}
	for _, a := range r.Axes {
		cell := f(a)
		cell.Number = true
		row.Cells = append(row.Cells, cell)
	}
	return row
}

// quantityRow makes a row of quantities with their combined uncertainty and,
// below it, the statistical one where it differs.
func quantityRow(r *calib.Result, name, unit string, f func(calib.Axis) calib.Quantity) tableRow {
	return rowOf(r, name, func(a calib.Axis) cellText { return quantityCell(f(a), unit) })
}

func quantityCell(q calib.Quantity, unit string) cellText {
	if !q.Known() {
		return cellText{Text: "unknown", Part: typeset(q.Reason)}
	}
	cell := cellText{Text: typeset(combined(q, unit))}
	if q.Combined != nil && q.Statistical != nil {
		if alone := typeset(number(q.Value, q.Statistical, unit)); alone != cell.Text {
			cell.Part = "statistical " + alone
		}
	}
	return cell
}

func numberRow(r *calib.Result, name, unit string, f func(calib.Axis) calib.Float) tableRow {
	return rowOf(r, name, func(a calib.Axis) cellText { return cellText{Text: typeset(bare(rounded(f(a), 5, unit), unit))} })
}

// estimatesTable puts the stiffness estimates side by side, the routes apart.
func estimatesTable(r *calib.Result) table {
	group := func(title, route string) rowGroup {
		g := rowGroup{Title: title}
		for _, leg := range legs {
			if leg.route == route {
				g.Rows = append(g.Rows, quantityRow(r, figure.LegName(leg.leg), stiffnessUnit, func(a calib.Axis) calib.Quantity { return estimateOf(a, leg.leg) }))
			}
		}
		return g
	}
	adopted := quantityRow(r, "adopted", stiffnessUnit, func(a calib.Axis) calib.Quantity { return a.Adopted.Stiffness })
	adopted.Total = true
	for i, a := range r.Axes {
		if !a.Adopted.Stiffness.Known() {
			adopted.Cells[i] = cellText{Text: "withheld", Number: true}
		}
	}
	return perAxis(r, "Stiffness in "+typeset(stiffnessUnit)+", with the combined standard uncertainty of the last digits in brackets", "estimate",
		group("Through drag", calib.RouteDrag), group("Through amplitude", calib.RouteAmplitude),
		rowGroup{Rows: []tableRow{adopted, weightRow(r)}})
}

func estimateOf(a calib.Axis, leg string) calib.Quantity {
	for _, e := range a.Estimates {
		if e.Leg == leg {
			return e.Stiffness
		}
	}
	return calib.Withheld("N/m", "")
}

func weightRow(r *calib.Result) tableRow {
	return rowOf(r, "weight of drag and of amplitude", func(a calib.Axis) cellText {
		drag, amplitude := weight(a, calib.RouteDrag), weight(a, calib.RouteAmplitude)
		if drag == dash && amplitude == dash {
			return cellText{Text: dash}
		}
		return cellText{Text: drag + ", " + amplitude}
	})
}

func weight(a calib.Axis, route string) string {
	w, ok := a.Adopted.Weights[route]
	if !ok || !w.Known() {
		return dash
	}
	return fmt.Sprintf("%.2f", float64(w))
}

// agreementTable shows the tests of equality.
func agreementTable(r *calib.Result) table {
	test := func(name string, f func(calib.CrossCheck) calib.Test) tableRow {
		return rowOf(r, name, func(a calib.Axis) cellText {
			t := f(a.CrossCheck)
			if !t.PValue.Known() && !t.PValueCombined.Known() {
				return cellText{Text: dash, Part: typeset(t.Reason)}
			}
			cell := cellText{Text: probability(t.PValueCombined)}
			if t.PValue.Known() {
				cell.Part = "statistical " + probability(t.PValue)
			}
			return cell
		})
	}
	rows := []tableRow{
		test("all estimates are one number", func(c calib.CrossCheck) calib.Test { return c.Equality }),
		test("drag route equals amplitude route", func(c calib.CrossCheck) calib.Test { return c.Routes }),
		test("amplitude estimates are one number", func(c calib.CrossCheck) calib.Test { return c.Amplitudes }),
		rowOf(r, "drag route above amplitude route", func(a calib.Axis) cellText { return cellText{Text: percent(a.CrossCheck.Routes.MeanDifference)} }),
		rowOf(r, "in words", func(a calib.Axis) cellText { return cellText{Text: typeset(orDash(a.CrossCheck.Text))} }),
	}
	return perAxis(r, "Do the estimates agree? p-values with the stated uncertainties of the inputs; a small one speaks against it", "hypothesis", rowGroup{Rows: rows})
}

// dragTable compares the drag that was measured with the one that was computed.
func dragTable(r *calib.Result) table {
	unit := typeset(dragUnit)
	return perAxis(r, "Drag on the bead, and the effect of the surface on it", "quantity", rowGroup{Rows: []tableRow{
		quantityRow(r, "computed: Stokes times wall factor, "+unit, dragUnit, func(a calib.Axis) calib.Quantity { return a.Drag }),
		quantityRow(r, "measured: kT over diffusion coefficient, "+unit, dragUnit, func(a calib.Axis) calib.Quantity { return a.MeasuredDrag }),
		quantityRow(r, "measured over computed", "1", func(a calib.Axis) calib.Quantity { return a.DragRatio }),
		quantityRow(r, "wall factor", "1", func(a calib.Axis) calib.Quantity { return a.Wall.Factor }),
		numberRow(r, "Faxén's value of the wall factor", "1", func(a calib.Axis) calib.Float { return a.Wall.Faxen }),
		rowOf(r, "its error", func(a calib.Axis) cellText { return cellText{Text: percent(a.Wall.FaxenError)} }),
		rowOf(r, "wall factor by", func(a calib.Axis) cellText { return cellText{Text: orDash(a.Wall.Method)} }),
		rowOf(r, "motion, to the surface", func(a calib.Axis) cellText { return cellText{Text: orDash(a.Orientation)} }),
	}})
}

// budgetTables lists, for each axis, what the combined uncertainty is made of.
func budgetTables(r *calib.Result) []table {
	var tables []table
	for _, a := range r.Axes {
		if len(a.Adopted.Budget) == 0 {
			continue
		}
		t := table{Caption: "Contributions to the uncertainty of the stiffness along " + Plain(a.Name), Head: heads("input", "value", "sensitivity", "degrees of freedom", "contribution", "share of the variance")}
		for i := range t.Head[1:5] {
			t.Head[i+1].Number = true
		}
		var rows []tableRow
		for _, line := range a.Adopted.Budget {
			rows = append(rows, budgetRow(line))
		}
		t.Groups = []rowGroup{{Rows: rows}}
		tables = append(tables, t)
	}
	return tables
}

func budgetRow(line calib.BudgetLine) tableRow {
	value := dash
	if line.Value.Known() {
		unit := budgetUnit(line.Unit, line.Value)
		value = typeset(withUnit(withStandard(line.Value, line.StandardUncertainty, unit), unit))
	}
	sensitivity := dash
	if line.Sensitivity.Known() {
		sensitivity = typeset(fmt.Sprintf("%.2g", float64(line.Sensitivity)))
	}
	share := cellText{Text: percent(line.Share)}
	if line.Share > 0 {
		share.Bar = fmt.Sprintf("%.1f", 100*min(float64(line.Share), 1))
	}
	freedom := "∞"
	if line.Freedom > 0 { // 0 in results that were stored before it was there
		freedom = twoDigits(float64(line.Freedom))
	}
	return tableRow{Name: typeset(line.Input), Cells: []cellText{{Text: value, Part: typeset(line.Note), Number: true}, {Text: sensitivity, Number: true}, {Text: freedom, Number: true},
		{Text: percent(line.Contribution), Number: true}, share}}
}

// withStandard prints a value with the standard uncertainty that was stated for
// it, if one was, without the unit.
func withStandard(value, standard calib.Float, unit string) string {
	if !standard.Known() {
		return number(value, nil, unit)
	}
	nowhere := [2]calib.Float{calib.Float(math.NaN()), calib.Float(math.NaN())}
	return number(value, &calib.Uncertainty{Standard: standard, Interval68: nowhere, Interval95: nowhere}, unit)
}

// shortLength is where lengths begin that are read in nanometres, such as a localisation noise or the length of a pixel [m].
const shortLength = 1e-6

// budgetUnit is the unit in which an input is read.
func budgetUnit(unit string, value calib.Float) string {
	switch unit {
	case "m":
		if math.Abs(float64(value)) < shortLength {
			return "nm"
		}
		return "um"
	case "s":
		return "ms"
	case "K":
		return "C"
	}
	if u, ok := readable[unit]; ok {
		return u
	}
	return unit
}
