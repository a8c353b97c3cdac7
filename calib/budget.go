package calib

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// BudgetLine is one input of the uncertainty budget (JCGM 100:2008, 5.1). Inputs are
// independent of each other; one that acts in two ways, as the temperature does
// through viscosity and kT, stands with its net effect, signs included.
type BudgetLine struct {
	Input               string `json:"input"`                // name of the input
	Value               Float  `json:"value"`                // as it was used
	Unit                string `json:"unit"`                 // of value and standard uncertainty
	StandardUncertainty Float  `json:"standard_uncertainty"` // of the input
	Sensitivity         Float  `json:"log_sensitivity"`      // d ln(stiffness) / d ln(input); for temperature d ln(stiffness) / d ln(T / K)
	Contribution        Float  `json:"contribution"`         // to u(ln stiffness), 1
	Share               Float  `json:"share"`                // of the combined variance, 1
	Freedom             Float  `json:"degrees_of_freedom"`   // of the standard uncertainty; null: infinite, as it was stated
	Note                string `json:"note,omitempty"`       // what to know of the line
}

// Expanded is the expanded uncertainty of the adopted stiffness (JCGM 100:2008, 6.2 and
// G.4). It is symmetric; the interval of the stiffness itself follows the likelihood and is
// the better one where the two differ.
type Expanded struct {
	Coverage    Float `json:"coverage_probability"`         // of the interval, 1
	Factor      Float `json:"coverage_factor"`              // of Student's t
	Freedom     Float `json:"effective_degrees_of_freedom"` // Welch and Satterthwaite; null: infinite
	Uncertainty Float `json:"expanded_uncertainty"`         // N/m
}

// combinedLegs stands for the combination of both routes in place of a leg.
const combinedLegs = -1

// budget lists what the combined uncertainty of the adopted stiffness is made of.
func (w *work) budget() {
	a := &w.axis.Adopted
	if !a.Stiffness.Known() {
		return
	}
	drag := float64(a.Weights[RouteDrag])
	var lines []BudgetLine
	for _, in := range w.phys.influences {
		lines = append(lines, inputLine(in, drag))
	}
	lines = append(lines, w.recordLines()...)
	total := float64(a.Stiffness.Combined.Standard / a.Stiffness.Value)
	for i := range lines {
		c := float64(lines[i].Contribution)
		lines[i].Share = Float(c * c / (total * total))
	}
	a.Budget = lines
	a.Expanded = expanded(lines, a.Stiffness)
	a.Halving = toHalve(lines)
}

// onAdopted is the change of ln(stiffness) for one standard uncertainty of an input, at the weight of the drag route.
func (in influence) onAdopted(drag float64) float64 {
	return drag*in.drag + (1-drag)*(in.energy-2*in.length)
}

func inputLine(in influence, drag float64) BudgetLine {
	c := in.onAdopted(drag)
	line := BudgetLine{Input: in.name, Value: Float(in.value), Unit: in.unit, StandardUncertainty: Float(in.u),
		Sensitivity: Float(math.NaN()), Contribution: Float(math.Abs(c)), Freedom: Float(math.NaN())}
	if in.u > 0 {
		line.Sensitivity = Float(c / (in.u / in.base))
	}
	if in.drag != 0 && in.energy != 0 {
		line.Note = "acts through the viscosity and through kT; the net effect stands here"
	}
	if in.name == "bead diameter" && in.u > 0 && math.Abs(in.drag/(in.u/in.base)-1) > 0.005 {
		line.Note = "with its effect on the wall factor"
	}
	return line
}

// recordLines are the lines of the record: its statistics, the stated noise, the stated exposure.
func (w *work) recordLines() []BudgetLine {
	a := w.axis.Adopted
	stat := float64(a.Stiffness.Statistical.Standard / a.Stiffness.Value)
	lines := []BudgetLine{{Input: statisticsLine, Value: a.Stiffness.Value, Unit: "N/m", StandardUncertainty: a.Stiffness.Statistical.Standard,
		Sensitivity: 1, Contribution: Float(stat), Freedom: Float(w.independent()), Note: "degrees of freedom: pi times the duration in periods of the corner frequency"}}
	noise, moved := w.onRecord()
	nan := Float(math.NaN())
	add := func(name, unit string, value, u, c float64) {
		if c == 0 {
			return
		}
		line := BudgetLine{Input: name, Value: Float(value), Unit: unit, StandardUncertainty: Float(u), Sensitivity: nan, Contribution: Float(math.Abs(c)), Freedom: nan}
		if value > 0 {
			line.Sensitivity = Float(c / (u / value))
		}
		lines = append(lines, line)
	}
	sd, u := w.statedNoise()
	add(noiseLine, "m", sd, u, noise)
	alphaU, f3dbU := w.diodeU()
	add(exposureLine, "s", w.exposure, w.exposureU, moved[exposureMoves])
	add(alphaLine, "1", w.seen.Alpha, alphaU, moved[alphaMoves])
	add(f3dbLine, "Hz", w.seen.F3dB, f3dbU, moved[f3dbMoves])
	return lines
}

