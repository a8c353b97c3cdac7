// Package calib calibrates one recording of a trapped bead: it estimates the
// stiffness of each axis by three methods, compares them with what the drag of the bead
// should be, says whether they agree, and adopts one value.
//
// The estimators are packages psd, equipartition and calib/msd. This package turns
// their corner frequencies and variances into stiffnesses by two routes: through drag (2 pi
// gamma fc, gamma by Stokes and the wall) and through amplitude (kT over variance). The
// routes fail for different reasons, and are compared with the covariance that
// estimates from one record have.
package calib

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"
	"sync"

	"beadwell/calib/session"
	"beadwell/calib/track"
)

// Options are choices that are not settings of the recording.
type Options struct {
	// Use is UseGood to calibrate only the longest part without what is bad. Empty: all.
	Use string
	// Adopt names the route to adopt, one of AdoptWords, whatever the
	// cross-check says. Empty: the combination, withheld when the routes disagree.
	Adopt string
	// MonteCarlo asks for a propagation of distributions through the adopted stiffness.
	MonteCarlo MonteCarloOptions
	// Background is a recording without a bead, or with a stuck one, in the same unit and at the same rate: where no noise is stated it
	// gives the noise, and its lines are left out of the fit. Nil: none.
	Background *track.Recording
	// FreeBead are recordings of the same bead with the laser off, whose drag stands beside the computed one. Nil: none.
	FreeBead []*FreeBeadDrag
	// Companions are other recordings of the same bead in the same chamber, such as one with the laser off, one with a
	// moving stage or one at another height. Where the routes disagree they join the diagnosis.
	Companions []Companion
	// Gathered holds what is known of a recording that was too long for the memory, and whose axes have no values. Nil: they have.
	Gathered *Gatherer
	// Program and its version, and the command line, for the record.
	Program Program
}

// AdoptWords are the routes that can be adopted whatever the cross-check says: drag, by that of the free bead
// too where there is one; amplitude; drag by that of the free bead alone; on the axis that follows a moving stage the estimate without
// viscosity, and Stokes drag at constant speed.
var AdoptWords = []string{RouteDrag, RouteAmplitude, RouteFreeBead, RouteDriven, RouteFlow}

// Companion is a recording that joins the diagnosis of another, with its settings.
type Companion struct {
	Recording *track.Recording
	Settings  *session.Settings
}

// choices returns what of the options a result records; nil when nothing was chosen.
func (o Options) choices() *Choices {
	if o.Adopt == "" && o.Use == "" && o.MonteCarlo.Draws == 0 {
		return nil
	}
	c := &Choices{Adopt: o.Adopt, Use: o.Use, Draws: o.MonteCarlo.Draws}
	if c.Draws > 0 {
		c.Seed = fmt.Sprint(o.MonteCarlo.Seed)
	}
	return c
}

// DataError says that a recording cannot carry a calibration.
type DataError struct {
	Name    string // of the recording
	Axis    string
	Problem string
	Remedy  string
}

// Error gives the name, the axis and the problem, and the hint on a line of its own.
func (e *DataError) Error() string {
	text := e.Name + ": "
	if e.Axis != "" {
		text += "axis " + e.Axis + ": "
	}
	text += e.Problem
	if e.Remedy != "" {
		text += "\n  hint: " + e.Remedy
	}
	return text
}

// calibrateAll calibrates the whole of a recording; it leaves in seen what is needed to
// go on from there.
func calibrateAll(ctx context.Context, rec *track.Recording, set *session.Settings, opt Options, seen *pass) (*Result, error) {
	if opt.Adopt != "" && !slices.Contains(AdoptWords, opt.Adopt) {
		return nil, &SettingError{Key: "adopt", Problem: fmt.Sprintf("%q is none of %s", opt.Adopt, strings.Join(AdoptWords, ", "))}
	}
	role := roleOf(set)
	if g := opt.Gathered; g != nil {
		if err := g.check(rec, role); err != nil {
			return nil, err
		}
	}
	if role == RoleBackground {
		return measureBackground(ctx, rec, set, opt)
	}
	works, err := newWorks(rec, set, opt)
	if err != nil {
		return nil, err
	}
	if role == RoleFree {
		return calibrateFree(ctx, rec, set, works, opt)
	}
	if err := runTrapped(ctx, rec, set, works, opt); err != nil {
		return nil, err
	}
	r := newResult(rec, set, works, opt)
	for _, w := range works {
		r.Axes = append(r.Axes, w.axis)
	}
	pairs := startPairs(works, opt.Gathered)
	seen.works, seen.good = works, r.examine(rec, works)
	sums := pairs()
	if _, upset := r.event(); !upset { // an event in the recording is the better answer
		if err := firstHopeless(works); err != nil {
			return nil, err
		}
	}
	r.describeParts(rec, works, opt.Gathered)
	r.judge(works, opt)
	if err := r.findCause(ctx, works, opt); err != nil {
		return nil, err
	}
	if err := r.propagate(ctx, works, opt.MonteCarlo); err != nil {
		return nil, err
	}
	r.collectFindings(set, works)
	r.findAxes(works, sums)
	r.partFindings()
	return r, nil
}

