package track

import (
	"fmt"
	"math"
	"slices"
)

const (
	// beside is what a run needs besides the samples [bytes].
	beside = 120_000_000
	// leastRows is the smallest number of rows that are held at a time, whatever the limit of the memory.
	leastRows = 1 << 19
	// leastStretch is the number of rows below which a rest at the end is left out: it may be too short to
	// find its own rate from rounded stamps.
	leastStretch = 1000
	// dayLength is how far a time of day falls at midnight [s].
	dayLength = 86400
)

// mostRows returns how many rows may be held within the limit of the memory, or 0 without a limit. An analysis holds the
// positions twice; while a long recording is read in parts, there are all kept columns and some copies of a part.
func (p *plan) mostRows(opt Options) int {
	if opt.MaxMemory <= 0 || opt.Part == nil {
		return 0
	}
	axes := 0
	for _, u := range p.uses {
		if u.axis != 0 {
			axes++
		}
	}
	row := max(16*axes, 8*len(p.uses)+4)
	return max(leastRows, int((opt.MaxMemory-beside)/int64(row)))
}

// partReader hands out a recording that is too long for the memory.
type partReader struct {
	opt   Options
	table func(*parsed) (*table, error)

	first   *Recording // the first stretch, with the facts of all; nil as long as the rows fit
	low     []float64  // smallest value of each axis
	high    []float64
	pending []badLine // lines behind the last sample: a footer, if no sample follows
	end     float64   // time at which the next sample is due [s]
	squares float64   // sum of squares of the stamps about the grid [s2]
	stamped int       // samples with stamps
	counted int       // samples up to end
}

// take hands out the rows that are held.
func (r *partReader) take(rows *parsed) error {
	if err := r.judge(rows); err != nil {
		return err
	}
	if rows.rows == 0 {
		return nil
	}
	tab, err := r.table(rows)
	if err != nil {
		return err
	}
	tab.stretch = true
	list, err := tab.recordings(r.opt)
	if err != nil {
		return err
	}
	if len(list) > 1 {
		return &Error{File: r.opt.Name, Code: CodeLimit, What: fmt.Sprintf("the file has several beads, and more rows than fit into %d MB", r.opt.MaxMemory/1_000_000),
			Remedy: "choose one (--bead), raise --max-memory, or split the file"}
	}
	gap, err := r.join(list[0], tab)
	if err != nil {
		return err
	}
	return r.opt.Part(list[0], gap)
}

// judge refuses lines that are no samples unless they may belong to a footer.
func (r *partReader) judge(rows *parsed) error {
	if rows.total == 0 && len(r.pending) == 0 {
		return nil
	}
	all := *rows
	all.bad, all.total = append(slices.Clone(r.pending), rows.bad...), rows.total+len(r.pending)
	if len(r.pending) > 0 && rows.rows > 0 { // samples follow: it is no footer
		return asError(errorsOf(all.bad), all.total)
	}
	if err := all.judge(); err != nil {
		return err
	}
	r.pending = all.bad
	rows.bad, rows.total = nil, 0
	return nil
}

