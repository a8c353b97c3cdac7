package main

import (
	"context"
	"fmt"
	"math"

	"beadwell/calib"
)

// trialCell is one cell of the study of detection: a setup with a fault, or a clean recording.
type trialCell struct {
	Name  string
	group string
	setup setup
	fault fault
	clean *Cell // the regime of a clean recording
}

// Groups of the study of detection.
const (
	cleanGroup     = "clean"
	statementGroup = "statement"
	recordingGroup = "recording"
)

// Sizes of the study, so that it takes hours and not days.
const (
	fullNumber  = 200000 // samples of all axes up to which a cell gets the full number of recordings; longer ones get fewer in proportion
	fewest      = 5      // recordings of a cell
	manySamples = 400000 // beyond which clean recordings have one axis, not three
)

// detectionCells lists the study: clean recordings in all regimes of the accuracy table, then every fault in
// every setup that it fits.
func detectionCells() []trialCell {
	var list []trialCell
	all, _ := cells()
	for _, c := range all {
		if c.Drift > 0 || c.Line > 0 || c.Gaps > 0 {
			continue
		}
		list = append(list, trialCell{Name: "clean: " + c.String(), group: cleanGroup, clean: &c})
	}
	for _, g := range []struct {
		name   string
		faults []fault
	}{{statementGroup, wrongStatements()}, {recordingGroup, spoiltRecordings()}} {
		for _, f := range g.faults {
			for _, s := range setups() {
				if f.fits(s) {
					list = append(list, trialCell{Name: f.name + ": " + s.name, group: g.name, setup: s, fault: f})
				}
			}
		}
	}
	return list
}

// scenes returns what is true and what is stated.
func (c trialCell) scenes() (truth, stated scene) {
	if c.clean != nil {
		axes := "xyz"
		if c.clean.samples() > manySamples {
			axes = "x"
		}
		truth = usual(*c.clean, axes)
		truth.exact, truth.soft = !c.clean.Drawn, equal
		return truth, truth
	}
	truth, stated = c.setup.scene, c.setup.scene
	c.fault.change(&truth, &stated)
	if truth.rate != c.setup.scene.rate || stated.rate != truth.rate { // the rate may be anybody's, the record is the truth's
		stated.samples = truth.samples
	}
	return truth, stated
}

// calibrate simulates a recording of the truth, and its companions, and calibrates it with what is stated.
func (c trialCell) calibrate(ctx context.Context, seed uint64) (*calib.Result, error) {
	truth, stated := c.scenes()
	main, err := asStated(truth, stated, seed)
	if err != nil {
		return nil, err
	}
	var opt calib.Options
	for i, change := range c.setup.companions {
		other, err := asStated(change(truth), change(stated), seed+uint64(i)+1)
		if err != nil {
			return nil, err
		}
		opt.Companions = append(opt.Companions, other)
	}
	return calib.Calibrate(ctx, main.Recording, main.Settings, opt)
}

// asStated is a recording of the truth with what is stated of it.
func asStated(truth, stated scene, seed uint64) (calib.Companion, error) {
	rec, err := truth.recording(seed)
	if err != nil {
		return calib.Companion{}, err
	}
	rec.Rate = stated.rate
	set, err := stated.settings()
	return calib.Companion{Recording: rec, Settings: set}, err
}

// Detection is the score of a cell. All fields are exported for the file of results.
type Detection struct {
	Name         string
	Runs, Failed int
	Error        string `json:",omitempty"`
	// of all cells: recordings in which a check raised an alarm, by code, and any of them
	Checks       map[string]int
	AnyCheck     int // any check
	Diagnosed    int
	Inconsistent int // verdicts
	Unfit        int
	Any          int // any check or the diagnosis
	Top          int // the true cause is in the tie
	Alone        int // and nothing else is
	Excluded     int // recordings whose tie holds a cause that leaves p < 0.01
	Covered      int // and its 95 % interval holds the true value
	Bad          int // recordings with the exit status 3
	Tied         map[string]int
	Ideal        Ideal
}

// detect runs a number of recordings of a cell, scored in the order of their seeds.
func detect(ctx context.Context, c trialCell, runs int) *Detection {
	d := &Detection{Name: c.Name, Runs: runs, Checks: map[string]int{}, Tied: map[string]int{}}
	switch c.group {
	case statementGroup:
		d.Ideal = c.ideal()
	case recordingGroup:
		d.Ideal = c.checked()
	}
	results := make([]*calib.Result, runs)
	errs := make([]error, runs)
	each(runs, func(i int) {
		if results[i], errs[i] = c.calibrate(ctx, seedOf(c.Name, i)); errs[i] == nil {
			results[i] = slim(results[i])
		}
	})
	for i, r := range results {
		if errs[i] != nil {
			d.Failed++
			d.Error = errs[i].Error()
			continue
		}
		d.score(c, r)
	}
	return d
}

