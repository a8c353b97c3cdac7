package calib

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"beadwell/calib/relaxation"
)

// compare tests the equality of the legs.
func (w *work) compare() {
	c := &w.axis.CrossCheck
	c.Routes = w.routes()
	c.Amplitudes = w.contrast(equipartitionLeg, displacementLeg)
	c.Equality = w.equality()
	c.Text = w.crossCheckText()
}

func noTest(reason string) Test {
	nan := Float(math.NaN())
	return Test{ChiSquare: nan, PValue: nan, ChiSquareCombined: nan, PValueCombined: nan, MeanDifference: nan, Reason: reason}
}

func survival(chi2 float64, dof int) Float {
	return Float(distuv.ChiSquared{K: float64(dof)}.Survival(chi2))
}

// routes is the likelihood-ratio test that the measured drag is the computed one: twice
// the log-likelihood lost by fixing ln fc + ln V, or by the prior that allows for the
// uncertainty of the inputs (Wilks, Ann. Math. Stat. 9 (1938) 60; docs/method.md, Eq. 41).
func (w *work) routes() Test {
	if w.fitErr != nil {
		return noTest("the recording does not determine the drag")
	}
	p := &w.pooled
	sd, _ := w.fit.SD(alongDrag)
	if sd > 2*hopeless {
		return noTest(tooUncertain(sd))
	}
	if w.poolErr != nil { // too far apart for a fit of both: the normal approximation will do
		d := w.dragExcess()
		near, far := d*d/(sd*sd), d*d/(sd*sd+p.u*p.u)
		return Test{ChiSquare: Float(near), DegreesOfFreedom: 1, PValue: survival(near, 1),
			ChiSquareCombined: Float(far), PValueCombined: survival(far, 1), MeanDifference: Float(d)}
	}
	fixed, _, err := w.fit.Problem.Ratio(w.fit.Maximum, alongDrag, p.expected)
	if err != nil {
		fixed = w.dragExcess() / sd
		fixed *= fixed
	}
	loose := math.Max(0, 2*(w.fit.Maximum.Value-p.maximum.Value))
	if !w.has(spectrumLeg) && !w.has(amplitudeLeg) && loose < farApart {
		return noTest("the recording does not determine the drag")
	}
	excess := w.bartlett()
	fixed, loose = fixed/(excess*excess), loose/(excess*excess)
	t := Test{ChiSquare: Float(fixed), DegreesOfFreedom: 1, PValue: survival(fixed, 1),
		ChiSquareCombined: Float(loose), PValueCombined: survival(loose, 1), MeanDifference: Float(w.dragExcess())}
	return t
}

// dragExcess returns ln kappa by drag less ln kappa by amplitude, from the spectrum: the
// logarithm of the computed over the measured drag.
func (w *work) dragExcess() float64 {
	return w.fit.Maximum.At[0] + w.fit.Maximum.At[1] - w.pooled.expected
}

// leastVariance is the share of the variance of an estimate that its difference from
// another must have to be tested. The estimates of one route are nearly one statistic, with
// correlations of 0.95 and more: the small rest of their difference is made of terms of second
// order, which the theory of their covariance leaves out, and a test of it would not
// keep its level.
const leastVariance = 0.2

// contrast compares two legs of one route.
func (w *work) contrast(a, b int) Test {
	l := &w.legs
	if math.IsNaN(l.value[a]) || math.IsNaN(l.value[b]) {
		return noTest("an estimate is withheld")
	}
	d := l.value[a] - l.value[b]
	v := l.stat[a][a] + l.stat[b][b] - 2*l.stat[a][b]
	vt := l.total[a][a] + l.total[b][b] - 2*l.total[a][b]
	if v < leastVariance*l.stat[b][b] {
		return noTest(fmt.Sprintf("the two estimates are nearly the same statistic (correlation %.2f): their agreement says little", l.stat[a][b]/math.Sqrt(l.stat[a][a]*l.stat[b][b])))
	}
	return Test{ChiSquare: Float(d * d / v), DegreesOfFreedom: 1, PValue: survival(d*d/v, 1),
		ChiSquareCombined: Float(d * d / vt), PValueCombined: survival(d*d/vt, 1), MeanDifference: Float(d)}
}

