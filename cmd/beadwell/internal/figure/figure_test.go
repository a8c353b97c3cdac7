package figure

import (
	"math"
	"slices"
	"strings"
	"testing"

	"beadwell/calib"
	"beadwell/calib/quantity"
	"beadwell/cmd/beadwell/internal/figure/specimen"

	"github.com/google/go-cmp/cmp"
)

func TestAllNamesEveryFigure(t *testing.T) {
	var names []string
	for _, f := range All(specimen.Result()) {
		names = append(names, f.Name)
		if f.Reason != "" {
			t.Errorf("%s is empty: %s", f.Name, f.Reason)
		}
		if f.Title == "" || f.Caption == "" || len(f.Description) < len(f.Caption) {
			t.Errorf("%s: title %q, caption %q, description %q", f.Name, f.Title, f.Caption, f.Description)
		}
	}
	want := []string{"estimates",
		"spectrum-x", "position-x", "displacement-x", "trace-x",
		"spectrum-y", "position-y", "displacement-y", "trace-y",
		"spectrum-z", "position-z", "displacement-z", "trace-z"}
	if diff := cmp.Diff(want, names); diff != "" {
		t.Error(diff)
	}
}

func TestNamesAreUniqueAndSafe(t *testing.T) {
	r := specimen.Result()
	r.Axes[0].Name, r.Axes[1].Name, r.Axes[2].Name = "../x", "x", ""
	seen := map[string]bool{}
	for _, f := range All(r) {
		if seen[f.Name] {
			t.Errorf("%q is the name of two figures", f.Name)
		}
		seen[f.Name] = true
		if fileSafe(f.Name) != "" && slices.ContainsFunc([]byte(f.Name), func(c byte) bool { return c == '/' || c == '.' || c == 0 }) {
			t.Errorf("%q is no safe file name", f.Name)
		}
	}
}

// find returns the series of a name in a panel of a figure.
func find(t *testing.T, f Figure, panelName, name string) (panel, series) {
	t.Helper()
	for _, p := range f.panels {
		for _, s := range p.series {
			if p.name == panelName && s.name == name {
				return p, s
			}
		}
	}
	t.Fatalf("%s has no series %q in panel %q", f.Name, name, panelName)
	return panel{}, series{}
}

func TestSpectrumShowsThePointsOfTheResult(t *testing.T) {
	a := specimen.Result().Axes[0]
	f := spectrum(&a)
	_, used := find(t, f, "spectrum", "used")
	_, unused := find(t, f, "spectrum", "left out")
	if got := len(used.x) + len(unused.x); got != len(a.Spectrum.Points) {
		t.Fatalf("%d points drawn, the result has %d", got, len(a.Spectrum.Points))
	}
	first := slices.IndexFunc(a.Spectrum.Points, func(p calib.SpectrumPoint) bool { return p.Used })
	p := a.Spectrum.Points[first]
	if used.x[0] != float64(p.Frequency) || used.y[0] != float64(p.Power) {
		t.Errorf("first point at (%g, %g), want (%g, %g)", used.x[0], used.y[0], p.Frequency, p.Power)
	}
	// The bar is one standard error of the logarithm: up and down the same factor.
	factor := 1 + float64(p.Standard/p.Model)
	if math.Abs(used.high[0]/used.y[0]-factor) > 1e-12 || math.Abs(used.y[0]/used.low[0]-factor) > 1e-12 { // rounding of one division
		t.Errorf("bar from %g to %g about %g, want a factor of %g", used.low[0], used.high[0], used.y[0], factor)
	}
	_, residual := find(t, f, "residuals", "residual, used")
	if residual.y[0] != float64(p.Residual) {
		t.Errorf("first residual %g, want %g", residual.y[0], p.Residual)
	}
	_, fit := find(t, f, "spectrum", "fit")
	if last := a.Spectrum.Model[len(a.Spectrum.Model)-1]; fit.x[len(fit.x)-1] != float64(last.X) || fit.y[len(fit.y)-1] != float64(last.Y) {
		t.Errorf("the fit ends at (%g, %g), want (%g, %g)", fit.x[len(fit.x)-1], fit.y[len(fit.y)-1], last.X, last.Y)
	}
	for _, panelName := range []string{"spectrum", "residuals"} {
		_, b := find(t, f, panelName, "fit band")
		if b.low[0] != 2 || b.high[0] != 4500 {
			t.Errorf("band of panel %s from %g to %g, want 2 to 4500", panelName, b.low[0], b.high[0])
		}
		if _, e := find(t, f, panelName, "excluded"); len(e.low) != 3 {
			t.Errorf("%d exclusions in panel %s, want 3", len(e.low), panelName)
		}
	}
	if _, c := find(t, f, "spectrum", "corner frequency"); c.x[0] != float64(a.Spectrum.Corner.Value) {
		t.Errorf("corner at %g, want %g", c.x[0], a.Spectrum.Corner.Value)
	}
}

