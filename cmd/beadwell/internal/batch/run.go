package batch

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"maps"
	"os"
	"path/filepath"
	"sync"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/report"
)

// The files beside the folders of the recordings.
const (
	IndexName   = "index.html"
	SummaryJSON = "summary.json"
	SummaryCSV  = "summary.csv"
)

// Outcome is what became of one bead of a file.
type Outcome struct {
	Result  *calib.Result
	Aside   string          // why it was not calibrated, for a recording of another role
	Problem *report.Problem // why there is no result
}

// Job is what to do. The functions are called by several workers at once.
type Job struct {
	Files   []string  // the whole list, in order
	Growing []Growing // listed in the summary, not done
	Out     string    // folder of results, made when it is not there
	Workers int
	Shard   Shard
	// Fingerprint is a text that changes with anything but the file's own content that
	// the outcome depends on.
	Fingerprint func(path string) string
	// Calibrate reads and calibrates the beads of one file. It returns the error of ctx only.
	Calibrate func(ctx context.Context, path string) ([]Outcome, error)
	// Outputs makes the files of one result.
	Outputs func(context.Context, *calib.Result) ([]Output, error)
	// Plan is told how many recordings are to be done, Step of each one that is. Nil: nobody.
	Plan   func(all int)
	Step   func()
	Series SeriesOptions
}

// Shard is one part of the list: every Of-th file from number Number, from 1. The
// zero value is the whole.
type Shard struct{ Number, Of int }

func (s Shard) holds(index int) bool { return s.Of == 0 || index%s.Of == s.Number-1 }

func (s Shard) text() string {
	if s.Of == 0 {
		return ""
	}
	return fmt.Sprintf("%d/%d", s.Number, s.Of)
}

func (s Shard) journal() string {
	if s.Of == 0 {
		return journalName
	}
	return fmt.Sprintf("journal-%d-of-%d.jsonl", s.Number, s.Of)
}

// Task is one file in the plan of a run.
type Task struct {
	Path, Folder string
	Done         bool // unchanged since an earlier run
	sum          string
	fingerprint  string
	before       entry
}

// errOutput marks errors of writing, which end a run.
type errOutput struct{ err error }

func (e errOutput) Error() string { return e.err.Error() }
func (e errOutput) Unwrap() error { return e.err }

// IsOutput tells whether an error is one of writing results.
func IsOutput(err error) bool { return errors.As(err, new(errOutput)) }

// Plan tells what a run would do, and changes nothing.
func Plan(ctx context.Context, job Job) ([]Task, error) {
	root, err := os.OpenRoot(job.Out)
	if err != nil { // nothing was done yet
		return job.tasks(ctx, nil, nil)
	}
	defer root.Close()
	entries, err := job.known(root)
	if err != nil {
		return nil, errOutput{err}
	}
	return job.tasks(ctx, root, entries)
}

// known is what earlier runs did: those of the whole list, and of this shard.
func (job Job) known(root *os.Root) (map[string]entry, error) {
	_, entries, err := readJournal(root, journalName)
	if err != nil || job.Shard.Of == 0 {
		return entries, err
	}
	_, own, err := readJournal(root, job.Shard.journal())
	maps.Copy(entries, own)
	return entries, err
}

// tasks lists the files of the shard, and which of them are done. Files are hashed by
// all workers, and only where the journal knows them.
func (job Job) tasks(ctx context.Context, root *os.Root, entries map[string]entry) ([]Task, error) {
	var tasks []Task
	for i, folder := range folderNames(job.Files) {
		if job.Shard.holds(i) {
			tasks = append(tasks, Task{Path: job.Files[i], Folder: folder})
		}
	}
	err := job.each(ctx, len(tasks), func(i int) error {
		t := &tasks[i]
		t.fingerprint = job.Fingerprint(t.Path)
		if known, ok := entries[t.Path]; ok && known.Folder == t.Folder {
			t.sum, t.before = FileSum(t.Path), known
			t.Done = known.unchanged(root, t.sum, t.fingerprint)
		}
		return nil
	})
	return tasks, err
}

// each calls do for every index on the workers, until one fails or ctx ends.
func (job Job) each(ctx context.Context, count int, do func(int) error) error {
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	next := make(chan int)
	var group sync.WaitGroup
	for range max(1, min(job.Workers, count)) {
		group.Go(func() {
			for i := range next {
				if ctx.Err() == nil {
					if err := do(i); err != nil {
						cancel(err)
					}
				}
			}
		})
	}
	for i := range count {
		next <- i
	}
	close(next)
	group.Wait()
	return context.Cause(ctx)
}

// Run does what is not done, and writes the summary, or the journal alone for a shard. It
// goes on after a recording that fails. The error is that of ctx, or one of writing.
func Run(ctx context.Context, job Job) (*Summary, error) {
	if err := os.MkdirAll(job.Out, 0o777); err != nil {
		return nil, errOutput{err}
	}
	root, err := os.OpenRoot(job.Out)
	if err != nil {
		return nil, errOutput{err}
	}
	defer root.Close()
	known, err := job.known(root)
	if err != nil {
		return nil, errOutput{err}
	}
	tasks, err := job.tasks(ctx, root, known)
	if err != nil {
		return nil, err
	}
	entries, err := job.work(ctx, root, tasks)
	if err != nil {
		return nil, err
	}
	head := header{Schema: journalSchema, Files: len(job.Files), Shard: job.Shard.text()}
	if err := writeJournal(root, job.Shard.journal(), head, entries); err != nil {
		return nil, errOutput{err}
	}
	summary := newSummary(entries, job.Growing, job.Series)
	if job.Shard.Of > 0 {
		return summary, nil
	}
	if err := summary.write(root); err != nil {
		return nil, errOutput{err}
	}
	return summary, nil
}

