package calib

import (
	"fmt"
	"math"
	"slices"

	"beadwell/calib/drag"
	"beadwell/calib/medium"
	"beadwell/calib/session"
)

// influence is one input with a standard uncertainty and what it moves, all in
// logarithms: a change of one standard uncertainty changes ln gamma by Drag, ln kT by
// Energy, and the logarithm of every length that was recorded by Length.
type influence struct {
	name   string
	value  float64
	unit   string
	u      float64 // standard uncertainty, unit of value
	base   float64 // what d ln(input) is taken of: the value, or the absolute temperature
	drag   float64 // d ln gamma
	energy float64 // d ln kT
	length float64 // d ln(recorded length)
	apart  bool    // it acts on the drag by another recording alone
}

// physics is what is computed for one axis before its record is looked at.
type physics struct {
	kT, gamma   float64 // J, N s/m
	influences  []influence
	wall        drag.Wall
	walled      bool
	medium      Medium
	bead        Bead
	radius      float64 // m
	density     float64 // of the liquid, kg/m3
	viscosity   float64 // Pa s
	height      float64 // m, +Inf when far
	beadDensity float64 // kg/m3; NaN when not stated
	parallel    bool
	fluid       medium.Fluid // zero when the viscosity was stated
	chamber     drag.Chamber
}

// number returns a quantity setting for an axis; ok is false when it is not set.
func number(set *session.Settings, key, axis string) (session.Setting, bool) {
	s, ok := set.Lookup(key, axis)
	if !ok || s.Word != "" {
		return s, false
	}
	return s, true
}

// newPhysics evaluates liquid, bead and walls for one axis.
func newPhysics(set *session.Settings, axis string) (*physics, error) {
	p := &physics{height: math.Inf(1)}
	diameter, ok := number(set, "bead.diameter", "")
	if !ok {
		return nil, &SettingError{Key: "bead.diameter", Problem: "is not given, and it has no default",
			Remedy: `give it with --diameter "1.02(3) um", or in session.toml as [bead] diameter = "1.02(3) um"`}
	}
	if diameter.Value.U > widestDiameter*diameter.Value.SI {
		return nil, &SettingError{Key: "bead.diameter", Where: diameter.Where, Problem: fmt.Sprintf("has a standard uncertainty of %.0f %%, with which nothing can be computed", 100*diameter.Value.U/diameter.Value.SI),
			Remedy: `the digits in brackets are those of the last places: 1.02(3) um is 1.02 um with 0.03 um`}
	}
	p.radius = diameter.Value.SI / 2
	p.bead.Diameter = input(diameter.Value.SI, diameter.Value.U, "m")
	temperature, err := p.setTemperature(set)
	if err != nil {
		return nil, err
	}
	if err := p.setLiquid(set, temperature); err != nil {
		return nil, err
	}
	if err := p.setWall(set, axis, diameter); err != nil {
		return nil, err
	}
	p.gamma = drag.Stokes(p.viscosity, p.radius) * p.wall.Factor
	return p, nil
}

// Largest standard uncertainties that are taken: beyond them a propagation by first
// derivatives means nothing (the viscosity of water halves within 30 K).
const (
	widestTemperature = 20.0 // K
	widestDiameter    = 0.3  // relative
)

// kelvin is the temperature at the trap with what it depends on.
type kelvin struct {
	value   float64
	sources []influence // value, unit, u; drag and energy are filled in later
}

