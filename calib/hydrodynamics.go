package calib

import (
	"context"
	"fmt"
	"math"

	"beadwell/calib/drag"
	"beadwell/calib/session"
	"beadwell/calib/track"
	"beadwell/psd"
)

// Names of the drag in a spectrum.
const (
	ConstantDrag           = "constant"
	FrequencyDependentDrag = "frequency-dependent"
)

const (
	// hydroBias is the bias of a fit with constant drag, in its statistical uncertainties, from which on
	// the frequency dependence is looked at: a tenth of that in quadrature.
	hydroBias = 0.25
	// otherBead is the likelihood-ratio statistic of one degree of freedom beyond which the computed drag is not that of
	// the recording, whichever the spectrum: p = 0.005, the level of the cross-check.
	otherBead = 7.88
)

// hydrodynamic is the spectrum with the inertia of liquid and bead and the low-pass of
// the detector; ok is false where neither is known. The mass of a bead of unstated density is that of
// the liquid it displaces: it matters near f_m, megahertz for a bead of a micrometre.
func (w *work) hydrodynamic(inertia bool) (psd.Hydrodynamic, bool) {
	h, hasDiode := w.photodiode()
	p := w.phys
	if inertia && !math.IsNaN(p.density) {
		d := drag.Frequency{Radius: p.radius, Height: p.height, Viscosity: p.viscosity, Density: p.density,
			StaticFactor: math.Max(1, p.wall.Factor), Perpendicular: !p.parallel}
		if d.Check() == nil {
			static := complex(d.StaticFactor, 0)
			h.Drag = func(f float64) complex128 { return d.Factor(f) / static }
			h.DragKey = d
			density := p.beadDensity
			if math.IsNaN(density) {
				density = p.density
			}
			mass := 4.0 / 3 * math.Pi * p.radius * p.radius * p.radius * density
			h.MassCorner = p.gamma / (2 * math.Pi * mass)
		}
	}
	return h, hasDiode || h.Drag != nil
}

// settleDrag replaces the fit with constant drag by one with frequency-dependent drag or a
// photodiode's low-pass, where that is set, or where it matters and the record shows it.
func (w *work) settleDrag() error {
	w.dragModel = ConstantDrag
	choice := "auto"
	if s, ok := w.set.Lookup("fit.drag", ""); ok && s.Word != "" {
		choice = s.Word
	}
	diode, hasDiode := w.hydrodynamic(false)
	if w.dragChoice != "" {
		choice = w.dragChoice
	}
	if w.tooManyGaps() && (hasDiode || choice == FrequencyDependentDrag) {
		key := "fit.drag"
		if hasDiode {
			key = "detector.f3db"
		}
		return &SettingError{Key: key, Axis: w.axisName, Problem: fmt.Sprintf("cannot be used where samples are missing, and %d are", w.record.Missing),
			Remedy: "leave it out and restrict the fit with --band, or record without gaps"}
	}
	if hasDiode {
		if err := w.refit(diode); err != nil {
			return err
		}
	}
	if choice == ConstantDrag {
		return nil
	}
	h, ok := w.hydrodynamic(true)
	if !ok || h.Drag == nil {
		if choice == FrequencyDependentDrag {
			return &SettingError{Key: "fit.drag", Problem: "is frequency-dependent, but the density of the liquid is not known",
				Remedy: `state it with --fluid-density "0.998 g/cm3"`}
		}
		return nil
	}
	if choice == FrequencyDependentDrag {
		w.dragModel = FrequencyDependentDrag
		return w.refit(h)
	}
	return w.chooseDrag(h)
}

// refit fits another spectrum to the record. Lines that the fit with constant drag found may be where that does not
// hold: they are put back and looked for anew.
func (w *work) refit(h psd.Hydrodynamic) error {
	if err := h.Check(); err != nil {
		return &SettingError{Key: "detector.f3db", Problem: err.Error()}
	}
	if len(w.record.Lines) > 0 {
		if err := w.prepare(); err != nil {
			return err
		}
	}
	options := w.fitOptions()
	options.Form = h.Form(w.rate, w.exposure)
	options.KeepLines = w.record.Missing > 0
	if w.fitErr == nil && !h.FitAlpha && !h.FitF3dB {
		options.From = w.fit
	}
	var record *psd.Record
	w.fit, record, w.fitErr = w.estimateFilled(options)
	w.form, w.seen = options.Form, h
	if w.fitErr == nil {
		w.settleRoles(record)
		w.seen = h.Seen(w.fit)
	}
	return nil
}

// mostFilled is the share of missing samples up to which a spectrum of another shape is
// fitted to the record with its gaps bridged by straight lines: a bridge errs by less than
// a step of the motion, so that the highest frequencies lose less than this share of their power.
const mostFilled = 0.002

func (w *work) tooManyGaps() bool {
	return float64(w.record.Missing) > mostFilled*float64(w.record.Samples)
}

// estimateFilled fits a spectrum of another shape, which knows nothing of missing samples.
func (w *work) estimateFilled(options psd.Options) (*psd.Fit, *psd.Record, error) {
	record := w.record
	if record.Missing > 0 {
		var err error
		if record, err = psd.Prepare(bridged(record.X), record.Rate); err != nil {
			return nil, record, err
		}
	}
	fit, err := psd.Estimate(record, options)
	return fit, record, err
}

