package calib

import (
	"math"
	"slices"
	"strings"
)

// Standard uncertainties that are usual in labs, for the order of causes that nobody
// stated an uncertainty of. Judgement, not measurement.
const (
	usualScale     = 0.02 // relative: a stage micrometre read in an image
	usualKelvin    = 1.0  // K: a room thermometer
	usualViscosity = 0.03 // relative: a buffer taken as water
	usualDiameter  = 0.03 // relative: a supplier's data sheet
	usualHeight    = 0.1  // relative: a focus drive
	usualStage     = 0.02 // relative: a piezo stage without a sensor of its own
)

// scanSteps is the number of values of an input that are tried before the search; each costs
// microseconds.
const scanSteps = 240

// hypotheses lists the causes that this recording can have.
func (b *bench) hypotheses() []hypothesis {
	list := b.scales()
	list = append(list, b.temperatures()...)
	list = append(list, b.viscosity(), b.diameter())
	list = append(list, b.heights()...)
	if h, ok := b.stage(); ok {
		list = append(list, h)
	}
	return append(list, b.ofTheRecord()...)
}

// shifted makes the weighing of a hypothesis that changes conditions of the axes.
func (b *bench) shifted(freed func(influence, *work) bool, change func(w *work, c *conditions, parameter float64)) func(float64) (weighed, bool) {
	return func(parameter float64) (weighed, bool) {
		moved := make(map[*work]float64, len(b.works))
		for _, w := range b.works {
			c := w.phys.conditions()
			change(w, &c, parameter)
			shift, err := w.phys.mobility(c)
			if err != nil {
				return weighed{}, false
			}
			moved[w] = shift
		}
		return b.weigh(b.asRead, func(w *work, kind reading) float64 {
			if kind == scaleReading { // neither bead nor liquid enters
				return 0
			}
			return moved[w]
		}, freed)
	}
}

// widestFactor bounds factors on scale, viscosity and diameter.
const widestFactor = 20

// factor is a hypothesis of a factor on one statement.
func factor(code, name string, stated Quantity, usual float64) hypothesis {
	base := float64(stated.Value)
	return hypothesis{code: code, name: name, stated: stated, low: -math.Log(widestFactor), high: math.Log(widestFactor), steps: scanSteps,
		value: func(p float64) float64 { return base * math.Exp(p) },
		order: func(needed float64) float64 { return math.Abs(needed/base-1) / usual }, text: textOfFactor}
}

// scales are the length scale of all axes, and, with several axes, of each alone.
func (b *bench) scales() []hypothesis {
	scale := func(code string, axis int) hypothesis {
		w := b.works[max(axis, 0)]
		name := "length scale"
		if axis >= 0 {
			name += " of " + w.axisName
		}
		h := factor(code, name, w.phys.lengthScale(), usualScale)
		if axis >= 0 {
			h.axis = w.axisName
		}
		of := func(o *work) bool { return axis < 0 || o.axisName == w.axisName }
		weigh := func(found []evidence, p float64) (weighed, bool) {
			return b.weigh(found, func(o *work, kind reading) float64 {
				switch {
				case !of(o):
					return 0
				case kind == scaleReading:
					return p
				case o.scaledByDrive(): // no stated length enters
					return 0
				}
				return -2 * p // lengths are recorded too small by the factor
			}, func(in influence, o *work) bool { return in.length != 0 && of(o) })
		}
		h.at = func(p float64) (weighed, bool) { return weigh(b.asRead, p) }
		h.also = func(top summit) (hypothesis, bool) { return b.noiseInTrueLengths(h, top, of, weigh) }
		return h
	}
	list := []hypothesis{scale(CauseScale, -1)}
	for i := range b.own {
		if b.own > 1 {
			list = append(list, scale(CauseScaleOne, i))
		}
	}
	return list
}

const (
	noiseReach = 0.2 // in the logarithm of the length scale, about where it was without a change of the noise
	noiseGain  = 0.1 // of the log-likelihood, below which a change of the noise is not followed
)

// noiseInTrueLengths is a hypothesis on the length scale that also moves the stated noise. A noise that was measured with the same scale
// is wrong with it, and right in the lengths of the recording; one that is known in true lengths is e^-p of it there.
func (b *bench) noiseInTrueLengths(h hypothesis, top summit, of func(*work) bool, weigh func([]evidence, float64) (weighed, bool)) (hypothesis, bool) {
	stated := func(w *work) bool {
		return of(w) && w.noise.Known && w.noise.Variance > 0 && w.background == nil && !w.scaledByDrive()
	}
	if !slices.ContainsFunc(b.works, stated) {
		return h, false
	}
	near := refits{}
	h.at = func(p float64) (weighed, bool) {
		found := slices.Clone(b.asRead)
		for i, w := range b.works {
			if !stated(w) {
				continue
			}
			n := w.noise
			n.Variance *= math.Exp(-2 * p)
			n.VarianceU *= math.Exp(-2 * p)
			var ok bool
			if found[i], ok = near.of(w, w.exposure, n); !ok {
				return weighed{}, false
			}
		}
		return weigh(found, p)
	}
	if w, ok := h.at(top.at); ok && math.Abs(w.value-top.value) < noiseGain {
		return h, false
	}
	h.low, h.high, h.steps = top.at-noiseReach, top.at+noiseReach, refitSteps
	return h, true
}

