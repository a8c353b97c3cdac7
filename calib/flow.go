package calib

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"beadwell/calib/relaxation"
	"beadwell/psd"
)

// FlowLine is the displacement of the bead against the speed of the stage: a straight line whose slope is drag
// over stiffness, gamma/kappa (Stokes' law in a harmonic trap), with an intercept and a drift in time left free
// (docs/method.md, Eq. 57).
type FlowLine struct {
	Slope     Quantity    `json:"slope"`           // of displacement against speed, as recorded [s]
	Intercept Quantity    `json:"intercept"`       // displacement at rest, from the mean of the record [m]
	Goodness  Goodness    `json:"goodness_of_fit"` // of the line
	Skipped   Float       `json:"skipped_s"`       // left out after each reversal
	Points    []FlowPoint `json:"points"`          // one for each stroke of the stage
}

// FlowPoint is one stroke of the stage.
type FlowPoint struct {
	Speed        Float `json:"speed_m_per_s"`        // of the stage
	Displacement Float `json:"displacement_m"`       // of the bead, as recorded
	Standard     Float `json:"standard_uncertainty"` // of the displacement, m
	Model        Float `json:"model_m"`              // the line at this speed
}

// flow is what is known of a bead in a liquid that is moved at constant speed.
type flow struct {
	stage           []float64 // m, on the grid of the recording
	corner          float64   // Hz, with which the answer was taken out
	bead, phase     float64   // of the bead's fundamental and of the stage [rad]
	slope, slopeU   float64   // recorded length over speed [s]
	offset, offsetU float64   // recorded length
	chi2            float64
	dof             int
	points          []FlowPoint
	skipped         float64 // s
}

const (
	// settleTimes is the number of relaxation times that are dropped after each reversal: exp(-8) = 3e-4 of
	// the step is left, half of it in the mean of a stroke of equal length.
	settleTimes = 8
	// flowRounds is how often answer and thermal fit are made in turn.
	flowRounds = 3
	// cornerStep is the change of ln fc for a derivative: large against rounding, small against its curvature.
	cornerStep = 1e-3
	// cornerGrid is the number of corner frequencies that are tried, in equal ratios, for the first answer.
	cornerGrid = 24
	// scanSamples is about the number of samples that this is tried on.
	scanSamples = 1 << 16
	// bentStroke is the rms deviation of the stage from constant speed, over the length of the stroke, above which a
	// stroke is not used; that of half a sine is 0.05.
	bentStroke   = 0.01
	leastStrokes = 4
)

// takeOutFlow removes the answer of the bead to a stage of alternating speed from the record: together with it, to
// first order, what an error of its corner frequency and of its timing leaves. The corner frequency comes from the thermal
// fit and the timing from the answer itself, in turn.
func (w *work) takeOutFlow() error {
	raw := w.record.X
	if w.reply.flow == nil {
		w.reply.flow = &flow{}
		if err := w.startFlow(raw); err != nil {
			return err
		}
	}
	f := w.reply.flow
	for round := range flowRounds {
		w.record.X = append([]float64(nil), raw...)
		w.placeStage(len(raw))
		shapes := flowShapes(f.stage, f.corner/w.rate)
		fit, err := w.record.TakeOut(shapes[:]...)
		if err != nil {
			return err
		}
		if round == flowRounds-1 {
			w.reply.mean, w.reply.slope = fit.Mean, fit.Slope
			break
		}
		shift := fit.Coefficients[3] / fit.Coefficients[0] // samples
		f.phase += 2 * math.Pi * w.drive.frequency / w.rate * math.Max(-1, math.Min(1, shift))
		w.thermalCorner()
	}
	return nil
}

// thermalCorner takes the corner frequency from what is left of the record.
func (w *work) thermalCorner() {
	f, o := w.reply.flow, w.fitOptions()
	o.KeepLines = true
	if fit, err := psd.Estimate(w.record, o); err == nil {
		if w.drive.column == nil { // the bead is ahead of the stage by this angle
			f.phase += math.Atan(f.corner/w.drive.frequency) - math.Atan(fit.Corner/w.drive.frequency)
		}
		f.corner = fit.Corner
	}
}

