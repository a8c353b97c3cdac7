package calib

import (
	"fmt"
	"math"

	"beadwell/calib/session"
)

// PlanVersion names the layout of a stored Plan.
const PlanVersion = "beadwell-plan/1"

// PlanOptions are what is expected of a recording that has not been made, beside
// its settings.
type PlanOptions struct {
	Axis      string  // "x", "y" or "z"; empty is x
	Stiffness float64 // expected stiffness [N/m]; 0: from Corner
	Corner    float64 // expected corner frequency [Hz]; used when Stiffness is 0
	Wanted    float64 // wanted combined standard uncertainty, relative to the stiffness; 0: none
	Program   Program // for the record
}

// Plan is what a recording of one axis can tell, before it is made. SI units; all
// uncertainties are relative to the stiffness.
type Plan struct {
	Schema      string    `json:"schema"`           // layout of this object, with its version
	Program     Program   `json:"program"`          // what made the plan
	Settings    []Setting `json:"settings"`         // every setting that was in force
	Axis        string    `json:"axis"`             // "x", "y" or "z"
	Orientation string    `json:"orientation"`      // "parallel" or "perpendicular" to the surface
	Medium      Medium    `json:"medium"`           // the liquid as it was used
	Bead        Bead      `json:"bead"`             // the bead as it was used
	WallFactor  Float     `json:"wall_factor"`      // drag over Stokes drag, 1
	Drag        Quantity  `json:"drag"`             // Stokes times wall factor, N s/m
	Stiffness   Quantity  `json:"stiffness"`        // expected, N/m
	Corner      Quantity  `json:"corner_frequency"` // expected, Hz
	RMS         Quantity  `json:"thermal_rms"`      // root mean square of the thermal motion, m
	Rate        Float     `json:"rate_hz"`          // sampling rate that is planned
	Exposure    Float     `json:"exposure_s"`       // time over which a position is averaged
	Noise       Quantity  `json:"noise"`            // localisation noise, m

	Floor  PlanFloor   `json:"floor"`            // what the inputs leave
	Times  []PlanTime  `json:"times"`            // in order of duration
	Enough Quantity    `json:"enough"`           // duration from which on a longer recording improves the combined uncertainty by less than 5 %, s
	Wanted *PlanWanted `json:"wanted,omitempty"` // how long to record; absent when nothing was wanted
	Rates  PlanRates   `json:"rates"`            // the same recording at other sampling rates

	Findings []Finding `json:"findings"` // never null
}

// PlanUncertainty is a relative standard uncertainty of the stiffness, 1: that of an estimate
// which reaches the Cramer-Rao bound of the recording together with what is stated of the noise.
// The combined one is that bound. The statistical one is its part that repeated recordings would
// show; with a noise that is stated as uncertain it may rise with the duration, when the
// recording begins to tell the noise better than the statement. Null: the recording does not
// determine the stiffness to better than its own size.
type PlanUncertainty struct {
	Statistical Float `json:"statistical"` // scatter of repeated recordings, inputs taken as exact
	Combined    Float `json:"combined"`    // with the stated uncertainties of the inputs
}

// PlanRoutes are the uncertainties by the two routes and by their combination.
type PlanRoutes struct {
	Drag      PlanUncertainty `json:"drag"`      // 2 pi times drag times corner frequency
	Amplitude PlanUncertainty `json:"amplitude"` // kT over variance
	Both      PlanUncertainty `json:"both"`      // combined, as Calibrate adopts them
}

// PlanTime is the prediction for one duration.
type PlanTime struct {
	Duration Float      `json:"duration_s"`  // duration of the recording
	Samples  int        `json:"samples"`     // number of samples
	Routes   PlanRoutes `json:"uncertainty"` // of the stiffness
	Drift    Float      `json:"drift_m"`     // rms of a drift that is not a straight line at which it moves the amplitude route by its statistical uncertainty, m
}

// PlanFloor is what is left of the uncertainty however long the recording is.
type PlanFloor struct {
	Drag      Float        `json:"drag"`               // relative, 1
	Amplitude Float        `json:"amplitude"`          // relative, 1
	Both      Float        `json:"both"`               // relative, 1
	Weight    Float        `json:"drag_weight"`        // of the drag route in the combination
	Dominant  string       `json:"dominant,omitempty"` // input with the largest share of it
	Budget    []BudgetLine `json:"budget"`             // the inputs, and what each adds
}

// PlanWanted says how long to record for a wanted combined uncertainty.
type PlanWanted struct {
	Uncertainty Float    `json:"uncertainty"` // relative, 1
	Drag        Quantity `json:"drag"`        // duration, s; null with a reason when no duration is enough
	Amplitude   Quantity `json:"amplitude"`   // likewise
	Both        Quantity `json:"both"`        // likewise
}

// PlanRates compares sampling rates at one duration.
type PlanRates struct {
	Duration Float      `json:"duration_s"` // duration of all of them
	Best     Quantity   `json:"best"`       // lowest rate whose combined uncertainty is within 5 % of the best of all, Hz
	Rows     []PlanRate `json:"rows"`       // in order of rate
}

