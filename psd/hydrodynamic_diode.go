package psd

import (
	"math"

	"beadwell/calib/relaxation"
)

// Diode is the fitted low-pass of a photodiode.
type Diode struct {
	Alpha  float64 // prompt share of the amplitude
	Share  float64 // of the power, Alpha squared: the parameter in which the likelihood is near normal
	ShareU float64 // NaN when Share is at the end of its range, 0 when it was given
	F3dB   float64 // [Hz]
	F3dBU  float64 // NaN when F3dB is at the end of the search, 0 when it was given
	// AtShare and AtF3dB tell at which end of its range a parameter is: -1 the lower, 1 the upper, 0 inside.
	AtShare, AtF3dB int
	// WithCorner are the correlations of Share and of F3dB with ln fc; 0 for those that are given or at an end.
	WithCorner [2]float64
}

// Diode returns the low-pass that was fitted together with the spectrum, with standard
// uncertainties that count those of the other parameters; false if none was.
func (f *Fit) Diode() (Diode, bool) {
	l, ok := f.Problem.Likelihood.(*freeDiode)
	if !ok {
		return Diode{}, false
	}
	return l.fitted(f.Maximum.At, f.Total), true
}

// diode is a power response a + (1-a)/(1 + (f/f3dB)^2), a = alpha^2.
type diode struct {
	share float64 // a
	log   float64 // ln f3dB, f3dB in Hz; +Inf without low-pass
	f3dB  float64 // [Hz]
}

func newDiode(share, log float64) diode { return diode{share, log, math.Exp(log)} }

func (h Hydrodynamic) diode() diode {
	if h.F3dB == 0 {
		return newDiode(1, math.Inf(1))
	}
	return newDiode(h.Alpha*h.Alpha, math.Log(h.F3dB))
}

func (d diode) prompt() float64 { return d.share }

func (d diode) power(f float64) float64 { return d.share + (1-d.share)*d.slow(f) }

// slow is the power response 1/(1 + (f/f3dB)^2) of the part that is not prompt.
func (d diode) slow(f float64) float64 {
	r := f / d.f3dB
	return 1 / (1 + r*r)
}

// byLog is the derivative of power with respect to ln f3dB.
func (d diode) byLog(f float64) float64 {
	s := d.slow(f)
	return 2 * (1 - d.share) * s * (1 - s)
}

// freeDiode is the likelihood maximised over the response of the photodiode at every
// point, so that its maximum is that over all parameters, its information is what is left when
// the response is unknown (the Schur complement), and its profiles are true ones.
type freeDiode struct {
	*whittle
	held      [2]bool               // a and f3dB are given, not fitted
	given     bool                  // there is a value of f3dB to start from
	low, high float64               // range of ln f3dB
	from      diode                 // where the search for the response starts
	drawn     relaxation.Parameters // that Density was asked for last
}

func newFreeDiode(w *whittle, h Hydrodynamic) *freeDiode {
	d := &freeDiode{whittle: w, given: h.F3dB > 0, held: [2]bool{!h.FitAlpha, !h.FitF3dB}}
	d.low, d.high = math.Log(lowestF3dB), math.Log(math.Max(lowestF3dB, highestF3dB*w.lattice.rate))
	if d.given {
		d.from = h.diode()
		d.low, d.high = d.from.log-math.Log(givenWithin), d.from.log+math.Log(givenWithin)
		return d
	}
	d.from = newDiode(0.1, (d.low+d.high)/2)
	if d.held[0] {
		d.from.share = h.Alpha * h.Alpha
	}
	return d
}

// response is a detector with what the likelihood says of it at fixed parameters.
type response struct {
	diode diode
	model *model
	mean  *expected
	value float64
	*derived
}

func (d *freeDiode) try(p relaxation.Parameters, at diode) *response {
	r := &response{diode: at, model: d.lattice.model(at.power, at.prompt())}
	r.mean = d.expected(r.model, math.Exp(p[0]), true)
	r.value = d.settle(p, r.mean)
	return r
}

// deriveAll fills in the derivatives, those of a and ln f3dB last.
func (d *freeDiode) deriveAll(p relaxation.Parameters, r *response) {
	x := math.Exp(p[0])
	byShare := d.expected(d.lattice.model(func(f float64) float64 { return 1 - r.diode.slow(f) }, 1), x, false)
	byLog := d.expected(d.lattice.model(r.diode.byLog, 0), x, false)
	r.derived = d.derive(p, r.mean, []*expected{byShare, byLog})
}

// The range of the search for f3dB when none is given: silicon diodes in the near infrared have
// several kHz (Berg-Sorensen et al., J. Appl. Phys. 93 (2003) 3167), and one below the corner of
// the trap could pass for it; above the sampling rate only (1-alpha^2)/f3dB^2 could be told.
// A given value is trusted within a factor.
const (
	lowestF3dB  = 1000.0 // Hz
	highestF3dB = 1.0    // of the sampling rate
	givenWithin = 4.0
)

