package report

import (
	"fmt"
	"strings"

	"beadwell/calib"
)

// fitsTable shows the numbers behind the estimates.
func fitsTable(r *calib.Result) table {
	spectrum := rowGroup{Title: "Power spectrum", Rows: []tableRow{
		rowOf(r, "method", func(a calib.Axis) cellText {
			return cellText{Text: orDash(a.Spectrum.Method), Part: typeset(strings.TrimSpace(a.Spectrum.Drag + " drag"))}
		}),
		quantityRow(r, "corner frequency, Hz", "Hz", func(a calib.Axis) calib.Quantity { return a.Spectrum.Corner }),
		numberRow(r, "the same by least squares, Hz", "Hz", func(a calib.Axis) calib.Float { return a.Spectrum.LeastSquares.Corner }),
		quantityRow(r, "diffusion coefficient, "+typeset("um2/s"), "um2/s", func(a calib.Axis) calib.Quantity { return a.Spectrum.Diffusion }),
		quantityRow(r, "variance, "+typeset("nm2"), "nm2", func(a calib.Axis) calib.Quantity { return a.Spectrum.Variance }),
		quantityRow(r, "localisation noise, nm", "nm", func(a calib.Axis) calib.Quantity { return a.Spectrum.Noise }),
		rowOf(r, "fit band", func(a calib.Axis) cellText {
			return cellText{Text: band(a.Spectrum.Band), Part: excluded(a.Spectrum.Excluded)}
		}),
		rowOf(r, "goodness of fit, p", func(a calib.Axis) cellText { return cellText{Text: probability(a.Spectrum.Goodness.PValue)} }),
	}}
	variance := rowGroup{Title: "Equipartition", Rows: []tableRow{
		numberRow(r, "recorded variance, "+typeset("nm2"), "nm2", func(a calib.Axis) calib.Float { return a.Equipartition.RawVariance }),
		quantityRow(r, "corrected variance, "+typeset("nm2"), "nm2", func(a calib.Axis) calib.Quantity { return a.Equipartition.Variance }),
		numberRow(r, "kept by the exposure", "1", func(a calib.Axis) calib.Float { return a.Equipartition.BlurFactor }),
		rowOf(r, "share of noise", func(a calib.Axis) cellText { return cellText{Text: percent(a.Equipartition.NoiseShare)} }),
		numberRow(r, "kept by the length of the record", "1", func(a calib.Axis) calib.Float { return a.Equipartition.LengthFactor }),
		rowOf(r, "independent samples", func(a calib.Axis) cellText { return cellText{Text: whole(a.Equipartition.EffectiveN)} }),
		quantityRow(r, "excess kurtosis", "1", func(a calib.Axis) calib.Quantity { return a.Equipartition.Potential.Anharmonic }),
		quantityRow(r, "skewness", "1", func(a calib.Axis) calib.Quantity { return a.Equipartition.Potential.Skewness }),
	}}
	displacement := rowGroup{Title: "Mean-square displacement", Rows: []tableRow{
		quantityRow(r, "plateau, "+typeset("nm2"), "nm2", func(a calib.Axis) calib.Quantity { return a.Displacement.Plateau }),
		quantityRow(r, "relaxation time, ms", "ms", func(a calib.Axis) calib.Quantity { return a.Displacement.RelaxationTime }),
		rowOf(r, "goodness of fit, p", func(a calib.Axis) cellText { return cellText{Text: probability(a.Displacement.Goodness.PValue)} }),
	}}
	return perAxis(r, "What each estimate rests on", "quantity", spectrum, variance, displacement)
}

// excluded lists the ranges left out of the fit with their reasons.
func excluded(list []calib.Excluded) string {
	var parts []string
	for _, e := range list {
		parts = append(parts, strings.TrimSpace(band(e.Range)+" "+Plain(e.Reason)))
	}
	if len(parts) == 0 {
		return ""
	}
	return "without " + strings.Join(parts, ", ")
}

func whole(f calib.Float) string {
	if !f.Known() {
		return dash
	}
	return fmt.Sprintf("%.0f", float64(f))
}
