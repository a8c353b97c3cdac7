package figure

// Several is the kind of a figure over several recordings.
const Several Kind = "several"

// AxisOf says what one axis of a figure over several recordings shows.
type AxisOf struct {
	Quantity string  // "laser power"
	Unit     string  // as shown: "mW"
	SI       string  // "W"
	Factor   float64 // shown over SI
}

// Recordings is what a figure over several recordings is drawn from. Numbers are SI.
type Recordings struct {
	Name        string // fit for a file name
	Title       string
	Description string // its first sentence is the caption
	Across, Up  AxisOf
	X, Y        []float64
	Low, High   []float64       // ends of the bars
	Outlier     []bool          // shown as rings
	Curve       [][2]float64    // the fit
	Limits      [2][][2]float64 // dashed lines, such as those of a control chart
	Upright     float64         // a line up at this place, named UprightName; NaN: none
	UprightName string
}

// OfRecordings draws numbers of several recordings with the fit through them.
func OfRecordings(r Recordings) Figure {
	f := Figure{Name: "several-" + fileSafe(r.Name), Kind: Several, Title: clean(r.Title), height: 62}
	across, up := newExtent(), newExtent()
	plain := series{name: "recordings", mark: dots, ink: data}
	apart := series{name: "outliers", mark: rings, ink: ampl}
	for i := range r.X {
		if !finite(r.X[i], r.Y[i]) {
			continue
		}
		into := &plain
		if r.Outlier[i] {
			into = &apart
		}
		into.x, into.y = append(into.x, r.X[i]), append(into.y, r.Y[i])
		into.low, into.high = append(into.low, r.Low[i]), append(into.high, r.High[i])
		across.show(r.X[i])
		up.show(r.Y[i], r.Low[i], r.High[i])
	}
	fit := series{name: "fit", mark: curve, ink: adopted}
	for _, at := range r.Curve {
		fit.x, fit.y = append(fit.x, at[0]), append(fit.y, at[1])
		across.show(at[0])
		up.show(at[1])
	}
	var dashed []series
	for _, line := range r.Limits {
		limit := series{name: "limit", mark: dashes, ink: rule}
		for _, at := range line {
			limit.x, limit.y = append(limit.x, at[0]), append(limit.y, at[1])
			up.show(at[1])
		}
		dashed = append(dashed, limit)
	}
	if across.empty() || up.empty() {
		return f.empty("no recording of the series has the number")
	}
	across.show(r.Upright)
	p := panel{name: "series", share: 1}
	p.x = scale{quantity: r.Across.Quantity, unit: r.Across.Unit, si: r.Across.SI, factor: r.Across.Factor}.over(across)
	p.y = scale{quantity: r.Up.Quantity, unit: r.Up.Unit, si: r.Up.SI, factor: r.Up.Factor}.over(up)
	if finite(r.Upright) {
		p.add(series{name: r.UprightName, mark: upright, ink: rule, x: []float64{r.Upright}, label: r.UprightName})
	}
	for _, limit := range dashed {
		p.add(limit)
	}
	p.add(fit)
	p.add(plain)
	p.add(apart)
	f.panels = []panel{p}
	f.key = []keyItem{{"recordings", dots, data}}
	if len(apart.x) > 0 {
		f.key = append(f.key, keyItem{"outliers", rings, ampl})
	}
	if len(fit.x) > 0 {
		f.key = append(f.key, keyItem{"fit", curve, adopted})
	}
	if len(r.Limits[0]) > 0 {
		f.key = append(f.key, keyItem{"limits", dashes, rule})
	}
	return f.described(r.Description)
}
