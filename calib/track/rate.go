package track

import (
	"cmp"
	"fmt"
	"math"
	"strconv"
)

// rateTolerance is the relative difference up to which a stated sampling rate
// agrees with the time stamps: crystal clocks are a thousand times better,
// rates rounded for a form are within it.
const rateTolerance = 1e-3

// slowest is the rate up to which a time column without a unit is not taken as
// seconds: a trapped particle is sampled faster, so the stamps are more likely
// milliseconds.
const slowest = 20 // Hz

// grid settles the time grid and the sampling rate of a recording.
func (tab *table) grid(rec *Recording, g group, rows int, opt Options) (grid, error) {
	rec.Rate, rec.RateU = math.NaN(), math.NaN()
	p := tab.plan
	fail := func(f *gridFault) error {
		row := f.row
		if g.rows != nil {
			row = g.rows[row]
		}
		err := tab.place(row)
		err.What, err.Remedy, err.Code = f.what, f.remedy, CodeTime
		if rec.Bead != "" {
			err.What += " (bead " + rec.Bead + ")"
		}
		return err
	}
	stamps := p.time
	if stamps == nil {
		stamps = p.date
	}
	var fitted grid
	var fault *gridFault
	switch {
	case stamps != nil:
		t := tab.stamps(g)
		frames, err := tab.checkTimeUnit(rec, t, opt)
		if err != nil {
			return fitted, err
		}
		if frames {
			fitted, fault = fitFrames(t)
			break
		}
		fitted, fault = fitGrid(t, tab.written, tab.likelyRate(g, opt))
		if fault == nil {
			tab.takeRate(rec, &fitted)
		}
	case p.frame != nil:
		fitted, fault = fitFrames(g.pick(tab.columns[p.frame.out]))
	default:
		fitted = grid{samples: rows, rms: math.NaN(), max: math.NaN()}
	}
	if fault != nil {
		return fitted, fail(fault)
	}
	if err := tab.settleRate(rec, opt); err != nil {
		return fitted, err
	}
	tab.noteGrid(rec, &fitted)
	return fitted, nil
}

// likelyRate is the rate [Hz] that decides between rounded stamps and lost rows
// where the stamps of one bead leave both open: a stated one, or that of another
// bead of the file; 0 when there is none.
func (tab *table) likelyRate(g group, opt Options) float64 {
	switch {
	case opt.Rate > 0:
		return opt.Rate
	case len(tab.pre.rates) > 0 || g.rows == nil:
		return tab.pre.rate(0).rate
	case tab.rate > 0:
		return tab.rate
	}
	all, err := tab.groups(Options{})
	for _, other := range all {
		if err != nil || len(other.rows) < 2 {
			continue
		}
		if fitted, fault := fitGrid(tab.stamps(other), tab.written, 0); fault == nil {
			tab.rate = 1 / fitted.interval
			break
		}
	}
	return tab.rate
}

// stamps returns the times of a group [s]: one column, or date plus time of day.
func (tab *table) stamps(g group) []float64 {
	p := tab.plan
	if p.time == nil {
		return g.pick(tab.columns[p.date.out])
	}
	t := tab.si(*p.time, g.pick(tab.columns[p.time.out]))
	if p.date != nil && p.columns[p.date.column].clock && p.columns[p.time.column].clock {
		days := g.pick(tab.columns[p.date.out])
		sum := make([]float64, len(t))
		for i := range t {
			sum[i] = t[i] + days[i]
		}
		return sum
	}
	if tab.undated {
		days := 0.0
		out := make([]float64, len(t))
		for i, v := range t {
			if i > 0 && v+days < out[i-1]-43200 {
				days += 86400 // past midnight
			}
			out[i] = v + days
		}
		return out
	}
	return t
}

