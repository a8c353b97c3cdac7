package calib

import (
	"fmt"
	"math"

	"beadwell/calib/relaxation"
)

// scaledByDrive tells that the lengths of the recording rest on the motion of the stage.
func (w *work) scaledByDrive() bool { return w.sensitivityOrigin == SensitivityDriven }

// byDrive is why the amplitude estimates are withheld when the stage gave the sensitivity.
const byDrive = "the sensitivity was taken from the motion of the stage; the driven estimate stands in its place"

// scaleByDrive finds the sensitivity from the motion of the stage and turns the positions into metres. A noise that
// was stated in metres is used from then on.
func (w *work) scaleByDrive() error {
	metres := w.noise
	last := math.Inf(1)
	w.noise.Known = w.noiseRecorded
	for range scaleSteps {
		if err := w.fitPositions(); err != nil {
			return err
		}
		if err := w.answer(); err != nil {
			return err
		}
		w.perUnit = math.Exp(w.reply.logScale)
		if !metres.Known || w.noiseRecorded || math.Abs(math.Log(w.perUnit)-last) < scaleEnd {
			break
		}
		last = math.Log(w.perUnit)
		square := w.perUnit * w.perUnit
		w.noise = metres
		w.noise.Variance, w.noise.VarianceU = metres.Variance/square, metres.VarianceU/square
	}
	w.sensitivityOrigin = SensitivityDriven
	w.noise = w.noiseInMetres(metres)
	if err := w.rescale(); err != nil {
		return err
	}
	return w.answer()
}

// drivenSensitivity is the sensitivity that the motion of the stage gives.
func (w *work) drivenSensitivity(unit string) Quantity {
	e := w.drivenScale()
	e.value += math.Log(w.perUnit)
	return w.drivenQuantity(e, unit)
}

// withholdScaled withdraws the estimates that are the driven one in other words.
func (w *work) withholdScaled() {
	l := &w.legs
	for _, leg := range []int{equipartitionLeg, displacementLeg, amplitudeLeg} {
		l.value[leg], l.reason[leg] = math.NaN(), byDrive
	}
	c := &w.axis.CrossCheck
	c.Routes = w.compareDriven()
	c.Equality, c.Amplitudes = c.Routes, noTest(byDrive)
	c.Text = "the drag route and the driven stage, whose sensitivity is free of viscosity, are the two independent legs: " + w.drivenText(c.Routes)
}

func (w *work) drivenText(t Test) string {
	if !t.PValue.Known() {
		return "not tested: " + t.Reason
	}
	d := float64(t.MeanDifference)
	relation := "above"
	if d < 0 {
		relation = "below"
	}
	return fmt.Sprintf("the drag route is %.1f %% %s the driven stage (%s with inputs exact, %s with their uncertainties)",
		100*math.Abs(math.Expm1(d)), relation, pText(float64(t.PValue)), pText(float64(t.PValueCombined)))
}

// adoptDriven adopts the minimum-variance combination, in ln(stiffness), of the drag leg and the driven estimate with their
// covariance, weights within [0, 1]; the driven estimate alone when the drag leg is withheld.
func (w *work) adoptDriven() {
	a, e := &w.axis.Adopted, w.drivenStiffness()
	share := 0.0 // of the drag leg
	if w.has(spectrumLeg) {
		c := w.drivenPair(true)
		share = math.Max(0, math.Min(1, (c[1][1]-c[0][1])/(c[0][0]+c[1][1]-2*c[0][1])))
	}
	switch {
	case w.opt.Adopt == RouteDriven:
		share = 0
	case w.opt.Adopt == RouteDrag && w.has(spectrumLeg):
		share = 1
	}
	w.byStage = true
	a.Basis = "drag route and driven stage combined"
	switch share {
	case 0:
		a.Basis = "driven stage and temperature"
	case 1:
		a.Basis = "corner frequency and computed drag"
	}
	a.Weights = map[string]Float{RouteDrag: Float(share), RouteDriven: Float(1 - share)}
	value := e.value
	if share > 0 {
		value = share*w.legs.value[spectrumLeg] + (1-share)*e.value
	}
	form := func(c [2][2]float64) float64 {
		return share*share*c[0][0] + 2*share*(1-share)*c[0][1] + (1-share)*(1-share)*c[1][1]
	}
	record, total := form(w.drivenPair(false)), form(w.drivenPair(true))
	sd := math.Sqrt(record)
	a.Stiffness = stiffness(value, sd, relaxation.Normal(sd), math.Sqrt(total), relaxation.Normal(math.Sqrt(total)))
	w.drivenBudget(share)
}

// drivenPair is the covariance of drag leg and driven estimate, with the inputs or without.
func (w *work) drivenPair(inputs bool) [2][2]float64 {
	e, r := w.drivenStiffness(), &w.reply
	list := [2]relaxation.Parameters{alongCorner, e.weights}
	var c [2][2]float64
	for i, a := range list {
		for j, b := range list {
			c[i][j] = w.fit.Data.Form(a, b)
			if inputs {
				c[i][j] = w.fit.Total.Form(a, b)
				for _, in := range w.phys.influences {
					moves := [2]float64{in.drag, in.energy}
					c[i][j] += moves[i] * moves[j]
				}
			}
		}
	}
	c[1][1] += 4 * r.record * r.record
	if inputs {
		c[1][1] += 4 * r.stage * r.stage
	}
	return c
}

