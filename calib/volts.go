package calib

import (
	"fmt"
	"math"

	"beadwell/calib/relaxation"
	"beadwell/psd"
)

// Sensitivity is the length per unit of the detector of one axis.
//
// The spectrum of a recording in detector units gives D_V, the diffusion coefficient in
// units squared a second. That of the bead is kT/gamma, gamma by Stokes and the wall, so that
// the sensitivity is sqrt(kT/(gamma D_V)) (Tolic-Norrelykke et al., Rev. Sci. Instrum. 77 (2006) 103101,
// for the calibration of a detector by the diffusion of the bead; docs/method.md, Eq. 52).
type Sensitivity struct {
	Used     Quantity `json:"used"`      // m per unit of the detector, by which the positions were scaled
	Unit     string   `json:"unit"`      // of the detector: "V", "counts", "1"; volts for V, mV and uV
	Origin   string   `json:"origin"`    // "stated", "computed drag", "driven stage"
	FromDrag Quantity `json:"from_drag"` // what diffusion and computed drag make it, m per unit
}

// Origins of a sensitivity.
const (
	SensitivityStated = "stated"
	SensitivityDrag   = "computed drag"
	SensitivityDriven = "driven stage"
)

// selfScaled is why the amplitude route is no independent leg of a recording in detector
// units without a stated sensitivity.
const selfScaled = "the sensitivity was taken from the computed drag, so that a stiffness through amplitude would repeat the one through drag"

// scaleSteps bounds the search for a sensitivity when the noise is stated in metres; it
// converges by the share of the noise in the spectrum a step.
const (
	scaleSteps = 30
	scaleEnd   = 1e-9
)

// scalePositions finds the sensitivity from the computed drag, turns the positions into
// metres, and repeats the fit with them. A noise stated in metres needs the
// sensitivity before it can be used, which takes a few rounds.
func (w *work) scalePositions() error {
	metres := w.noise
	if metres.Known && !w.noiseRecorded {
		w.noise.Variance, w.noise.VarianceU = 0, 0
	}
	last := math.Inf(1)
	for range scaleSteps {
		if err := w.fitPositions(); err != nil {
			return err
		}
		if w.fitErr != nil {
			return w.dataError(fmt.Errorf("the positions are in %s, and their spectrum does not give the sensitivity: %w", w.source.Unit, w.fitErr),
				`state it with --sensitivity "1.31(4) um/V", or record longer or faster`)
		}
		w.perUnit = math.Exp(w.logSensitivity())
		if !metres.Known || metres.Variance == 0 || w.noiseRecorded || math.Abs(math.Log(w.perUnit)-last) < scaleEnd {
			break
		}
		last = math.Log(w.perUnit)
		square := w.perUnit * w.perUnit
		w.noise.Variance, w.noise.VarianceU = metres.Variance/square, metres.VarianceU/square
	}
	w.sensitivityOrigin = SensitivityDrag
	w.noise = w.noiseInMetres(metres)
	return w.rescale()
}

// noiseInMetres returns the noise once the length of the recorded unit is known.
func (w *work) noiseInMetres(stated psd.Noise) psd.Noise {
	if w.noiseRecorded {
		square := w.perUnit * w.perUnit
		stated.Variance *= square
		stated.VarianceU *= square
	}
	return stated
}

// rescale turns the positions into metres and fits them again.
func (w *work) rescale() error {
	w.scaleBy(w.perUnit)
	w.form, w.seen, w.rival = nil, psd.Hydrodynamic{}, nil
	return w.fitPositions()
}

// logSensitivity returns the logarithm of the length per recorded unit at which the diffusion
// coefficient of the fit is kT over the computed drag.
func (w *work) logSensitivity() float64 {
	measured := math.Log(2 * math.Pi * w.fit.Corner * w.fit.Variance)
	return (math.Log(w.phys.kT/w.phys.gamma) - measured) / 2
}

// takesDrag tells that the lengths of the recording rest on its own diffusion and the computed drag.
func (w *work) takesDrag() bool { return w.sensitivityOrigin == SensitivityDrag }

// withholdAmplitude withdraws the estimates that repeat the drag route.
func (w *work) withholdAmplitude() {
	l := &w.legs
	for _, leg := range []int{equipartitionLeg, displacementLeg, amplitudeLeg} {
		l.value[leg], l.reason[leg] = math.NaN(), selfScaled
	}
	w.axis.CrossCheck = CrossCheck{Equality: noTest(selfScaled), Routes: noTest(selfScaled), Amplitudes: noTest(selfScaled),
		Text: "not tested: " + selfScaled + "; corner frequency and computed drag are the only independent leg"}
}

// describeSensitivity fills in the sensitivity of a recording in detector units.
func (w *work) describeSensitivity() {
	if !w.detector {
		return
	}
	s := &Sensitivity{Unit: w.source.Unit, Origin: w.sensitivityOrigin}
	switch s.Unit {
	case "mV", "uV":
		s.Unit = "V" // as the positions were read
	}
	unit := "m/" + s.Unit
	w.axis.Sensitivity = s
	if w.fitErr != nil {
		s.FromDrag = Withheld(unit, "the spectrum does not give the diffusion coefficient")
	} else {
		sd, _ := w.fit.SD(alongDrag)
		o := w.profile(alongDrag, sd).Mirrored().Scaled(0.5)
		inputs := w.dragInputsU() / 2
		s.FromDrag = exponential(math.Log(w.perUnit)+w.logSensitivity(), sd/2, o, math.Hypot(sd/2, inputs), o.Widened(inputs), unit)
	}
	switch w.sensitivityOrigin {
	case SensitivityDrag:
		s.Used = s.FromDrag
		w.describeSelfScaled()
	case SensitivityDriven:
		s.Used = w.drivenSensitivity(unit)
	default:
		s.Used = input(w.perUnit, w.perUnitU, unit)
	}
}

// dragInputsU is the uncertainty of ln(kT/gamma) by the inputs, lengths left out.
func (w *work) dragInputsU() float64 {
	u := 0.0
	for _, in := range w.phys.influences {
		u = math.Hypot(u, in.energy-in.drag)
	}
	return u
}

// describeSelfScaled states what the fit gives in metres when its lengths come from the
// computed drag: the diffusion coefficient is kT/gamma by construction, and the
// variance kT over the stiffness of the drag route.
func (w *work) describeSelfScaled() {
	s := &w.axis.Spectrum
	if w.fitErr != nil {
		return
	}
	inputs := w.dragInputsU()
	s.Diffusion = exponential(math.Log(w.phys.kT/w.phys.gamma), 0, relaxation.Offsets{}, inputs, relaxation.Normal(inputs), "m2/s")
	s.Diffusion.Statistical = nil
	sd, total := w.fit.SD(alongCorner)
	o := relaxation.Normal(sd)
	if w.has(spectrumLeg) {
		o = w.legs.offsets[spectrumLeg].Mirrored()
	}
	extra := math.Sqrt(math.Max(0, total*total-sd*sd) + inputs*inputs)
	s.Variance = exponential(math.Log(w.fit.Variance), sd, o, math.Hypot(sd, extra), o.Widened(extra), "m2")
}
