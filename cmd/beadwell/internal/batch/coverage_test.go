package batch

import (
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"beadwell/calib"
	"beadwell/calib/drag"
	"beadwell/calib/series"
)

// folders is how many are simulated of each kind. A coverage may miss 0.95 by 2.8 of its standard errors: by 4.3 % with 200 folders, and by 1.9 % with
// -folders 1000, which takes a minute or two. The seeds are fixed.
var folders = flag.Int("folders", 200, "simulated folders of TestCoverageOverFolders")

// What a simulated folder holds, and how well its numbers are known.
const (
	trueRadius    = 0.51e-6 // m
	trueViscosity = 0.91e-3 // Pa s
	trueSurface   = -0.35e-6
	perWatt       = 0.8e-3 // N/(m W)
	trueSlope     = -0.02e6
	scatter       = 0.012 // relative, of each recording by itself
	ofInputs      = 0.015 // relative, what the inputs have in common
	ofDiameter    = 0.02
	ofScale       = 0.02
	ofMeter       = 0.03
)

// drawn is a number whose truth is known: its own scatter, and the factor that all of the folder share.
func drawn(r *rand.Rand, truth, shared, own, sharedU float64) Number {
	v := truth * (1 + shared) * math.Exp(own*r.NormFloat64())
	return Number{Value: calib.Float(v), Statistical: calib.Float(own * v), Combined: calib.Float(math.Hypot(own, sharedU) * v)}
}

// stated is an input whose statement is off by what is stated of it.
func stated(value, u float64) Number {
	return Number{Value: calib.Float(value), Statistical: unknown.Value, Combined: calib.Float(u * value)}
}

// powerFolder is a folder of six powers; the meter is off by one factor.
func powerFolder(r *rand.Rand, intercept float64) []Row {
	shared, meter := ofInputs*r.NormFloat64(), 1+ofMeter*r.NormFloat64()
	var rows []Row
	for i := range 6 {
		power := 0.02 * float64(i+1)
		row := emptyRow(fmt.Sprintf("p%d.csv", i), calib.Consistent, "")
		row.Diameter, row.Height, row.Power = stated(2*trueRadius, 0), stated(6e-6, 0), stated(power*meter, ofMeter)
		row.Axes = []RowAxis{{Axis: "x", Stiffness: drawn(r, intercept+perWatt*power, shared, scatter, ofInputs), Corner: unknown, Drag: unknown, DragRatio: unknown,
			FreeDragRatio: unknown, Sensitivity: unknown, WallFactor: unknown}}
		rows = append(rows, row)
	}
	return rows
}

// heightFolder is a folder of nine heights with a hidden surface; diameter, scale and length are off by what is stated of them.
func heightFolder(t *testing.T, r *rand.Rand, scale float64) []Row {
	t.Helper()
	shared, diameter, scaleStated := ofInputs*r.NormFloat64(), 2*trueRadius*(1+ofDiameter*r.NormFloat64()), scale*(1+ofScale*r.NormFloat64())
	viscosity := trueViscosity * (1 + 0.01*r.NormFloat64())
	var rows []Row
	for i, h := range []float64{0.66e-6, 0.75e-6, 0.9e-6, 1.1e-6, 1.4e-6, 1.9e-6, 2.8e-6, 4.5e-6, 8e-6} {
		factor, err := drag.Parallel(h / trueRadius)
		if err != nil {
			t.Fatal(err)
		}
		gamma := drag.Stokes(trueViscosity, trueRadius) * factor
		row := emptyRow(fmt.Sprintf("h%d.csv", i), calib.Consistent, "")
		row.Diameter, row.Height, row.HeightScale = stated(diameter, ofDiameter), stated(trueSurface+h/scale, 0), stated(scaleStated, ofScale)
		row.Viscosity = stated(viscosity, 0.01)
		k := 40e-6 * math.Exp(trueSlope*h)
		row.Axes = []RowAxis{{Axis: "x", Drag: drawn(r, gamma, shared, scatter, ofInputs), Corner: drawn(r, k/(2*math.Pi*gamma), 0, scatter/2, 0),
			Stiffness: unknown, DragRatio: unknown, FreeDragRatio: unknown, Sensitivity: unknown, WallFactor: unknown}}
		rows = append(rows, row)
	}
	return rows
}