// drivenBudget lists what the uncertainty of the adopted stiffness is made of.
func (w *work) drivenBudget(share float64) {
	w.stageBudget(func(in influence) float64 { return share*in.drag + (1-share)*in.energy }, -2*(1-share))
}

// stageBudget is the budget for what one standard uncertainty of an input, and a relative change of the stage's amplitude,
// do to ln(stiffness).
func (w *work) stageBudget(move func(influence) float64, byAmplitude float64) {
	a := &w.axis.Adopted
	total := float64(a.Stiffness.Combined.Standard / a.Stiffness.Value)
	add := func(name string, value, u float64, unit string, move, base float64) {
		l := BudgetLine{Input: name, Value: Float(value), Unit: unit, StandardUncertainty: Float(u), Sensitivity: Float(math.NaN()),
			Contribution: Float(math.Abs(move)), Share: Float(move * move / (total * total)), Freedom: Float(math.NaN())}
		if u > 0 {
			l.Sensitivity = Float(move / (u / base))
		}
		a.Budget = append(a.Budget, l)
	}
	for _, in := range w.phys.influences {
		add(in.name, in.value, in.u, in.unit, move(in), in.base)
	}
	amplitude, _, u := w.drive.amplitude(w.stageBlur())
	if math.IsNaN(amplitude) { // a triangle that is known by its column has speeds, and no one amplitude
		amplitude = 0
	}
	add("amplitude of the stage", amplitude, u*amplitude, "m", byAmplitude*u, amplitude)
	s := a.Stiffness.Statistical.Standard
	add(statisticsLine, float64(a.Stiffness.Value), float64(s), "N/m", float64(s/a.Stiffness.Value), float64(a.Stiffness.Value))
	a.Budget[len(a.Budget)-1].Freedom = Float(w.independent())
	a.Expanded, a.Halving = expanded(a.Budget, a.Stiffness), toHalve(a.Budget)
}

// describeDriven fills in what the moving stage tells.
func (w *work) describeDriven() {
	if w.drive == nil {
		return
	}
	x, r := &w.axis, &w.reply
	d := &Driven{Waveform: w.drive.waveform, Frequency: Float(w.drive.frequency), Origin: "settings", LeadExpect: Float(math.NaN())}
	if w.drive.column != nil {
		d.Origin = "column"
	}
	x.Driven = d
	x.Estimates = append(x.Estimates, Estimate{Leg: LegDriven, Route: RouteDriven, Stiffness: w.drivenQuantity(w.drivenStiffness(), "N/m")})
	d.LengthScale, d.Drag = w.drivenQuantity(w.drivenScale(), "1"), w.drivenQuantity(w.drivenDrag(), "N s/m")
	d.DragRatio = w.drivenRatio()
	d.Test = w.compareDriven()
	d.Text = w.drivenText(d.Test)
	reason := "the stage moves at constant speed"
	d.Amplitude, d.Power, d.Expected, d.Lead = Withheld("m", reason), Withheld("m2", reason), Withheld("m2", reason), Withheld("rad", "the stage has no column")
	if w.drive.waveform == sineWave {
		w.describeLine(d)
	}
	if r.flow != nil {
		w.describeFlow(d)
	}
	if !w.scaledByDrive() {
		x.CrossCheck.Text += "; " + d.Text
		x.CrossCheck.Driven = &d.Test
		return
	}
	x.MeasuredDrag, x.DragRatio = d.Drag, d.DragRatio
}

// drivenRatio is the measured over the computed drag; both hold kT or the temperature.
func (w *work) drivenRatio() Quantity {
	e := w.drivenDrag()
	e.value -= math.Log(w.phys.gamma)
	e.energy = 0
	record, total := w.variances(e)
	u := w.dragInputsU()
	o := relaxation.Normal(math.Sqrt(record))
	inputs := math.Sqrt(total - record + u*u)
	return exponential(e.value, math.Sqrt(record), o, math.Sqrt(total+u*u), o.Widened(inputs), "1")
}

// finestStage is the relative uncertainty of an amplitude below which it is given as exact: no sensor of a stage is as good, and
// the scatter of its column is then that of the last digit.
const finestStage = 1e-6

func (w *work) describeLine(d *Driven) {
	r := &w.reply
	amplitude, record, stated := w.drive.amplitude(w.stageBlur())
	d.Amplitude = input(amplitude, math.Hypot(record, stated)*amplitude, "m")
	if math.Hypot(record, stated) < finestStage {
		d.Amplitude = Exact(amplitude, "m")
	}
	d.Power = around(r.power, r.powerU*r.power, "m2")
	ratio := w.fit.Corner / w.drive.frequency
	sd, _ := w.fit.SD(alongCorner)
	d.Expected = around(expectedPower(amplitude, ratio), 2*math.Hypot(record, r.bend*sd)*expectedPower(amplitude, ratio), "m2")
	if w.drive.tracked != nil {
		lead := math.Remainder(r.line.Phase-w.drive.tracked.Phase, 2*math.Pi)
		d.Lead = around(lead, math.Hypot(r.powerU/2, w.drive.trackedU), "rad")
		d.LeadExpect = Float(math.Atan(ratio))
	}
}