// chooseDrag takes frequency-dependent drag where a fit with constant drag would be
// biased by more than a quarter of its uncertainty and the record agrees better with it.
func (w *work) chooseDrag(h psd.Hydrodynamic) error {
	if w.fitErr != nil {
		return nil
	}
	sd, _ := w.fit.SD(alongCorner)
	sdD, _ := w.fit.SD(alongDrag)
	noise := math.Max(0, w.fit.NoiseQ/w.fit.Variance)
	at := h
	at.Alpha, at.F3dB = w.seen.Alpha, w.seen.F3dB // as it was fitted
	bias, err := at.Bias(psd.Design{Rate: w.rate, Exposure: w.exposure, Corner: w.fit.Corner, Noise: noise, NoiseFree: !w.noise.Known, Band: w.givenBand()})
	if err != nil || math.Abs(bias.Corner) < hydroBias*sd && math.Abs(bias.Diffusion) < hydroBias*sdD {
		return nil
	}
	w.hydro = &bias
	if w.tooManyGaps() {
		return nil
	}
	plain := *w
	if err := w.refit(h); err != nil || w.fitErr != nil {
		w.backTo(&plain)
		return nil
	}
	// the same form of the likelihood for both, so that their values compare
	options := w.fitOptions()
	options.KeepLines = true
	constant := h
	constant.Drag, constant.MassCorner = nil, 0
	options.Form = constant.Form(w.rate, w.exposure)
	options.From = plain.fit
	base, _, err := w.estimateFilled(options)
	if err != nil {
		w.backTo(&plain)
		return nil
	}
	with, without := w.agreement(w.fit), w.agreement(base)
	w.inertia = with - without
	if 2*min(w.fit.Maximum.Value-with, base.Maximum.Value-without) > otherBead {
		// A wrong height, say: what the computed drag would like better is no evidence and must not move the measured one, and
		// recordings of one series must not differ by chance.
		w.inertia = w.fit.Maximum.Value - base.Maximum.Value - otherBead/2
	}
	if w.inertia > 0 {
		w.dragModel = FrequencyDependentDrag
		return nil
	}
	w.backTo(&plain)
	return nil
}

// backTo takes back a fit of another spectrum.
func (w *work) backTo(plain *work) {
	w.record, w.fit, w.fitErr, w.form, w.seen, w.rival = plain.record, plain.fit, plain.fitErr, plain.form, plain.seen, plain.rival
}

// agreeOnDrag lets the axes of a recording decide together: liquid and bead are the same for
// all. Axes that chose otherwise are analysed again.
func agreeOnDrag(ctx context.Context, rec *track.Recording, set *session.Settings, opt Options, works []*work) error {
	sum := 0.0
	for _, w := range works {
		sum += w.inertia
	}
	want := ConstantDrag
	if sum > 0 {
		want = FrequencyDependentDrag
	}
	for i, w := range works {
		if w.inertia == 0 || w.dragModel == want {
			continue
		}
		next, err := newWork(rec, i, set, opt)
		if err != nil {
			return err
		}
		next.dragChoice = want
		if err := next.run(ctx); err != nil {
			return err
		}
		next.hydro, next.inertia = w.hydro, w.inertia
		works[i] = next
	}
	return nil
}

// agreement returns the log-likelihood of a fit that knows the computed drag: the shape
// of the spectrum counts, and where that cannot tell, what Stokes drag and kT say of D, unless they contradict the record. The noise is
// kept from turning negative, which would let a wrong shape pass.
func (w *work) agreement(fit *psd.Fit) float64 {
	kept := w.fit
	w.fit, w.physicalNoise = fit, true
	defer func() { w.fit, w.physicalNoise = kept, false }()
	if w.pool() != nil {
		return math.Inf(-1)
	}
	return w.pooled.maximum.Value
}

func (w *work) givenBand() psd.Range { return w.fitOptions().Band }

// hydrodynamicFinding says which drag was used where it matters.
func (w *work) hydrodynamicFinding() (Finding, bool) {
	if w.hydro == nil {
		return Finding{}, false
	}
	f := Finding{Code: CodeHydrodynamics, Axis: w.axisName, Value: Float(w.hydro.Corner), Limit: Float(math.NaN()), Unit: "1"}
	size := fmt.Sprintf("corner frequency and stiffness by drag would be %.1f %% off", 100*math.Abs(w.hydro.Corner))
	if w.dragModel == FrequencyDependentDrag {
		f.Severity = Note
		f.Text = "The inertia of the liquid matters at this rate: with constant drag " + size + ". Frequency-dependent drag was fitted."
		return f, true
	}
	f.Severity = Doubtful
	if w.tooManyGaps() {
		f.Text = fmt.Sprintf("The inertia of the liquid matters at this rate, but %d samples are missing, and only constant drag can be fitted then: %s.", w.record.Missing, size)
		f.Remedy = "record without gaps, or restrict the fit with --band to a few times the corner frequency"
		return f, true
	}
	f.Text = "The inertia of the liquid should matter at this rate, but the spectrum does not show it better than a constant drag; constant drag was fitted. If the inertia is there, " + size + "."
	f.Remedy = "record longer, restrict the fit with --band to a few times the corner frequency, or decide with --drag constant or --drag frequency-dependent"
	return f, true
}