// The 95 % intervals of the series hold the truth in 95 % of folders, and the numbers are unbiased: the mean of z is 0 within four
// standard errors and a tenth, for the curvature of the wall's effect, which is of second order in the uncertainties. Inputs are off by their stated
// uncertainties in each folder.
func TestCoverageOverFolders(t *testing.T) {
	heights := func(scale float64, change func(*Row)) func(*rand.Rand) []Row {
		return func(r *rand.Rand) []Row {
			rows := heightFolder(t, r, scale)
			for i := range rows {
				change(&rows[i])
			}
			return rows
		}
	}
	asStated := func(*Row) {}
	for _, c := range []struct {
		name   string
		folder func(*rand.Rand) []Row
		opt    SeriesOptions
		kind   string
		truths map[string]float64
	}{
		{"power", func(r *rand.Rand) []Row { return powerFolder(r, 0) }, SeriesOptions{}, kindPower,
			map[string]float64{"stiffness per power, through the origin": perWatt, "slope, with an intercept": perWatt, "intercept": 0}},
		{"power with an intercept", func(r *rand.Rand) []Row { return powerFolder(r, 4e-6) }, SeriesOptions{}, kindPower,
			map[string]float64{"slope, with an intercept": perWatt, "intercept": 4e-6}},
		{"scale stated", heights(0.82, asStated), SeriesOptions{}, kindDrag,
			map[string]float64{"reading at the surface": trueSurface, "viscosity": trueViscosity}},
		{"scale fitted", heights(0.82, func(row *Row) { row.HeightScale, row.FitScale = unknown, true }), SeriesOptions{}, kindDrag,
			map[string]float64{"reading at the surface": trueSurface, "height scale": 0.82, "viscosity": trueViscosity}},
		{"diameter fitted", heights(0.82, asStated), SeriesOptions{FitDiameter: true}, kindDrag,
			map[string]float64{"reading at the surface": trueSurface, "radius of the bead": trueRadius}},
		{"both fitted", heights(0.82, func(row *Row) { row.HeightScale, row.FitScale = unknown, true }), SeriesOptions{FitDiameter: true}, kindDrag,
			map[string]float64{"reading at the surface": trueSurface, "height scale": 0.82, "radius of the bead": trueRadius}},
		{"corner, slope fitted", heights(0.82, asStated), SeriesOptions{StiffnessSlope: &series.Input{Free: true}}, kindCorner,
			map[string]float64{"reading at the surface": trueSurface, "change of ln(stiffness) with height": trueSlope}},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			r := rand.New(rand.NewPCG(21, 7))
			hits, sums := map[string]int{}, map[string]float64{}
			for range *folders {
				s := newSummary([]entry{{Rows: c.folder(r)}}, nil, c.opt)
				for _, v := range valuesOf(t, s, c.kind) {
					if truth, asked := c.truths[v.Name]; asked {
						sums[v.Name] += (float64(v.Value) - truth) / float64(v.Combined)
						if float64(v.Interval[0]) <= truth && truth <= float64(v.Interval[1]) {
							hits[v.Name]++
						}
					}
				}
			}
			n := float64(*folders)
			bound := 2.8 * math.Sqrt(0.05*0.95/n)
			for name := range c.truths {
				share, mean := float64(hits[name])/n, sums[name]/n
				t.Logf("%s: coverage %.3f, mean z %.3f", name, share, mean)
				if math.Abs(share-0.95) > bound {
					t.Errorf("the interval of the %s holds the truth in %.3f of folders, want 0.95 within %.3f", name, share, bound)
				}
				if math.Abs(mean) > 4/math.Sqrt(n)+0.1 {
					t.Errorf("the mean z of the %s is %.3f", name, mean)
				}
			}
		})
	}
}

// valuesOf are the numbers of the only series of a kind.
func valuesOf(t *testing.T, s *Summary, kind string) []SeriesValue {
	t.Helper()
	for _, one := range s.Series {
		if one.Kind == kind {
			if one.Reason != "" {
				t.Fatal(one.Reason)
			}
			return one.Values
		}
	}
	t.Fatalf("no series of %s", kind)
	return nil
}
