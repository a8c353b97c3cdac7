package calib

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
)

// MonteCarloOptions ask for a propagation of distributions. The zero value asks for none.
type MonteCarloOptions struct {
	Draws int    // number of draws M; 0: none
	Seed  uint64 // selects the draws
}

// MonteCarlo is the propagation of distributions through the adopted estimate (JCGM 101:2008): stated inputs are
// normal with their standard uncertainties, and drag, wall, viscosity and kT are evaluated for every draw; the
// record's part has the widths of its likelihood on either side.
type MonteCarlo struct {
	Draws       int              `json:"draws"`       // number of draws
	Rejected    int              `json:"rejected"`    // draws at which no bead fits (a height below the radius); left out
	Seed        string           `json:"seed"`        // decimal
	Axes        []MonteCarloAxis `json:"axes"`        // those with an adopted stiffness
	Correlation [][]Float        `json:"correlation"` // of the stiffnesses of these axes, through the inputs they share
	Text        string           `json:"text"`        // what it says, for a person
}

// MonteCarloAxis is the distribution of the stiffness of one axis.
type MonteCarloAxis struct {
	Axis       string   `json:"axis"`                 // "x", "y" or "z"
	Mean       Float    `json:"mean"`                 // N/m
	Standard   Float    `json:"standard_uncertainty"` // N/m
	Interval95 [2]Float `json:"interval_95"`          // probabilistically symmetric, N/m
	Shortest95 [2]Float `json:"shortest_interval_95"` // N/m
	Difference [2]Float `json:"difference"`           // of the ends of the symmetric interval from those of the adopted stiffness, N/m
	Tolerance  Float    `json:"tolerance"`            // half a unit of the second digit of the standard uncertainty, N/m
	EndError   Float    `json:"end_error"`            // standard error of the ends from the finite number of draws, N/m
	Agrees     bool     `json:"agrees"`               // both ends agree within the tolerance and twice their error
}

// Options returns the options that make the same choices again.
func (c *Choices) Options() (Options, error) {
	if c == nil {
		return Options{}, nil
	}
	o := Options{Adopt: c.Adopt, Use: c.Use, MonteCarlo: MonteCarloOptions{Draws: c.Draws}}
	if c.Draws > 0 {
		seed, err := strconv.ParseUint(c.Seed, 10, 64)
		if err != nil {
			return o, fmt.Errorf("the seed %q of the stored draws is no whole number", c.Seed)
		}
		o.MonteCarlo.Seed = seed
	}
	return o, nil
}

// propagate draws the inputs of all adopted axes together.
func (r *Result) propagate(ctx context.Context, works []*work, opt MonteCarloOptions) error {
	if opt.Draws == 0 {
		return nil
	}
	m := newMonteCarlo(r, works)
	if len(m.works) == 0 {
		return nil
	}
	p, err := propagate(ctx, opt.Draws, len(m.works), opt.Seed, m.draw)
	if err != nil {
		return err
	}
	r.MonteCarlo = m.result(p, opt)
	return nil
}

// monteCarlo is the measurement model of the adopted stiffnesses.
type monteCarlo struct {
	works []*work
	names map[string]int // of the inputs, by name, to the position of its deviate
	noise []int          // position of the deviate of each axis' noise
	moves [moveCount]int // positions of the deviates of the inputs of the record; those without an uncertainty do not matter
	count int
}

func newMonteCarlo(r *Result, works []*work) *monteCarlo {
	m := &monteCarlo{names: map[string]int{}}
	deviate := func(name string) int {
		if _, ok := m.names[name]; !ok {
			m.names[name] = m.count
			m.count++
		}
		return m.names[name]
	}
	for i, w := range works {
		if len(r.Axes[i].Adopted.Budget) == 0 || w.byStage { // withheld, or not from a model of these inputs
			continue
		}
		if w.adopter != nil {
			w = w.adopter
		}
		w.axis.Adopted = r.Axes[i].Adopted
		m.works = append(m.works, w)
		for _, in := range w.phys.influences {
			deviate(w.sharedName(in))
		}
		n, _ := number(w.set, "recording.noise", w.axisName)
		m.noise = append(m.noise, deviate(noiseLine+" "+n.Axis))
		m.moves[exposureMoves] = deviate(exposureLine)
		alpha, f3db := w.diodeU()
		if alpha > 0 {
			m.moves[alphaMoves] = deviate(alphaLine)
		}
		if f3db > 0 {
			m.moves[f3dbMoves] = deviate(f3dbLine)
		}
	}
	return m
}

// sharedName names an input so that axes which share it have the same name for it.
func (w *work) sharedName(in influence) string {
	if in.name == freeStatistics {
		return in.name + " " + w.axisName
	}
	if in.name == wallModel && !w.phys.parallel {
		return in.name + " perpendicular" // the two solutions err on their own
	}
	return in.name
}