// newWorks prepares the axes of a recording; one of them follows a moving stage.
func newWorks(rec *track.Recording, set *session.Settings, opt Options) ([]*work, error) {
	works := make([]*work, len(rec.Axes))
	for i := range rec.Axes {
		w, err := newWork(rec, i, set, opt)
		if err != nil {
			return nil, err
		}
		works[i] = w
	}
	if roleOf(set) != RoleDriven {
		return works, nil
	}
	return works, assignDrive(rec, set, works)
}

// runTrapped analyses the axes of a trapped bead, which agree on the kind of drag.
func runTrapped(ctx context.Context, rec *track.Recording, set *session.Settings, works []*work, opt Options) error {
	if err := runAll(ctx, works); err != nil || roleOf(set) == RoleDriven {
		return err
	}
	return agreeOnDrag(ctx, rec, set, opt, works)
}

// newResult starts a result with what was read and set.
func newResult(rec *track.Recording, set *session.Settings, works []*work, opt Options) *Result {
	r := &Result{Schema: SchemaVersion, Program: opt.Program, Settings: ListSettings(set), Choices: opt.choices(), Role: roleOf(set), Axes: []Axis{}, Findings: []Finding{}, Checks: []Check{}}
	r.describe(rec, works)
	return r
}

// longRecord is the number of samples from which axes are analysed one after the other, each on all
// processors, and their copies of the samples let go: memory then counts.
const longRecord = 1 << 21

// firstHopeless is the error of the first axis of which nothing can be said.
func firstHopeless(works []*work) error {
	for _, w := range works {
		if w.hopeless != nil {
			return w.hopeless
		}
	}
	return nil
}

// runAll analyses the axes at the same time; the first error in the order of the
// axes is returned.
func runAll(ctx context.Context, works []*work) error {
	errs := make([]error, len(works))
	workers := len(works) // three axes on two processors end together, when none waits for another
	if len(works) > 0 && len(works[0].recorded.Values) >= longRecord {
		workers = 1
	}
	limit := make(chan struct{}, workers)
	var group sync.WaitGroup
	for i, w := range works {
		group.Go(func() {
			limit <- struct{}{}
			defer func() { <-limit }()
			defer func() { // a panic here would end the process with a stack trace
				if v := recover(); v != nil {
					errs[i] = fmt.Errorf("%s: axis %s: internal error: %v", w.name, w.axisName, v)
				}
			}()
			if errs[i] = ctx.Err(); errs[i] == nil {
				errs[i] = w.run(ctx)
			}
		})
	}
	group.Wait()
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	return nil
}

// describe fills in what was read.
func (r *Result) describe(rec *track.Recording, works []*work) {
	r.Input = Input{Name: rec.Name, Bead: rec.Bead, Size: rec.Size, SHA256: rec.SHA256}
	r.ReadAs = ReadAs{Line: rec.ReadAs.String()}
	for _, c := range rec.ReadAs.Columns {
		r.ReadAs.Columns = append(r.ReadAs.Columns, Column{Header: c.Header, Role: c.Role, Unit: c.Unit})
	}
	for _, n := range rec.Notes {
		r.ReadAs.Notes = append(r.ReadAs.Notes, n.Text)
	}
	start := Float(rec.Start)
	if math.IsNaN(rec.JitterRMS) {
		start = Float(math.NaN())
	}
	r.Recording = Recording{Rate: Float(rec.Rate), RateOrigin: rec.RateOrigin, Samples: rec.Samples, Missing: rec.Missing,
		Duration: Float(float64(rec.Samples) / rec.Rate), Exposure: Float(math.NaN()), Jitter: Float(rec.JitterRMS), Start: start}
	if len(works) > 0 {
		r.Medium, r.Bead = works[0].phys.medium, works[0].phys.bead
		r.Recording.Exposure = Float(works[0].exposure)
	}
}

// join lists words: "x", "x and y", "x, y and z".
func join(words []string) string {
	if len(words) < 2 {
		return strings.Join(words, "")
	}
	return strings.Join(words[:len(words)-1], ", ") + " and " + words[len(words)-1]
}