// join puts a stretch behind those before it, and returns the number of samples that are missing between.
func (r *partReader) join(rec *Recording, tab *table) (gap int, err error) {
	hasTime := rec.RateOrigin == "time column"
	due := r.end
	r.end = rec.Start + float64(rec.Samples)/rec.Rate
	if rec.JitterRMS >= 0 {
		r.squares += rec.JitterRMS * rec.JitterRMS * float64(rec.Samples-rec.Missing)
		r.stamped += rec.Samples - rec.Missing
	}
	if r.first == nil {
		one := *rec
		one.Axes = slices.Clone(rec.Axes)
		one.InParts, one.Extra = true, nil
		for i := range one.Axes {
			r.low, r.high = append(r.low, math.Inf(1)), append(r.high, math.Inf(-1))
			one.Axes[i].Values, one.Axes[i].Missing = nil, 0
		}
		one.Samples, one.Missing = 0, 0
		r.first = &one
	} else if hasTime {
		if !agree(rec.Rate, r.first.Rate, 6*math.Hypot(rec.RateU, r.first.RateU)) {
			return 0, r.fault(tab, fmt.Sprintf("the sampling rate changes from %.6g Hz to %.6g Hz", r.first.Rate, rec.Rate), "split the file where it changes")
		}
		late := rec.Start - due
		if tab.undated {
			late -= dayLength * math.Round(late/dayLength)
		}
		steps := math.Round(late * rec.Rate)
		switch {
		case steps < 0:
			return 0, r.fault(tab, fmt.Sprintf("time runs backwards: %s, where %s is due", seconds(rec.Start), seconds(due)), "sort the rows by time; keep one recording in a file")
		case steps > float64(r.first.Samples):
			return 0, r.fault(tab, fmt.Sprintf("a gap of %s, longer than the record before it", seconds(late)), "split the file at the gap")
		}
		gap = int(steps)
	}
	t := r.first
	t.Samples += rec.Samples + gap
	r.counted = t.Samples
	t.Missing += rec.Missing + gap
	if rec.JitterMax > t.JitterMax {
		t.JitterMax = rec.JitterMax
	}
	t.ReadAs.Rows += rec.ReadAs.Rows
	t.ReadAs.Ignored += rec.ReadAs.Ignored
	if t.Samples == rec.Samples {
		t.ReadAs.Rows, t.ReadAs.Ignored = rec.ReadAs.Rows, rec.ReadAs.Ignored
	}
	for _, n := range rec.Notes {
		if !slices.ContainsFunc(t.Notes, func(o Note) bool { return o.Code == n.Code }) {
			t.Notes = append(t.Notes, n)
		}
	}
	for i := range rec.Axes {
		t.Axes[i].Missing += rec.Axes[i].Missing + gap
		_, low, high := extent(rec.Axes[i].Values)
		r.low[i], r.high[i] = min(r.low[i], low), max(r.high[i], high)
	}
	return gap, nil
}

// fault is an error at the first row of a stretch.
func (r *partReader) fault(tab *table, what, remedy string) error {
	e := tab.place(0)
	e.What, e.Remedy, e.Code = what, remedy, CodeTime
	return e
}

// finish takes the last rows and returns the table of the whole recording.
func (r *partReader) finish(rows *parsed) (*table, error) {
	t := r.first
	if rows.rows < leastStretch {
		if err := r.judge(rows); err != nil {
			return nil, err
		}
		t.Samples += rows.rows
		t.ReadAs.Rows += rows.rows
	} else if err := r.take(rows); err != nil {
		return nil, err
	}
	if t.RateOrigin == "time column" {
		// over all stretches the ends of the record tell the rate best
		span := r.end - t.Start
		samples := r.counted
		u := math.Sqrt(2*r.squares/float64(max(1, r.stamped))) / span
		g := grid{interval: span / float64(samples), slopeU: u * span / float64(samples), start: t.Start}
		(&table{}).takeRate(t, &g)
		t.ReadAs.Rate = t.Rate
	}
	if r.stamped > 0 {
		t.JitterRMS = math.Sqrt(r.squares / float64(r.stamped))
	}
	for i, a := range t.Axes {
		if !(r.low[i] < r.high[i]) {
			return nil, &Error{File: r.opt.Name, Code: CodeEmpty, What: fmt.Sprintf("axis %s does not move", a.Name), Remedy: "name the columns that do (--columns)"}
		}
	}
	if n := len(r.pending); n > 0 {
		t.Notes = note(t.Notes, "footer", "%d lines of text behind the data are left out, from line %d on", n, r.pending[0].err.Line)
	}
	return &table{whole: t}, nil
}

func errorsOf(bad []badLine) []*Error {
	list := make([]*Error, len(bad))
	for i, b := range bad {
		list[i] = b.err
	}
	return list
}
