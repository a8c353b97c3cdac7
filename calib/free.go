package calib

import (
	"context"
	"fmt"
	"math"

	"beadwell/calib/relaxation"
	"beadwell/calib/session"
	"beadwell/calib/track"
)

// FreeBead is what a recording with the laser off tells of one axis: the diffusion coefficient by the exact likelihood of
// the displacements (Berglund, Phys. Rev. E 82 (2010) 011917), and the drag kT/D against Stokes times wall factor.
// It is the purest test of bead diameter, viscosity, temperature and length scale together, for no trap is in it.
type FreeBead struct {
	Diffusion     Quantity `json:"diffusion_coefficient"` // m2/s
	Expected      Quantity `json:"expected_diffusion"`    // kT over the computed drag, m2/s
	Noise         Quantity `json:"noise"`                 // localisation noise, standard deviation, m
	NoiseVariance Quantity `json:"noise_variance"`        // m2; may be negative when it was fitted
	Speed         Quantity `json:"drift_speed"`           // m/s
	Displacements int      `json:"displacements"`         // that the estimate rests on
	Test          Test     `json:"test"`                  // measured against computed drag
	Text          string   `json:"text"`                  // what it says, for a person
}

// noTrap is why a free bead has no stiffness.
const noTrap = "the bead was free, with the laser off: there is no trap to calibrate"

// CodeFreeDrag is the code of the finding that the drag of a free bead is not the computed one.
const CodeFreeDrag = "free-bead-drag"

// calibrateFree analyses a recording of a free bead.
func calibrateFree(ctx context.Context, rec *track.Recording, set *session.Settings, works []*work, opt Options) (*Result, error) {
	r := newResult(rec, set, works, opt)
	for _, w := range works {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		if err := w.runFree(); err != nil {
			return nil, err
		}
		r.Axes = append(r.Axes, w.axis)
	}
	r.judgeFree()
	if err := r.findCause(ctx, works, opt); err != nil {
		return nil, err
	}
	r.addFreeFinding()
	r.settingFindings(set, works)
	r.inspect(rec, set)
	return r, nil
}

// runFree estimates the diffusion of one axis.
func (w *work) runFree() error {
	fit, ratio, err := w.measureFree()
	if err != nil {
		return err
	}
	w.axis = blankAxis(w, noTrap)
	x, p := &w.axis, w.phys
	extra := math.Sqrt(math.Max(0, fit.LogTotal*fit.LogTotal-fit.LogSD*fit.LogSD))
	stat := relaxation.Normal(fit.LogSD)
	if fit.LogTotal > 0 {
		stat = fit.Intervals.Scaled(fit.LogSD / fit.LogTotal)
	}
	total := func(u float64) (float64, relaxation.Offsets) {
		return math.Hypot(fit.LogTotal, u), stat.Widened(math.Hypot(extra, u))
	}
	value := math.Log(fit.Diffusion)
	gg, _, aa := p.systematics()
	gamma := math.Sqrt(gg)
	x.Drag = input(p.gamma, gamma*p.gamma, "N s/m")
	f := &FreeBead{Expected: input(p.kT/p.gamma, w.dragInputsU()*p.kT/p.gamma, "m2/s"), Displacements: fit.Count}
	x.Free = f
	w.describeFreeNoise(f, fit)
	f.Speed = around(fit.Speed, fit.SpeedSD, "m/s")
	if w.unscaled {
		w.freeSensitivity(ratio, stat, fit)
		return nil
	}
	w.loose = &fit
	sd, o95 := total(w.lengthU())
	f.Diffusion = exponential(value, fit.LogSD, stat, sd, o95, "m2/s")
	x.Spectrum.Diffusion = f.Diffusion
	sd, o95 = total(math.Sqrt(aa))
	x.MeasuredDrag = exponential(ratio+math.Log(p.gamma), fit.LogSD, stat.Mirrored(), sd, o95.Mirrored(), "N s/m")
	u := w.ratioU()
	sd, o95 = total(u)
	x.DragRatio = exponential(ratio, fit.LogSD, stat.Mirrored(), sd, o95.Mirrored(), "1")
	near, far := ratio*ratio/(fit.LogTotal*fit.LogTotal), ratio*ratio/(sd*sd)
	f.Test = Test{ChiSquare: Float(near), DegreesOfFreedom: 1, PValue: survival(near, 1), ChiSquareCombined: Float(far), PValueCombined: survival(far, 1), MeanDifference: Float(ratio)}
	relation := "above"
	if ratio < 0 {
		relation = "below"
	}
	f.Text = fmt.Sprintf("the measured drag is %.1f %% %s the computed one (%s with inputs exact, %s with their uncertainties)",
		100*math.Abs(math.Expm1(ratio)), relation, pText(float64(f.Test.PValue)), pText(float64(f.Test.PValueCombined)))
	x.CrossCheck.Text = f.Text
	return nil
}

// measureFree fits the diffusion, and gives the logarithm of the measured over the computed drag.
func (w *work) measureFree() (fit relaxation.FreeFit, ratio float64, err error) {
	fit, err = w.fitFree(relaxation.FreeOptions{Interval: 1 / w.rate, Exposure: w.exposure})
	if err != nil {
		return fit, 0, w.dataError(err, "record longer or faster; state the localisation noise with --noise if the bead hardly moves between samples")
	}
	return fit, math.Log(w.phys.kT/w.phys.gamma) - math.Log(fit.Diffusion), nil
}

