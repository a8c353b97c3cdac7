package calib

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"

	"beadwell/calib/relaxation"
	"beadwell/calib/session"
	"beadwell/calib/track"
)

// LegFreeDrag is the stiffness 2 pi gamma fc with the drag that a recording of the free bead gave.
const LegFreeDrag = "free_bead_drag"

// RouteFreeBead names that stiffness where a route to adopt is asked for.
const RouteFreeBead = "free-bead"

// CodeFreeUnused is the code of the finding that a recording of the free bead could not be used.
const CodeFreeUnused = "free-bead-not-used"

// FreeDrag is the drag of the bead as recordings with the laser off gave it, carried to a recording in the trap.
//
// What is carried is the ratio of measured to computed drag (docs/method.md, Eqs 65 and 66): the drag here is the ratio times Stokes
// drag and wall factor of this recording, so that another height, and the warmer water of a trap that heats it, are allowed for.
// Inputs that both recordings share act once: the bead's diameter and the viscosity all but cancel, and the length scale stays.
type FreeDrag struct {
	Recordings  []FreeRecording `json:"recordings"`      // that it rests on
	Ratio       Quantity        `json:"ratio"`           // measured over computed drag of the free bead, 1
	Drag        Quantity        `json:"drag"`            // of this recording by that ratio, N s/m
	Share       Float           `json:"share"`           // of this drag in the drag by which the stiffness was adopted; the rest is the computed one
	LengthPower Float           `json:"log_sensitivity"` // d ln(drag) / d ln(length scale of this recording)
	Test        Test            `json:"test"`            // against the computed drag, and against the drag measured in the trap
	Text        string          `json:"text"`            // how the drags compare, for a person
}

// FreeRecording identifies a recording of the free bead.
type FreeRecording struct {
	Name   string `json:"name"`           // as it was read
	Bead   string `json:"bead,omitempty"` // identifier when the file holds several beads
	SHA256 string `json:"sha256"`         // hexadecimal
	Weight Float  `json:"weight"`         // in the mean of several
}

// FreeBeadDrag is what a recording of a free bead says of its drag: the ratio to the computed one on each axis.
type FreeBeadDrag struct {
	name, bead, sum string
	axes            map[string]freeAxis
	reason          string    // why it says nothing; empty when it does
	whole           Companion // the recording itself, for a diagnosis
}

// freeAxis is the ratio on one axis, in logarithms.
type freeAxis struct {
	ratio, record float64 // and its standard uncertainty by the recording
	inputs        []moved
	reason        string // why there is no ratio
}

// moved is an input with what one standard uncertainty of it does to a logarithm.
type moved struct {
	identity string // two recordings share an input of the same identity
	in       influence
	by       float64
}

// MeasureFreeDrag measures the drag of a free bead for recordings of the same bead in the trap. A recording
// that does not give it is no error: those in the trap say why it was not used. The error is that of ctx.
func MeasureFreeDrag(ctx context.Context, rec *track.Recording, set *session.Settings) (*FreeBeadDrag, error) {
	f := &FreeBeadDrag{name: rec.Name, bead: rec.Bead, sum: rec.SHA256, axes: map[string]freeAxis{}, whole: Companion{Recording: rec, Settings: set}}
	for i, a := range rec.Axes {
		if err := ctx.Err(); err != nil {
			return nil, err
		}
		axis, err := measureFreeAxis(rec, i, set)
		if err != nil {
			axis.reason = firstLine(err)
		}
		f.axes[a.Name] = axis
	}
	return f, nil
}

// UnusableFreeBead stands for a recording of a free bead that could not be read.
func UnusableFreeBead(name string, err error) *FreeBeadDrag {
	return &FreeBeadDrag{name: name, reason: firstLine(err)}
}

// firstLine is an error without its hint.
func firstLine(err error) string {
	line, _, _ := strings.Cut(err.Error(), "\n")
	return line
}

func measureFreeAxis(rec *track.Recording, index int, set *session.Settings) (f freeAxis, err error) {
	w, err := newWork(rec, index, set, Options{})
	if err != nil {
		return f, err
	}
	if w.unscaled {
		f.reason = fmt.Sprintf("its positions are in %s, and no sensitivity is stated", w.source.Unit)
		return f, nil
	}
	fit, ratio, err := w.measureFree()
	if err != nil {
		return f, err
	}
	f.ratio, f.record = ratio, fit.LogTotal
	for _, in := range w.phys.influences {
		if by := in.energy - 2*in.length - in.drag; by != 0 {
			f.inputs = append(f.inputs, moved{w.identity(in), in, by})
		}
	}
	return f, nil
}

