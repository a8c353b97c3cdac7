package calib

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"beadwell/calib/relaxation"
)

// FlowPart is what one recording with a stage at constant speed gives to a straight line through several.
type FlowPart struct {
	Name    string `json:"name"` // of the recording
	Bead    string `json:"bead,omitempty"`
	Axis    string `json:"axis"`
	Trap    string `json:"trap"` // the settings that parts of one line share, in words
	Slowest Float  `json:"slowest_m_per_s"`
	Fastest Float  `json:"fastest_m_per_s"`
	Strokes int    `json:"strokes"`
	Slope   Float  `json:"slope_s"` // gamma/kappa by this recording alone, s
	SlopeU  Float  `json:"slope_standard_uncertainty_s"`
	Offset  Float  `json:"intercept_m"`
	OffsetU Float  `json:"intercept_standard_uncertainty_m"`
	Chi     Float  `json:"chi_square"` // of its own line
	Freedom int    `json:"degrees_of_freedom"`
	Drag    Float  `json:"drag_N_s_per_m"` // computed
	InputsU Float  `json:"inputs_uncertainty"`
	Driven  Float  `json:"driven_stiffness_N_per_m"` // without viscosity, by this recording alone; null when withheld
	DrivenU Float  `json:"driven_relative_statistical"`
	DrivenI Float  `json:"driven_relative_inputs"`
}

// FlowJoin is one straight line of displacement against speed through several recordings of one trap: every recording has an
// intercept and a drift of its own, and all have the slope gamma/kappa (docs/method.md, Eq. 58).
type FlowJoin struct {
	Axis      string     `json:"axis"`
	Trap      string     `json:"trap"`            // what the recordings share, in words
	Slope     Quantity   `json:"slope"`           // gamma/kappa [s]
	Intercept Quantity   `json:"intercept"`       // mean of the intercepts, each from the mean of its record [m]
	Goodness  Goodness   `json:"goodness_of_fit"` // of all strokes about the one line
	Between   Test       `json:"between"`         // whether the recordings have one slope
	Stiffness Quantity   `json:"stiffness"`       // computed drag over the slope [N/m]
	Driven    Quantity   `json:"driven"`          // without viscosity, mean of the recordings [N/m]
	Text      string     `json:"text"`
	Parts     []FlowPart `json:"parts"`
}

// shared are the settings that recordings of one trap have in common. Rate, exposure, band and the motion of the stage may
// differ.
var shared = []string{"bead.diameter", "medium.fluid", "medium.viscosity", "medium.temperature", "chamber.height", "chamber.depth",
	"laser.power", "laser.heating", "recording.pixel", "recording.sensitivity"}

// FlowParts are the lines of a result that can be joined with those of others: of axes that follow a stage at constant speed
// and whose length scale is not taken from that motion.
func FlowParts(r *Result) []FlowPart {
	var parts []FlowPart
	for _, a := range r.Axes {
		d := a.Driven
		if d == nil || d.Flow == nil || !a.estimate(LegFlow).Known() {
			continue
		}
		f, k := d.Flow, a.estimate(LegFlow)
		p := FlowPart{Name: r.Input.Name, Bead: r.Input.Bead, Axis: a.Name, Trap: trapOf(r, a.Name), Strokes: len(f.Points),
			Slope: f.Slope.Value, SlopeU: f.Slope.Statistical.Standard, Offset: f.Intercept.Value, OffsetU: f.Intercept.Statistical.Standard,
			Chi: f.Goodness.ChiSquare, Freedom: f.Goodness.DegreesOfFreedom, Drag: a.Drag.Value, InputsU: inputsOf(k),
			Driven: Float(math.NaN()), DrivenU: Float(math.NaN()), DrivenI: Float(math.NaN()), Slowest: Float(math.Inf(1))}
		for _, q := range f.Points {
			v := Float(math.Abs(float64(q.Speed)))
			p.Slowest, p.Fastest = min(p.Slowest, v), max(p.Fastest, v)
		}
		if q := a.estimate(LegDriven); q.Known() {
			p.Driven, p.DrivenU, p.DrivenI = q.Value, q.Statistical.Standard/q.Value, inputsOf(q)
		}
		parts = append(parts, p)
	}
	return parts
}

// estimate is the estimate of a name; withheld when there is none.
func (a Axis) estimate(leg string) Quantity {
	for _, e := range a.Estimates {
		if e.Leg == leg {
			return e.Stiffness
		}
	}
	return Withheld("N/m", "no such estimate")
}

// inputsOf is the relative uncertainty of a quantity by the inputs.
func inputsOf(q Quantity) Float {
	c, s := float64(q.Combined.Standard), float64(q.Statistical.Standard)
	return Float(math.Sqrt(math.Max(0, c*c-s*s)) / float64(q.Value))
}

