package calib

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"beadwell/calib/relaxation"
	"beadwell/psd"
)

// Codes of the findings of a plan, beside those of a calibration.
const (
	CodeSlowRate      = "corner-above-half-rate"
	CodeBlurred       = "exposure-averages-motion"
	CodeFloor         = "inputs-limit-uncertainty"
	CodeCloseSurface  = "surface-close"
	CodeDriftMatters  = "drift-limit"
	CodeExactInputs   = "inputs-without-uncertainty"
	CodeNoiseDominant = "noise-above-motion"
	CodeNoiseLearned  = "noise-told-by-recording"
	CodeExposureGrows = "exposure-limits-uncertainty"
)

// Limits of the findings of a plan.
const (
	muchBlur     = 0.2 // share of the variance that the exposure takes away
	closeSurface = 2.0 // height of the centre over the radius: the wall factor is 1.38 and rises by 5 % for 10 %
)

// findings says what to look out for.
func (f *forecast) findings(p *Plan) []Finding {
	var out []Finding
	for _, one := range []func(*Plan) (Finding, bool){f.assumed, f.exactInputs, f.slowRate, f.blurred, f.noiseFindings, f.noiseLearned, f.exposureGrows, f.short, f.surface,
		f.inertia, f.drift, f.limit} {
		if finding, ok := one(p); ok {
			finding.Axis = f.axis
			out = append(out, finding)
		}
	}
	return out
}

// compared is the number of samples of the duration at which rates are compared.
func (f *forecast) compared(p *Plan) int {
	return max(leastPlanned, f.samples(float64(p.Rates.Duration), f.rate))
}

func planFinding(code, severity, text, remedy string, value, limit float64, unit string) (Finding, bool) {
	return Finding{Code: code, Severity: severity, Text: text, Remedy: remedy, Value: Float(value), Limit: Float(limit), Unit: unit}, true
}

func (f *forecast) assumed(*Plan) (Finding, bool) {
	var named []string
	for _, s := range f.set.All() {
		if s.Assumed {
			named = append(named, fmt.Sprintf("%s = %s", s.Key, s.Text))
		}
	}
	if len(named) == 0 {
		return Finding{}, false
	}
	return planFinding(CodeAssumed, Note, "Not stated, and assumed: "+strings.Join(named, ", ")+".", "state it as it will be", math.NaN(), math.NaN(), "")
}

// exactInputs names inputs whose uncertainty is always there, and was not stated.
func (f *forecast) exactInputs(*Plan) (Finding, bool) {
	var named []string
	for _, in := range f.phys.influences {
		switch in.name {
		case "temperature", "bead diameter", "height", "pixel size", "sensitivity":
			if in.u == 0 {
				named = append(named, in.name)
			}
		}
	}
	if len(named) == 0 {
		return Finding{}, false
	}
	return planFinding(CodeExactInputs, Note, capital(join(named))+" "+plural(len(named), "is", "are")+" stated without an uncertainty and taken as exact; what the plan calls combined is too small by that.",
		`state each with its standard uncertainty, such as "1.02(3) um"`, float64(len(named)), math.NaN(), "1")
}

func (f *forecast) slowRate(*Plan) (Finding, bool) {
	if f.corner < f.rate/2 {
		return Finding{}, false
	}
	return planFinding(CodeSlowRate, Doubtful, fmt.Sprintf("The corner frequency of %.4g Hz lies above half the sampling rate; %.2g of the correlation is left from one sample to the next, and the drag route lives on that.",
		f.corner, math.Exp(-2*math.Pi*f.corner/f.rate)), fmt.Sprintf("record at %s Hz or more, or with less stiffness", digits(4*f.corner, 2)), f.corner, f.rate/2, "Hz")
}

func (f *forecast) blurred(*Plan) (Finding, bool) {
	s, _ := relaxation.BlurVariance(2 * math.Pi * f.corner * f.exposure)
	if 1-s < muchBlur {
		return Finding{}, false
	}
	return planFinding(CodeBlurred, Doubtful, fmt.Sprintf("The exposure averages %.0f %% of the variance away; the correction rests on the exposure and the corner frequency.", 100*(1-s)),
		fmt.Sprintf("expose for %s ms or less, and state the uncertainty of the exposure", digits(1e3*blurExposure(f.corner), 2)), 1-s, muchBlur, "1")
}

