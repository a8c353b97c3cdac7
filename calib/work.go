package calib

import (
	"context"
	"errors"
	"fmt"
	"math"

	"beadwell/calib/health"
	"beadwell/calib/msd"
	"beadwell/calib/relaxation"
	"beadwell/calib/session"
	"beadwell/calib/track"
	"beadwell/equipartition"
	"beadwell/psd"
)

// work is the analysis of one axis.
type work struct {
	name      string // of the recording
	axisName  string
	set       *session.Settings
	opt       Options
	phys      *physics
	source    track.Axis
	recorded  track.Axis // as it was read
	rate      float64    // Hz
	start     float64    // s
	exposure  float64    // s
	exposureU float64    // s
	noise     psd.Noise
	// noiseRecorded tells that the noise is in the recorded unit squared, whose length is not known yet.
	noiseRecorded bool
	background    *background // where the noise comes from one
	detector      bool        // positions were recorded in detector units
	unscaled      bool        // no sensitivity is known beforehand
	// perUnit is the length of the recorded unit [m], perUnitU its stated standard uncertainty.
	perUnit, perUnitU float64
	gathered          *gatheredAxis // of a recording that is too long for the memory; nil for others
	unit              float64       // what its positions were multiplied with: 1 or perUnit
	sensitivityOrigin string
	drive             *drive // of the axis that follows a moving stage; nil for others
	reply             response
	free              *carried            // drag of the free bead; nil without one
	freeUnused        []string            // recordings of it that say nothing, with the reason
	tones             *health.Spectrum    // periodogram of the positions; nil where it is not that of the record
	adopter           *work               // the work by whose drag the stiffness was adopted; nil: itself
	loose             *relaxation.FreeFit // of a free bead whose lengths are known; nil for others

	record        *psd.Record
	fit           *psd.Fit
	fitErr        error
	hopeless      error // set when nothing at all can be said of the trap
	legs          legs
	profiles      []profileOf
	pooled        pooled
	adoptedLeg    int // the leg that was adopted, or combinedLegs
	poolErr       error
	dragModel     string                                                 // ConstantDrag or FrequencyDependentDrag
	dragChoice    string                                                 // what the axes of the recording agreed on; empty: the setting
	inertia       float64                                                // log-likelihood gained by frequency-dependent drag; 0: not looked at
	physicalNoise bool                                                   // the pooled fit keeps the noise from turning negative
	seen          psd.Hydrodynamic                                       // the spectrum of the fit with its photodiode, where there is a form
	rival         *psd.Fit                                               // trap and photodiode exchanged, where nothing says which is which
	byStage       bool                                                   // the adopted stiffness rests on the motion of the stage
	moved         [moveCount]float64                                     // inputs of the record, moved by so many standard uncertainties
	form          func(relaxation.Blocks, float64) relaxation.Likelihood // of the fit; nil: the relaxation process
	hydro         *psd.Bias                                              // of a fit with constant drag, where it matters
	axis          Axis
}

// newWork reads what the settings say of one axis and converts its positions.
func newWork(rec *track.Recording, index int, set *session.Settings, opt Options) (*work, error) {
	a := rec.Axes[index]
	w := &work{name: rec.Name, axisName: a.Name, set: set, opt: opt, source: a, recorded: a, rate: rec.Rate, start: rec.Start}
	if w.unit = 1; opt.Gathered != nil {
		w.gathered = opt.Gathered.axis(a.Name)
	}
	var err error
	if w.phys, err = newPhysics(set, a.Name); err != nil {
		return nil, err
	}
	if err := w.setExposure(); err != nil {
		return nil, err
	}
	if err := w.setLength(); err != nil {
		return nil, err
	}
	w.setNoise()
	w.carry()
	if opt.Adopt == RouteFreeBead && w.free == nil {
		return nil, &SettingError{Key: "adopt", Axis: a.Name, Problem: fmt.Sprintf("is %q, but no recording of the free bead gives its drag", opt.Adopt),
			Remedy: "name one with --free-bead, or give its row in tracks.csv the role free"}
	}
	if (opt.Adopt == RouteDriven || opt.Adopt == RouteFlow) && roleOf(set) != RoleDriven {
		return nil, &SettingError{Key: "adopt", Axis: a.Name, Problem: fmt.Sprintf("is %q, but the recording is not one with a moving stage", opt.Adopt),
			Remedy: "give its row in tracks.csv the role driven, or add --role driven"}
	}
	return w, w.setBackground()
}