// startFlow finds a corner frequency to begin with: the one whose answer leaves least of the record.
func (w *work) startFlow(raw []float64) error {
	f := w.reply.flow
	if math.IsNaN(w.drive.frequency) {
		w.drive.frequency = w.drive.reversalRate(w.rate)
	}
	hz := w.drive.frequency
	if !(hz > 0) {
		return errors.New("the stage does not reverse often enough")
	}
	if err := w.followFlow(raw); err != nil {
		return err
	}
	n := min(len(raw), max(scanSamples, int(3*w.rate/hz)))
	best, chosen, phase := math.Inf(1), 0.0, 0.0
	for i := range cornerGrid {
		corner := hz * math.Pow(w.rate/2/hz, float64(i)/(cornerGrid-1))
		f.phase = f.bead - math.Atan(corner/hz)
		w.placeStage(len(raw))
		r, err := psd.Prepare(raw[:n], w.rate)
		if err != nil {
			return err
		}
		shapes := flowShapes(f.stage[:n], corner/w.rate)
		if _, err := r.TakeOut(shapes[0], shapes[1]); err != nil {
			continue
		}
		if left := r.MeanSquare(); left < best {
			best, chosen, phase = left, corner, f.phase
		}
	}
	if math.IsInf(best, 1) {
		return psd.ErrShapes
	}
	f.corner, f.phase = chosen, phase
	first, err := psd.Prepare(raw, w.rate)
	if err != nil {
		return err
	}
	w.placeStage(len(raw))
	shapes := flowShapes(f.stage, f.corner/w.rate)
	if _, err := first.TakeOut(shapes[0], shapes[1]); err != nil {
		return err
	}
	kept := w.record
	w.record = first
	w.thermalCorner()
	w.record = kept
	return nil
}

// followFlow finds the phase of the stated motion from the bead, which leads the stage by atan(fc/f) at the
// fundamental frequency f.
func (w *work) followFlow(raw []float64) error {
	f, d := w.reply.flow, w.drive
	if d.column != nil {
		f.stage = bridged(d.column)
		return nil
	}
	r, err := psd.Prepare(raw, w.rate)
	if err != nil {
		return err
	}
	if !d.refined {
		d.refine(r)
	}
	s, err := r.TakeSinusoid(d.frequency)
	f.bead = s.Phase
	return err
}

// placeStage sets the motion of the stage, of n samples, from what is stated and the phase; that of a column stays.
func (w *work) placeStage(n int) {
	f, d := w.reply.flow, w.drive
	if d.column != nil {
		return
	}
	f.stage = make([]float64, n)
	for i := range f.stage {
		f.stage[i] = d.stated * triangleAt(d.frequency*float64(i)/w.rate+f.phase/(2*math.Pi))
	}
}

// triangleAt is a triangle wave between -1 and 1 that is 0 and rises at whole numbers of turns.
func triangleAt(turns float64) float64 {
	_, t := math.Modf(turns)
	t = math.Mod(t+1.25, 1) // 0 at the lowest point
	return 1 - 4*math.Abs(t-0.5)
}

// flowShapes returns the answer of a bead to the stage, at rest at first; the decay of what it had then; and the
// derivatives of the answer to ln fc and to the time, in samples. On each sampling interval the stage is taken to move at constant
// speed v: x' = -x/tau + v.
func flowShapes(stage []float64, cornerPerSample float64) [4][]float64 {
	respond := func(perSample float64) []float64 {
		a := 2 * math.Pi * perSample
		c, gain := math.Exp(-a), -math.Expm1(-a)/a
		x := make([]float64, len(stage))
		for i := 1; i < len(stage); i++ {
			x[i] = c*x[i-1] + gain*(stage[i]-stage[i-1])
		}
		return x
	}
	answer, faster := respond(cornerPerSample), respond(cornerPerSample*math.Exp(cornerStep))
	start, later := make([]float64, len(stage)), make([]float64, len(stage))
	left, c := 1.0, math.Exp(-2*math.Pi*cornerPerSample)
	for i := range answer {
		faster[i] = (faster[i] - answer[i]) / cornerStep
		later[i] = (answer[min(i+1, len(answer)-1)] - answer[max(i-1, 0)]) / 2
		start[i], left = left, left*c
	}
	return [4][]float64{answer, start, faster, later}
}

// bridged fills missing values by straight lines.
func bridged(values []float64) []float64 {
	out := append([]float64(nil), values...)
	last := -1
	for i, v := range out {
		if v != v {
			continue
		}
		for j := last + 1; j < i; j++ {
			if last < 0 {
				out[j] = v
				continue
			}
			out[j] = out[last] + (v-out[last])*float64(j-last)/float64(i-last)
		}
		last = i
	}
	for j := last + 1; j < len(out) && last >= 0; j++ {
		out[j] = out[last]
	}
	return out
}

// answerToFlow fits the straight line of displacement against speed to the means of the strokes.
func (w *work) answerToFlow() error {
	f := w.reply.flow
	process := w.fit.Process()
	f.skipped = settleTimes/(2*math.Pi*w.fit.Corner) + w.exposure
	drop := int(math.Ceil(f.skipped * w.rate))
	var rows [][3]float64 // 1, speed, time about the middle
	var means, sds []float64
	for _, s := range strokes(f.stage) {
		begin, end := s.begin+drop, s.end-max(2, (s.end-s.begin)/100)
		if end-begin < 4 {
			continue
		}
		slope, rough := straight(f.stage, begin, end)
		if !(rough < bentStroke) {
			continue
		}
		mean, n := meanOf(w.positions()[begin:end])
		if n < 4 {
			continue
		}
		all, _ := process.SampleVariance(end-begin, relaxation.RemovedNothing)
		about, _ := process.SampleVariance(end-begin, relaxation.RemovedMean)
		rows = append(rows, [3]float64{1, slope * w.rate, (float64(begin+end)/2 - float64(len(f.stage))/2) / w.rate})
		means = append(means, mean-w.record.Mean)
		sds = append(sds, math.Sqrt(all-about))
	}
	if err := w.fitFlow(rows, means, sds); err != nil {
		return w.dataError(err, "give the stage at least four strokes in both directions, each much longer than eight relaxation times")
	}
	r := &w.reply
	r.bend = 1
	r.logScale = -math.Log(2*math.Pi*w.fit.Corner) - math.Log(math.Abs(f.slope))
	r.record, r.stage = f.slopeU/math.Abs(f.slope), w.drive.statedU
	return nil
}