// equality tests that the three stiffness estimates are one number. Its chi-square is the
// likelihood ratio of the routes plus the square of what the difference between the two
// variance estimates adds, given the routes' difference.
func (w *work) equality() Test {
	l := &w.legs
	t := w.axis.CrossCheck.Routes
	if !t.PValue.Known() {
		return t
	}
	if math.IsNaN(l.value[equipartitionLeg]) || math.IsNaN(l.value[displacementLeg]) {
		return t
	}
	stat, ok := w.added(l.stat, w.dragExcess())
	total, okTotal := w.added(l.total, w.dragExcess())
	if !ok || !okTotal {
		return t
	}
	t.DegreesOfFreedom = 2
	t.ChiSquare += Float(stat)
	t.ChiSquareCombined += Float(total)
	t.PValue, t.PValueCombined = survival(float64(t.ChiSquare), 2), survival(float64(t.ChiSquareCombined), 2)
	return t
}

// added returns the squared deviate of equipartition less MSD given the routes' difference.
func (w *work) added(c [legCount][legCount]float64, excess float64) (float64, bool) {
	l := &w.legs
	d := l.value[equipartitionLeg] - l.value[displacementLeg]
	v := c[equipartitionLeg][equipartitionLeg] + c[displacementLeg][displacementLeg] - 2*c[equipartitionLeg][displacementLeg]
	if v < leastVariance*l.stat[displacementLeg][displacementLeg] {
		return 0, false
	}
	r := c[spectrumLeg][spectrumLeg] + c[amplitudeLeg][amplitudeLeg] - 2*c[spectrumLeg][amplitudeLeg]
	cov := c[spectrumLeg][equipartitionLeg] - c[spectrumLeg][displacementLeg] - c[amplitudeLeg][equipartitionLeg] + c[amplitudeLeg][displacementLeg]
	rest := v - cov*cov/r
	if !(rest > leastVariance*v) {
		return 0, false
	}
	z := d - cov/r*excess
	return z * z / rest, true
}

func (w *work) crossCheckText() string {
	t := w.axis.CrossCheck.Routes
	if !t.PValue.Known() {
		return "not tested: " + t.Reason
	}
	d := float64(t.MeanDifference)
	relation := "above"
	if d < 0 {
		relation = "below"
	}
	size := fmt.Sprintf("%.1f %%", 100*math.Abs(math.Expm1(d)))
	if math.Abs(d) > math.Ln2 {
		size = fmt.Sprintf("a factor of %.3g", math.Exp(math.Abs(d)))
	}
	return fmt.Sprintf("the drag route is %s %s the amplitude route (%s with inputs exact, %s with their uncertainties)",
		size, relation, pText(float64(t.PValue)), pText(float64(t.PValueCombined)))
}

// pText writes a p-value for a sentence.
func pText(p float64) string {
	if p < 1e-4 {
		return "p < 0.0001"
	}
	return fmt.Sprintf("p = %.2g", p)
}

// openAbove removes the upper ends of the pooled interval that stand at the end of the domain: the stiffness
// grows with the corner frequency on the line of the computed drag, up to where samples are white.
func (w *work) openAbove(o relaxation.Offsets) relaxation.Offsets {
	edge := math.Log(relaxation.HighestCorner) - w.pooled.maximum.At[0] - edgeWidth
	for _, end := range []*float64{&o.High68, &o.High95} {
		if *end > edge {
			*end = math.Inf(1)
		}
	}
	return o
}

// edgeWidth is the distance in the logarithm within which the search for an end may stop short of the domain's.
const edgeWidth = 0.05

// noMaximum is the relative uncertainty, a factor of e^2, beyond which the likelihood of the stiffness is taken
// to have no maximum within the domain. Below it the adopted stiffness is given with the interval that its likelihood
// has, open to one side if need be: to withhold it where that interval is wide would leave the recordings in which
// chance made it narrow, and those cover less than they say.
const noMaximum = 2