// checkTimeUnit deals with a time column whose unit is not stated. It reports
// true when the column counts frames. Seconds are assumed, with a note, only
// where the rate that follows is plausible.
func (tab *table) checkTimeUnit(rec *Recording, t []float64, opt Options) (frames bool, err error) {
	u := tab.plan.time
	if u == nil || u.known {
		return false, nil
	}
	whole := true
	for _, v := range t {
		if v != math.Trunc(v) {
			whole = false
			break
		}
	}
	step := usualStep(t)
	name := label(tab.plan.columns[u.column], u.column)
	if whole && step >= 0.5 {
		if opt.Rate > 0 && math.Abs(step-1) < 0.25 {
			rec.Notes = note(rec.Notes, "time-frames", "%s holds whole numbers without a unit: taken as frame numbers", name)
			return true, nil
		}
		if opt.Inspect {
			rec.Notes = note(rec.Notes, "time-unit-unknown", "the file states no unit for %s", name)
			return false, nil
		}
	}
	if step > 0 && 1/step <= slowest*(1+1e-9) {
		if opt.Rate > 0 && math.Abs(step*opt.Rate-1) <= 0.01 {
			return false, nil
		}
		if opt.Inspect {
			rec.Notes = note(rec.Notes, "time-unit-unknown", "the file states no unit for %s", name)
			return false, nil
		}
		return false, &Error{File: rec.Name, Line: tab.plan.line, Code: CodeUnit,
			What:   fmt.Sprintf("the file states no unit for %s, and its step of %s is too long for seconds", name, strconv.FormatFloat(step, 'g', 6, 64)),
			Remedy: "state it (--time-unit s, ms, us or frame), or write it in the header: " + name + " (ms)"}
	}
	rec.Notes = note(rec.Notes, "time-unit-assumed", "the file states no unit for %s: taken as seconds", name)
	return false, nil
}

// takeRate sets the rate from the fit of the stamps.
func (tab *table) takeRate(rec *Recording, g *grid) {
	rate := 1 / g.interval
	rec.RateU = g.slopeU / (g.interval * g.interval)
	// Digits that the rounding of the stamps made up are left out.
	for digits := 4; digits <= 9; digits++ {
		short, err := strconv.ParseFloat(strconv.FormatFloat(rate, 'e', digits-1, 64), 64)
		if err == nil && math.Abs(short-rate) <= max(1e-10*rate, min(rec.RateU, 1e-6*rate)) {
			rate = short
			break
		}
	}
	rec.Rate, rec.RateOrigin, rec.Start = rate, "time column", g.start
	if math.Abs(rec.Start) < 1e-9*g.interval {
		rec.Start = 0
	}
}