func TestPositionShowsHistogramAndPotential(t *testing.T) {
	r := specimen.Result()
	a := r.Axes[0]
	f := position(r, &a)
	_, bars := find(t, f, "histogram", "positions")
	area := 0.0
	for i := range bars.y {
		area += bars.y[i] * (bars.high[i] - bars.low[i])
	}
	// 65536 positions, of which under 1e-4 lie outside 4.1 standard deviations.
	if math.Abs(area-1) > 1e-3 {
		t.Errorf("area of the histogram %g, want 1", area)
	}
	_, g := find(t, f, "histogram", "Gaussian")
	sigma := float64(a.Equipartition.Potential.Gaussian[1])
	if peak := slices.Max(g.y); math.Abs(peak*sigma*math.Sqrt(2*math.Pi)-1) > 1e-9 { // rounding
		t.Errorf("peak of the Gaussian %g, want 1/(sigma sqrt(2 pi)) = %g", peak, 1/(sigma*math.Sqrt(2*math.Pi)))
	}
	_, h := find(t, f, "potential", "harmonic")
	k, kT := float64(a.Equipartition.Potential.Curvature.Value), float64(r.Medium.ThermalEnergy.Value)
	i, j := 0, len(h.x)/2 // the end and the middle, which is the mean
	want := k * (h.x[i]*h.x[i] - h.x[j]*h.x[j]) / (2 * kT)
	if got := h.y[i] - h.y[j]; math.Abs(got/want-1) > 1e-9 { // rounding
		t.Errorf("the parabola rises by %g kT, want k x^2/2 = %g kT", got, want)
	}
}

func TestDisplacementShowsPlateauAndRelaxationTime(t *testing.T) {
	a := specimen.Result().Axes[1]
	f := displacement(&a)
	_, plateau := find(t, f, "displacement", "plateau")
	_, tau := find(t, f, "displacement", "relaxation time")
	if plateau.y[0] != float64(a.Displacement.Plateau.Value) || tau.x[0] != float64(a.Displacement.RelaxationTime.Value) {
		t.Errorf("plateau %g and relaxation time %g, want %g and %g", plateau.y[0], tau.x[0], a.Displacement.Plateau.Value, a.Displacement.RelaxationTime.Value)
	}
	_, used := find(t, f, "displacement", "used")
	p := a.Displacement.Points[0]
	if used.x[0] != float64(p.Lag) || used.y[0] != float64(p.MSD) || math.Abs(used.high[0]-used.low[0]-2*float64(p.Standard)) > 1e-12*used.y[0] {
		t.Errorf("first lag (%g, %g) with bar %g to %g, want (%g, %g) and %g either way", used.x[0], used.y[0], used.low[0], used.high[0], p.Lag, p.MSD, p.Standard)
	}
}

func TestTraceKeepsExtremes(t *testing.T) {
	r := specimen.Result()
	a := &r.Axes[0]
	a.Trace.High[777], a.Trace.Low[333] = 400e-9, -300e-9
	a.Trace.High[10] = calib.Float(math.NaN())
	f := trace(r, a)
	_, s := find(t, f, "trace", "position")
	if len(s.x) > maxPoints {
		t.Errorf("%d stretches, want at most %d", len(s.x), maxPoints)
	}
	if slices.Max(s.high) != 400e-9 || slices.Min(s.low) != -300e-9 {
		t.Errorf("envelope from %g to %g, want -3e-7 to 4e-7", slices.Min(s.low), slices.Max(s.high))
	}
	at := slices.Index(s.high, 400e-9)
	if want := 777.5 * float64(a.Trace.Step); math.Abs(s.x[at]-want) > 3*float64(a.Trace.Step) { // a group of three stretches
		t.Errorf("the jump is drawn at %g s, want %g s", s.x[at], want)
	}
	_, mark := find(t, f, "trace", "drifting")
	if mark.low[0] != 2.1 || mark.high[0] != 3.0 {
		t.Errorf("finding marked from %g to %g s, want 2.1 to 3.0", mark.low[0], mark.high[0])
	}
	if other := trace(r, &r.Axes[1]); len(other.panels[0].series) != 1 {
		t.Error("a finding of x is marked on y")
	}
}

