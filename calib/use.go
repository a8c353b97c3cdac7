package calib

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"beadwell/calib/health"
	"beadwell/calib/session"
	"beadwell/calib/track"
)

// UseGood is the choice to calibrate only the longest part without what is bad.
const UseGood = "good"

// Codes of the findings on the part that was used.
const (
	CodeGoodPart   = "good-part-used"
	CodeNothingCut = "nothing-cut"
)

const (
	mostCuts  = 4   // a cut may uncover what a louder event hid
	leastUsed = 0.1 // share of the samples below which a part is not used: its choice would matter more than its data
)

// Calibrate calibrates one recording with the settings in force.
//
// The error is a *SettingError when a setting is missing or impossible, a *DataError
// when the recording cannot carry an estimate, and that of the context when it is
// cancelled. The result does not depend on the number of processors.
func Calibrate(ctx context.Context, rec *track.Recording, set *session.Settings, opt Options) (*Result, error) {
	if opt.Use != "" && opt.Gathered != nil {
		return nil, &SettingError{Key: "use", Problem: "has no effect on a recording that is too long for the memory", Remedy: "leave it out, raise --max-memory, or split the file"}
	}
	switch opt.Use {
	case UseGood:
		return calibrateGood(ctx, rec, set, opt)
	case "":
	default:
		return nil, &SettingError{Key: "use", Problem: fmt.Sprintf("%q is not %q", opt.Use, UseGood)}
	}
	var seen pass
	calibrate := calibrateAll
	if roleOf(set) == RoleDriven && opt.Gathered == nil {
		calibrate = calibrateDriven
	}
	r, err := calibrate(ctx, rec, set, opt, &seen)
	if opt.Gathered != nil {
		return r, err
	}
	if err != nil {
		return nil, offerOnError(err, rec, set)
	}
	r.offer(rec, seen.good)
	return r, nil
}

// pass is what calibrateAll leaves of the calibration of a recording.
type pass struct {
	works []*work
	good  stretch
}

// stretch is a part of a recording that nothing bad has a claim on.
type stretch struct {
	from, to int      // samples, to exclusive
	why      []string // what is bad elsewhere, a sentence each; empty: there is no such part, or all is good
}

func (s stretch) found() bool { return len(s.why) > 0 }

// enough tells whether the part is worth a calibration.
func (s stretch) enough(all int) bool { return float64(s.to-s.from) >= leastUsed*float64(all) }

// part returns a part of this part as a part of the recording.
func (s stretch) part(of stretch) stretch {
	return stretch{from: s.from + of.from, to: s.from + of.to, why: slices.Concat(s.why, of.why)}
}

// times are the ends of the part in words, on the clock of the recording.
func (s stretch) times(rec *track.Recording) string {
	return fmt.Sprintf("from %.4g s to %.4g s", rec.Start+float64(s.from)/rec.Rate, rec.Start+float64(s.to)/rec.Rate)
}

// goodStretch finds the part that the checks leave.
func goodStretch(in health.Input, checks []health.Check) stretch {
	from, to, ok := health.GoodStretch(in, checks)
	if !ok || in.Axes[0].Gathered != nil || to-from == len(in.Axes[0].X) {
		return stretch{}
	}
	s := stretch{from: from, to: to}
	for _, c := range checks {
		if c.Level != health.Bad || !health.Placed(c.Code) || len(c.Ranges) == 0 {
			continue
		}
		text := c.Text
		if c.Axis != "" {
			text = "axis " + c.Axis + ": " + text
		}
		s.why = append(s.why, text)
	}
	return s
}

// calibrateGood cuts the recording to the longest part without what is bad, and
// calibrates that. A recording that cannot be fitted as a whole is judged without
// a fit.
func calibrateGood(ctx context.Context, rec *track.Recording, set *session.Settings, opt Options) (*Result, error) {
	if role := roleOf(set); role != RoleTrapped && role != RoleDriven {
		return nil, &SettingError{Key: "use", Problem: fmt.Sprintf("is %q, which is not for a recording of the role %s", opt.Use, role), Remedy: "leave it out"}
	}
	used := stretch{to: rec.Samples}
	var lost loss
	carried := false
	if roleOf(set) == RoleDriven {
		away, before, ok, err := heldPart(ctx, rec, set)
		if err != nil {
			return nil, err
		}
		if carried = ok; ok {
			lost, used = away, before
		}
	}
	for cut := 0; ; cut++ {
		part := cutRecording(rec, used)
		var seen pass
		r, err := calibrateAll(ctx, part, set, opt, &seen)
		good, fit := stretch{}, (*DataError)(nil)
		switch {
		case err == nil:
			good = seen.good
		case errors.As(err, &fit):
			good = unfittedStretch(part, set)
		default:
			return nil, err
		}
		if good.found() && good.enough(rec.Samples) && cut < mostCuts {
			used = used.part(good)
			continue
		}
		if err != nil {
			return nil, err
		}
		r.markUsed(rec, used, seen.works)
		if carried {
			r.describeEscape(rec, lost, used, seen.works)
		}
		return r, nil
	}
}