// identity names an input by the statements that it comes from: two recordings for which the same was stated, value and
// uncertainty, had it measured once.
func (w *work) identity(in influence) string {
	keys := map[string][]string{
		"temperature": {"medium.temperature"}, "laser heating": {"laser.heating"}, "laser power": {"laser.power"},
		"viscosity": {"medium.viscosity"}, "viscosity correlation": {"medium.fluid"}, "bead diameter": {"bead.diameter"},
		"height": {"chamber.height"}, "depth": {"chamber.depth"}, wallModel: {"bead.diameter", "chamber.height", "chamber.depth", "fit.perpendicular"},
	}[in.name]
	if keys == nil { // a length scale
		return fmt.Sprint(in.name, in.unit, in.value, in.u)
	}
	text := in.name
	for _, key := range keys {
		s, _ := w.set.Lookup(key, "")
		text += fmt.Sprint(";", s.Word, s.Value.SI, s.Value.U)
	}
	return text
}

// carried is the drag of free beads carried to one axis of a recording in the trap.
type carried struct {
	used     []FreeRecording
	ratio    float64     // ln(measured/computed) of the free bead
	record   float64     // standard uncertainty of it by the free recordings
	base     []float64   // d ln(computed drag) for one standard uncertainty of each influence of this axis
	grad     []float64   // d ln(carried drag) for the same
	own      []influence // inputs of the free recordings alone; drag is the change of ln(drag)
	share    float64     // of the carried drag in the one in use
	applied  float64     // the share that the physics of this axis have already
	test     Test
	computed float64 // the computed drag, N s/m
}

// carry takes the drag from the recordings of the free bead. It keeps the reasons why one was not used.
func (w *work) carry() {
	if len(w.opt.FreeBead) == 0 || roleOf(w.set) != RoleTrapped {
		return
	}
	type usable struct {
		of   *FreeBeadDrag
		axis freeAxis
	}
	var list []usable
	total := 0.0
	for _, f := range w.opt.FreeBead {
		axis, has := f.axes[w.axisName]
		reason := f.reason
		switch {
		case reason != "":
		case !has:
			reason = "it has no axis " + w.axisName
		default:
			reason = axis.reason
		}
		if reason != "" {
			w.freeUnused = append(w.freeUnused, fmt.Sprintf("%s: %s", f.name, strings.TrimPrefix(reason, f.name+": ")))
			continue
		}
		list = append(list, usable{f, axis})
		total += 1 / (axis.record * axis.record)
	}
	if len(list) == 0 {
		return
	}
	c := &carried{record: 1 / math.Sqrt(total), grad: make([]float64, len(w.phys.influences)), computed: w.phys.gamma}
	names := make([]string, len(c.grad))
	for i, in := range w.phys.influences {
		c.grad[i], names[i] = in.drag, w.identity(in)
	}
	c.base = slices.Clone(c.grad)
	var others []string
	for _, f := range list {
		weight := 1 / (f.axis.record * f.axis.record) / total
		c.ratio += weight * f.axis.ratio
		c.used = append(c.used, FreeRecording{Name: f.of.name, Bead: f.of.bead, SHA256: f.of.sum, Weight: Float(weight)})
		for _, m := range f.axis.inputs {
			if i := slices.Index(names, m.identity); i >= 0 {
				c.grad[i] += weight * m.by
				continue
			}
			k := slices.Index(others, m.identity)
			if k < 0 {
				k = len(others)
				in := m.in
				in.name, in.drag, in.energy, in.length, in.apart = in.name+" of the free bead", 0, 0, 0, true
				others, c.own = append(others, m.identity), append(c.own, in)
			}
			c.own[k].drag += weight * m.by
		}
	}
	c.settleShare()
	w.free = c
	if w.unscaled { // the lengths will rest on the drag, so that it must be settled first
		w.compareFree()
		w.phys = w.combinedPhysics()
		c.applied = c.share
	}
}

// settleShare finds the combination of computed and carried drag that has the least variance.
func (c *carried) settleShare() {
	var computed, both float64
	free := c.record*c.record + c.inputsVariance()
	for i, g := range c.base {
		computed += g * g
		both += g * c.grad[i]
	}
	if d := computed + free - 2*both; d > 0 {
		c.share = math.Max(0, math.Min(1, (computed-both)/d))
	}
}

// freeMoves are the differences that are tested, for one standard uncertainty of each input: the carried drag less the computed
// one, and less the one that was measured in the trap.
func (w *work) freeMoves() (moves [][2]float64) {
	c := w.free
	for i, g := range c.grad {
		in := w.phys.influences[i]
		moves = append(moves, [2]float64{g - c.base[i], g - (in.energy - 2*in.length)})
	}
	for _, in := range c.own {
		moves = append(moves, [2]float64{in.drag, in.drag})
	}
	return moves
}