func TestEstimatesShowEveryLegAndBothIntervals(t *testing.T) {
	r := specimen.Result()
	r.Axes[2].Estimates[3].Stiffness = calib.Withheld("N/m", "no noise floor")
	r.Axes[2].Adopted.Stiffness = calib.Withheld("N/m", "the routes differ")
	f := estimates(r)
	if len(f.panels) != 3 {
		t.Fatalf("%d panels, want one for each of 3 axes", len(f.panels))
	}
	for _, e := range r.Axes[0].Estimates {
		_, s := find(t, f, "x", e.Leg)
		u := e.Stiffness.Combined
		got := []float64{s.x[0], s.innerLow[0], s.inHigh[0], s.low[0], s.high[0]}
		want := []float64{float64(e.Stiffness.Value), float64(u.Interval68[0]), float64(u.Interval68[1]), float64(u.Interval95[0]), float64(u.Interval95[1])}
		if diff := cmp.Diff(want, got); diff != "" {
			t.Errorf("%s: %s", e.Leg, diff)
		}
		if wantGlyph := map[string]mark{calib.RouteDrag: dots, calib.RouteAmplitude: squares}[e.Route]; s.glyph != wantGlyph {
			t.Errorf("%s has glyph %d, want %d: the routes differ in shape", e.Leg, s.glyph, wantGlyph)
		}
	}
	find(t, f, "x", "adopted")
	if len(f.panels[2].notes) != 1 {
		t.Errorf("%d notes on z, want one for the withheld estimate", len(f.panels[2].notes))
	}
	if got, want := f.panels[2].x.label(), "stiffness along z, none adopted (pN/µm)"; got != want {
		t.Errorf("label %q, want %q", got, want)
	}
	for _, s := range f.panels[2].series {
		if s.name == "adopted" {
			t.Error("a withheld value is drawn as adopted")
		}
	}
}

func TestMergedKeepsPowerAndBins(t *testing.T) {
	points := make([]calib.SpectrumPoint, 5000)
	power, bins := 0.0, 0
	for i := range points {
		points[i] = calib.SpectrumPoint{Frequency: calib.Float(i + 1), Power: calib.Float(1 + i%7), Model: 4, Standard: 2, Bins: 1 + i%5, Used: true}
		power += float64(points[i].Power) * float64(points[i].Bins)
		bins += points[i].Bins
	}
	out := merged(points)
	if len(out) > maxMarks {
		t.Fatalf("%d points left, want at most %d", len(out), maxMarks)
	}
	gotPower, gotBins := 0.0, 0
	for _, p := range out {
		gotPower += float64(p.Power) * float64(p.Bins)
		gotBins += p.Bins
	}
	if gotBins != bins || math.Abs(gotPower/power-1) > 1e-12 { // rounding of 5000 sums
		t.Errorf("%d bins with power %g, want %d with %g", gotBins, gotPower, bins, power)
	}
	// Two points of two and six bins: mean power weighted 1 to 3, standard error
	// from independent errors.
	two := join([]calib.SpectrumPoint{{Power: 2, Model: 4, Standard: 2, Bins: 2}, {Power: 6, Model: 4, Standard: 1, Bins: 6}})
	if two.Power != 5 || math.Abs(float64(two.Standard)-math.Sqrt(16+36)/8) > 1e-15 || math.Abs(float64(two.Residual)-8/math.Sqrt(52)) > 1e-15 {
		t.Errorf("joined: power %g, standard %g, residual %g, want 5, %g, %g", two.Power, two.Standard, two.Residual, math.Sqrt(52)/8, 8/math.Sqrt(52))
	}
}