func (w *work) setExposure() error {
	e, ok := number(w.set, "recording.exposure", w.axisName)
	if !ok {
		return nil
	}
	w.exposure, w.exposureU = e.Value.SI, e.Value.U
	if w.exposure*w.rate > 1+1e-6 {
		return &SettingError{Key: "recording.exposure", Axis: w.axisName, Where: e.Where,
			Problem: fmt.Sprintf("%g s is longer than the sampling interval of %g s", w.exposure, 1/w.rate),
			Remedy:  "give the time that the shutter is open for one frame"}
	}
	w.exposure = math.Min(w.exposure, 1/w.rate)
	return nil
}

// setLength finds the length of the recorded unit.
func (w *work) setLength() error {
	a := w.source
	w.perUnit = 1
	if !math.IsNaN(a.ToMetre) {
		return nil
	}
	key := "recording.sensitivity"
	if a.Unit == "px" {
		key = "recording.pixel"
	}
	s, ok := number(w.set, key, a.Name)
	if !ok && key == "recording.pixel" {
		return &SettingError{Key: key, Axis: a.Name, Problem: "is not given, but the positions are in pixels",
			Remedy: `give the length of a pixel in the sample with --pixel "65.0(3) nm"`}
	}
	w.detector = key == "recording.sensitivity"
	if w.unscaled = !ok; w.unscaled {
		if w.opt.Adopt == RouteAmplitude {
			return &SettingError{Key: "adopt", Axis: a.Name, Problem: fmt.Sprintf("is %q, but the positions are in %s and no sensitivity is stated", RouteAmplitude, a.Unit),
				Remedy: `state the sensitivity with --sensitivity "1.31(4) um/V", or leave it out`}
		}
		return nil
	}
	scale := s.Value.SI
	w.perUnit, w.perUnitU, w.sensitivityOrigin = scale, s.Value.U, SensitivityStated
	w.scaleBy(scale)
	name, unit := "sensitivity", s.Value.Dimension.SIUnit()
	if key == "recording.pixel" {
		name = "pixel size"
	}
	if s.Axis != "" {
		name += " of " + s.Axis
	}
	w.phys.withLength(name, unit, scale, s.Value.U)
	return nil
}

// scaleBy multiplies the recorded positions.
func (w *work) scaleBy(scale float64) {
	w.unit = scale
	w.source.Values = nil
}

// positions are the recorded positions in their unit, or in metres where that is known. Those that had to be
// converted are a copy, which release lets go for a long record.
func (w *work) positions() []float64 {
	if w.source.Values == nil && w.recorded.Values != nil {
		values := make([]float64, len(w.recorded.Values))
		for i, v := range w.recorded.Values {
			values[i] = v * w.unit
		}
		w.source.Values = values
	}
	return w.source.Values
}

func (w *work) setNoise() {
	n, ok := number(w.set, "recording.noise", w.axisName)
	if !ok {
		return
	}
	sd, u := n.Value.SI, n.Value.U
	// E[sigma^2] = sd^2 + u^2, and its standard deviation, for a normal sigma
	w.noise = psd.Noise{Known: true, Variance: sd*sd + u*u, VarianceU: math.Sqrt(4*sd*sd*u*u + 2*u*u*u*u)}
}

// run makes all estimates of the axis.
func (w *work) run(ctx context.Context) error {
	if err := w.fitInMetres(); err != nil {
		return err
	}
	if err := ctx.Err(); err != nil {
		return err
	}
	if w.poolErr = w.pool(); w.poolErr != nil && w.fitErr != nil && w.noise.Known {
		w.hopeless = w.dataError(fmt.Errorf("the positions do not look like those of a trapped bead: %w", w.fitErr),
			"check the unit, the diameter and the exposure, and that the bead was trapped; state the noise if it is known")
	}
	w.estimate()
	w.settle()
	w.describe()
	w.release()
	return ctx.Err()
}

// release keeps the spectrum of a record from which nothing but mean and line was taken, for the search of lines, and lets go of
// the samples of a long record, mean and line removed, which can be made again.
func (w *work) release() {
	if w.record.Missing == 0 && len(w.record.Lines) == 0 && w.drive == nil && w.gathered == nil {
		w.tones = health.SpectrumOf(w.record.Power, w.record.Length)
	}
	if w.record.Samples < longRecord {
		return
	}
	w.record.Release()
	w.unload()
}

// unload lets go of the copy of converted positions of a long record.
func (w *work) unload() {
	if w.unit != 1 && len(w.recorded.Values) >= longRecord {
		w.source.Values = nil
	}
}

// fitInMetres fits the positions in metres, whatever their length scale comes from.
func (w *work) fitInMetres() error {
	switch {
	case w.unscaled && w.drive != nil:
		return w.scaleByDrive()
	case w.unscaled:
		return w.scalePositions()
	}
	if err := w.fitPositions(); err != nil || w.drive == nil {
		return err
	}
	return w.answer()
}