// ratioU is the uncertainty of ln(measured/computed drag) by the inputs.
func (w *work) ratioU() float64 {
	gg, ga, aa := w.phys.systematics()
	return math.Sqrt(math.Max(0, gg+aa-2*ga))
}

// fitFree fits the displacements in the recorded unit; a noise stated in metres takes a few rounds when the unit is not known.
func (w *work) fitFree(o relaxation.FreeOptions) (relaxation.FreeFit, error) {
	o.NoiseKnown, o.Noise, o.NoiseU = w.noise.Known, w.noise.Variance, w.noise.VarianceU
	if !w.unscaled || !w.noise.Known || w.noiseRecorded {
		return relaxation.FitFree(w.positions(), o)
	}
	o.Noise, o.NoiseU = 0, 0
	var fit relaxation.FreeFit
	for range scaleSteps {
		var err error
		if fit, err = relaxation.FitFree(w.positions(), o); err != nil {
			return fit, err
		}
		square := w.phys.kT / w.phys.gamma / fit.Diffusion
		next := w.noise.Variance / square
		if math.Abs(next-o.Noise) <= scaleEnd*next {
			break
		}
		o.Noise, o.NoiseU = next, w.noise.VarianceU/square
	}
	return fit, nil
}

func (w *work) describeFreeNoise(f *FreeBead, fit relaxation.FreeFit) {
	f.NoiseVariance = around(fit.Noise, fit.NoiseSD, "m2")
	switch {
	case fit.Noise > 2*fit.NoiseSD:
		f.Noise = around(math.Sqrt(fit.Noise), fit.NoiseSD/(2*math.Sqrt(fit.Noise)), "m")
	case w.noise.Known:
		f.Noise = Exact(math.Sqrt(math.Max(0, fit.Noise)), "m")
	default:
		f.Noise = Withheld("m", "the noise is not above twice its uncertainty")
	}
}

// freeSensitivity gives the length per unit of a detector at which the free bead has the computed drag.
func (w *work) freeSensitivity(ratio float64, stat relaxation.Offsets, fit relaxation.FreeFit) {
	x, f := &w.axis, w.axis.Free
	w.perUnit = math.Exp(ratio / 2)
	o, u := stat.Mirrored().Scaled(0.5), w.dragInputsU()/2
	unit := "m/" + w.source.Unit
	q := exponential(ratio/2, fit.LogSD/2, o, math.Hypot(fit.LogSD/2, u), o.Widened(u), unit)
	x.Sensitivity = &Sensitivity{Used: q, Unit: w.source.Unit, Origin: SensitivityDrag, FromDrag: q}
	reason := "the sensitivity was taken from the computed drag, so that the diffusion cannot test it"
	f.Diffusion = Withheld("m2/s", reason)
	f.NoiseVariance, f.Noise = Withheld("m2", reason), Withheld("m", reason)
	f.Speed = around(fit.Speed*w.perUnit, fit.SpeedSD*w.perUnit, "m/s")
	if fit.Noise > 2*fit.NoiseSD {
		f.NoiseVariance = around(fit.Noise*w.perUnit*w.perUnit, fit.NoiseSD*w.perUnit*w.perUnit, "m2")
		f.Noise = around(math.Sqrt(fit.Noise)*w.perUnit, fit.NoiseSD/(2*math.Sqrt(fit.Noise))*w.perUnit, "m")
	}
	x.MeasuredDrag, x.DragRatio, f.Test, f.Text = Withheld("N s/m", reason), Withheld("1", reason), noTest(reason), "not tested: "+reason
	x.CrossCheck.Text = f.Text
}

// judgeFree compares the measured with the computed drag over all axes.
func (r *Result) judgeFree() {
	lowest, tested, worst := 1.0, 0, ""
	for _, a := range r.Axes {
		if p := float64(a.Free.Test.PValueCombined); !math.IsNaN(p) {
			tested++
			if p <= lowest {
				lowest, worst = p, fmt.Sprintf("axis %s: %s", a.Name, a.Free.Text)
			}
		}
	}
	v := &r.Verdict
	v.Status, v.FamilyWiseP = Consistent, Float(math.NaN())
	if tested == 0 {
		v.Text, v.Reason = "The free bead gives the sensitivity of the detector.", "diffusion and computed drag are its only legs"
		return
	}
	v.FamilyWiseP = Float(math.Min(1, lowest*float64(tested)))
	v.Text = "The drag of the free bead is the computed one within the uncertainties."
	v.Reason = fmt.Sprintf("%s; smallest p-value over %d %s, corrected for their number: %s (inconsistent below %g)", worst, tested, plural(tested, "axis", "axes"),
		pText(float64(v.FamilyWiseP)), familyLevel)
	if float64(v.FamilyWiseP) >= familyLevel {
		return
	}
	v.Status = Inconsistent
	v.Text = "The drag of the free bead is not the computed one: bead diameter, viscosity, temperature, height or length scale is wrong."
}

// addFreeFinding says that the drag of a free bead is not the computed one.
func (r *Result) addFreeFinding() {
	v := r.Verdict
	if v.Status != Inconsistent {
		return
	}
	r.Findings = append(r.Findings, Finding{Code: CodeFreeDrag, Severity: Bad, Text: v.Text + " " + capital(v.Reason) + ".",
		Remedy: "check bead diameter, liquid, temperature, height and length scale; a trapped recording with the same settings would be wrong the same way",
		Value:  v.FamilyWiseP, Limit: familyLevel, Unit: "1"})
}