// moved returns the detector after a step, within its range.
func (d *freeDiode) moved(at diode, share, log float64) diode {
	if d.held[0] {
		share = 0
	}
	if d.held[1] {
		log = 0
	}
	return newDiode(math.Max(0, math.Min(1, at.share+share)), math.Max(d.low, math.Min(d.high, at.log+log)))
}

// free tells which of the two can move along the gradient.
func (d *freeDiode) free(r *response) (free [2]bool) {
	up, down := d.moved(r.diode, 1e-9, 1e-9), d.moved(r.diode, -1e-9, -1e-9)
	free[0] = !d.held[0] && !(up.share == r.diode.share && r.grad[3] >= 0) && !(down.share == r.diode.share && r.grad[3] <= 0)
	free[1] = !d.held[1] && !(up.log == r.diode.log && r.grad[4] >= 0) && !(down.log == r.diode.log && r.grad[4] <= 0)
	return free
}

// inverse returns the inverse of the information of those that are free, 0 elsewhere.
func (r *response) inverse(free [2]bool, damping float64) (c [2][2]float64) {
	a, b, m := r.info[3][3]*(1+damping), r.info[4][4]*(1+damping), r.info[3][4]
	switch {
	case free[0] && free[1]:
		if det := a*b - m*m; det > 1e-13*a*b {
			return [2][2]float64{{b / det, -m / det}, {-m / det, a / det}}
		}
		return [2][2]float64{{1 / a, 0}, {0, 0}}
	case free[0] && a > 0:
		c[0][0] = 1 / a
	case free[1] && b > 0:
		c[1][1] = 1 / b
	}
	return c
}

const (
	diodeSteps = 60    // at most; 4 to 8 are usual
	diodeGain  = 1e-11 // of the log-likelihood at which the search ends
	diodeLimit = 1e8   // of the damping
)

// best maximises over the response at fixed parameters, by Fisher scoring.
func (d *freeDiode) best(p relaxation.Parameters, from diode) *response {
	r := d.try(p, from)
	if math.IsInf(r.value, -1) {
		return r
	}
	d.deriveAll(p, r)
	damping := 0.0
	for range diodeSteps {
		c := r.inverse(d.free(r), damping)
		var step [2]float64
		for a := range step {
			step[a] = c[a][0]*r.grad[3] + c[a][1]*r.grad[4]
		}
		if gain := step[0]*r.grad[3] + step[1]*r.grad[4]; gain < diodeGain || damping > diodeLimit {
			break
		}
		step[1] = math.Max(-1, math.Min(1, step[1]))
		next := d.try(p, d.moved(r.diode, step[0], step[1]))
		if !(next.value > r.value) {
			damping = math.Max(1e-2, 10*damping)
			continue
		}
		damping /= 10
		d.deriveAll(p, next)
		r = next
	}
	return r
}

// Value returns the log-likelihood at the best response.
func (d *freeDiode) Value(p relaxation.Parameters) float64 {
	if !inDomain(p) {
		return math.Inf(-1)
	}
	return d.best(p, d.from).value
}

// Score returns the log-likelihood at the best response, its gradient, and the
// information that is left when the response is unknown.
func (d *freeDiode) Score(p relaxation.Parameters) (float64, relaxation.Parameters, relaxation.Matrix) {
	if !inDomain(p) {
		return math.Inf(-1), relaxation.Parameters{}, relaxation.Matrix{}
	}
	r := d.best(p, d.from)
	if math.IsInf(r.value, -1) {
		return r.value, relaxation.Parameters{}, relaxation.Matrix{}
	}
	g, f := r.own(), r.ownInfo()
	c := r.inverse(d.free(r), 0)
	for i := range g {
		for j := range g {
			for a := range c {
				for b := range c {
					f[i][j] -= r.info[3+a][i] * c[a][b] * r.info[3+b][j]
				}
			}
		}
	}
	return r.value, g, f
}

