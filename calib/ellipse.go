package calib

import (
	"fmt"
	"math"
	"strings"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"

	"beadwell/calib/relaxation"
)

// TrapAxes are the axes of the trap itself, from the covariance of the recorded axes.
//
// In a harmonic trap the positions are Gaussian with the covariance kT K^-1, K the matrix of stiffness (equipartition), so the
// principal axes of the covariance are those of the trap. The covariance of two axes is corrected for blur as their variances are. Sampling scatter is
// that of correlated samples: with c the correlation of neighbouring samples of each axis, N samples count as N (1 - c1 c2)/(1 + c1 c2)
// (Bartlett, J. R. Stat. Soc. Suppl. 8 (1946) 27); the direction of an axis then has the variance v1 v2/(N (v1-v2)^2) (Anderson, Ann. Math.
// Stat. 34 (1963) 122).
type TrapAxes struct {
	Names      []string        `json:"axes"`           // recorded axes, in the order of the covariance
	Covariance [][]Float       `json:"covariance_m2"`  // of the positions, blur and noise removed
	Pairs      []AxisPair      `json:"pairs"`          // each two of the axes
	Principal  []PrincipalAxis `json:"principal_axes"` // of the trap, one for each recorded axis
	Text       string          `json:"text"`           // what it says, for a person
}

// AxisPair is how two recorded axes move together.
type AxisPair struct {
	First       string   `json:"first"`            // axis
	Second      string   `json:"second"`           // axis
	Correlation Quantity `json:"correlation"`      // of the positions, blur and noise removed, 1
	PValue      Float    `json:"p_value"`          // of no correlation
	Fast        Quantity `json:"fast_correlation"` // real part of the coherency at frequencies above the corners: cross-talk shows there, a tilt does not
}

// PrincipalAxis is one axis of the trap.
type PrincipalAxis struct {
	Nearest   string   `json:"nearest_axis"` // recorded axis
	Direction []Float  `json:"direction"`    // unit vector over the recorded axes
	Angle     Quantity `json:"angle"`        // between it and the nearest recorded axis [rad]; positive towards the next one in a plane of two
	Stiffness Quantity `json:"stiffness"`    // N/m, kT over the variance along it
	Bias      Float    `json:"log_bias"`     // ln of the stiffness along the recorded axis over the one along this
}

// CodeTilted is the code of the finding that the recorded axes are not those of the trap.
const CodeTilted = "axes-tilted"

const (
	// tiltChance is the p-value of no correlation above which axes count as those of the trap.
	tiltChance = 1e-3
	// tiltShare is the bias of a stiffness, in its combined standard uncertainty, above which the user is told.
	tiltShare = 0.3
	// fastBand is the highest frequency of the fast correlation over the largest corner frequency; above it noise gains.
	fastBand = 8
)

// findAxes compares the recorded axes with those of the trap, by the sums over their pairs, nil where they cannot be compared.
func (r *Result) findAxes(works []*work, sums []pairSums) {
	if sums == nil {
		return
	}
	n := len(works)
	t := &TrapAxes{}
	v := mat.NewSymDense(n, nil)
	for i, w := range works {
		t.Names = append(t.Names, w.axisName)
		v.SetSym(i, i, w.ownVariance())
	}
	for i := range n {
		for j := i + 1; j < n; j++ {
			c, pair := pairOf(works[i], works[j], sums[len(t.Pairs)])
			v.SetSym(i, j, c)
			t.Pairs = append(t.Pairs, pair)
		}
	}
	for i := range n {
		row := make([]Float, n)
		for j := range n {
			row[j] = Float(v.At(i, j))
		}
		t.Covariance = append(t.Covariance, row)
	}
	var e mat.EigenSym
	if !e.Factorize(v, true) {
		return
	}
	values := e.Values(nil)
	if values[0] <= 0 {
		return
	}
	var vectors mat.Dense
	e.VectorsTo(&vectors)
	t.principal(works, values, &vectors)
	t.Text = t.words()
	r.TrapAxes = t
	r.tiltFindings(t, works)
}

// ownVariance is the variance of an axis, blur and noise removed [m2].
func (w *work) ownVariance() float64 {
	if w.legs.eq.Variance > 0 {
		return w.legs.eq.Variance
	}
	return w.fit.Variance
}

// count is the number of independent samples of the product of two relaxing positions.
func count(a, b *work, common int) float64 {
	c := a.fit.Process().Decay() * b.fit.Process().Decay()
	return math.Max(2, float64(common)*(1-c)/(1+c))
}

