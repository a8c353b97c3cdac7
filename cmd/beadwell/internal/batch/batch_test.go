package batch

import (
	"context"
	"encoding/csv"
	"errors"
	"fmt"
	"html"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"sync/atomic"
	"testing"

	"beadwell/calib"
	"beadwell/calib/series"
	"beadwell/cmd/beadwell/internal/report"
)

func TestNatural(t *testing.T) {
	want := []string{"a", "a1b", "a2", "a10", "a010", "b", "run7.csv", "run10.csv"}
	got := slices.Clone(want)
	slices.Reverse(got)
	slices.SortFunc(got, natural)
	// a010 and a10 are the same number: bytes decide.
	want[3], want[4] = "a010", "a10"
	if !reflect.DeepEqual(got, want) {
		t.Errorf("sorted %q, want %q", got, want)
	}
}

func TestFolderNames(t *testing.T) {
	got := folderNames([]string{"a/run1.csv", "a/run1.txt", "b/run1.csv", "a/-x.csv", "a/summary.json.csv", "a/RUN2.csv", "a/run2.csv", "a/ä b.csv.gz"})
	want := []string{"a-run1.csv", "run1.txt", "b-run1.csv", "_-x", "summary.json_", "RUN2.csv", "a-run2.csv", "ä_b"}
	seen := map[string]bool{}
	for i, name := range got {
		if seen[strings.ToLower(name)] {
			t.Errorf("%q twice", name)
		}
		seen[strings.ToLower(name)] = true
		if i != 5 && i != 6 && name != want[i] {
			t.Errorf("name %d = %q, want %q", i, name, want[i])
		}
	}
}

func TestFind(t *testing.T) {
	folder := t.TempDir()
	for _, name := range []string{"run10.csv", "run2.csv", "README.txt", "session.toml", "tracks.csv", ".hidden.csv", "x.npy", "y.csv.gz", "photo.png", "below/z.dat", "old/journal.jsonl", "old/run1.csv"} {
		write(t, filepath.Join(folder, name), "1")
	}
	found, err := Find([]string{folder}, true)
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, path := range found.Paths {
		name, _ := filepath.Rel(folder, path)
		names = append(names, filepath.ToSlash(name))
	}
	if want := []string{"below/z.dat", "run2.csv", "run10.csv", "x.npy", "y.csv.gz"}; !reflect.DeepEqual(names, want) {
		t.Errorf("found %q, want %q", names, want)
	}
	if len(found.Aside) != 2 {
		t.Errorf("left out %q", found.Aside)
	}
	if flat, _ := Find([]string{folder, filepath.Join(folder, "run*.csv")}, false); len(flat.Paths) != 4 {
		t.Errorf("found %q", flat.Paths)
	}
	if _, err := Find([]string{filepath.Join(folder, "gone*")}, false); err == nil {
		t.Error("a pattern that matches nothing was not refused")
	}
	gone := filepath.Join(folder, "gone.csv")
	if found, err := Find([]string{gone, filepath.Join(folder, "x.npy"), filepath.Join(folder, "*.none")}, false); err != nil || len(found.Paths) != 3 || !slices.Contains(found.Paths, gone) {
		t.Errorf("one of a list that is not there: %v, %q", err, found.Paths)
	}
}

func write(t *testing.T, path, content string) {
	t.Helper()
	if err := errors.Join(os.MkdirAll(filepath.Dir(path), 0o777), os.WriteFile(path, []byte(content), 0o666)); err != nil {
		t.Fatal(err)
	}
}

// invented makes a job over count files whose content is a power in mW; the stiffness is 1
// pN/um for each mW. File 3 fails, file 5 panics, file 6 is of another role.
func invented(t *testing.T, count int) (Job, *atomic.Int64) {
	folder := t.TempDir()
	var calls atomic.Int64
	job := Job{Out: filepath.Join(t.TempDir(), "out"), Workers: 2, Fingerprint: func(string) string { return "settings" }}
	for i := range count {
		path := filepath.Join(folder, fmt.Sprintf("run%d.csv", i+1))
		write(t, path, fmt.Sprint(10*(i+1)))
		job.Files = append(job.Files, path)
	}
	job.Calibrate = func(ctx context.Context, path string) ([]Outcome, error) {
		calls.Add(1)
		switch filepath.Base(path) {
		case "run3.csv":
			return []Outcome{{Problem: &report.Problem{Code: "input", Status: 4, Message: "is no recording"}}}, nil
		case "run5.csv":
			panic("an index")
		case "run6.csv":
			return []Outcome{{Aside: "role free"}}, nil
		}
		return []Outcome{{Result: inventedResult(path)}}, ctx.Err()
	}
	job.Outputs = func(_ context.Context, r *calib.Result) ([]Output, error) {
		return []Output{{ResultName, []byte(r.Input.Name + r.Input.SHA256)}}, nil
	}
	return job, &calls
}