// settle compares the estimates and adopts one stiffness.
func (w *work) settle() {
	switch {
	case w.takesDrag():
		w.withholdAmplitude()
		w.opt.Adopt = RouteDrag
		w.adoptWithFree()
	case w.scaledByDrive():
		w.withholdScaled()
		w.adoptDriven()
	case w.drive != nil && w.opt.Adopt == RouteDriven:
		w.compare()
		w.compareFree()
		w.adoptDriven()
	case w.drive != nil && w.opt.Adopt == RouteFlow:
		w.compare()
		w.compareFree()
		w.adoptFlow()
	default:
		w.compare()
		w.compareFree()
		if w.opt.Adopt == RouteDriven || w.opt.Adopt == RouteFlow { // on the axis that follows the stage alone
			w.opt.Adopt = ""
		}
		w.adoptWithFree()
	}
}

// fitPositions fits the spectrum of the positions, in their unit.
func (w *work) fitPositions() error {
	if err := w.prepare(); err != nil {
		return err
	}
	w.fit, w.fitErr = psd.Estimate(w.record, w.fitOptions())
	if rms := math.Sqrt(w.record.MeanSquare()); w.fitErr != nil && w.noise.Variance > 0 && math.Sqrt(w.noise.Variance) >= rms {
		return w.dataError(fmt.Errorf("the stated localisation noise, %.3g nm, is not below the recorded motion, %.3g nm rms", math.Sqrt(w.noise.Variance)*1e9, rms*1e9),
			"check the unit of the noise and of the positions, or leave the noise out")
	}
	if w.fitErr != nil && !errors.Is(w.fitErr, relaxation.ErrNoMaximum) {
		return w.dataError(w.fitErr, "record longer, or widen the band")
	}
	return w.settleDrag()
}

// prepare takes mean, drift and the answer to a moving stage out of the positions.
func (w *work) prepare() (err error) {
	if w.gathered != nil {
		w.record = w.gathered.spectrum.Record(w.unit, w.rate)
	} else if w.record, err = psd.PrepareIn(w.recorded.Values, w.unit, w.rate); err != nil {
		return w.dataError(err, "record longer, or check the columns")
	}
	if w.drive != nil {
		return w.takeOutDrive()
	}
	return nil
}

func (w *work) dataError(err error, remedy string) error {
	return &DataError{Name: w.name, Axis: w.axisName, Problem: err.Error(), Remedy: remedy}
}

func (w *work) fitOptions() psd.Options {
	o := psd.Options{Exposure: w.exposure, Noise: w.noise, Form: w.form}
	if s, ok := w.set.Lookup("fit.band", ""); ok && len(s.Bands) == 1 {
		o.Band = psd.Range{Low: s.Bands[0].Low, High: s.Bands[0].High}
	}
	if w.background != nil {
		for _, l := range w.background.lines {
			o.Exclude = append(o.Exclude, psd.Range{Low: l.Low, High: l.High})
		}
	}
	if s, ok := w.set.Lookup("fit.exclude", ""); ok {
		for _, b := range s.Bands {
			o.Exclude = append(o.Exclude, psd.Range{Low: b.Low, High: b.High})
		}
	}
	return o
}

// The parameters of a fit.
var (
	alongCorner   = relaxation.Parameters{1, 0, 0}
	alongVariance = relaxation.Parameters{0, 1, 0}
	alongNoise    = relaxation.Parameters{0, 0, 1}
	alongDrag     = relaxation.Parameters{1, 1, 0} // ln fc + ln V = ln(D/2 pi)
)

// legs are the stiffness estimates of one axis in logarithms, in the order of the Leg
// constants.
type legs struct {
	value   [legCount]float64 // ln kappa; NaN when withheld
	reason  [legCount]string
	offsets [legCount]relaxation.Offsets // of ln kappa, statistical
	stat    [legCount][legCount]float64  // covariance of ln kappa, inputs exact
	total   [legCount][legCount]float64  // with the uncertainties of the inputs
	// grad[i] is the change of ln kappa for one standard uncertainty of each influence; the last entries are
	// exposure and noise.
	grad [legCount][]float64
	eq   equipartition.Result
	msd  *msd.Result
}

const (
	spectrumLeg = iota
	equipartitionLeg
	displacementLeg
	amplitudeLeg
	timeLeg
	legCount
)

var legNames = [legCount]string{LegSpectrum, LegEquipartition, LegDisplacement, LegSpectrumAmplitude, LegDisplacementTime}

var dragLeg = [legCount]bool{spectrumLeg: true, timeLeg: true}

func routeOf(leg int) string {
	if dragLeg[leg] {
		return RouteDrag
	}
	return RouteAmplitude
}