// pairOf returns the covariance of two axes, and what is told of it.
func pairOf(a, b *work, sums pairSums) (float64, AxisPair) {
	shrink := func(w *work) float64 {
		s, _ := w.keptShare(w.fit.Corner)
		return s
	}
	cov := sums.product / float64(sums.n) / math.Sqrt(shrink(a)*shrink(b))
	va, vb := a.ownVariance(), b.ownVariance()
	rho := cov / math.Sqrt(va*vb)
	// the variance of a mean of products of two independent processes is the sum of the products of their autocovariances
	pa, pb := a.fit.Process(), b.fit.Process()
	products := pa.Autocovariance(0)*pb.Autocovariance(0) + 2*pa.Autocovariance(1)*pb.Autocovariance(1)/(1-pa.Decay()*pb.Decay())
	sd := math.Sqrt(products / float64(sums.n) * (1 + rho*rho) / (shrink(a) * shrink(b) * va * vb))
	p := 2 * distuv.UnitNormal.Survival(math.Abs(rho)/sd)
	pair := AxisPair{First: a.axisName, Second: b.axisName, Correlation: around(rho, sd, "1"), PValue: Float(p)}
	pair.Fast = sums.fast(a.record.Missing+b.record.Missing > 0)
	return cov, pair
}

// principal fills in the axes of the trap, in the order of the recorded axes that they are nearest to.
func (t *TrapAxes) principal(works []*work, values []float64, vectors *mat.Dense) {
	n := len(works)
	taken := make([]bool, n)
	order := make([]int, n) // principal axis of each recorded one
	for i := range n {
		best := -1
		for k := range n {
			if !taken[k] && (best < 0 || math.Abs(vectors.At(i, k)) > math.Abs(vectors.At(i, best))) {
				best = k
			}
		}
		order[i], taken[best] = best, true
	}
	for i, k := range order {
		w, sign := works[i], 1.0
		if vectors.At(i, k) < 0 {
			sign = -1
		}
		p := PrincipalAxis{Nearest: w.axisName, Bias: Float(math.Log(values[k] / w.ownVariance()))}
		for j := range n {
			p.Direction = append(p.Direction, Float(sign*vectors.At(j, k)))
		}
		cosine := math.Min(1, math.Abs(vectors.At(i, k)))
		angle := math.Acos(cosine)
		if n == 2 {
			angle = math.Atan2(float64(p.Direction[1-i]), float64(p.Direction[i]))
			if i == 1 {
				angle = -angle
			}
		}
		spread := 0.0
		for j, l := range order {
			if l != k {
				d := values[k] - values[l]
				spread += values[k] * values[l] / (count(w, works[j], w.record.Observed()) * d * d)
			}
		}
		if sd := math.Sqrt(spread); sd < math.Pi/6 {
			p.Angle = around(angle, sd, "rad")
		} else {
			p.Angle = Withheld("rad", "the trap is as stiff along one axis as along another, within the uncertainty")
		}
		l := &w.legs
		sd := math.Sqrt(2 / count(w, w, w.record.Observed()))
		extra := math.Sqrt(math.Max(0, l.total[amplitudeLeg][amplitudeLeg]-l.stat[amplitudeLeg][amplitudeLeg]))
		if own := math.Sqrt(l.stat[amplitudeLeg][amplitudeLeg]); own > sd {
			sd = own
		}
		o := relaxation.Normal(sd)
		p.Stiffness = exponential(math.Log(w.phys.kT/values[k]), sd, o, math.Hypot(sd, extra), o.Widened(extra), "N/m")
		if w.takesDrag() {
			p.Stiffness = Withheld("N/m", selfScaled)
		}
		t.Principal = append(t.Principal, p)
	}
}

// words says how the axes of the trap lie.
func (t *TrapAxes) words() string {
	var parts []string
	for _, p := range t.Pairs {
		if p.PValue >= tiltChance {
			continue
		}
		text := fmt.Sprintf("%s and %s are correlated by %.3f", p.First, p.Second, float64(p.Correlation.Value))
		if p.Fast.Known() {
			fast, sd := float64(p.Fast.Value), float64(p.Fast.Statistical.Standard)
			cause := ", and not at high frequency: the axes of the trap are tilted against the recorded ones"
			if math.Abs(fast) > 4*sd {
				cause = fmt.Sprintf(", and by %.3f at high frequency: the detector mixes the axes", fast)
			}
			text += cause
		}
		parts = append(parts, text)
	}
	if len(parts) == 0 {
		return "the recorded axes are those of the trap, within the uncertainty"
	}
	return strings.Join(parts, "; ")
}

// tiltFindings tells where the stiffness along a recorded axis is not that of the trap.
func (r *Result) tiltFindings(t *TrapAxes, works []*work) {
	correlated := false
	for _, p := range t.Pairs {
		correlated = correlated || p.PValue < tiltChance
	}
	if !correlated {
		return
	}
	for i, p := range t.Principal {
		a := r.Axes[i].Adopted.Stiffness
		if !a.Known() || a.Combined == nil {
			continue
		}
		u := float64(a.Combined.Standard / a.Value)
		if bias := math.Abs(float64(p.Bias)); bias > tiltShare*u {
			r.Findings = append(r.Findings, Finding{Code: CodeTilted, Severity: Doubtful, Axis: works[i].axisName, Value: Float(bias / u), Limit: tiltShare, Unit: "1",
				Text: fmt.Sprintf("The stiffness along the recorded axis differs from that along the trap's own axis by %.1f %%, %.1f of its uncertainty: %s.",
					100*math.Abs(math.Expm1(float64(p.Bias))), bias/u, t.Text),
				Remedy: "turn the recorded axes to those of the trap, or correct the cross-talk of the detector"})
		}
	}
}