// digits prints a number with n significant digits and without an exponent.
func digits(v float64, n int) string {
	rounded, err := strconv.ParseFloat(strconv.FormatFloat(v, 'g', n, 64), 64)
	if err != nil {
		rounded = v
	}
	return strconv.FormatFloat(rounded, 'f', -1, 64)
}

// blurExposure is the exposure [s] that takes about a tenth of the variance: S = 1 - a/3.
func blurExposure(corner float64) float64 { return 0.3 / (2 * math.Pi * corner) }

func (f *forecast) noiseFindings(p *Plan) (Finding, bool) {
	reference := f.at(f.rate, f.compared(p)).routes
	if !f.noise.Known && !(float64(reference.Amplitude.Statistical) <= hopeless && float64(reference.Drag.Statistical) <= hopeless) {
		return planFinding(CodeNoiseUnknown, Doubtful, "The localisation noise is not stated, and at this rate it cannot be told from the motion of the bead: the stiffness will rest on the computed drag.",
			`measure the noise with a stuck bead and state it with --noise "4(1) nm"`, float64(reference.Amplitude.Statistical), hopeless, "1")
	}
	s, _ := relaxation.BlurVariance(2 * math.Pi * f.corner * f.exposure)
	if f.noise.Variance < s*f.variance {
		return Finding{}, false
	}
	return planFinding(CodeNoiseDominant, Doubtful, fmt.Sprintf("The localisation noise of %.3g nm exceeds the recorded motion of %.3g nm (root mean square).",
		1e9*math.Sqrt(f.noise.Variance), 1e9*math.Sqrt(s*f.variance)), "use more light, a brighter bead, or less stiffness", f.noise.Variance/(s*f.variance), 1, "1")
}

// noiseLearned explains why the statistical part can rise with the duration: a longer recording
// tells the noise better than it was stated, and what was a part of the input becomes one of
// the recording.
func (f *forecast) noiseLearned(p *Plan) (Finding, bool) {
	if !f.noise.Known || f.noise.VarianceU == 0 {
		return Finding{}, false
	}
	from, to := rises(p.Times, func(r PlanRoutes) Float { return r.Amplitude.Statistical })
	if to == 0 {
		return Finding{}, false
	}
	one, two := p.Times[from], p.Times[to]
	return planFinding(CodeNoiseLearned, Note, fmt.Sprintf("Recordings longer than about %s s tell the localisation noise better than it is stated. From there on its part of the uncertainty is statistical: by amplitude, the statistical part goes from %.2g %% to %.2g %% at %s s, the combined one from %.2g %% to %.2g %%.",
		digits(float64(one.Duration), 3), 100*float64(one.Routes.Amplitude.Statistical), 100*float64(two.Routes.Amplitude.Statistical), digits(float64(two.Duration), 3),
		100*float64(one.Routes.Amplitude.Combined), 100*float64(two.Routes.Amplitude.Combined)),
		"compare durations by the combined uncertainty, and measure the noise with a longer background", float64(one.Duration), math.NaN(), "s")
}

// exposureGrows tells when a longer recording is a worse one: the more the recording is relied upon,
// the more it counts that the exposure is not what was stated.
func (f *forecast) exposureGrows(p *Plan) (Finding, bool) {
	from, to := rises(p.Times, func(r PlanRoutes) Float { return r.Both.Combined })
	if to == 0 {
		return Finding{}, false
	}
	one, two := p.Times[from], p.Times[to]
	return planFinding(CodeExposureGrows, Doubtful, fmt.Sprintf("The exposure is too uncertain for long recordings: the combined uncertainty is %.2g %% at %s s and %.2g %% at %s s, because more of it then rests on the exposure.",
		100*float64(one.Routes.Both.Combined), digits(float64(one.Duration), 3), 100*float64(two.Routes.Both.Combined), digits(float64(two.Duration), 3)),
		"measure the exposure better, or expose for a shorter time", float64(one.Duration), math.NaN(), "s")
}

// rises returns the rows between which a number rises most with the duration, or zeros when it
// rises by less than a rounding of its two digits.
func rises(rows []PlanTime, of func(PlanRoutes) Float) (from, to int) {
	const least = 1.01
	largest, lowest := least, 0
	for i, row := range rows {
		before, now := float64(of(rows[lowest].Routes)), float64(of(row.Routes))
		if !(now >= before) { // NaN: the recording was too short to tell
			lowest = i
		}
		if now/before > largest {
			largest, from, to = now/before, lowest, i
		}
	}
	return from, to
}