// leastLeft is the p-value below which an ideal test would exclude a cause.
const leastLeft = 0.01

func (d *Detection) score(c trialCell, r *calib.Result) {
	alarmed := map[string]bool{}
	for _, k := range r.Checks {
		if k.Level != "ok" && !c.deserved(k.Code) {
			alarmed[k.Code] = true
		}
	}
	for code := range alarmed {
		d.Checks[code]++
	}
	if len(alarmed) > 0 {
		d.AnyCheck++
	}
	if r.Diagnosis != nil {
		d.Diagnosed++
	}
	if len(alarmed) > 0 || r.Diagnosis != nil {
		d.Any++
	}
	switch r.Verdict.Status {
	case calib.Inconsistent:
		d.Inconsistent++
		d.Bad++
	case calib.Unfit:
		d.Unfit++
		d.Bad++
	}
	if r.Diagnosis == nil {
		return
	}
	tied, found, covered, excluded := 0, false, false, false
	for _, k := range r.Diagnosis.Causes {
		if !k.Tied {
			continue
		}
		tied++
		d.Tied[k.Code]++
		if k.Code == c.fault.code && (c.fault.axis == "" || c.fault.axis == k.Axis) {
			found = true
			if c.covers(k) {
				covered = true
			}
		}
		excluded = excluded || float64(k.PValue) < leastLeft
	}
	if found {
		d.Top++
		if tied == 1 {
			d.Alone++
		}
	}
	if covered {
		d.Covered++
	}
	if excluded {
		d.Excluded++
	}
}

// covers tells whether the 95 % interval of the value that would reconcile holds the true one.
func (c trialCell) covers(k calib.Cause) bool {
	truth, _ := c.scenes()
	want := map[string]float64{calib.CauseScale: truth.pixel, calib.CauseScaleOne: truth.pixel * truth.uneven, calib.CauseTemperature: truth.kelvin,
		calib.CauseHeating: truth.kelvin + truth.heating, calib.CauseDiameter: truth.diameter, calib.CauseHeight: truth.height, calib.CauseExposure: truth.exposure,
		calib.CauseRate: truth.rate, calib.CauseNoise: truth.noise, calib.CauseStage: truth.drive}[c.fault.code]
	if c.fault.code == calib.CauseViscosity {
		want = truth.thickness * float64(k.Stated.Value)
	}
	if u := k.Needed.Combined; u != nil {
		low, high := float64(u.Interval95[0]), float64(u.Interval95[1])
		return !(want < low) && !(want > high) // an open end excludes nothing
	}
	return math.Abs(float64(k.Needed.Value)/want-1) < exactly
}

// exactly is what rounding leaves of a value without an uncertainty.
const exactly = 1e-9

// deserved tells that a check of the plan of a clean recording is right to say something: the true
// process is beyond its threshold.
func (c trialCell) deserved(code string) bool {
	if c.clean == nil {
		return false
	}
	switch code {
	case "slow-sampling":
		b, err := c.clean.bounds()
		return err != nil || b.Drag > slowSD
	case "short-record":
		return c.clean.Periods < shortPeriods
	case "long-exposure":
		return c.clean.Ratio*c.clean.Exposure*2*math.Pi > longExposure
	}
	return false
}

// Thresholds of package health that a clean regime may itself be beyond.
const (
	slowSD       = 0.6 // standard uncertainty of ln(fc)
	shortPeriods = 30  // T fc
	longExposure = 12  // 2 pi fc W
)

// count is the number of recordings of a cell: fewer where records are long, for a study of a few hours.
func (c trialCell) count(runs int) int {
	truth, _ := c.scenes()
	n := truth.samples * len(truth.axes)
	for _, of := range c.setup.companions {
		n += of(truth).samples
	}
	if n > fullNumber {
		return min(runs, max(fewest, runs*fullNumber/n))
	}
	return runs
}

func (d *Detection) share(n int) float64 {
	if d.Runs == d.Failed {
		return math.NaN()
	}
	return float64(n) / float64(d.Runs-d.Failed)
}

func (d *Detection) String() string {
	return fmt.Sprintf("%s: %d recordings, %d refused, diagnosed %.0f %%, true cause tied %.0f %%, alone %.0f %%, with one excluded %.0f %%; checks %v; tied %v; %d inconsistent, %d unfit", d.Name, d.Runs, d.Failed,
		100*d.share(d.Diagnosed), 100*d.share(d.Top), 100*d.share(d.Alone), 100*d.share(d.Excluded), d.Checks, d.Tied, d.Inconsistent, d.Unfit)
}
