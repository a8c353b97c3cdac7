package calib

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// EstimateAdopted names the adopted stiffness where an estimate is asked for by name.
const EstimateAdopted = "adopted"

// Trap is what a stored calibration tells of one axis, as forces need it. SI units.
type Trap struct {
	Axis      string
	Estimate  string   // EstimateAdopted, or one of the Leg constants
	Stiffness Quantity // N/m
	// Relative is the combined relative standard uncertainty of a force at a displacement
	// recorded on the same length scale as the calibration: an error of that scale moves
	// the displacement, and the stiffness by amplitude the other way.
	Relative float64
	Noise    float64 // localisation noise of the calibration [m]; NaN when it is not known
	Corner   float64 // corner frequency of the trap [Hz]; NaN when it is not known
	Linear   Linear
}

// TrapError says why a calibration gives no stiffness for an axis.
type TrapError struct {
	Axis    string
	Problem string
	Remedy  string
}

// Error gives the axis and the problem, and the hint on a line of its own.
func (e *TrapError) Error() string {
	text := "axis " + e.Axis + ": " + e.Problem
	if e.Remedy != "" {
		text += "\n  hint: " + e.Remedy
	}
	return text
}

// Trap returns the trap of an axis by the named estimate; empty is the adopted one.
//
// The error is a *TrapError when the result has no such axis or estimate, or the
// stiffness is withheld.
func (r *Result) Trap(axis, estimate string) (Trap, error) {
	i := slices.IndexFunc(r.Axes, func(a Axis) bool { return a.Name == axis })
	if i < 0 {
		return Trap{}, &TrapError{axis, "is not in the calibration, which has " + strings.Join(r.axisNames(), ", "), "calibrate a recording with this axis"}
	}
	a := &r.Axes[i]
	if estimate == "" {
		estimate = EstimateAdopted
	}
	t := Trap{Axis: axis, Estimate: estimate, Stiffness: a.Adopted.Stiffness, Noise: math.NaN(), Corner: math.NaN(), Linear: linear(a.Equipartition.Potential, float64(r.Medium.ThermalEnergy.Value))}
	lengthPower := -2 * float64(a.Adopted.Weights[RouteAmplitude]) // d ln(stiffness)/d ln(length scale)
	if f := a.FreeDrag; f != nil {
		lengthPower += float64(a.Adopted.Weights[RouteDrag] * f.Share * f.LengthPower)
	}
	if estimate != EstimateAdopted {
		at := slices.IndexFunc(a.Estimates, func(e Estimate) bool { return e.Leg == estimate })
		if at < 0 {
			return Trap{}, &TrapError{axis, fmt.Sprintf("has no estimate %q", estimate), "the estimates are " + strings.Join(a.legs(), ", ")}
		}
		t.Stiffness, lengthPower = a.Estimates[at].Stiffness, 0
		if a.Estimates[at].Route == RouteAmplitude {
			lengthPower = -2
		}
		if estimate == LegFreeDrag {
			lengthPower = float64(a.FreeDrag.LengthPower)
		}
	}
	if !(t.Stiffness.Value > 0) {
		return Trap{}, &TrapError{axis, "the stiffness is withheld: " + t.Stiffness.Reason, "name an estimate to take instead: " + strings.Join(a.legs(), ", ")}
	}
	t.Relative = relativeForce(t.Stiffness, lengthPower, r.lengthU(axis))
	if s := a.Sensitivity; s != nil && s.Origin == SensitivityDrag && estimate == EstimateAdopted {
		t.Relative = selfScaledForce(t.Stiffness, s.Used)
	}
	if a.Spectrum.Noise.Known() {
		t.Noise = float64(a.Spectrum.Noise.Value)
	}
	if a.Drag.Value > 0 {
		t.Corner = float64(t.Stiffness.Value / a.Drag.Value / (2 * math.Pi))
	}
	return t, nil
}

func (r *Result) axisNames() []string {
	var names []string
	for _, a := range r.Axes {
		names = append(names, a.Name)
	}
	return names
}

// legs are the names of the estimates that have a value.
func (a *Axis) legs() []string {
	var names []string
	for _, e := range a.Estimates {
		if e.Stiffness.Known() {
			names = append(names, e.Leg)
		}
	}
	return names
}