// Start fits the other parameters with each of a net of responses, and keeps the best.
func (d *freeDiode) Start(noise float64, noiseFree bool) relaxation.Parameters {
	start := d.whittle.Start(noise, noiseFree)
	var directions []relaxation.Parameters
	if !noiseFree {
		start[2] = noise / d.scale
		directions = []relaxation.Parameters{{1, 0, 0}, {0, 1, 0}}
	}
	var net []diode
	if d.given {
		net = append(net, d.from)
	}
	const places = 5 // of f3dB, evenly spaced in its logarithm
	shares, logs := []float64{0, 0.09, 0.36}, []float64{d.from.log}
	if d.held[0] {
		shares = []float64{d.from.share}
	}
	if !d.held[1] {
		logs = logs[:0]
		for i := range places {
			logs = append(logs, d.low+(d.high-d.low)*(float64(i)+0.5)/places)
		}
	}
	for _, share := range shares {
		for _, log := range logs {
			net = append(net, newDiode(share, log))
		}
	}
	top, at := math.Inf(-1), start
	for _, n := range net {
		fixed := &whittle{blocks: d.blocks, lattice: d.lattice, scale: d.scale,
			model: d.lattice.model(n.power, n.prompt())}
		m, err := relaxation.Problem{Likelihood: fixed, Directions: directions}.Maximise(start)
		if err == nil && m.Value > top {
			top, at, d.from = m.Value, m.At, n
		}
	}
	return at
}

// Density returns the one-sided spectrum of the samples [m2/Hz] at f [Hz] with the best
// response.
func (d *freeDiode) Density(p relaxation.Parameters, hz float64) float64 {
	if m := d.recent.Load(); m != nil && m.corner == math.Exp(p[0]) && d.drawn == p {
		return d.density(m.model, p, hz)
	}
	d.drawn = p
	return d.density(d.best(p, d.from).model, p, hz)
}

// fitted returns the best response at p, total being the covariance of the parameters.
func (d *freeDiode) fitted(p relaxation.Parameters, total relaxation.Matrix) Diode {
	r := d.best(p, d.from)
	free := d.free(r)
	c := r.inverse(free, 0)
	var u, with [2]float64
	for a := range u {
		var along relaxation.Parameters // change of the response with the parameters
		for i := range along {
			along[i] = c[a][0]*r.info[3][i] + c[a][1]*r.info[4][i]
		}
		u[a] = math.Sqrt(c[a][a] + math.Max(0, total.Form(along, along)))
		switch {
		case d.held[a]:
			u[a] = 0
		case !free[a]:
			u[a] = math.NaN()
		case total[0][0] > 0:
			with[a] = -total.Form(along, relaxation.Parameters{1, 0, 0}) / (u[a] * math.Sqrt(total[0][0]))
		}
	}
	at := func(a int, x, low, high float64) int {
		switch {
		case free[a] || d.held[a]:
			return 0
		case x-low < high-x:
			return -1
		}
		return 1
	}
	return Diode{Alpha: math.Sqrt(r.diode.share), Share: r.diode.share, ShareU: u[0], F3dB: r.diode.f3dB, F3dBU: u[1] * r.diode.f3dB,
		AtShare: at(0, r.diode.share, 0, 1), AtF3dB: at(1, r.diode.log, d.low, d.high), WithCorner: with}
}

// closeCorners is the distance of the corner frequency of the trap from that of the photodiode, in standard
// uncertainties, within which an exchange of the two is no other fit.
const closeCorners = 6

// Exchanged returns the fit in which trap and photodiode have changed roles; false if there is none, because no
// photodiode was fitted, the exchange lies outside of the search, or the two are so close that it is the same fit.
//
// With a constant drag the recorded spectrum is (1 + alpha^2 f^2/f3dB^2)/[(1 + f^2/fc^2)(1 + f^2/f3dB^2)]: fc and f3dB
// may be exchanged when alpha becomes alpha fc/f3dB, and the likelihood is the same. Only the inertia of the liquid, a given
// alpha, or what is known of the amplitude tells which is the trap (docs/method.md, Eq. 64).
func (f *Fit) Exchanged(r *Record) (*Fit, bool) {
	d, ok := f.Problem.Likelihood.(*freeDiode)
	if !ok {
		return nil, false
	}
	found := d.fitted(f.Maximum.At, f.Total)
	if d.held[1] || math.IsNaN(found.F3dBU) || math.Log(f.Corner) < d.low || math.Log(f.Corner) > d.high {
		return nil, false
	}
	ratio := found.F3dB / f.Corner
	if math.Abs(math.Log(ratio)) < closeCorners*found.F3dBU/found.F3dB {
		return nil, false
	}
	share := found.Share
	if !d.held[0] {
		share = math.Min(1, found.Share/(ratio*ratio))
	}
	other := &freeDiode{whittle: d.whittle, given: d.given, held: d.held, low: d.low, high: d.high, from: newDiode(share, math.Log(f.Corner))}
	at := f.Maximum.At
	at[0] += math.Log(ratio)
	at[1] += math.Log(ratio) // the same plateau, V/fc
	next := *f
	next.Problem.Likelihood = other
	m, err := next.Problem.Maximise(at)
	if err != nil || math.Abs(m.At[0]-f.Maximum.At[0]) < math.Abs(m.At[0]-at[0]) { // it fell back
		return nil, false
	}
	return &next, next.settle(m, r) == nil
}
