package psd

import (
	"math"

	"beadwell/calib/relaxation"

	"gonum.org/v1/gonum/integrate/quad"
)

// The recorded spectrum is that of the relaxation process of the same fc and V, in closed form, plus
// the difference of the two spectra, blurred and summed over all aliases. The difference
// vanishes with the frequency dependence, and with it every error of the sum.
//
// The sum over the aliases k != 0 is smooth in 0 <= f <= rate/2, for its nearest
// singularity lies at f = rate: it is interpolated from aliasNodes Chebyshev points, with an error
// below 5.8^-aliasNodes. At each of them aliasPairs pairs are summed one by one. The
// rest is an integral (Euler and Maclaurin): with X = aliasPairs + 1/2,
//
//	sum_{k > aliasPairs} [h(k+f) + h(k-f)] = 2 int_X^inf h + (1/12 - f^2) h'(X) + O(h''').
//
// Of sinc^2, where its turns are too fast for the points of the integral, the mean 1/(2 u^2)
// is taken. The whole is within 1e-6 of the spectrum for every exposure (TestAliases).
const (
	aliasNodes  = 12   // 5.8^-12 = 7e-10
	aliasPairs  = 64   // error X^-3/20 = 2e-7 of the first alias, at most, from the turns of sinc^2
	tailPanels  = 14   // of the integral, each over a factor of two: up to 1e6 rates
	tailNodes   = 16   // Gauss-Legendre points in a panel
	tailTurns   = 6.0  // turns of sinc^2 in a panel that tailNodes points can follow
	tailSpacing = 0.25 // for the difference quotient of h at X
)

// lattice holds the sites of a record: what depends neither on parameters nor on the detector.
type lattice struct {
	source   Hydrodynamic
	rate     float64      // [Hz]
	exposure float64      // in units of the sampling interval
	blocks   []site       // at the blocks, and
	turns    []complex128 // 1 - exp(2 pi i f dt) there
	rows     [][aliasNodes]float64
	aliases  []site // 2 aliasPairs of them for each node
	tail     []site
	edge     [2]site // at X -+ tailSpacing, for h'(X)
}

func (h Hydrodynamic) newLattice(b relaxation.Blocks, rate, exposure float64) *lattice {
	l := &lattice{source: h, rate: rate, exposure: exposure * rate}
	for _, sigma := range b.Sigma {
		phi := math.Asin(math.Min(1, math.Sqrt(sigma)/2)) / math.Pi
		l.blocks = append(l.blocks, l.at(phi, false, 1))
		l.rows = append(l.rows, chebyshevRow(phi))
		sine, cosine := math.Sincos(math.Pi * phi)
		l.turns = append(l.turns, complex(2*sine*sine, -2*sine*cosine))
	}
	for j := range aliasNodes {
		phi := chebyshevNode(j)
		for k := aliasPairs; k > 0; k-- {
			l.aliases = append(l.aliases, l.at(float64(k)+phi, false, 1), l.at(float64(k)-phi, false, 1))
		}
	}
	l.addTail()
	return l
}

// at returns the site of phi (in units of the rate) with the blur, or its mean over
// the turns of sinc^2, and a weight.
func (l *lattice) at(phi float64, mean bool, weight float64) site {
	s := l.source.site(phi*l.rate, l.rate)
	u := math.Pi * phi * l.exposure
	switch {
	case u == 0:
	case mean:
		weight /= 2 * u * u
	default:
		weight *= math.Sin(u) * math.Sin(u) / (u * u)
	}
	s.weight *= weight
	return s
}

func (l *lattice) addTail() {
	start := aliasPairs + 0.5
	for i, sign := range []float64{-1, 1} {
		phi := start + sign*tailSpacing
		l.edge[i] = l.at(phi, phi*l.exposure > tailTurns, sign/(2*tailSpacing))
	}
	nodes, weights := make([]float64, tailNodes), make([]float64, tailNodes)
	quad.Legendre{}.FixedLocations(nodes, weights, 0, 1)
	for range tailPanels {
		for i, t := range nodes {
			phi := start * math.Exp2(t)
			l.tail = append(l.tail, l.at(phi, start*l.exposure > tailTurns, 2*weights[i]*phi*math.Ln2))
		}
		start *= 2
	}
	for i, t := range nodes { // from start to infinity with phi = start/t
		phi := start / t
		l.tail = append(l.tail, l.at(phi, start*l.exposure > tailTurns, 2*weights[i]*phi/t))
	}
}

// chebyshevNode returns the j-th Chebyshev point of 0..1/2.
func chebyshevNode(j int) float64 {
	return (1 + math.Cos(math.Pi*(float64(j)+0.5)/aliasNodes)) / 4
}