// statedNoise is the localisation noise as it was stated, or as a background gave it, with its standard uncertainty [m].
func (w *work) statedNoise() (sd, u float64) {
	if n, ok := number(w.set, "recording.noise", w.axisName); ok {
		return n.Value.SI, n.Value.U
	}
	if sd = math.Sqrt(math.Max(0, w.noise.Variance)); sd > 0 {
		u = w.noise.VarianceU / (2 * sd)
	}
	return sd, u
}

// Names of the lines that are no inputs of the physics.
const (
	statisticsLine = "statistics of the recording"
	noiseLine      = "localisation noise"
	exposureLine   = "exposure"
	alphaLine      = "alpha of the photodiode"
	f3dbLine       = "f3dB of the photodiode"
)

// onRecord is the change of the adopted ln(stiffness) for one standard uncertainty of the
// stated noise and of the stated inputs of the record.
func (w *work) onRecord() (noise float64, moved [moveCount]float64) {
	n := len(w.phys.influences)
	if w.adoptedLeg != combinedLegs {
		g := w.legs.grad[w.adoptedLeg]
		return g[n], [moveCount]float64(g[n+1:])
	}
	p := &w.pooled
	if w.noise.Known && w.noise.VarianceU > 0 {
		// d(weights . p)/d(mean of the prior) = weights' C e_q / sd^2
		noise = p.total.Form(p.weights, alongNoise) / (w.noise.VarianceU / w.fit.Scale())
	}
	return noise, p.moved
}

// independent is the number of degrees of freedom of the record's own uncertainty, pi T fc.
func (w *work) independent() float64 {
	at := w.pooled.maximum.At
	if w.poolErr != nil && w.fitErr == nil {
		at = w.fit.Maximum.At
	}
	return math.Pi * math.Exp(at[0]) * float64(w.record.Observed())
}

// coverage of the expanded uncertainty.
const coverage = 0.95

func expanded(lines []BudgetLine, q Quantity) *Expanded {
	u, nu := make([]float64, len(lines)), make([]float64, len(lines))
	for i, l := range lines {
		u[i], nu[i] = float64(l.Contribution), float64(l.Freedom)
		if math.IsNaN(nu[i]) {
			nu[i] = math.Inf(1)
		}
	}
	freedom := effectiveFreedom(u, nu)
	k := coverageFactor(coverage, freedom)
	return &Expanded{Coverage: coverage, Factor: Float(k), Freedom: Float(freedom), Uncertainty: Float(k) * q.Combined.Standard}
}

// effectiveFreedom is the number of degrees of freedom of a combined standard uncertainty with contributions u
// of nu degrees of freedom each (JCGM 100:2008, Eq. G.2b; docs/method.md, Eq. 67); +Inf when all are infinite.
func effectiveFreedom(u, nu []float64) float64 {
	total, sum := 0.0, 0.0
	for i := range u {
		total += u[i] * u[i]
		if !math.IsInf(nu[i], 1) {
			sum += math.Pow(u[i], 4) / nu[i]
		}
	}
	if sum == 0 {
		return math.Inf(1)
	}
	return total * total / sum
}

// coverageFactor is the factor of a symmetric interval of probability p: Student's t of the next lower whole
// number of degrees of freedom (JCGM 100:2008, G.4.1), of at least one.
func coverageFactor(p, freedom float64) float64 {
	if math.IsInf(freedom, 1) || freedom > 1e6 { // there t and the normal quantile agree to 1e-6
		return distuv.UnitNormal.Quantile((1 + p) / 2)
	}
	return distuv.StudentsT{Mu: 0, Sigma: 1, Nu: math.Max(1, math.Floor(freedom))}.Quantile((1 + p) / 2)
}
