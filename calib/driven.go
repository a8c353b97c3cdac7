package calib

import (
	"fmt"
	"math"

	"beadwell/calib/relaxation"
	"beadwell/psd"
)

// LegDriven is the stiffness of a recording with a moving stage, free of viscosity: 2 pi fc
// kT/D, with D in metres by the response to the known motion. LegFlow is Stokes drag times speed
// over displacement at constant speed.
const (
	LegDriven = "driven_stage"
	LegFlow   = "constant_flow"
)

// RouteDriven is the route that gets its length scale from the motion of the stage.
const RouteDriven = "driven"

// RouteFlow names the stiffness by Stokes drag at constant speed where a route to adopt is asked for.
const RouteFlow = "flow"

// Driven is what a moving stage tells of one axis.
//
// A stage that moves as A sin(2 pi f t) carries the liquid along, and the bead answers with a line of
// power W = A^2/(2 (1 + fc^2/f^2)) on its thermal spectrum, in metres (Tolic-Norrelykke et al., Rev.
// Sci. Instrum. 77 (2006) 103101). The line of the recording over W is the square of the recorded unit
// per metre; with it the diffusion coefficient is in metres too, the drag is kT/D and the stiffness 2 pi
// fc kT/D: neither viscosity nor bead diameter nor length scale enters (docs/method.md, Eqs 55 and 56).
type Driven struct {
	Waveform    string    `json:"waveform"`                // "sine", "triangle"
	Frequency   Float     `json:"frequency_hz"`            // of the motion; null for a triangle that is known by its track alone
	Amplitude   Quantity  `json:"amplitude"`               // of the stage [m]
	Origin      string    `json:"origin"`                  // of the motion: "column", "settings"
	Power       Quantity  `json:"line_power"`              // of the bead's line, exposure and photodiode undone, in the lengths of this result [m2]; sine
	Expected    Quantity  `json:"expected_power"`          // what the motion of the stage makes of a bead of this corner frequency [m2]; sine
	Lead        Quantity  `json:"phase_lead"`              // of the bead before the stage's column [rad]; sine
	LeadExpect  Float     `json:"phase_lead_expected"`     // of a bead of this corner frequency [rad]
	LengthScale Quantity  `json:"length_scale"`            // true length over the one recorded: 1 when the stated scale is right
	Drag        Quantity  `json:"drag"`                    // kT/D, N s/m
	DragRatio   Quantity  `json:"drag_ratio"`              // over the computed drag
	Flow        *FlowLine `json:"constant_flow,omitempty"` // fit of displacement against speed; triangle
	Escape      *Escape   `json:"escape,omitempty"`        // when the bead was lost
	Test        Test      `json:"test"`                    // the driven estimate against the others
	Text        string    `json:"text"`                    // what it says, for a person
}

// response is the answer of one axis to the moving stage.
//
// The length scale is beta = true length over recorded length. Its logarithm changes with ln fc by -bend, and has the
// variance record from the response and stage's track, and the relative uncertainty stage of the stated amplitude.
type response struct {
	logScale      float64
	bend          float64 // fc^2/(f^2 + fc^2) of a sine, 1 at constant speed
	record, stage float64 // relative standard uncertainties of the scale
	line          psd.Sinusoid
	power         float64 // of the line, exposure and photodiode undone, in recorded units squared
	powerU        float64 // relative, of the record
	blur          float64
	flow          *flow
	mean, slope   float64 // of the record, beside those that were fitted without the answer [m, m/s]
}

// checkFlow refuses to adopt Stokes drag at constant speed where there is none, or where the lengths rest on it.
func (w *work) checkFlow() error {
	if w.drive == nil || w.opt.Adopt != RouteFlow {
		return nil
	}
	e := &SettingError{Key: "adopt", Axis: w.axisName, Problem: fmt.Sprintf("is %q, but the stage does not move at constant speed", RouteFlow), Remedy: "take --adopt driven"}
	switch {
	case w.drive.waveform != triangleWave:
		return e
	case w.unscaled:
		e.Problem = fmt.Sprintf("is %q, but the sensitivity is taken from the same displacement", RouteFlow)
		return e
	}
	return nil
}