// PlanRate is the prediction for one sampling rate.
type PlanRate struct {
	Rate    Float      `json:"rate_hz"`     // sampling rate
	Samples int        `json:"samples"`     // number of samples
	Planned bool       `json:"planned"`     // the rate of the settings
	Routes  PlanRoutes `json:"uncertainty"` // of the stiffness
}

// Forecast predicts the uncertainty of the stiffness of one axis from the Cramer-Rao
// bound of the recorded process (Whittle's sum over the frequencies) and the
// uncertainties of the inputs, with the settings that Calibrate takes.
//
// The bound is that of a mean and a straight line unknown and removed. The scatter of
// Calibrate is within 5 % of it from about a hundred relaxation times on
// (TestForecastAgainstSimulation); shorter recordings do worse, which a finding says.
//
// The error is a *SettingError when a setting is missing or impossible.
func Forecast(set *session.Settings, opt PlanOptions) (*Plan, error) {
	if opt.Axis == "" {
		opt.Axis = "x"
	}
	f, err := newForecast(set, opt)
	if err != nil {
		return nil, err
	}
	p := &Plan{Schema: PlanVersion, Program: opt.Program, Settings: ListSettings(set), Axis: opt.Axis, Findings: []Finding{}}
	f.describe(p)
	p.Floor = f.floor()
	p.Times = f.times()
	p.Enough = f.enough(float64(p.Floor.Both))
	if opt.Wanted > 0 {
		p.Wanted = f.wanted(opt.Wanted)
	}
	p.Rates = f.rates(f.reference(p))
	p.Findings = append(p.Findings, f.findings(p)...)
	return p, nil
}

// newForecast evaluates the settings.
func newForecast(set *session.Settings, opt PlanOptions) (*forecast, error) {
	phys, err := newPhysics(set, opt.Axis)
	if err != nil {
		return nil, err
	}
	rate, ok := number(set, "recording.rate", "")
	if !ok {
		return nil, &SettingError{Key: "recording.rate", Problem: "is not given", Remedy: `give the sampling rate to plan for with --rate "2 kHz"`}
	}
	f := &forecast{axis: opt.Axis, set: set, phys: phys, rate: rate.Value.SI, kappa: opt.Stiffness}
	if f.kappa == 0 {
		f.kappa = 2 * math.Pi * phys.gamma * opt.Corner
	}
	if !(f.kappa > 0) || math.IsInf(f.kappa, 1) {
		return nil, &SettingError{Key: "stiffness", Problem: "to expect is not given", Remedy: `give it with --stiffness "50 pN/um", or the corner frequency with --corner "500 Hz"`}
	}
	f.corner, f.variance = f.kappa/(2*math.Pi*phys.gamma), phys.kT/f.kappa
	// what a recording would need, by the code that calibrates one
	w := &work{axisName: opt.Axis, set: set, rate: f.rate, phys: phys}
	if err := w.setExposure(); err != nil {
		return nil, err
	}
	w.setNoise()
	f.exposure, f.exposureU, f.noise = w.exposure, w.exposureU, w.noise
	if x := f.corner / f.rate; x < lowestRatio || x > highestRatio {
		return nil, &SettingError{Key: "recording.rate", Where: rate.Where,
			Problem: fmt.Sprintf("%g Hz cannot record a corner frequency of %.4g Hz", f.rate, f.corner),
			Remedy:  fmt.Sprintf("choose a rate from %s Hz to %s Hz", digits(f.corner/highestRatio, 3), digits(f.corner/lowestRatio, 3))}
	}
	for _, key := range []string{"recording.pixel", "recording.sensitivity"} {
		if s, ok := number(set, key, opt.Axis); ok && s.Value.SI > 0 {
			phys.withLength(map[string]string{"recording.pixel": "pixel size", "recording.sensitivity": "sensitivity"}[key], s.Value.Dimension.SIUnit(), s.Value.SI, s.Value.U)
		}
	}
	return f, nil
}

// The corner frequencies over the sampling rate that can be planned. Above, exp(-2 pi 2)
// = 3e-6 of the correlation is left after one sample; below, a recording of 1e9 samples
// has no relaxation in it.
const (
	lowestRatio  = 1e-7
	highestRatio = 2.0
)

func (f *forecast) describe(p *Plan) {
	phys := f.phys
	p.Orientation = "parallel"
	if !phys.parallel {
		p.Orientation = "perpendicular"
	}
	p.Medium, p.Bead, p.WallFactor = phys.medium, phys.bead, Float(phys.wall.Factor)
	gg, _, _ := phys.systematics()
	p.Drag = input(phys.gamma, math.Sqrt(gg)*phys.gamma, "N s/m")
	p.Stiffness, p.Corner, p.RMS = Exact(f.kappa, "N/m"), Exact(f.corner, "Hz"), Exact(math.Sqrt(f.variance), "m")
	p.Rate, p.Exposure = Float(f.rate), Float(f.exposure)
	p.Noise = Withheld("m", "not stated: it will be fitted")
	if n, ok := number(f.set, "recording.noise", f.axis); ok {
		p.Noise = input(n.Value.SI, n.Value.U, "m")
	}
}