// draw makes one draw of the stiffnesses [N/m].
func (m *monteCarlo) draw(rng *rand.Rand, out []float64) bool {
	e := make([]float64, m.count)
	for i := range e {
		e[i] = rng.NormFloat64()
	}
	for i, w := range m.works {
		a := w.axis.Adopted
		drag := float64(a.Weights[RouteDrag])
		c, scale := w.drawn(e, m.names)
		energy, friction, err := w.phys.under(c)
		if err != nil || !(scale > 0) {
			return false
		}
		noise, moved := w.onRecord()
		change := drag*w.frictionChange(friction, e, m.names) + (1-drag)*(energy-math.Log(w.phys.kT)-2*math.Log(scale))
		for k, by := range moved {
			change += by * e[m.moves[k]]
		}
		change += noise*e[m.noise[i]] + lopsidedDraw(a.Stiffness, rng.NormFloat64())
		out[i] = float64(a.Stiffness.Value) * math.Exp(change)
	}
	return true
}

// lopsidedDraw is a change of ln(stiffness) with the statistical widths on either side.
func lopsidedDraw(q Quantity, deviate float64) float64 {
	low, high := q.Statistical.Interval68[0], q.Statistical.Interval68[1]
	if deviate < 0 && low.Known() {
		return -deviate * math.Log(float64(low/q.Value))
	}
	if deviate > 0 && high.Known() {
		return deviate * math.Log(float64(high/q.Value))
	}
	return deviate * float64(q.Statistical.Standard/q.Value)
}

// drawn are the conditions and the factor on the length scale for deviates of the inputs.
func (w *work) drawn(e []float64, names map[string]int) (c conditions, scale float64) {
	c, scale = w.phys.conditions(), 1
	kelvin := c.temperature
	for _, in := range w.phys.influences {
		if in.apart {
			continue
		}
		z := e[names[w.sharedName(in)]]
		relative := 0.0
		if in.base > 0 {
			relative = z * in.u / in.base
		}
		switch in.name {
		case "temperature", "laser heating", "laser power":
			c.temperature += z * in.energy * kelvin
		case "viscosity", "viscosity correlation":
			c.thickness *= 1 + relative
		case "bead diameter":
			c.radius *= 1 + relative
		case "height":
			c.height *= 1 + relative
		case "depth":
			c.depth *= 1 + relative
		case wallModel:
			c.wall *= 1 + relative
		default:
			scale *= 1 + relative
		}
	}
	return c, scale
}

func (m *monteCarlo) result(p *propagation, opt MonteCarloOptions) *MonteCarlo {
	r := &MonteCarlo{Draws: opt.Draws, Rejected: p.rejected, Seed: fmt.Sprint(opt.Seed), Axes: []MonteCarloAxis{}, Correlation: [][]Float{}}
	if 2*p.rejected > opt.Draws {
		r.Text = fmt.Sprintf("%d of %d draws were left out, for no bead fits the chamber there: the stated uncertainties of height and diameter are too large for each other.", p.rejected, opt.Draws)
		return r
	}
	agree := true
	for i, w := range m.works {
		row := make([]Float, len(p.correlation[i]))
		for j, v := range p.correlation[i] {
			row[j] = Float(v)
		}
		r.Correlation = append(r.Correlation, row)
		low, high := p.symmetric(i, coverage)
		short, long := p.shortest(i, coverage)
		q := w.axis.Adopted.Stiffness
		a := MonteCarloAxis{Axis: w.axisName, Mean: Float(p.mean[i]), Standard: Float(p.sd[i]), Interval95: [2]Float{Float(low), Float(high)},
			Shortest95: [2]Float{Float(short), Float(long)}, Tolerance: Float(tolerance(float64(q.Combined.Standard))),
			EndError: Float(endError(p.sd[i], opt.Draws-p.rejected, coverage))}
		a.Agrees = true
		for k, end := range q.Combined.Interval95 {
			a.Difference[k] = a.Interval95[k] - end
			a.Agrees = a.Agrees && math.Abs(float64(a.Difference[k])) <= float64(a.Tolerance+2*a.EndError)
		}
		agree = agree && a.Agrees
		r.Axes = append(r.Axes, a)
	}
	r.Text = fmt.Sprintf("%d draws agree with the budget within half a unit of the second digit of the standard uncertainty.", opt.Draws)
	if !agree {
		r.Text = fmt.Sprintf("%d draws differ from the budget by more than half a unit of the second digit of the standard uncertainty: an input acts too strongly for a straight line, and the interval of the draws is the better one.", opt.Draws)
	}
	if p.rejected > 0 {
		r.Text += fmt.Sprintf(" %d draws were left out: no bead fits the chamber there.", p.rejected)
	}
	return r
}