func inventedResult(path string) *calib.Result {
	text, _ := os.ReadFile(path)
	var milliwatt float64
	fmt.Sscan(string(text), &milliwatt)
	k := milliwatt * 1e-6
	q := calib.Quantity{Value: calib.Float(k), Unit: "N/m", Statistical: &calib.Uncertainty{Standard: calib.Float(0.01 * k)}, Combined: &calib.Uncertainty{Standard: calib.Float(0.02 * k)}}
	none := calib.Withheld("", "not known")
	return &calib.Result{Input: calib.Input{Name: filepath.Base(path), SHA256: hexSum(text)}, Verdict: calib.Verdict{Status: calib.Consistent},
		Bead: calib.Bead{Diameter: calib.Exact(1e-6, "m"), Height: none}, Medium: calib.Medium{Temperature: none, Viscosity: none},
		Settings: []calib.Setting{{Key: "laser.power", Value: calib.Float(milliwatt * 1e-3), StandardUncertainty: calib.Float(math.NaN())}},
		Axes: []calib.Axis{{Name: "x", Orientation: "parallel", Adopted: calib.Adopted{Stiffness: q}, MeasuredDrag: none, DragRatio: none,
			Spectrum: calib.Spectrum{Corner: none}, Wall: calib.Wall{Factor: none}}}}
}