// setTemperature adds the laser's heating to the chamber temperature.
func (p *physics) setTemperature(set *session.Settings) (kelvin, error) {
	t, ok := number(set, "medium.temperature", "")
	if !ok {
		return kelvin{}, &SettingError{Key: "medium.temperature", Problem: "is not given", Remedy: `give it with --temperature "24.5(5) C"`}
	}
	if t.Value.U > widestTemperature {
		return kelvin{}, &SettingError{Key: "medium.temperature", Where: t.Where, Problem: fmt.Sprintf("has a standard uncertainty of %g K, with which nothing can be computed", t.Value.U),
			Remedy: `the digits in brackets are those of the last places: 24.5(5) C is 24.5 C with 0.5 K`}
	}
	k := kelvin{value: t.Value.SI}
	k.sources = append(k.sources, influence{name: "temperature", value: t.Value.SI, unit: "K", u: t.Value.U})
	heating, hasHeating := number(set, "laser.heating", "")
	power, hasPower := number(set, "laser.power", "")
	if hasHeating && hasPower && roleOf(set) != RoleFree { // a free bead was recorded with the laser off
		rise := heating.Value.SI * power.Value.SI
		k.value += rise
		k.sources[0].value = k.value
		k.sources = append(k.sources,
			influence{name: "laser heating", value: heating.Value.SI, unit: "K/W", u: heating.Value.U},
			influence{name: "laser power", value: power.Value.SI, unit: "W", u: power.Value.U})
	}
	p.kT = medium.Boltzmann * k.value
	// what each source does to the temperature, in kelvin for one standard uncertainty
	for i := range k.sources {
		s := &k.sources[i]
		s.base = s.value
		switch s.name {
		case "laser heating":
			s.energy = s.u * power.Value.SI / k.value
		case "laser power":
			s.energy = s.u * heating.Value.SI / k.value
		default:
			s.energy = s.u / k.value
		}
	}
	u := 0.0
	for _, s := range k.sources {
		u = math.Hypot(u, s.energy*k.value)
	}
	p.medium.Temperature = input(k.value, u, "K")
	p.medium.ThermalEnergy = input(p.kT, medium.Boltzmann*u, "J")
	return k, nil
}

// setLiquid takes a stated viscosity, or that of a fluid at the temperature.
func (p *physics) setLiquid(set *session.Settings, t kelvin) error {
	if v, ok := number(set, "medium.viscosity", ""); ok {
		p.viscosity = v.Value.SI
		p.medium.Fluid = "a liquid"
		p.medium.Source = "viscosity stated by the user"
		p.medium.Viscosity = input(v.Value.SI, v.Value.U, "Pa s")
		p.medium.Density = Withheld("kg/m3", "not stated")
		p.density = math.NaN()
		if d, ok := number(set, "medium.density", ""); ok {
			p.density = d.Value.SI
			p.medium.Density = input(d.Value.SI, d.Value.U, "kg/m3")
		}
		p.influences = append(t.sources, influence{name: "viscosity", value: v.Value.SI, unit: "Pa s", u: v.Value.U, base: v.Value.SI, drag: v.Value.U / v.Value.SI})
		return nil
	}
	text, _ := set.Lookup("medium.fluid", "")
	fluid, err := medium.ParseFluid(fluidText(text))
	if err != nil {
		return &SettingError{Key: "medium.fluid", Where: text.Where, Problem: err.Error()}
	}
	prop, err := fluid.At(t.value)
	if err != nil {
		return &SettingError{Key: "medium.temperature", Problem: err.Error()}
	}
	p.viscosity, p.density, p.fluid = prop.Viscosity, prop.Density, fluid
	p.medium.Fluid, p.medium.Source = fluidText(text), prop.Source
	u := prop.ViscosityU
	for i := range t.sources {
		s := &t.sources[i]
		s.drag = s.energy * t.value * prop.ViscosityTemp
		u = math.Hypot(u, s.drag)
	}
	p.medium.Viscosity = input(prop.Viscosity, u*prop.Viscosity, "Pa s")
	p.medium.Density = input(prop.Density, prop.DensityU*prop.Density, "kg/m3")
	p.influences = append(t.sources, influence{name: "viscosity correlation", value: prop.Viscosity, unit: "Pa s",
		u: prop.ViscosityU * prop.Viscosity, base: prop.Viscosity, drag: prop.ViscosityU})
	return nil
}

func fluidText(s session.Setting) string {
	if s.Word != "" {
		return s.Word
	}
	return s.Text
}