// compareFree tests the carried drag against the computed one and, where the recording determines it, against the drag
// measured in the trap.
func (w *work) compareFree() {
	c := w.free
	if c == nil || c.test.DegreesOfFreedom > 0 {
		return
	}
	record := c.record * c.record
	near := [2][2]float64{{record, record}, {record, record}}
	values, n := [2]float64{c.ratio, 0}, 1
	if r := w.axis.CrossCheck.Routes; r.PValue.Known() && w.fit != nil {
		sd, _ := w.fit.SD(alongDrag)
		values[1], n = c.ratio+w.dragExcess(), 2
		near[1][1] += sd * sd
	}
	far := near
	for _, m := range w.freeMoves() {
		for i := range far {
			for j := range far {
				far[i][j] += m[i] * m[j]
			}
		}
	}
	if n == 2 {
		far[1][1] += w.noiseOnDrag()
	}
	t := &c.test
	t.DegreesOfFreedom, t.MeanDifference = n, Float(c.ratio)
	t.ChiSquare, t.ChiSquareCombined = Float(pairChiSquare(values, near, n)), Float(pairChiSquare(values, far, n))
	t.PValue, t.PValueCombined = survival(float64(t.ChiSquare), n), survival(float64(t.ChiSquareCombined), n)
	if float64(t.PValueCombined) < familyLevel { // they are not one drag: no mean of them
		c.share = 0
	}
	if w.opt.Adopt == RouteFreeBead {
		c.share = 1
	}
}

// noiseOnDrag is the variance that stated noise, exposure and photodiode add to ln(fc V).
func (w *work) noiseOnDrag() float64 {
	data, total := w.fit.SD(alongDrag)
	v := total*total - data*data
	if !w.has(spectrumLeg) || !w.has(amplitudeLeg) {
		return math.Max(0, v)
	}
	for k := len(w.phys.influences) + 1; k < len(w.legs.grad[spectrumLeg]); k++ {
		d := w.legs.grad[spectrumLeg][k] - w.legs.grad[amplitudeLeg][k]
		v += d * d
	}
	return math.Max(0, v)
}

// pairChiSquare is the chi-square of the first n of two differences.
func pairChiSquare(x [2]float64, c [2][2]float64, n int) float64 {
	if n == 1 {
		return x[0] * x[0] / c[0][0]
	}
	det := c[0][0]*c[1][1] - c[0][1]*c[1][0]
	return (x[0]*x[0]*c[1][1] - 2*x[0]*x[1]*c[0][1] + x[1]*x[1]*c[0][0]) / det
}

// combinedPhysics are those of this axis with the combined drag in place of the computed one.
func (w *work) combinedPhysics() *physics {
	c, p := w.free, *w.phys
	p.gamma *= math.Exp(c.share * c.ratio)
	p.influences = slices.Clone(p.influences)
	for i := range p.influences {
		p.influences[i].drag += c.share * (c.grad[i] - c.base[i])
	}
	for _, in := range c.own {
		in.drag *= c.share
		p.influences = append(p.influences, in)
	}
	drag := c.computed * math.Exp(c.ratio)
	p.influences = append(p.influences, influence{name: freeStatistics, value: drag, unit: "N s/m", u: c.record * drag, base: drag, drag: c.share * c.record, apart: true})
	return &p
}

// withFree returns the work with the combined drag in place of the computed one. What the estimates were tested
// by stays with the work itself.
func (w *work) withFree() *work {
	c, v := w.free, *w
	v.phys = w.combinedPhysics()
	for leg := range v.legs.value {
		if dragLeg[leg] {
			v.legs.value[leg] += c.share * c.ratio
		}
	}
	v.influences()
	for leg := range v.legs.grad { // those of the record itself
		copy(v.legs.grad[leg][len(v.phys.influences)+1:], w.legs.grad[leg][len(w.phys.influences)+1:])
	}
	v.totals()
	v.poolErr = v.pool()
	return &v
}

// freeStatistics is the budget line of the recordings of the free bead.
const freeStatistics = "drag of the free bead"

// adoptWithFree adopts a stiffness by the combined drag; without a free bead by the computed one.
func (w *work) adoptWithFree() {
	c, by := w.free, w
	if c == nil || c.share == 0 {
		w.adopt()
		return
	}
	if c.applied == 0 {
		by = w.withFree()
		w.adopter = by
	}
	if by.opt.Adopt == RouteFreeBead {
		by.opt.Adopt = RouteDrag
	}
	by.adopt()
	a := &by.axis.Adopted
	name := "free bead's drag"
	if c.share < 1 {
		name = "computed drag and free bead's"
	}
	a.Basis = strings.Replace(a.Basis, "computed drag", name, 1)
	a.Basis = strings.Replace(a.Basis, "drag and amplitude route combined", "drag and amplitude route and free bead combined", 1)
	w.axis.Adopted, w.adoptedLeg = *a, by.adoptedLeg
}