// takeOutDrive removes the answer to the stage from the record that is about to be fitted.
func (w *work) takeOutDrive() error {
	var err error
	if w.drive.waveform == triangleWave {
		err = w.takeOutFlow()
	} else {
		if w.drive.tracked == nil && !w.drive.refined {
			w.drive.refine(w.record)
		}
		w.reply.line, err = w.record.TakeSinusoid(w.drive.frequency)
		w.reply.mean, w.reply.slope = w.reply.line.Mean, w.reply.line.Slope
	}
	if err != nil {
		return w.dataError(fmt.Errorf("the answer to the stage: %w", err), "record several periods of the drive")
	}
	return nil
}

// answer evaluates the response once the thermal spectrum is known.
func (w *work) answer() error {
	if w.fitErr != nil {
		return w.dataError(fmt.Errorf("the thermal spectrum of the driven axis: %w", w.fitErr), "record longer or faster")
	}
	if w.drive.waveform == triangleWave {
		return w.answerToFlow()
	}
	r, f := &w.reply, w.drive.frequency
	r.blur = blurOf(f, w.exposure)
	ratio := w.fit.Corner / f
	r.bend = ratio * ratio / (1 + ratio*ratio)
	// what chance adds to the square of an amplitude, of which the line's power is half
	noise := r.line.Scatter * w.fit.Spectrum(f) / 2 * w.rate
	square := r.line.Amplitude*r.line.Amplitude - 2*noise
	if !(square > leastDrive*noise) {
		return w.dataError(fmt.Errorf("the bead does not follow the stage at %.6g Hz: its line does not stand out", f),
			"drive by a larger amplitude, or check its frequency")
	}
	r.power = square / 2 / (r.blur * r.blur * w.diodePower(f))
	r.powerU = 2 * math.Sqrt(noise/square)
	amplitude, record, stated := w.drive.amplitude(w.stageBlur())
	r.logScale = (math.Log(expectedPower(amplitude, ratio)) - math.Log(r.power)) / 2
	r.record, r.stage = math.Hypot(record, r.powerU/2), stated
	return nil
}

// stageBlur is what the exposure leaves of the stage's amplitude in its own column, which is averaged as the bead's is.
func (w *work) stageBlur() float64 {
	return blurOf(w.drive.frequency, w.exposure) * math.Sqrt(w.diodePower(w.drive.frequency))
}

// expectedPower is the power of the bead's line [m2] for an amplitude of the stage [m] and a ratio of corner frequency
// to that of the drive (Tolic-Norrelykke et al. 2006).
func expectedPower(amplitude, ratio float64) float64 {
	return amplitude * amplitude / (2 * (1 + ratio*ratio))
}

// diodePower is the share of the power at a frequency [Hz] that the photodiode passes.
func (w *work) diodePower(hz float64) float64 {
	return w.seen.Response(hz)
}

// driven is the viscosity-free estimate in logarithms: of the stiffness, the drag and the length
// scale, each linear in ln fc, ln V and the logarithm of the scale.
type drivenEstimate struct {
	value   float64
	weights relaxation.Parameters // of ln fc and ln V
	scale   float64               // d value / d ln scale, fc held
	energy  float64               // d value / d ln kT
}

// kappa = kT/(beta^2 V), with beta depending on fc.
func (w *work) drivenStiffness() drivenEstimate {
	r := &w.reply
	return drivenEstimate{value: math.Log(w.phys.kT/w.fit.Variance) - 2*r.logScale,
		weights: relaxation.Parameters{2 * r.bend, -1, 0}, scale: -2, energy: 1}
}

// gamma = kT/(beta^2 2 pi fc V).
func (w *work) drivenDrag() drivenEstimate {
	e := w.drivenStiffness()
	e.value -= math.Log(2 * math.Pi * w.fit.Corner)
	e.weights[0]--
	return e
}

