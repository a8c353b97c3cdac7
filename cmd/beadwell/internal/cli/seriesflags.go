package cli

import (
	"strings"

	"github.com/spf13/pflag"

	"beadwell/calib/quantity"
	"beadwell/calib/series"
	"beadwell/cmd/beadwell/internal/batch"
)

// seriesFlags are choices for the series, as they were given.
type seriesFlags struct {
	scale       string // of collect; batch has it as a setting
	slope       string
	fitDiameter bool
}

func (f *seriesFlags) add(flags *pflag.FlagSet) {
	flags.BoolVar(&f.fitDiameter, "fit-diameter", false, "fit the bead's diameter to the series against height too")
	flags.StringVar(&f.slope, "stiffness-slope", "", "change of the stiffness with height, such as `'-1.5(5) %/um'`, or fit; it allows series of corner frequencies")
}

// options turns the flags into those of the series.
func (f *seriesFlags) options() (batch.SeriesOptions, error) {
	o := batch.SeriesOptions{FitDiameter: f.fitDiameter}
	switch f.scale {
	case "":
	case batch.FitWord:
		o.Scale = series.Input{Value: 1, Free: true}
	default:
		v, err := quantity.Parse(f.scale, quantity.Dimensionless)
		if err != nil || v.SI == 0 {
			return o, usageError("write it like --height-scale '0.82(2)', or fit", "--height-scale %q is no ratio of two lengths", f.scale)
		}
		o.Scale = series.Input{Value: v.SI, Uncertainty: v.U}
	}
	switch f.slope {
	case "":
	case batch.FitWord:
		o.StiffnessSlope = &series.Input{Free: true}
	default:
		number, hasUnit := strings.CutSuffix(strings.TrimSpace(f.slope), "%/um")
		v, err := quantity.Parse(strings.TrimSpace(number), quantity.Dimensionless)
		if err != nil || !hasUnit {
			return o, usageError("write it like --stiffness-slope '-1.5(5) %/um', or fit", "--stiffness-slope %q is no change per length", f.slope)
		}
		const perMetre = 1e4 // 1 %/um in 1/m
		o.StiffnessSlope = &series.Input{Value: v.SI * perMetre, Uncertainty: v.U * perMetre}
	}
	return o, nil
}