func (f *forecast) short(p *Plan) (Finding, bool) {
	if p.Wanted == nil || !p.Wanted.Both.Known() {
		return Finding{}, false
	}
	periods := float64(p.Wanted.Both.Value) * f.corner
	if periods >= shortRelaxations {
		return Finding{}, false
	}
	return planFinding(CodeShort, Note, fmt.Sprintf("The duration for the wanted uncertainty is %.3g times 1/fc; so short a recording does somewhat worse than the bound.", periods),
		fmt.Sprintf("record for %s s or longer", digits(shortRelaxations/f.corner, 2)), periods, shortRelaxations, "1")
}

func (f *forecast) surface(*Plan) (Finding, bool) {
	if !f.phys.walled {
		if s, ok := f.set.Lookup("chamber.height", ""); ok && s.Word == "far" {
			return Finding{}, false
		}
		factor, err := nearFactor(f.phys.radius, 10*f.phys.radius)
		if err != nil {
			return Finding{}, false
		}
		return planFinding(CodeNoHeight, Note, fmt.Sprintf("No height is stated, and the bead is taken to be far from any surface; at ten radii the drag is already %.0f %% larger.", 100*(factor-1)),
			`state it with --height "8.0(5) um", or --height far`, factor-1, math.NaN(), "1")
	}
	ratio := f.phys.height / f.phys.radius
	if ratio >= closeSurface {
		return Finding{}, false
	}
	return planFinding(CodeCloseSurface, Doubtful, fmt.Sprintf("The centre of the bead is %.3g radii above the surface: the wall factor is %.3g, and changes by %.2g %% for 1 %% in height.",
		ratio, f.phys.wall.Factor, math.Abs(f.phys.wall.LogSlopeHeight)), "trap the bead higher, or measure the height well", ratio, closeSurface, "1")
}

// inertia says how far a fit with constant drag would miss.
func (f *forecast) inertia(p *Plan) (Finding, bool) {
	bias, ok := f.inertialBias()
	limit := hydroBias * float64(f.at(f.rate, f.compared(p)).routes.Drag.Combined)
	if !ok || math.Abs(bias) < limit {
		return Finding{}, false
	}
	return planFinding(CodeHydrodynamics, Note, fmt.Sprintf("The inertia of the liquid matters at this rate: a fit with constant drag up to half the rate would be off by %+.2g %% in corner frequency.", 100*bias),
		"let the calibration take the frequency-dependent drag, as it does by itself, and state height and bead density", bias, limit, "1")
}

// inertialBias returns the relative bias of the corner frequency by constant drag.
func (f *forecast) inertialBias() (float64, bool) {
	w := &work{set: f.set, phys: f.phys}
	h, ok := w.hydrodynamic(true)
	if !ok || h.Drag == nil {
		return 0, false
	}
	bias, err := h.Bias(psd.Design{Rate: f.rate, Exposure: f.exposure, Corner: f.corner, Noise: f.noise.Variance / f.variance, NoiseFree: !f.noise.Known})
	return bias.Corner, err == nil
}

func (f *forecast) drift(p *Plan) (Finding, bool) {
	s := float64(f.at(f.rate, f.compared(p)).routes.Amplitude.Statistical)
	if math.IsNaN(s) {
		return Finding{}, false
	}
	limit := math.Sqrt(s * f.variance)
	return planFinding(CodeDriftMatters, Note, fmt.Sprintf("A straight drift is removed. One that wanders by %.3g nm (root mean square) within %s s moves the amplitude route by its statistical uncertainty.",
		1e9*limit, digits(float64(p.Rates.Duration), 3)), "let the stage settle, or cut long recordings into several", limit, math.NaN(), "m")
}

func (f *forecast) limit(p *Plan) (Finding, bool) {
	if p.Floor.Dominant == "" || !p.Enough.Known() {
		return Finding{}, false
	}
	return planFinding(CodeFloor, Note, fmt.Sprintf("Longer than %s s gains little: the inputs leave %.2g %%, and %s dominates.",
		digits(float64(p.Enough.Value), 2), 100*float64(p.Floor.Both), p.Floor.Dominant), "measure the "+p.Floor.Dominant+" better", float64(p.Floor.Both), math.NaN(), "1")
}