// adopt combines the routes into one stiffness.
func (w *work) adopt() {
	a := &w.axis.Adopted
	p := &w.pooled
	drag := p.drag
	switch {
	case w.opt.Adopt == "" && w.poolErr != nil:
		reason := "the recording and the computed drag cannot be brought together"
		if w.fitErr != nil {
			reason = "noise and motion of the bead cannot be told apart in this recording"
		}
		a.Stiffness, a.Withheld = Withheld("N/m", reason), reason
		return
	case w.opt.Adopt == RouteDrag || w.opt.Adopt == "" && drag >= 1 && w.has(spectrumLeg):
		w.adoptLeg(spectrumLeg, "corner frequency and computed drag")
	case w.opt.Adopt == RouteAmplitude || w.opt.Adopt == "" && drag <= 0 && w.has(amplitudeLeg):
		w.adoptLeg(amplitudeLeg, "amplitude of the spectrum and temperature")
	default:
		drag = math.Max(0, math.Min(1, drag))
		a.Basis = "drag and amplitude route combined"
		a.Weights = map[string]Float{RouteDrag: Float(drag), RouteAmplitude: Float(1 - drag)}
		o := relaxation.Normal(p.sdTotal)
		if p.sdTotal > smallEnough {
			o = w.openAbove(p.problem.Profile(p.maximum, p.weights, p.sdTotal)).Scaled(w.bartlett())
		}
		stat, rest := o.Scaled(p.sdData/p.sdTotal), math.Sqrt(p.rest)
		for _, moved := range p.moved {
			rest = math.Hypot(rest, moved)
		}
		combined := o.Widened(rest)
		if math.IsInf(o.Low95, 0) || p.sdTotal > noMaximum {
			reason := tooUncertain(math.Inf(1))
			if low := p.value - combined.Low95; math.IsInf(o.High95, 0) && !math.IsInf(low, 0) {
				reason = fmt.Sprintf("the recording bounds the stiffness from below only: it is above %.3g pN/um (95 %%)", math.Exp(low)*1e6)
			}
			a.Stiffness, a.Withheld = Withheld("N/m", reason), reason
			return
		}
		a.Stiffness = stiffness(p.value, p.sdData, stat, math.Hypot(p.sdTotal, rest), combined)
		w.adoptedLeg = combinedLegs
	}
	w.budget()
}

func (w *work) has(leg int) bool { return !math.IsNaN(w.legs.value[leg]) }

func (w *work) adoptLeg(leg int, basis string) {
	a := &w.axis.Adopted
	a.Basis = basis
	one := Float(1)
	a.Weights = map[string]Float{RouteDrag: 0, RouteAmplitude: 0}
	a.Weights[routeOf(leg)] = one
	if !w.has(leg) {
		a.Stiffness, a.Withheld = Withheld("N/m", w.legs.reason[leg]), w.legs.reason[leg]
		return
	}
	a.Stiffness = w.legStiffness(leg)
	w.adoptedLeg = leg
}

// legStiffness turns a leg into a quantity.
func (w *work) legStiffness(leg int) Quantity {
	l := &w.legs
	if math.IsNaN(l.value[leg]) {
		return Withheld("N/m", l.reason[leg])
	}
	sd, total := math.Sqrt(l.stat[leg][leg]), math.Sqrt(l.total[leg][leg])
	extra := math.Sqrt(math.Max(0, l.total[leg][leg]-l.stat[leg][leg]))
	return stiffness(l.value[leg], sd, l.offsets[leg], total, l.offsets[leg].Widened(extra))
}

// stiffness makes a quantity from ln kappa and its statistical and combined offsets.
func stiffness(value, sd float64, stat relaxation.Offsets, total float64, combined relaxation.Offsets) Quantity {
	return exponential(value, sd, stat, total, combined, "N/m")
}

// exponential makes the quantity exp(value).
func exponential(value, sd float64, stat relaxation.Offsets, total float64, combined relaxation.Offsets, unit string) Quantity {
	k := math.Exp(value)
	interval := func(low, high float64) [2]Float {
		return [2]Float{end(value - low), end(value + high)}
	}
	return Quantity{Value: Float(k), Unit: unit,
		Statistical: &Uncertainty{Standard: Float(k * sd), Interval68: interval(stat.Low68, stat.High68), Interval95: interval(stat.Low95, stat.High95)},
		Combined:    &Uncertainty{Standard: Float(k * total), Interval68: interval(combined.Low68, combined.High68), Interval95: interval(combined.Low95, combined.High95)}}
}

// end is one end of an interval; an unbounded one is unknown.
func end(logarithm float64) Float {
	if value := math.Exp(logarithm); !math.IsInf(logarithm, 0) && !math.IsInf(value, 0) {
		return Float(value)
	}
	return Float(math.NaN())
}