// frictionChange is the change of the logarithm of the drag in use for a draw of the inputs, at the logarithm of the
// computed drag there. The carried part follows its first derivatives.
func (w *work) frictionChange(friction float64, e []float64, names map[string]int) float64 {
	c := w.free
	if c == nil || len(w.phys.influences) == len(c.grad) { // without the inputs of the free bead
		return friction - math.Log(w.phys.gamma)
	}
	change := (1 - c.share) * (friction - math.Log(c.computed))
	for i, in := range w.phys.influences {
		z := e[names[w.sharedName(in)]]
		if i < len(c.grad) {
			change += c.share * c.grad[i] * z
		} else {
			change += in.drag * z
		}
	}
	return change
}

// freeStiffness is ln(2 pi gamma fc) with the carried drag, and its uncertainties.
func (w *work) freeStiffness() Quantity {
	l := &w.legs
	if !w.has(spectrumLeg) {
		return Withheld("N/m", l.reason[spectrumLeg])
	}
	c := w.free
	extra := c.record*c.record + c.inputsVariance()
	for _, g := range l.grad[spectrumLeg][len(w.phys.influences):] {
		extra += g * g
	}
	stat := math.Sqrt(l.stat[spectrumLeg][spectrumLeg])
	return stiffness(l.value[spectrumLeg]+(1-c.applied)*c.ratio, stat, l.offsets[spectrumLeg], math.Sqrt(stat*stat+extra), l.offsets[spectrumLeg].Widened(math.Sqrt(extra)))
}

// inputsVariance is the variance of the logarithm of the carried drag by the inputs.
func (c *carried) inputsVariance() float64 {
	sum := 0.0
	for _, g := range c.grad {
		sum += g * g
	}
	for _, in := range c.own {
		sum += in.drag * in.drag
	}
	return sum
}

// describeFree fills in what the free bead says of this axis.
func (w *work) describeFree() {
	c := w.free
	if c == nil {
		return
	}
	x := &w.axis
	x.Estimates = append(x.Estimates, Estimate{Leg: LegFreeDrag, Route: RouteDrag, Stiffness: w.freeStiffness()})
	var ratio float64
	for _, m := range w.freeMoves() {
		ratio = math.Hypot(ratio, m[0])
	}
	f := &FreeDrag{Recordings: c.used, Test: c.test, Share: Float(c.share), LengthPower: Float(w.lengthPower())}
	f.Ratio = carriedLog(c.ratio, c.record, ratio, "1")
	f.Drag = carriedLog(math.Log(c.computed)+c.ratio, c.record, math.Sqrt(c.inputsVariance()), "N s/m")
	f.Text = w.freeText()
	x.FreeDrag = f
	x.CrossCheck.Free = &c.test
}

// carriedLog makes the quantity exp(value) with a standard uncertainty by the free recordings and one by inputs, both of value.
func carriedLog(value, record, inputs float64, unit string) Quantity {
	total := math.Hypot(record, inputs)
	return exponential(value, record, relaxation.Normal(record), total, relaxation.Normal(total), unit)
}

// lengthPower is d ln(carried drag)/d ln(length scale): -2 where the free bead was recorded on the length scale of this recording.
func (w *work) lengthPower() float64 {
	for i, g := range w.free.grad {
		if l := w.phys.influences[i].length; l != 0 {
			return g / l
		}
	}
	return 0
}

// freeText says how the three drags compare.
func (w *work) freeText() string {
	c := w.free
	than := func(ratio float64) string {
		if ratio < 0 {
			return fmt.Sprintf("%.1f %% below", -100*math.Expm1(ratio))
		}
		return fmt.Sprintf("%.1f %% above", 100*math.Expm1(ratio))
	}
	var names []string
	for _, f := range c.used {
		names = append(names, f.Name)
	}
	text := fmt.Sprintf("the drag of the free bead (%s) is %s the computed one", join(names), than(c.ratio))
	if c.test.DegreesOfFreedom == 2 {
		text += fmt.Sprintf(" and %s the one measured in the trap", than(c.ratio+w.dragExcess()))
	}
	return fmt.Sprintf("%s (%s with inputs exact, %s with their uncertainties)", text, pText(float64(c.test.PValue)), pText(float64(c.test.PValueCombined)))
}

// freeFindings tells which recordings of the free bead were not used.
func (w *work) freeFindings() (out []Finding) {
	nan := Float(math.NaN())
	for _, reason := range w.freeUnused {
		out = append(out, Finding{Code: CodeFreeUnused, Severity: Doubtful, Axis: w.axisName, Value: nan, Limit: nan,
			Text:   "The recording of the free bead was not used: " + strings.TrimSuffix(reason, ".") + ".",
			Remedy: `correct it or its row in tracks.csv, or leave it out with --free-bead none`})
	}
	return out
}
