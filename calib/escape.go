package calib

import (
	"context"
	"fmt"
	"math"
	"sort"

	"beadwell/calib/session"
	"beadwell/calib/track"
)

// Escape is the loss of a bead from a trap in a moving stage. The force is that on the systematic displacement of the bead,
// thermal motion left out, in the part of the recording before the loss.
type Escape struct {
	Time         Float    `json:"time_s"`        // of the loss, on the clock of the recording
	Displacement Quantity `json:"displacement"`  // largest systematic one before, m
	Force        Quantity `json:"force"`         // stiffness times displacement: the largest force that the bead was held against, N
	Drag         Quantity `json:"force_by_drag"` // the same by Stokes drag, computed drag times largest constant speed before, N; triangle
	AtLoss       Quantity `json:"drag_at_loss"`  // computed drag times speed of the stage when the bead was lost, N; triangle
	Margin       Float    `json:"excursion_m"`   // the excursion that showed the loss, m; null in a detector's unit
	Text         string   `json:"text"`          // what it says, for a person
}

// CodeLost is the code of the finding that a bead was lost from a driven recording.
const CodeLost = "bead-lost-in-flow"

const (
	// lostDeviations is the excursion, in rms of the beginning, that a trapped bead does not reach.
	lostDeviations = 9
	// lostShare is the excursion, as a share of the largest amplitude of the stage, that a trapped bead does not reach: at
	// constant speed it stands off by 1/16 of a stroke at most, which is 1/8 of the amplitude, where a stroke has the
	// sixteen relaxation times that an evaluation needs; in a sine by amplitude/(1 + (fc/f)^2)^(1/2).
	lostShare = 0.5
	// lostBeginning is the share of the recording that says what the motion of the trapped bead is like.
	lostBeginning = 0.1
)

// lostDriven finds the sample at which a driven bead is lost. Set free it goes with the liquid: from the first excursion that
// a trapped bead does not reach, it stays away for the rest of the recording. first is that excursion, begin the last sample before it
// near the usual place; size is the excursion in the recorded unit.
func lostDriven(values []float64, amplitude float64) (begin, first int, size float64, ok bool) {
	n := len(values)
	var head []float64
	for _, v := range values[:max(int(lostBeginning*float64(n)), min(n, 64))] {
		if v == v {
			head = append(head, v)
		}
	}
	if len(head) < 16 {
		return 0, 0, 0, false
	}
	centre, rms := middleOf(head)
	limit := math.Max(lostDeviations*rms, lostShare*amplitude)
	first = -1
	for i, v := range values {
		if math.Abs(v-centre) > limit {
			first, size = i, math.Abs(v-centre)
			break
		}
	}
	if first < 0 || !(rms > 0) {
		return 0, 0, 0, false
	}
	square, count := 0.0, 0
	for _, v := range values[first:] {
		if v == v {
			square += (v - centre) * (v - centre)
			count++
		}
	}
	if math.Sqrt(square/float64(count)) < limit/2 { // it came back: a spike, or a wide swing
		return 0, 0, 0, false
	}
	begin = first
	for begin > 0 && !(math.Abs(values[begin-1]-centre) < 2*rms) {
		begin--
	}
	return begin, first, size, true
}

// middleOf returns the median of values and their rms about it.
func middleOf(values []float64) (centre, rms float64) {
	sorted := append([]float64(nil), values...)
	sort.Float64s(sorted)
	centre = sorted[len(sorted)/2]
	for _, v := range values {
		rms += (v - centre) * (v - centre)
	}
	return centre, math.Sqrt(rms / float64(len(values)))
}

// loss is where a driven bead was lost.
type loss struct {
	axis         string
	begin, first int     // end of what is used, first excursion
	size         float64 // m, or the recorded unit
	speed        float64 // of the stage at the loss [m/s]; NaN when it is not constant there
}