// settleRate weighs the rates from the stamps, the preamble and the setting.
func (tab *table) settleRate(rec *Recording, opt Options) error {
	hasStamps := !math.IsNaN(rec.Rate)
	header := tab.pre.rate(cmp.Or(max(opt.Rate, 0), notNaN(rec.Rate)))
	stated, origin := header.rate, "header"
	if !hasStamps {
		rec.Start = tab.pre.start
	}
	if opt.Rate != 0 && !(opt.Rate > 0 && !math.IsInf(opt.Rate, 1)) {
		return &Error{File: rec.Name, Code: CodeSetting, What: fmt.Sprintf("the sampling rate %g Hz is impossible", opt.Rate), Remedy: "give a rate above zero"}
	}
	if opt.Rate > 0 && stated > 0 && !opt.RateForced && !agree(opt.Rate, stated, 0) {
		return &Error{File: rec.Name, Line: header.line, Code: CodeRate, What: fmt.Sprintf("the file states a sampling rate of %g Hz, the setting says %g Hz", stated, opt.Rate),
			Remedy: "correct one of them; the flag --rate overrides the file"}
	}
	if opt.Rate > 0 {
		stated, origin = opt.Rate, "setting"
	}
	if !hasStamps {
		if err := tab.checkHeaderRates(rec, opt); err != nil {
			return err
		}
		if stated > 0 {
			rec.Rate, rec.RateOrigin = stated, origin
			if origin == "header" && header.bare {
				rec.Notes = note(rec.Notes, "rate-unit-assumed", "the file states the sampling rate without a unit: read as %g Hz", stated)
			}
			return nil
		}
		if opt.Inspect {
			rec.Notes = note(rec.Notes, "rate-unknown", "the file has no time column and states no sampling rate")
			return nil
		}
		return &Error{File: rec.Name, Line: tab.plan.line, Code: CodeRate, What: "the sampling rate is unknown: no time column, and no rate in the file",
			Remedy: "state it (--rate '2 kHz', or recording.rate in the session file), or name the time column (--columns time=NAME)"}
	}
	if stated <= 0 || agree(stated, rec.Rate, 6*rec.RateU) {
		return nil
	}
	if origin == "setting" && opt.RateForced {
		rec.Notes = note(rec.Notes, "rate-overridden", "the sampling rate is %g Hz by a flag; the time column says %.6g Hz", stated, rec.Rate)
		rec.Rate, rec.RateU, rec.RateOrigin = stated, math.NaN(), "setting"
		return nil
	}
	who := "the setting"
	remedy := "correct one of them (is the unit of the time column right?); the flag --rate overrides the time column"
	if origin == "header" {
		who = fmt.Sprintf("line %d of the file", header.line)
	}
	return &Error{File: rec.Name, Line: tab.plan.line, Code: CodeRate, What: fmt.Sprintf("the time column gives a sampling rate of %.6g Hz, %s says %g Hz", rec.Rate, who, stated), Remedy: remedy}
}

// checkHeaderRates refuses a rate from the lines above the data that reads two ways,
// or that another line contradicts, where no time column and no setting decides.
func (tab *table) checkHeaderRates(rec *Recording, opt Options) error {
	if opt.Rate > 0 || opt.Inspect {
		return nil
	}
	const remedy = "state the rate (--rate '2 kHz', or recording.rate in the session file)"
	if other := tab.pre.contradiction(); other != nil {
		first := tab.pre.rates[0]
		return &Error{File: rec.Name, Line: other.line, Code: CodeRate, Remedy: remedy,
			What: fmt.Sprintf("a sampling rate of %g Hz, after one of %g Hz in line %d, and no time column that decides", other.rate, first.rate, first.line)}
	}
	if doubt := tab.pre.doubt; doubt != nil && len(tab.pre.rates) == 0 {
		return &Error{File: rec.Name, Line: doubt.line, Code: CodeRate, Remedy: remedy,
			What: fmt.Sprintf("the rate %s can be read with a decimal mark or with a thousands separator", quoted(doubt.text))}
	}
	return nil
}

// notNaN returns v, or 0 for NaN.
func notNaN(v float64) float64 {
	if v != v {
		return 0
	}
	return v
}

// agree compares two rates [Hz].
func agree(a, b, slack float64) bool {
	return math.Abs(a-b) <= rateTolerance*b+slack
}

// noteGrid says what the stamps showed.
func (tab *table) noteGrid(rec *Recording, g *grid) {
	if g.place != nil {
		missing := 0
		for i := 1; i < len(g.place); i++ {
			if g.place[i] > g.place[i-1]+1 {
				missing++
			}
		}
		rec.Notes = note(rec.Notes, "gaps", "%d gaps in the time: %d samples are filled as missing, the longest run is %d", missing, g.samples-len(g.place), g.longest)
	}
	switch {
	case math.IsNaN(g.rms) || g.max <= 1e-3*g.interval:
	case g.rounded:
		rec.Notes = note(rec.Notes, "time-rounded", "the time stamps are rounded; the rate comes from all of them")
	default:
		rec.Notes = note(rec.Notes, "jitter", "the time stamps are off an even grid by %.2g %% of a step (root mean square), %.2g %% at most", 100*g.rms/g.interval, 100*g.max/g.interval)
	}
}