// lengthU is the relative standard uncertainty of the length of a recorded unit on an
// axis; 0 when positions were recorded as lengths.
func (r *Result) lengthU(axis string) float64 {
	key := ""
	for _, c := range r.ReadAs.Columns {
		if c.Role != axis {
			continue
		}
		switch c.Unit {
		case "px":
			key = "recording.pixel"
		case "V", "mV", "uV", "counts", "1":
			key = "recording.sensitivity"
		}
	}
	u := 0.0
	for _, s := range r.Settings { // the general one comes before that of the axis
		if s.Key == key && (s.Axis == "" || s.Axis == axis) && s.Value != 0 {
			u = 0
			if s.StandardUncertainty.Known() {
				u = float64(s.StandardUncertainty / s.Value)
			}
		}
	}
	return u
}

// relativeForce returns the relative standard uncertainty of stiffness times
// displacement when both depend on a length scale of relative uncertainty u (docs/method.md,
// Eq. 51).
func relativeForce(q Quantity, power, u float64) float64 {
	stated := q.Combined
	if stated == nil {
		stated = q.Statistical
	}
	if stated == nil {
		return math.NaN()
	}
	relative := square(float64(stated.Standard / q.Value))
	return math.Sqrt(math.Max(0, relative-square(power*u)) + square((power+1)*u))
}

// selfScaledForce returns the relative standard uncertainty of a force when stiffness and
// sensitivity both come from the computed drag: the stiffness goes with the drag, the sensitivity with one
// over its root, so that their errors by the inputs oppose each other. Those by the statistics
// of the recording add as if they were independent (docs/method.md, Eq. 53).
func selfScaledForce(stiffness, sensitivity Quantity) float64 {
	if stiffness.Statistical == nil || stiffness.Combined == nil || sensitivity.Statistical == nil || sensitivity.Combined == nil {
		return math.NaN()
	}
	parts := func(q Quantity) (statistical, inputs float64) {
		statistical = float64(q.Statistical.Standard / q.Value)
		return statistical, math.Sqrt(math.Max(0, square(float64(q.Combined.Standard/q.Value))-square(statistical)))
	}
	statK, inputsK := parts(stiffness)
	statS, inputsS := parts(sensitivity)
	return math.Sqrt(square(statK) + square(statS) + square(inputsK-inputsS))
}

// Linear is the range of displacements from the mean over which the calibration saw
// a harmonic potential.
type Linear struct {
	Low, High float64 // m; NaN when the result holds no potential
	Reason    string  // what ends the range
}

// Limits of the linear range.
const (
	// agreement is the number of standard uncertainties that a bin may lie off the
	// parabola: of the 40 bins that count 0.3 % of harmonic traps have one outside.
	agreement = 4
	// leastSeen is the standard uncertainty of a bin's energy [kT] from which on it tells
	// nothing: that of four independent visits.
	leastSeen = 0.5
)

// linear walks from the middle of the histogram outwards, as long as the energies are
// those of the parabola fitted within 1.5 standard deviations.
func linear(p Potential, kT float64) Linear {
	nan := math.NaN()
	k, sigma := float64(p.Curvature.Value)/kT, float64(p.Gaussian[1])
	if len(p.Bins) == 0 || !(k > 0) || !(sigma > 0) {
		return Linear{nan, nan, "the calibration holds no potential"}
	}
	lift, weight := 0.0, 0.0 // energies count from the fullest bin
	for _, b := range p.Bins {
		if x := float64(b.Centre); math.Abs(x) < 1.5*sigma && b.Energy.Known() {
			lift += float64(b.Count) * (float64(b.Energy) - k*x*x/2)
			weight += float64(b.Count)
		}
	}
	if weight == 0 {
		return Linear{nan, nan, "the calibration holds no potential"}
	}
	lift /= weight
	l := Linear{Reason: "the bead was not seen further out"}
	half := float64(p.BinWidth) / 2
	fits := func(b HistogramBin) bool {
		if !b.Energy.Known() || !(float64(b.EnergyU) <= leastSeen) {
			return false
		}
		x := float64(b.Centre)
		if math.Abs(float64(b.Energy)-lift-k*x*x/2) <= agreement*float64(b.EnergyU) {
			return true
		}
		l.Reason = "the potential bends away from a parabola further out"
		return false
	}
	middle := len(p.Bins) / 2
	for i := middle; i < len(p.Bins) && fits(p.Bins[i]); i++ {
		l.High = float64(p.Bins[i].Centre) + half
	}
	for i := middle; i >= 0 && fits(p.Bins[i]); i-- {
		l.Low = float64(p.Bins[i].Centre) - half
	}
	return l
}

// Holds tells whether a displacement [m] lies in the range; an unknown range holds all.
func (l Linear) Holds(displacement float64) bool {
	return !(displacement < l.Low) && !(displacement > l.High)
}