// findLoss looks for a loss in a driven recording.
func findLoss(rec *track.Recording, set *session.Settings) (found loss, ok bool) {
	d, err := newDrive(rec, set)
	if err != nil { // calibrateAll says so
		return loss{}, false
	}
	amplitude := d.stated
	if d.column != nil {
		amplitude = spread(d.column)
	}
	for _, a := range rec.Axes {
		inUnit := amplitude
		if math.IsNaN(a.ToMetre) { // volts or pixels: the rms alone
			inUnit = 0
			if s, known := number(set, "recording.sensitivity", a.Name); known && a.Unit != "px" {
				inUnit = amplitude / math.Abs(s.Value.SI)
			}
		}
		begin, first, size, lost := lostDriven(a.Values, inUnit)
		begin = max(0, begin-d.period())
		if lost && (!ok || first < found.first) {
			if math.IsNaN(a.ToMetre) {
				size = math.NaN()
			}
			found, ok = loss{axis: a.Name, begin: begin, first: first, size: size, speed: d.speedAt(first)}, true
		}
	}
	return found, ok
}

// period is a period of the stage in samples: a bead that is carried along may pass the trap once more within it.
func (d *drive) period() int {
	hz := d.frequency
	if math.IsNaN(hz) {
		hz = d.reversalRate(d.rate)
	}
	if !(hz > 0) {
		return 0
	}
	return int(math.Ceil(d.rate / hz))
}

// speedAt is the speed of a stage at constant speed around a sample [m/s]; NaN for another one.
func (d *drive) speedAt(sample int) float64 {
	if d.waveform != triangleWave {
		return math.NaN()
	}
	if d.column == nil {
		return 4 * d.stated * d.frequency
	}
	for _, s := range strokes(d.column) {
		if sample >= s.begin && sample < s.end {
			if slope, rough := straight(d.column, s.begin, s.end); rough < bentStroke {
				return math.Abs(slope) * d.rate
			}
		}
	}
	return math.NaN()
}

// heldPart is the part of a driven recording before the bead was lost; ok is false when it never was.
func heldPart(ctx context.Context, rec *track.Recording, set *session.Settings) (lost loss, before stretch, ok bool, err error) {
	if lost, ok = findLoss(rec, set); !ok {
		return lost, before, false, nil
	}
	at := rec.Start + float64(lost.first)/rec.Rate
	before = stretch{to: lost.begin, why: []string{fmt.Sprintf("The bead was lost at %.4g s.", at)}}
	if !before.enough(rec.Samples) {
		return lost, before, true, &DataError{Name: rec.Name, Axis: lost.axis, Problem: fmt.Sprintf("the bead is lost at %.4g s, and what was recorded before is too short", at),
			Remedy: "drive more slowly at first, so that the bead is held for at least a tenth of the recording"}
	}
	before.to -= wayOut(ctx, cutRecording(rec, stretch{to: before.to / 2}), set, lost.axis, before.to)
	return lost, before, true, nil
}

// calibrateDriven calibrates a driven recording: the whole, or what there is before the bead was lost.
func calibrateDriven(ctx context.Context, rec *track.Recording, set *session.Settings, opt Options, seen *pass) (*Result, error) {
	lost, before, ok, err := heldPart(ctx, rec, set)
	if err != nil {
		return nil, err
	}
	if !ok {
		return calibrateAll(ctx, rec, set, opt, seen)
	}
	r, err := calibrateAll(ctx, cutRecording(rec, before), set, opt, seen)
	if err != nil {
		return nil, err
	}
	r.describeEscape(rec, lost, before, seen.works)
	return r, nil
}

// wayOut is the number of samples, before the end of a part of so many, that a free bead may have needed from the trap to where it
// was seen to be away. What the bead does while it is held comes from the first half of the part; where that cannot be fitted nothing is given.
//
// A bead diffuses over a distance r in the time r^2/(2 D), and seldom takes two and a half times as long. The distance is that of
// lostDeviations thermal rms or, where the stage moves as a sine, what hides in the swing of a free bead: up to the
// limit less its amplitude, as long as it still swings through the trap; there it is the last passage that is seen, which seldom takes
// six times as long. At most a fifth of the part is given away.
func wayOut(ctx context.Context, half *track.Recording, set *session.Settings, axis string, samples int) int {
	works, err := newWorks(half, set, Options{})
	if err != nil || runAll(ctx, works) != nil {
		return 0
	}
	for _, w := range works {
		if w.axisName != axis || w.fitErr != nil {
			continue
		}
		distance, often := lostDeviations*math.Sqrt(w.fit.Variance), 2.5
		if w.drive != nil && w.drive.waveform == sineWave {
			swing, _, _ := w.drive.amplitude(1)
			rms := math.Sqrt(w.fit.Variance + w.reply.line.Amplitude*w.reply.line.Amplitude/2)
			limit := math.Max(lostDeviations*rms, lostShare*swing)
			distance, often = math.Max(distance, math.Min(limit-swing, swing+2*rms)), 6
		}
		diffusion := 2 * math.Pi * w.fit.Corner * w.fit.Variance
		return int(math.Min(often*distance*distance/(2*diffusion)*half.Rate, float64(samples)/5))
	}
	return 0
}