func (w *work) drivenScale() drivenEstimate {
	r := &w.reply
	return drivenEstimate{value: r.logScale, weights: relaxation.Parameters{-r.bend, 0, 0}, scale: 1}
}

// variances returns the variance of the estimate by the record alone, and with the stated inputs.
func (w *work) variances(e drivenEstimate) (record, total float64) {
	data, all := w.fit.SD(e.weights)
	r := &w.reply
	record = data*data + e.scale*e.scale*r.record*r.record
	total = record + all*all - data*data + e.scale*e.scale*r.stage*r.stage
	for _, in := range w.phys.influences {
		total += e.energy * e.energy * in.energy * in.energy
	}
	return record, total
}

// quantity turns a driven estimate into a quantity.
func (w *work) drivenQuantity(e drivenEstimate, unit string) Quantity {
	record, total := w.variances(e)
	sd := math.Sqrt(record)
	o := relaxation.Normal(sd)
	if data, _ := w.fit.SD(e.weights); data > smallEnough {
		o = w.profile(e.weights, data).Widened(math.Sqrt(record - data*data))
	}
	return exponential(e.value, sd, o, math.Sqrt(total), o.Widened(math.Sqrt(total-record)), unit)
}

// compareDriven tests the driven estimate against the drag leg and, where lengths are known without it, the amplitude of the spectrum.
func (w *work) compareDriven() Test {
	if !w.has(spectrumLeg) {
		return noTest(w.legs.reason[spectrumLeg])
	}
	e := w.drivenStiffness()
	contrasts := []drivenEstimate{e} // driven less drag leg
	contrasts[0].value -= w.legs.value[spectrumLeg]
	contrasts[0].weights[0]--
	if w.has(amplitudeLeg) && !w.scaledByDrive() { // driven less amplitude leg: -2 ln beta
		contrasts = append(contrasts, drivenEstimate{value: -2 * w.reply.logScale, weights: relaxation.Parameters{2 * w.reply.bend, 0, 0}, scale: -2})
	}
	stat, total := w.contrastCovariance(contrasts, false), w.contrastCovariance(contrasts, true)
	near, okNear := chiSquare(contrasts, stat)
	far, okFar := chiSquare(contrasts, total)
	if !okNear || !okFar {
		return noTest("the estimates are one statistic")
	}
	n := len(contrasts)
	return Test{ChiSquare: Float(near), DegreesOfFreedom: n, PValue: survival(near, n), ChiSquareCombined: Float(far), PValueCombined: survival(far, n),
		MeanDifference: Float(-contrasts[0].value)}
}

// contrastCovariance is the covariance of differences between the driven estimate and another: the first is the drag
// leg, the second the amplitude leg.
func (w *work) contrastCovariance(list []drivenEstimate, inputs bool) [][]float64 {
	r := &w.reply
	out := make([][]float64, len(list))
	for i, a := range list {
		out[i] = make([]float64, len(list))
		for j, b := range list {
			if inputs {
				out[i][j] = w.fit.Total.Form(a.weights, b.weights) + a.scale*b.scale*(r.record*r.record+r.stage*r.stage)
				for _, in := range w.phys.influences {
					moves := [2]float64{in.energy - in.drag, 2 * in.length}
					out[i][j] += moves[i] * moves[j]
				}
				continue
			}
			out[i][j] = w.fit.Data.Form(a.weights, b.weights) + a.scale*b.scale*r.record*r.record
		}
	}
	return out
}

func chiSquare(list []drivenEstimate, c [][]float64) (float64, bool) {
	if len(list) == 1 {
		return list[0].value * list[0].value / c[0][0], c[0][0] > 0
	}
	x, y := list[0].value, list[1].value
	det := c[0][0]*c[1][1] - c[0][1]*c[1][0]
	return (x*x*c[1][1] - 2*x*y*c[0][1] + y*y*c[0][0]) / det, det > 1e-12*c[0][0]*c[1][1]
}