// cutRecording returns a part of a recording as a recording. The values are shared.
func cutRecording(rec *track.Recording, s stretch) *track.Recording {
	if s.from == 0 && s.to == rec.Samples {
		return rec
	}
	part := *rec
	part.Samples, part.Start = s.to-s.from, rec.Start+float64(s.from)/rec.Rate
	part.Axes = append([]track.Axis(nil), rec.Axes...)
	for i := range part.Axes {
		a := &part.Axes[i]
		a.Values = a.Values[s.from:s.to:s.to]
		a.Missing = countUnknown(a.Values)
	}
	part.Extra = append([]track.Column(nil), rec.Extra...)
	for i := range part.Extra {
		part.Extra[i].Values = part.Extra[i].Values[s.from:s.to:s.to]
	}
	part.Missing = 0
	for i := range part.Samples {
		all := len(part.Axes) > 0
		for _, a := range part.Axes {
			all = all && math.IsNaN(a.Values[i])
		}
		if all {
			part.Missing++
		}
	}
	return &part
}

func countUnknown(x []float64) int {
	n := 0
	for _, v := range x {
		if math.IsNaN(v) {
			n++
		}
	}
	return n
}

// markUsed says in the result which part was used, and shows it in the trace of the
// whole recording.
func (r *Result) markUsed(rec *track.Recording, used stretch, works []*work) {
	nan := Float(math.NaN())
	if !used.found() {
		r.Findings = append(r.Findings, Finding{Code: CodeNothingCut, Severity: Note, Value: nan, Limit: nan,
			Text: "All of the recording was used: nothing bad has a place that could be left out."})
		return
	}
	from, to := Float(rec.Start+float64(used.from)/rec.Rate), Float(rec.Start+float64(used.to)/rec.Rate)
	r.Recording.UsedFrom, r.Recording.UsedTo = &from, &to
	share := float64(used.to-used.from) / float64(rec.Samples)
	r.Findings = append(r.Findings, Finding{Code: CodeGoodPart, Severity: Note, Value: Float(share), Limit: leastUsed, Unit: "1", Range: &[2]Float{from, to},
		Text: fmt.Sprintf("Only the part %s was used, %.2g %% of the recording, as --use good asks. The rest was left out: %s",
			used.times(rec), 100*share, strings.Join(used.why, " ")),
		Remedy: "look at the trace, and record again when the part is too short"})
	for i := range r.Axes {
		r.Axes[i].Trace = works[i].wholeTrace(rec, i)
	}
}

// wholeTrace is the trace of all that was recorded, when only a part was used.
func (w *work) wholeTrace(rec *track.Recording, index int) Trace {
	all := *w
	all.recorded, all.start, all.unit = rec.Axes[index], rec.Start, 1
	if math.IsNaN(all.recorded.ToMetre) {
		all.unit = w.perUnit
	}
	return all.trace()
}

// offer adds the way out to the findings that a cut would heal.
func (r *Result) offer(rec *track.Recording, good stretch) {
	if !good.found() {
		return
	}
	for i := range r.Findings {
		f := &r.Findings[i]
		if f.Severity == Bad && f.Range != nil && health.Placed(f.Code) {
			f.Remedy += fmt.Sprintf(" Or calibrate the good part alone, %s: --use good.", good.times(rec))
		}
	}
}

// offerOnError adds the way out to the error of a recording that cannot be fitted as a whole.
func offerOnError(err error, rec *track.Recording, set *session.Settings) error {
	var data *DataError
	if !errors.As(err, &data) {
		return err
	}
	if good := unfittedStretch(rec, set); good.found() {
		offered := *data
		offered.Remedy += fmt.Sprintf("; or calibrate the good part alone, %s: --use good", good.times(rec))
		return &offered
	}
	return err
}