// lengthScale is the stated length of a recorded unit, or 1 where the file has a unit of length.
func (p *physics) lengthScale() Quantity {
	for _, in := range p.influences {
		if strings.HasPrefix(in.name, "pixel size") || strings.HasPrefix(in.name, "sensitivity") {
			return input(in.value, in.u, in.unit)
		}
	}
	return Exact(1, "1")
}

// temperatures are that of all recordings and, where the laser was on in some and off in others, that of the
// trap alone.
func (b *bench) temperatures() []hypothesis {
	p := b.works[0].phys
	low, high := p.fluid.Range()
	if math.IsNaN(low) { // a liquid of stated viscosity: about where water is one
		low, high = 250, 400
	}
	here := p.conditions().temperature
	with := func(code, name string, of func(w *work) bool) hypothesis {
		return hypothesis{code: code, name: name, stated: p.medium.Temperature, low: low, high: high, steps: scanSteps,
			at: b.shifted(func(in influence, w *work) bool { return of(w) && (in.energy != 0 || in.name == "temperature") },
				func(w *work, c *conditions, t float64) {
					if of(w) {
						c.temperature += t - here
					}
				}),
			value: func(p float64) float64 { return p }, order: func(needed float64) float64 { return math.Abs(needed-here) / usualKelvin }, text: textOfTemperature}
	}
	list := []hypothesis{with(CauseTemperature, "temperature", func(*work) bool { return true })}
	on := 0
	for _, w := range b.works {
		if trapped(w) {
			on++
		}
	}
	if on > 0 && on < len(b.works) && trapped(b.works[0]) {
		list = append(list, with(CauseHeating, "temperature at the trap alone", trapped))
	}
	return list
}

func (b *bench) viscosity() hypothesis {
	h := factor(CauseViscosity, "viscosity", b.works[0].phys.medium.Viscosity, usualViscosity)
	h.at = b.shifted(func(in influence, _ *work) bool { return strings.HasPrefix(in.name, "viscosity") }, func(_ *work, c *conditions, p float64) { c.thickness = math.Exp(p) })
	return h
}

func (b *bench) diameter() hypothesis {
	h := factor(CauseDiameter, "bead diameter", b.works[0].phys.bead.Diameter, usualDiameter)
	h.at = b.shifted(func(in influence, _ *work) bool { return in.name == "bead diameter" }, func(_ *work, c *conditions, p float64) { c.radius *= math.Exp(p) })
	return h
}

// Range of the gap between bead and surface, in radii: from where the wall models end
// to where the drag is that of the bulk within 0.1 %.
const (
	leastGap = 0.01
	mostGap  = 600
)

// heightName is the name of the cause that is the height of one recording.
const heightName = "height"

// heights are the distance to the surface of this recording and, with recordings at several heights, an error that
// they share: the place of the surface, or one factor.
func (b *bench) heights() []hypothesis {
	first := b.works[0]
	stated := first.phys.bead.Height
	base := float64(stated.Value)
	if !stated.Known() {
		stated.Unit = "m"
	}
	radius := first.phys.radius
	with := func(name string, of func(w *work) bool, height func(w *work, needed float64) float64) hypothesis {
		h := hypothesis{code: CauseHeight, name: name, stated: stated, low: math.Log(leastGap), high: math.Log(mostGap), steps: scanSteps,
			value: func(q float64) float64 { return radius * (1 + math.Exp(q)) }, text: textOfHeight}
		h.at = b.shifted(func(in influence, w *work) bool { return in.name == "height" && of(w) }, func(w *work, c *conditions, q float64) {
			if of(w) {
				c.height = height(w, h.value(q))
			}
		})
		h.order = func(needed float64) float64 {
			if !stated.Known() {
				return math.Log(100*radius/needed) / usualHeight
			}
			return math.Abs(needed/base-1) / usualHeight
		}
		return h
	}
	this := func(_ *work, needed float64) float64 { return needed }
	alike := func(w *work) bool { return w.phys.height == first.phys.height }
	list := []hypothesis{with(heightName, alike, this)}
	if !stated.Known() || !slices.ContainsFunc(b.works, func(w *work) bool { return !alike(w) && !math.IsInf(w.phys.height, 1) }) {
		return list
	}
	near := func(w *work) bool { return !math.IsInf(w.phys.height, 1) }
	return append(list,
		with("shift of all heights", near, func(w *work, needed float64) float64 { return w.phys.height + needed - base }),
		with("factor on all heights", near, func(w *work, needed float64) float64 { return w.phys.height * needed / base }))
}

// stage is the amplitude of a moving stage.
func (b *bench) stage() (hypothesis, bool) {
	for _, w := range b.works {
		if w.drive == nil {
			continue
		}
		amplitude, _, _ := w.drive.amplitude(w.stageBlur())
		h := factor(CauseStage, "amplitude of the stage", input(amplitude, w.reply.stage*amplitude, "m"), usualStage)
		h.at = func(p float64) (weighed, bool) {
			return b.weigh(b.asRead, func(o *work, kind reading) float64 {
				switch {
				case kind == scaleReading:
					return -p
				case o.scaledByDrive():
					return -2 * p
				}
				return 0
			}, func(in influence, _ *work) bool { return in.name == stageInput })
		}
		return h, true
	}
	return hypothesis{}, false
}