// TestUnitsOfAxes holds the factor of every axis against the unit on its label,
// read by the package that reads units everywhere else.
func TestUnitsOfAxes(t *testing.T) {
	plainUnit := map[string]string{"nm^{2}/Hz": "nm2/Hz", "nm^{2}": "nm2", "pN/µm": "pN/um", "µm": "um", "Hz": "Hz", "nm": "nm", "s": "s", "ms": "ms"}
	checked := 0
	for _, f := range All(specimen.Result()) {
		for _, p := range f.panels {
			for _, s := range []scale{p.x, p.y} {
				unit, known := plainUnit[s.unit]
				if !known {
					continue
				}
				want, err := quantity.Convert(1, unit)
				if err != nil {
					t.Fatal(err)
				}
				checked++
				if math.Abs(s.factor/want-1) > 1e-12 { // rounding of the factor
					t.Errorf("%s, %s: factor %g, want %g", f.Name, s.label(), s.factor, want)
				}
			}
		}
	}
	if checked < 20 {
		t.Errorf("only %d axes had a unit to check", checked)
	}
}

// A trace without a length keeps the unit of the detector, in the figure and in its words.
func TestTraceInVolts(t *testing.T) {
	r := &calib.Result{Axes: []calib.Axis{{Name: "x", Trace: calib.Trace{Step: 1, Low: []calib.Float{-0.02, -0.01}, High: []calib.Float{0.01, 0.03}, Unit: "V"}}}}
	f := trace(r, &r.Axes[0])
	if y := f.panels[0].y; y.unit != "V" || y.si != "V" || y.factor != 1 || y.low > -0.02 || y.high < 0.03 || y.high > 0.1 {
		t.Errorf("scale %+v", y)
	}
	if !strings.Contains(f.Description, "between −0.02 V and 0.03 V") {
		t.Errorf("words %q", f.Description)
	}
}

func TestPlateauLabelSaysWhatWasRemoved(t *testing.T) {
	a := specimen.Result().Axes[0]
	if _, s := find(t, displacement(&a), "displacement", "plateau"); strings.Contains(s.label, "removed") {
		t.Errorf("label %q though the curve ends on the plateau", s.label)
	}
	a.Displacement.Plateau.Value *= 1.4
	if _, s := find(t, displacement(&a), "displacement", "plateau"); !strings.Contains(s.label, "blur and noise removed") {
		t.Errorf("label %q though the curve ends below the plateau", s.label)
	}
}

func TestRelaxationTimeBelowTheFirstLagIsShown(t *testing.T) {
	a := specimen.Result().Axes[0]
	for factor, want := range map[calib.Float]bool{0.2: true, 1e-9: false} {
		a.Displacement.RelaxationTime = calib.Exact(float64(a.Displacement.Points[0].Lag*factor), "s")
		f := displacement(&a)
		if n := f.panels[0].x.normalised(float64(a.Displacement.RelaxationTime.Value)); (n >= 0) != want {
			t.Errorf("a relaxation time of %g first lags stands at %g of the axis", factor, n)
		}
	}
}

// What was not used of a recording is marked on the trace of every axis, and told in
// words; the finding that says so is not marked once more.
func TestTraceShowsWhatWasNotUsed(t *testing.T) {
	r := specimen.Result()
	from, to := calib.Float(1.5), calib.Float(4)
	r.Recording.UsedFrom, r.Recording.UsedTo = &from, &to
	r.Findings = []calib.Finding{{Code: calib.CodeGoodPart, Severity: calib.Note, Range: &[2]calib.Float{from, to}}}
	for i := range r.Axes {
		f := trace(r, &r.Axes[i])
		var spans [][2]float64
		for _, s := range f.panels[0].series {
			if s.mark == strip {
				spans = append(spans, [2]float64{s.low[0], s.high[0]})
			}
		}
		end := float64(r.Axes[i].Trace.Step) * float64(len(r.Axes[i].Trace.Low))
		if len(spans) != 2 || spans[0] != [2]float64{0, 1.5} || spans[1][0] != 4 || math.Abs(spans[1][1]-end) > 1e-9 {
			t.Errorf("axis %s: marked %v, want 0 to 1.5 and 4 to %g", r.Axes[i].Name, spans, end)
		}
		if !strings.Contains(f.Description, "used only from 1.5 s to 4 s") {
			t.Errorf("description %q", f.Description)
		}
	}
}