// describeEscape adds the loss to the result of the part before.
func (r *Result) describeEscape(rec *track.Recording, lost loss, before stretch, works []*work) {
	from, to := Float(rec.Start+float64(before.from)/rec.Rate), Float(rec.Start+float64(before.to)/rec.Rate)
	r.Recording.UsedFrom, r.Recording.UsedTo = &from, &to
	text := fmt.Sprintf("The bead was lost at %.4g s; the part before, to %.4g s, was calibrated.", rec.Start+float64(lost.first)/rec.Rate, float64(to))
	for i, w := range works {
		r.Axes[i].Trace = w.wholeTrace(rec, i)
		if w.drive == nil {
			continue
		}
		e := w.escape(r.Axes[i].Adopted.Stiffness, lost)
		e.Time = Float(rec.Start + float64(lost.first)/rec.Rate)
		r.Axes[i].Driven.Escape = e
		text += " " + e.Text
	}
	r.Findings = append(r.Findings, Finding{Code: CodeLost, Severity: Doubtful, Axis: lost.axis, Value: Float(lost.size), Limit: Float(math.NaN()), Unit: "m",
		Range: &[2]Float{to, Float(rec.Start + float64(rec.Samples)/rec.Rate)}, Text: text,
		Remedy: "the force of an escape is one draw of a random quantity: repeat, and look at its distribution"})
}

// escape is the largest force before the loss.
func (w *work) escape(stiffness Quantity, lost loss) *Escape {
	e := &Escape{Margin: Float(lost.size)}
	r := &w.reply
	d, u := r.line.Amplitude/(r.blur*math.Sqrt(w.diodePower(w.drive.frequency))), r.powerU/2
	if r.flow != nil {
		fastest := 0.0
		for _, p := range r.flow.points {
			fastest = math.Max(fastest, math.Abs(float64(p.Speed)))
		}
		d, u = math.Abs(r.flow.slope)*fastest, r.flow.slopeU/math.Abs(r.flow.slope)
		e.Drag = w.dragForce(fastest)
	} else {
		e.Drag = Withheld("N", "the stage does not move at constant speed")
	}
	e.AtLoss = Withheld("N", "the stage does not move at constant speed where the bead was lost")
	if lost.speed > 0 {
		e.AtLoss = w.dragForce(lost.speed)
	}
	e.Displacement = around(d, u*d, "m")
	if !stiffness.Known() {
		e.Force = Withheld("N", "the stiffness is withheld")
		e.Text = "The largest force before cannot be given: the stiffness is withheld."
		return e
	}
	k := float64(stiffness.Value)
	sd := math.Hypot(float64(stiffness.Statistical.Standard)/k, u)
	total := math.Hypot(float64(stiffness.Combined.Standard)/k, u)
	e.Force = Quantity{Value: Float(k * d), Unit: "N", Statistical: normalPart(k*d, sd*k*d), Combined: normalPart(k*d, total*k*d)}
	e.Text = "The largest force before it is stiffness times the largest systematic displacement; a trap that is softer further out holds against less."
	return e
}

// dragForce is the force of the liquid on a held bead at a speed of the stage [m/s].
func (w *work) dragForce(speed float64) Quantity {
	u := w.drive.statedU
	for _, in := range w.phys.influences {
		u = math.Hypot(u, in.drag)
	}
	return input(w.phys.gamma*speed, u*w.phys.gamma*speed, "N")
}

// normalPart is a normal uncertainty.
func normalPart(value, u float64) *Uncertainty {
	return &Uncertainty{Standard: Float(u), Interval68: [2]Float{Float(value - u), Float(value + u)}, Interval95: [2]Float{Float(value - z95*u), Float(value + z95*u)}}
}