// work does the tasks that are not done, and returns all entries in the order of the list.
func (job Job) work(ctx context.Context, root *os.Root, tasks []Task) ([]entry, error) {
	var kept []entry
	var open []int
	for i, t := range tasks {
		if t.Done {
			kept = append(kept, t.before)
		} else {
			open = append(open, i)
		}
	}
	if job.Plan != nil {
		job.Plan(len(open))
	}
	log, err := openJournal(root, job.Shard.journal(), header{Schema: journalSchema, Files: len(job.Files), Shard: job.Shard.text()}, kept)
	if err != nil {
		return nil, errOutput{err}
	}
	defer log.file.Close()
	entries := make([]entry, len(tasks))
	for i, t := range tasks {
		entries[i] = t.before
	}
	var lock sync.Mutex
	err = job.each(ctx, len(open), func(k int) error {
		i := open[k]
		e, err := job.do(ctx, root, tasks[i])
		if err != nil {
			return err
		}
		lock.Lock()
		defer lock.Unlock()
		entries[i] = e
		if job.Step != nil {
			job.Step()
		}
		if err := log.add(e); err != nil {
			return errOutput{err}
		}
		return nil
	})
	return entries, err
}

// do reads, calibrates and writes one file. A file that changes meanwhile is set aside, and
// is done again by the next run.
func (job Job) do(ctx context.Context, root *os.Root, t Task) (e entry, err error) {
	defer func() {
		if value := recover(); value != nil { // a mistake on one recording is not the others' fault
			e.Rows = []Row{failedRow(t.Path, report.Problem{Code: "internal", Status: 1, Input: t.Path,
				Message: fmt.Sprintf("a mistake in the program: %v", value), Remedy: "please report it with this recording"})}
			e.SHA256, e.Outputs, err = FileSum(t.Path), map[string]string{}, nil
		}
	}()
	e = entry{File: t.Path, FileBytes: nameBytes(t.Path), Folder: t.Folder, Fingerprint: t.fingerprint, Outputs: map[string]string{}}
	before, errBefore := os.Stat(t.Path)
	if errBefore == nil && !before.Mode().IsRegular() {
		e.Rows = []Row{failedRow(t.Path, noFile(t.Path, before.Mode()))}
		return e, nil // without a sum: looked at again by the next run
	}
	outcomes, err := job.Calibrate(ctx, t.Path)
	if err != nil {
		return e, err
	}
	after, errAfter := os.Stat(t.Path)
	if errBefore == nil && errAfter == nil && (before.Size() != after.Size() || !before.ModTime().Equal(after.ModTime())) {
		e.Rows = []Row{emptyRow(t.Path, SetAside, growingNote)}
		return e, nil // without a sum: never unchanged
	}
	for _, o := range outcomes {
		switch {
		case o.Problem != nil:
			e.Rows = append(e.Rows, failedRow(t.Path, *o.Problem))
		case o.Result == nil:
			e.Rows = append(e.Rows, emptyRow(t.Path, SetAside, o.Aside))
		default:
			row, err := job.store(ctx, root, t, o.Result, e.Outputs)
			if err != nil {
				return e, err
			}
			e.Rows = append(e.Rows, row)
			e.SHA256 = o.Result.Input.SHA256
		}
	}
	if e.SHA256 == "" {
		e.SHA256 = FileSum(t.Path)
	}
	return e, nil
}

// noFile is the problem with what stands in the place of a file. A pipe or a device could be read for ever, and no second time.
func noFile(path string, mode fs.FileMode) report.Problem {
	p := report.Problem{Code: "input", Status: 4, Input: path, File: path,
		Message: "is a device, not a file", Remedy: "take it out of the list, or copy the recording into a file"}
	switch {
	case mode.IsDir():
		p.Message, p.Remedy = "is a folder, not a file", "name the recordings in it, or add --below"
		if _, err := os.ReadDir(path); err != nil {
			p.Message, p.Remedy = "is a folder that cannot be read: "+reasonOf(err).Error(), "allow it to be read, or move it away"
		}
	case mode&fs.ModeNamedPipe != 0:
		p.Message = "is a pipe, not a file"
	case mode&fs.ModeSocket != 0:
		p.Message = "is a socket, not a file"
	}
	return p
}

// reasonOf is an error without the name of the file, which stands beside it.
func reasonOf(err error) error {
	var of *fs.PathError
	if errors.As(err, &of) {
		return of.Err
	}
	return err
}

// store writes the outputs of one result.
func (job Job) store(ctx context.Context, root *os.Root, t Task, r *calib.Result, sums map[string]string) (Row, error) {
	folder := t.Folder
	if r.Input.Bead != "" {
		folder += "--bead-" + safeName(r.Input.Bead)
	}
	outputs, err := job.Outputs(ctx, r)
	if err == nil {
		if err = writeOutputs(root, folder, outputs, sums); err != nil {
			err = errOutput{fmt.Errorf("%s: %w", filepath.Join(job.Out, folder), err)}
		}
	}
	row := resultRow(t.Path, folder, r)
	for _, name := range []string{ResultName, ReportName} { // the last that there is
		if _, has := sums[folder+"/"+name]; has {
			row.Report = folder + "/" + name
		}
	}
	return row, err
}