// trapOf lists the settings that say which trap it is.
func trapOf(r *Result, axis string) string {
	var words []string
	for _, s := range r.Settings {
		if slices.Contains(shared, s.Key) && (s.Axis == "" || s.Axis == axis) {
			words = append(words, s.Key+" = "+s.Text)
		}
	}
	return strings.Join(words, ", ")
}

// JoinFlow joins the lines of recordings that share axis and trap, in the order of the first of each. A recording that has
// no companion gives none.
func JoinFlow(parts []FlowPart) []FlowJoin {
	joins := []FlowJoin{}
	var order []string
	groups := map[string][]FlowPart{}
	for _, p := range parts {
		key := p.Axis + "\n" + p.Bead + "\n" + p.Trap
		if groups[key] == nil {
			order = append(order, key)
		}
		groups[key] = append(groups[key], p)
	}
	for _, key := range order {
		if group := groups[key]; len(group) > 1 {
			joins = append(joins, joinFlow(group))
		}
	}
	return joins
}

// flowLevel is the p-value of one slope below which no joined stiffness is given.
const flowLevel = familyLevel

// joinFlow makes one line. With an intercept and a drift for each recording, the least-squares slope through all strokes is the
// weighted mean of the slopes of the recordings, and the chi-square that of each plus that of the slopes about their mean.
func joinFlow(parts []FlowPart) FlowJoin {
	j := FlowJoin{Axis: parts[0].Axis, Trap: parts[0].Trap, Parts: parts}
	slope, u, between := weightedMean(parts, func(p FlowPart) (Float, Float) { return p.Slope, p.SlopeU })
	offset, offsetU, _ := weightedMean(parts, func(p FlowPart) (Float, Float) { return p.Offset, p.OffsetU })
	j.Slope, j.Intercept = around(slope, u, "s"), around(offset, offsetU, "m")
	chi, dof := between, len(parts)-1
	inputs, strokes := 0.0, 0
	slowest, fastest := math.Inf(1), 0.0
	for _, p := range parts {
		chi += float64(p.Chi)
		dof += p.Freedom
		inputs = math.Max(inputs, float64(p.InputsU))
		strokes += p.Strokes
		slowest, fastest = math.Min(slowest, float64(p.Slowest)), math.Max(fastest, float64(p.Fastest))
	}
	j.Goodness = Goodness{ChiSquare: Float(chi), DegreesOfFreedom: dof, PValue: survival(chi, dof)}
	p := survival(between, len(parts)-1)
	j.Between = Test{ChiSquare: Float(between), DegreesOfFreedom: len(parts) - 1, PValue: p, ChiSquareCombined: Float(between), PValueCombined: p,
		MeanDifference: Float(math.NaN())}
	relation := "agree with one line"
	if p < flowLevel {
		relation = "do not lie on one line"
	}
	j.Text = fmt.Sprintf("%d recordings with %d strokes from %.3g to %.3g um/s %s (%s for one slope, %s for all strokes)",
		len(parts), strokes, slowest*1e6, fastest*1e6, relation, pText(float64(p)), pText(float64(j.Goodness.PValue)))
	if p < flowLevel {
		reason := "the recordings do not have one slope: the trap, the height or the motion of the stage changed between them, or the largest displacement is beyond the linear range"
		j.Stiffness, j.Driven = Withheld("N/m", reason), Withheld("N/m", reason)
		return j
	}
	sd := u / math.Abs(slope)
	o := relaxation.Normal(sd)
	j.Stiffness = exponential(math.Log(float64(parts[0].Drag)/math.Abs(slope)), sd, o, math.Hypot(sd, inputs), o.Widened(inputs), "N/m")
	j.Driven = joinDriven(parts)
	return j
}

// joinDriven is the weighted mean of what the recordings give without viscosity, in the logarithm; the inputs are common.
func joinDriven(parts []FlowPart) Quantity {
	known := slices.DeleteFunc(slices.Clone(parts), func(p FlowPart) bool { return !p.Driven.Known() })
	if len(known) == 0 {
		return Withheld("N/m", "no recording gives it")
	}
	value, sd, _ := weightedMean(known, func(p FlowPart) (Float, Float) { return Float(math.Log(float64(p.Driven))), p.DrivenU })
	inputs := 0.0
	for _, p := range known {
		inputs = math.Max(inputs, float64(p.DrivenI))
	}
	o := relaxation.Normal(sd)
	return exponential(value, sd, o, math.Hypot(sd, inputs), o.Widened(inputs), "N/m")
}

// weightedMean returns mean, standard uncertainty and chi-square of values with uncertainties.
func weightedMean(parts []FlowPart, of func(FlowPart) (value, u Float)) (mean, u, chi float64) {
	sum, weights := 0.0, 0.0
	for _, p := range parts {
		v, s := of(p)
		w := 1 / float64(s*s)
		sum, weights = sum+float64(w*float64(v)), weights+w
	}
	mean = sum / weights
	for _, p := range parts {
		v, s := of(p)
		z := (float64(v) - mean) / float64(s)
		chi += float64(z * z)
	}
	return mean, 1 / math.Sqrt(weights), chi
}