func meanOf(values []float64) (mean float64, n int) {
	for _, v := range values {
		if v == v {
			mean += v
			n++
		}
	}
	return mean / float64(n), n
}

// fitFlow is the weighted fit of displacement = offset + slope speed + drift time.
func (w *work) fitFlow(rows [][3]float64, means, sds []float64) error {
	forth, back := false, false
	for _, r := range rows {
		forth, back = forth || r[1] > 0, back || r[1] < 0
	}
	if len(rows) < leastStrokes || !forth || !back {
		return fmt.Errorf("the stage makes %d usable strokes at constant speed", len(rows))
	}
	var top, low float64
	for _, r := range rows {
		top, low = math.Max(top, math.Abs(r[1])), math.Max(low, math.Abs(r[2]))
	}
	scale := [3]float64{1, top, math.Max(low, 1/w.rate)}
	a, y := mat.NewDense(len(rows), 3, nil), mat.NewVecDense(len(rows), nil)
	for i, r := range rows {
		for k := range r {
			a.Set(i, k, r[k]/scale[k]/sds[i])
		}
		y.SetVec(i, means[i]/sds[i])
	}
	var normal, inverse mat.Dense
	normal.Mul(a.T(), a)
	if inverse.Inverse(&normal) != nil {
		return psd.ErrShapes
	}
	var right, solution mat.VecDense
	right.MulVec(a.T(), y)
	solution.MulVec(&inverse, &right)
	f := w.reply.flow
	f.slope, f.slopeU = solution.AtVec(1)/top, math.Sqrt(inverse.At(1, 1))/top
	f.offset, f.offsetU = solution.AtVec(0), math.Sqrt(inverse.At(0, 0))
	f.chi2, f.dof, f.points = 0, len(rows)-3, nil
	for i, r := range rows {
		drift := solution.AtVec(2) * r[2] / scale[2]
		model := f.offset + f.slope*r[1]
		z := (means[i] - drift - model) / sds[i]
		f.chi2 += z * z
		f.points = append(f.points, FlowPoint{Speed: Float(r[1]), Displacement: Float(means[i] - drift), Standard: Float(sds[i]), Model: Float(model)})
	}
	return nil
}

// describeFlow fills in the straight line, and the stiffness that it gives with the computed drag.
func (w *work) describeFlow(d *Driven) {
	f := w.reply.flow
	p := Float(math.NaN())
	if f.dof > 0 {
		p = survival(f.chi2, f.dof)
	}
	d.Flow = &FlowLine{Slope: around(f.slope, f.slopeU, "s"), Intercept: around(f.offset, f.offsetU, "m"),
		Goodness: Goodness{ChiSquare: Float(f.chi2), DegreesOfFreedom: f.dof, PValue: p}, Skipped: Float(f.skipped), Points: f.points}
	e := Estimate{Leg: LegFlow, Route: RouteDrag, Stiffness: Withheld("N/m", byDrive)}
	if !w.scaledByDrive() {
		e.Stiffness = w.flowStiffness()
	}
	w.axis.Estimates = append(w.axis.Estimates, e)
}

// flowStiffness is the stiffness by Stokes drag: the computed drag over the slope of displacement against speed.
func (w *work) flowStiffness() Quantity {
	f := w.reply.flow
	sd := f.slopeU / math.Abs(f.slope)
	u := w.drive.statedU // of the speed
	for _, in := range w.phys.influences {
		u = math.Hypot(u, in.drag-in.length)
	}
	o := relaxation.Normal(sd)
	return exponential(math.Log(w.phys.gamma/math.Abs(f.slope)), sd, o, math.Hypot(sd, u), o.Widened(u), "N/m")
}

// adoptFlow adopts the stiffness by Stokes drag.
func (w *work) adoptFlow() {
	a := &w.axis.Adopted
	a.Basis, a.Stiffness, w.byStage = "displacement at constant speed and computed drag", w.flowStiffness(), true
	a.Weights = map[string]Float{RouteDrag: 1, RouteAmplitude: 0}
	w.stageBudget(func(in influence) float64 { return in.drag - in.length }, 1)
}