// tree is every file of a folder with its content.
func tree(t *testing.T, folder string) map[string]string {
	t.Helper()
	files := map[string]string{}
	err := filepath.WalkDir(folder, func(path string, entry fs.DirEntry, err error) error {
		if err != nil || entry.IsDir() {
			return err
		}
		content, err := os.ReadFile(path)
		name, _ := filepath.Rel(folder, path)
		files[filepath.ToSlash(name)] = string(content)
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

func run(t *testing.T, job Job) *Summary {
	t.Helper()
	s, err := Run(context.Background(), job)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func TestRunGoesOn(t *testing.T) {
	job, _ := invented(t, 8)
	s := run(t, job)
	var statuses []string
	for _, row := range s.Rows {
		statuses = append(statuses, row.Status)
	}
	if want := []string{"consistent", "consistent", "failed", "consistent", "failed", "set aside", "consistent", "consistent"}; !reflect.DeepEqual(statuses, want) {
		t.Errorf("statuses %q, want %q", statuses, want)
	}
	rows, err := csv.NewReader(strings.NewReader(tree(t, job.Out)[SummaryCSV])).ReadAll()
	if err != nil || len(rows) != 9 || !strings.Contains(strings.Join(rows[5], " "), "a mistake in the program") {
		t.Errorf("summary.csv: %v %q", err, rows)
	}
	if len(s.Series) != 1 || s.Series[0].Kind != kindPower {
		t.Fatalf("series %+v", s.Series)
	}
	// 1 pN/um for each mW: 1e-6 N/m over 1e-3 W. The digits of the decimal fractions remain.
	if v := s.Series[0].Values[0]; math.Abs(float64(v.Value)/1e-3-1) > 1e-12 || math.Abs(float64(v.Shared/v.Value)-math.Sqrt(3)*0.01) > 1e-12 {
		t.Errorf("stiffness per power %+v", v)
	}
}

// The bytes do not depend on the workers, on an interruption, or on shards.
func TestSameBytes(t *testing.T) {
	job, calls := invented(t, 9)
	run(t, job)
	want := tree(t, job.Out)

	again := job
	again.Workers, again.Out = 5, filepath.Join(t.TempDir(), "workers")
	run(t, again)
	same(t, "five workers", tree(t, again.Out), want)

	// Stopped after every single recording in turn.
	stopped := job
	stopped.Out = filepath.Join(t.TempDir(), "stopped")
	stopped.Workers = 1
	for range 20 {
		ctx, cancel := context.WithCancel(context.Background())
		stopped.Step = func() { cancel() }
		if _, err := Run(ctx, stopped); err == nil {
			break
		}
	}
	same(t, "stopped", tree(t, stopped.Out), want)

	before := calls.Load()
	run(t, job)
	if calls.Load() != before {
		t.Errorf("a second run calibrated %d recordings again", calls.Load()-before)
	}
	same(t, "second run", tree(t, job.Out), want)

	joined := filepath.Join(t.TempDir(), "joined")
	var folders []string
	for i := range 4 {
		shard := job
		shard.Shard, shard.Out = Shard{i + 1, 4}, filepath.Join(t.TempDir(), "shard")
		run(t, shard)
		folders = append([]string{shard.Out}, folders...)
	}
	if _, err := Collect(folders[1:], joined, SeriesOptions{}); err == nil {
		t.Error("a missing shard was not noticed")
	}
	joined = filepath.Join(t.TempDir(), "joined2")
	if _, err := Collect(folders, joined, SeriesOptions{}); err != nil {
		t.Fatal(err)
	}
	same(t, "collected", tree(t, joined), want)

	place := filepath.Join(t.TempDir(), "place")
	for i := range 4 {
		shard := job
		shard.Shard, shard.Out = Shard{i + 1, 4}, place
		run(t, shard)
	}
	if _, err := Collect([]string{place}, place, SeriesOptions{}); err != nil {
		t.Fatal(err)
	}
	same(t, "collected in place", tree(t, place), want)
}

func same(t *testing.T, what string, got, want map[string]string) {
	t.Helper()
	for name := range want {
		if got[name] != want[name] {
			t.Errorf("%s: %s differs", what, name)
		}
	}
	for name := range got {
		if _, has := want[name]; !has {
			t.Errorf("%s: %s is there", what, name)
		}
	}
}

// Batches of one recording each, joined in any order, are one batch of them all.
func TestCollectWholeBatches(t *testing.T) {
	job, _ := invented(t, 7)
	run(t, job)
	var folders []string
	for i, path := range job.Files {
		one := job
		one.Files, one.Out = []string{path}, filepath.Join(t.TempDir(), fmt.Sprint(i))
		run(t, one)
		folders = append([]string{one.Out}, folders...)
	}
	joined := filepath.Join(t.TempDir(), "joined")
	if _, err := Collect(folders, joined, SeriesOptions{}); err != nil {
		t.Fatal(err)
	}
	same(t, "collected", tree(t, joined), tree(t, job.Out))

	// Shards of one list beside a whole batch of others; each shard twice is no harm.
	part := job
	part.Files = job.Files[:4]
	var mixed []string
	for i := range 2 {
		part.Shard, part.Out = Shard{i + 1, 2}, filepath.Join(t.TempDir(), "shard")
		run(t, part)
		mixed = append(mixed, part.Out, part.Out)
	}
	rest := job
	rest.Files, rest.Out = job.Files[4:], filepath.Join(t.TempDir(), "rest")
	run(t, rest)
	joined = filepath.Join(t.TempDir(), "mixed")
	if _, err := Collect(append(mixed, rest.Out), joined, SeriesOptions{}); err != nil {
		t.Fatal(err)
	}
	same(t, "shards beside a batch", tree(t, joined), tree(t, job.Out))
	if _, err := Collect([]string{rest.Out, mixed[0]}, joined, SeriesOptions{}); err == nil || !strings.Contains(err.Error(), "2 of 4 recordings are there (shards 1/2)") {
		t.Errorf("a missing shard beside a batch: %v", err)
	}

	// Two recordings of the same name cannot share a folder; a batch that was stopped is not whole.
	twin := job
	twin.Files, twin.Out = []string{filepath.Join(t.TempDir(), "RUN1.csv")}, filepath.Join(t.TempDir(), "twin")
	write(t, twin.Files[0], "10")
	run(t, twin)
	if _, err := Collect([]string{job.Out, twin.Out}, joined, SeriesOptions{}); err == nil || !strings.Contains(err.Error(), "both have the folder") {
		t.Errorf("two of one name: %v", err)
	}
	text := tree(t, job.Out)[journalName]
	write(t, filepath.Join(job.Out, journalName), text[:len(text)-30])
	if _, err := Collect([]string{job.Out}, joined, SeriesOptions{}); err == nil || !strings.Contains(err.Error(), "6 of 7 recordings are there") {
		t.Errorf("a batch that was stopped: %v", err)
	}
}

// What changed is done again: content, settings, an output; a cut journal is read as far as it goes.
func TestResumeRedoesWhatChanged(t *testing.T) {
	job, calls := invented(t, 8)
	run(t, job)
	for _, c := range []struct {
		name   string
		change func()
		want   int64
	}{
		{"nothing", func() {}, 0},
		{"content", func() { write(t, job.Files[0], "77") }, 1},
		{"an output", func() { write(t, filepath.Join(job.Out, "run2", ResultName), "spoilt") }, 1},
		{"a lost output", func() { os.Remove(filepath.Join(job.Out, "run4", ResultName)) }, 1},
		{"the end of the journal", func() {
			text := tree(t, job.Out)[journalName]
			write(t, filepath.Join(job.Out, journalName), text[:len(text)-30])
		}, 1},
		{"settings", func() { job.Fingerprint = func(string) string { return "others" } }, 8},
	} {
		c.change()
		before := calls.Load()
		run(t, job)
		if got := calls.Load() - before; got != c.want {
			t.Errorf("%s: %d done again, want %d", c.name, got, c.want)
		}
	}
	tasks, err := Plan(context.Background(), job)
	if err != nil || slices.ContainsFunc(tasks, func(t Task) bool { return !t.Done }) {
		t.Errorf("plan after all is done: %+v, %v", tasks, err)
	}
}

// A file that changes while it is read is set aside, and done by the next run.
func TestGrowingFile(t *testing.T) {
	job, _ := invented(t, 2)
	plain := job.Calibrate
	grow := true
	job.Workers = 1
	job.Calibrate = func(ctx context.Context, path string) ([]Outcome, error) {
		outcomes, err := plain(ctx, path)
		if grow && path == job.Files[1] {
			write(t, path, "20 and more")
		}
		return outcomes, err
	}
	if s := run(t, job); s.Rows[1].Status != SetAside {
		t.Errorf("a growing file: %+v", s.Rows[1])
	}
	grow = false
	if s := run(t, job); s.Rows[1].Status != calib.Consistent {
		t.Errorf("the same when it is whole: %+v", s.Rows[1])
	}
}

func TestOutputsDoNotFollowLinks(t *testing.T) {
	job, _ := invented(t, 1)
	elsewhere := t.TempDir()
	if err := errors.Join(os.MkdirAll(job.Out, 0o777), os.Symlink(elsewhere, filepath.Join(job.Out, "run1"))); err != nil {
		t.Fatal(err)
	}
	if _, err := Run(context.Background(), job); !IsOutput(err) {
		t.Errorf("a link out of the folder: %v", err)
	}
	if entries, _ := os.ReadDir(elsewhere); len(entries) > 0 {
		t.Error("something was written through the link")
	}
}

// A height series with a hidden offset gives the surface.
func TestHeightSeries(t *testing.T) {
	s := heightSummary(t)
	s.addSeries(SeriesOptions{})
	if len(s.Series) != 1 || s.Series[0].Kind != kindDrag || s.Series[0].Reason != "" {
		t.Fatalf("series %+v", s.Series)
	}
	v := s.Series[0].Values[0]
	if math.Abs(float64(v.Value)-0.3e-6) > 1e-9 { // the drags are exact
		t.Errorf("surface at %g m, want 0.3e-6", v.Value)
	}
	if len(s.Notes) != 1 {
		t.Errorf("notes %q: the assumed height scale must be told", s.Notes)
	}
	s.Series, s.Notes = nil, nil
	s.addSeries(SeriesOptions{Scale: series.Input{Value: 1, Free: true}, FitDiameter: true})
	if len(s.Notes) != 0 || len(s.Series) != 1 || len(s.Series[0].Relations) != 3 {
		t.Errorf("with scale and diameter: %+v, %q", s.Series, s.Notes)
	}
}

// Copies are told, each once, and recordings of several beads in one file are none.
func TestCopiesAreNoted(t *testing.T) {
	rows := func(more ...Row) *Summary { return newSummary([]entry{{Rows: more}}, nil, SeriesOptions{}) }
	named := func(file, sum, bead string) Row {
		row := emptyRow(file, calib.Consistent, "")
		row.SHA256, row.Bead = sum, bead
		return row
	}
	if s := rows(named("a", "1", "left"), named("a", "1", "right"), named("b", "2", ""), named("c", "", ""), named("d", "", "")); len(s.Notes) != 0 {
		t.Errorf("notes %q", s.Notes)
	}
	if s := rows(named("a", "1", ""), named("b", "1", "")); len(s.Notes) != 1 || !strings.Contains(s.Notes[0], "b has the content of a:") {
		t.Errorf("notes %q", s.Notes)
	}
	if s := rows(named("a", "1", ""), named("b", "1", ""), named("c", "1", "")); len(s.Notes) != 1 || !strings.Contains(s.Notes[0], "2 recordings are copies of others (b has") {
		t.Errorf("notes %q", s.Notes)
	}
}

// The reason of a failed row says where.
func TestReasonSaysWhere(t *testing.T) {
	for _, c := range []struct {
		problem report.Problem
		want    string
	}{
		{report.Problem{Message: "is bad"}, "is bad"},
		{report.Problem{Message: "is bad", File: "a.csv"}, "is bad"},
		{report.Problem{Message: "is bad", File: "a.csv", Line: 3, Column: 7}, "line 3, column 7: is bad"},
		{report.Problem{Message: "is bad", File: "stuck.csv", Line: 3}, "stuck.csv: line 3: is bad"},
	} {
		if row := failedRow("a.csv", c.problem); row.Reason != c.want {
			t.Errorf("%+v: %q, want %q", c.problem, row.Reason, c.want)
		}
	}
}

// The stated uncertainty of a power is that of the meter's scale: it moves the slope, and neither intercept nor chi-square.
func TestPowerUncertainty(t *testing.T) {
	rowsAt := func(u float64) Series {
		var m []member
		for i := range 4 {
			p := 0.02 * float64(i+1)
			row := emptyRow("a", calib.Consistent, "")
			row.Power = Number{Value: calib.Float(p), Statistical: unknown.Value, Combined: calib.Float(u * p)}
			m = append(m, member{row, RowAxis{Axis: "x", Stiffness: Number{Value: calib.Float(1e-3 * p), Statistical: calib.Float(1e-5 * p), Combined: calib.Float(1e-5 * p)}}})
		}
		return againstPower(m)
	}
	exactly, stated := rowsAt(0), rowsAt(0.03)
	if got := float64(stated.Values[0].Shared / stated.Values[0].Value); math.Abs(got-0.03) > 1e-12 || exactly.Values[0].Shared != 0 {
		t.Errorf("shared uncertainty of the slope %g of it, want 0.03; %g with exact powers", got, float64(exactly.Values[0].Shared))
	}
	if a, b := exactly.Values[2], stated.Values[2]; a.Name != "intercept" || a != b || exactly.ChiSquare != stated.ChiSquare {
		t.Errorf("intercept %+v and %+v, chi-square %g and %g: want no difference", a, b, float64(exactly.ChiSquare), float64(stated.ChiSquare))
	}
}

// The index shows rows of one outcome without a script, when there are several, under a policy that allows its style alone; names stand
// without the folder that all share.
func TestIndexChoices(t *testing.T) {
	rows := []Row{emptyRow("night/a.csv", calib.Consistent, ""), emptyRow("night/b.csv", calib.Unfit, ""), failedRow("night/c.csv", report.Problem{Message: "is bad", Remedy: "mend it"})}
	rows[0].FreeBead = []string{"night/f.csv", "night/g.csv", "other/night/h.csv"}
	s := newSummary([]entry{{Rows: rows}}, nil, SeriesOptions{})
	page, err := s.HTML()
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{`id="show-all" checked> all 3<`, `id="show-good"> 1 consistent<`, `id="show-distrusted"> 1 not to be trusted<`, `id="show-failed"> 1 failed<`,
		`<tr class="failed"><th scope="row">c.csv`, "is bad; mend it", "names are those in night<", "<td>f.csv; g.csv; other/night/h.csv</td>", html.EscapeString(report.Policy(report.StyleSheet() + choiceStyle))} {
		if !strings.Contains(string(page), want) {
			t.Errorf("the index lacks %q", want)
		}
	}
	if strings.Contains(string(page), "show-aside\"") {
		t.Error("a choice of nothing")
	}
	if page, _ := newSummary([]entry{{Rows: rows[:1]}}, nil, SeriesOptions{}).HTML(); strings.Contains(string(page), "<fieldset") {
		t.Error("a choice of all or all")
	}
	for _, c := range []struct {
		files []string
		want  string
	}{{nil, "."}, {[]string{"a.csv"}, "."}, {[]string{"n/a.csv", "n/b/c.csv"}, "n"}, {[]string{"n/a.csv", "nn/a.csv"}, "."}, {[]string{"/d/a/x", "/d/b/x"}, "/d"}, {[]string{"/x", "/y"}, "/"}} {
		s := &Summary{}
		for _, file := range c.files {
			s.Rows = append(s.Rows, Row{File: filepath.FromSlash(file)})
		}
		if got := filepath.ToSlash(s.folder()); got != c.want {
			t.Errorf("folder of %q = %q, want %q", c.files, got, c.want)
		}
	}
}