// setWall evaluates the wall factor with its dependence on diameter, height and depth.
func (p *physics) setWall(set *session.Settings, axis string, diameter session.Setting) error {
	perpendicular, _ := set.Lookup("fit.perpendicular", "")
	p.parallel = perpendicular.Word != axis
	p.beadDensity = math.NaN()
	if d, ok := number(set, "bead.density", ""); ok {
		p.beadDensity = d.Value.SI
	}
	c := drag.Chamber{Radius: p.radius, Height: math.Inf(1), Perpendicular: !p.parallel}
	height, hasHeight := number(set, "chamber.height", "")
	depth, hasDepth := number(set, "chamber.depth", "")
	p.bead.Height = Withheld("m", "far from any surface")
	if hasHeight {
		c.Height, p.walled, p.height = height.Value.SI, true, height.Value.SI
		p.bead.Height = input(height.Value.SI, height.Value.U, "m")
	}
	if hasDepth && hasHeight {
		c.Depth = depth.Value.SI
	}
	if c.Height <= p.radius {
		return &SettingError{Key: "chamber.height", Where: height.Where,
			Problem: fmt.Sprintf("%.4g um is not above the radius of the bead, %.4g um: the bead would touch the surface", c.Height*1e6, p.radius*1e6),
			Remedy:  "give the height of the bead's centre above the nearer surface"}
	}
	w, err := c.Wall()
	if err != nil {
		return &SettingError{Key: "chamber.height", Where: height.Where, Problem: err.Error(),
			Remedy: "give the height of the bead's centre above the nearer surface; it must exceed the radius"}
	}
	p.wall, p.chamber = w, c
	d := diameter.Value
	p.influences = append(p.influences, influence{name: "bead diameter", value: d.SI, unit: "m", u: d.U, base: d.SI, drag: (1 + w.LogSlopeRadius) * d.U / d.SI})
	if hasHeight {
		h := height.Value
		p.influences = append(p.influences, influence{name: "height", value: h.SI, unit: "m", u: h.U, base: h.SI, drag: w.LogSlopeHeight * h.U / h.SI})
	}
	if c.Depth > 0 {
		p.influences = append(p.influences, influence{name: "depth", value: c.Depth, unit: "m", u: depth.Value.U, base: c.Depth, drag: w.LogSlopeDepth * depth.Value.U / c.Depth})
	}
	if w.FactorU > 0 {
		p.influences = append(p.influences, influence{name: wallModel, value: w.Factor, unit: "1", u: w.FactorU * w.Factor, base: w.Factor, drag: w.FactorU})
	}
	return nil
}

// withLength adds the length scale of an axis: value is the length per recorded unit.
func (p *physics) withLength(name, unit string, value, u float64) {
	p.influences = append(p.influences, influence{name: name, value: value, unit: unit, u: u, base: value, length: u / value})
}

// systematics returns the covariance of the errors of ln gamma (e_g) and of ln kT less
// twice the logarithm of the length scale (e_a); docs/method.md, Eq. 35.
func (p *physics) systematics() (gg, ga, aa float64) {
	for _, i := range p.influences {
		a := i.energy - 2*i.length
		gg += i.drag * i.drag
		ga += i.drag * a
		aa += a * a
	}
	return gg, ga, aa
}

// input makes a quantity from a value and its standard uncertainty; 0 is exact.
func input(value, u float64, unit string) Quantity {
	q := Quantity{Value: Float(value), Unit: unit}
	if u > 0 {
		q.Combined = &Uncertainty{Standard: Float(u),
			Interval68: [2]Float{Float(value - u), Float(value + u)},
			Interval95: [2]Float{Float(value - z95*u), Float(value + z95*u)}}
	}
	return q
}

const z95 = 1.959963984540054 // 97.5 % quantile of the standard normal

// SettingError says which setting is in the way.
type SettingError struct {
	Key     string // full name, such as "bead.diameter"
	Axis    string // "" for all axes
	Where   string // "session.toml:4:1"; empty when unknown
	Problem string // to be read after the key
	Remedy  string
}

// Error gives the place, the key and the problem, and the hint on a line of its own.
func (e *SettingError) Error() string {
	text := e.Key
	if e.Axis != "" {
		text += " of axis " + e.Axis
	}
	text += " " + e.Problem
	if e.Where != "" {
		text = e.Where + ": " + text
	}
	if e.Remedy != "" {
		text += "\n  hint: " + e.Remedy
	}
	return text
}

// ListSettings returns the settings in force in the form of a result.
func ListSettings(set *session.Settings) []Setting {
	var out []Setting
	for _, s := range set.All() {
		e := Setting{Key: s.Key, Axis: s.Axis, Text: s.Text, Value: Float(math.NaN()), StandardUncertainty: Float(math.NaN()),
			Origin: fmt.Sprint(s.Origin), Where: s.Where, Assumed: s.Assumed}
		if s.Word == "" && len(s.Bands) == 0 {
			e.Value, e.Unit = Float(s.Value.SI), s.Value.Dimension.SIUnit()
			if s.Value.HasU {
				e.StandardUncertainty = Float(s.Value.U)
			}
		}
		out = append(out, e)
	}
	return slices.Clip(out)
}