// chebyshevAngles are cos(k at_j) of the nodes.
var chebyshevAngles = func() (table [aliasNodes][aliasNodes]float64) {
	for j := range table {
		at := math.Pi * (float64(j) + 0.5) / aliasNodes
		for k := range table[j] {
			table[j][k] = math.Cos(float64(k) * at)
		}
	}
	return table
}()

// chebyshevRow returns the weights by which the values at the nodes make the value at phi.
func chebyshevRow(phi float64) (row [aliasNodes]float64) {
	t := math.Max(-1, math.Min(1, 4*phi-1))
	var here [aliasNodes]float64 // T_k(t)
	here[0], here[1] = 1, t
	for k := 2; k < aliasNodes; k++ {
		here[k] = 2*t*here[k-1] - here[k-2]
	}
	for j := range row {
		sum := 0.5
		for k := 1; k < aliasNodes; k++ {
			sum += here[k] * chebyshevAngles[j][k]
		}
		row[j] = 2 * sum / aliasNodes
	}
	return row
}

// model is a lattice seen through a detector.
type model struct {
	lattice *lattice
	prompt  float64 // response at infinite frequency
	power   func(hz float64) float64
	blocks  []term
	aliases []term
	tail    []term
	edge    [2]term
}

// term is a site with the response of the detector.
type term struct {
	square, elastic, viscous float64 // of the site
	moving, still            float64 // weights of the spectrum and of that of constant drag
}

// model applies the power response of a detector at f [Hz], which at infinity is prompt.
func (l *lattice) model(power func(hz float64) float64, prompt float64) *model {
	m := &model{lattice: l, prompt: prompt, power: power}
	all := func(sites []site) []term {
		terms := make([]term, len(sites))
		for i, s := range sites {
			terms[i] = m.term(s)
		}
		return terms
	}
	m.blocks, m.aliases, m.tail = all(l.blocks), all(l.aliases), all(l.tail)
	m.edge = [2]term{m.term(l.edge[0]), m.term(l.edge[1])}
	return m
}

func (m *model) term(s site) term {
	return term{square: s.square, elastic: s.elastic, viscous: s.viscous,
		moving: s.weight * s.drag * m.power(s.hz), still: s.weight * m.prompt}
}

// at returns the difference of the spectra at the corner x and its derivative with
// respect to ln x.
func (t *term) at(x float64) (value, slope float64) {
	u := x + t.elastic
	den := 1 / (u*u + t.viscous)
	den0 := 1 / (x*x + t.square)
	a, b := t.moving*den, t.still*den0
	return x * (a - b), x * (a*(1-2*x*u*den) - b*(1-2*x*x*den0))
}

// folded are the values and the derivatives with respect to ln x of the sum over the aliases
// k != 0 at the Chebyshev points, for one corner x.
type folded struct {
	value, slope [aliasNodes]float64
}

func (m *model) fold(x float64) *folded {
	f := &folded{}
	var rest, drest, edge, dedge float64
	for i := range m.tail {
		v, s := m.tail[i].at(x)
		rest += v
		drest += s
	}
	for i := range m.edge {
		v, s := m.edge[i].at(x)
		edge += v
		dedge += s
	}
	for j := range f.value {
		phi := chebyshevNode(j)
		by := 1.0/12 - phi*phi
		sum, dsum := rest+by*edge, drest+by*dedge
		terms := m.aliases[2*aliasPairs*j : 2*aliasPairs*(j+1)]
		for i := range terms {
			v, s := terms[i].at(x)
			sum += v
			dsum += s
		}
		f.value[j], f.slope[j] = sum, dsum
	}
	return f
}

// coefficients returns those of the Chebyshev series of the sum over 0..1/2.
func (f *folded) coefficients() (c [aliasNodes]float64) {
	for k := range c {
		for j, v := range f.value {
			c[k] += 2.0 / aliasNodes * v * math.Cos(math.Pi*float64(k)*(float64(j)+0.5)/aliasNodes)
		}
	}
	c[0] /= 2
	return c
}

// series sums a Chebyshev series over 0..1/2 at phi, by Clenshaw's recurrence.
func series(c *[aliasNodes]float64, phi float64) float64 {
	t := 4*phi - 1
	var next, last float64
	for k := aliasNodes - 1; k > 0; k-- {
		next, last = c[k]+2*t*next-last, next
	}
	return c[0] + t*next - last
}

// at returns the interpolated sum over the aliases.
func (f *folded) at(row *[aliasNodes]float64) (value, slope float64) {
	for j, w := range row {
		value += w * f.value[j]
		slope += w * f.slope[j]
	}
	return value, slope
}
