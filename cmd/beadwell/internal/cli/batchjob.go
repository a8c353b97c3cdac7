package cli

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"slices"
	"strings"
	"sync"

	"beadwell/calib"
	"beadwell/calib/session"
	"beadwell/cmd/beadwell/internal/batch"
	"beadwell/cmd/beadwell/internal/report"
)

// batchJob finds the recordings and their settings, and makes the job of them.
func (a *app) batchJob(o batchOptions) (job batch.Job, aside []string, err error) {
	if o.filesFrom != "" {
		lines, err := a.readLines(o.filesFrom)
		if err != nil {
			return job, nil, err
		}
		o.arguments = append(o.arguments, lines...)
	}
	found, err := batch.Find(o.arguments, o.below)
	if err != nil {
		return job, nil, inputError("check the names", err)
	}
	found.SetGrowingApart()
	if len(found.Paths)+len(found.Growing) == 0 {
		return job, nil, fileError(strings.Join(o.arguments, ", "), "recordings end in csv, tsv, txt, dat, asc or npy; name others one by one",
			errors.New("holds no recording"))
	}
	created := ""
	if a.Getenv("SOURCE_DATE_EPOCH") != "" { // else the time of day would tell two runs apart
		if created, err = a.created(); err != nil {
			return job, nil, err
		}
	}
	b := &batchWork{app: a, options: o, created: created, source: &source{app: a, file: o.session, flags: &o.flags}}
	for _, path := range found.Paths { // each folder once, before the workers share them
		if _, err := b.source.folder(path); err != nil {
			return job, nil, err
		}
	}
	workers, err := a.workers(o.jobs)
	if err != nil {
		return job, nil, err
	}
	shard, _ := parseShard(o.shard)  // checked before
	options, _ := o.series.options() // checked before
	return batch.Job{Files: found.Paths, Growing: found.Growing, Out: o.out, Workers: workers, Shard: shard,
		Fingerprint: b.fingerprint, Calibrate: b.calibrate, Outputs: b.outputs, Series: options}, found.Aside, nil
}

// readLines reads names from a file or standard input, one on each line, or with NUL between them.
func (a *app) readLines(path string) ([]string, error) {
	var from io.Reader = a.In
	if path != "-" {
		file, err := os.Open(path)
		if err != nil {
			return nil, fileError(path, "check the name, and that the file may be read", err)
		}
		defer file.Close()
		from = file
	}
	content, err := io.ReadAll(from)
	if err != nil {
		return nil, fileError(path, "check that the file may be read", err)
	}
	text := string(content)
	end := "\n"
	if strings.Contains(text, "\x00") { // of find -print0: names may hold ends of lines
		end = "\x00"
	} else {
		text = strings.ReplaceAll(text, "\r\n", "\n")
	}
	return slices.DeleteFunc(strings.Split(text, end), func(name string) bool { return name == "" }), nil
}

// batchWork reads and calibrates the recordings of a batch.
type batchWork struct {
	app     *app
	options batchOptions
	created string
	source  *source
	sums    fileSums
}

// command is the command line that gives the result of one recording: the same
// whatever the batch that it was in.
func (b *batchWork) command(path string) []string {
	command := []string{"beadwell", "calibrate"}
	if b.options.session != "" {
		command = append(command, "--session", b.options.session)
	}
	command = append(command, b.options.choices.command()...)
	for _, s := range b.options.flags.settings.All() {
		key, _ := session.Find(s.Key)
		text := s.Text
		if s.Axis != "" {
			text = s.Axis + "=" + text
		}
		command = append(command, "--"+key.Flag, text)
	}
	return utf8Words(append(command, path))
}

// fingerprint is a hash of all that the result depends on besides the recording: the
// program, the settings with their places, which outputs are made, and the other recordings
// that it uses, their content and their settings.
func (b *batchWork) fingerprint(path string) string {
	all := []any{calib.SchemaVersion, b.app.Version, b.created, b.options.reports, b.options.figures, b.options.drawing.figures, b.options.drawing.data, b.command(path)}
	all = append(all, b.settingsOf(path)...)
	for _, other := range b.dependencies(path) {
		all = append(all, other, b.sums.of(other))
		all = append(all, b.settingsOf(other)...)
	}
	text, err := json.Marshal(all)
	if err != nil {
		return "" // texts alone always have a form
	}
	sum := sha256.Sum256(text)
	return hex.EncodeToString(sum[:])
}

// settingsOf lists the settings of a file and those of its rows in the track list.
func (b *batchWork) settingsOf(path string) (all []any) {
	folder, err := b.source.folder(path)
	if err != nil {
		return []any{err.Error()}
	}
	settings, err := b.source.merged(folder, path, "", nil)
	if err != nil {
		all = append(all, err.Error())
	}
	layers := []*session.Settings{settings}
	for _, row := range folder.rows(path) {
		layers = append(layers, row.Settings)
	}
	for _, layer := range layers {
		for _, s := range layer.All() {
			all = append(all, []string{s.Key, s.Axis, s.Text, s.Origin.String(), s.Where})
		}
	}
	return all
}

// dependencies are the other recordings that the beads of a file use: backgrounds and free beads.
func (b *batchWork) dependencies(path string) (paths []string) {
	folder, err := b.source.folder(path)
	if err != nil {
		return nil
	}
	beads := []string{""}
	for _, row := range folder.rows(path) {
		if row.Bead != "" {
			beads = append(beads, row.Bead)
		}
	}
	for _, bead := range beads {
		settings, err := b.source.merged(folder, path, bead, nil)
		if err != nil {
			continue
		}
		if named, ok := settings.Lookup("recording.background", ""); ok {
			paths = append(paths, b.source.beside(path, named, []string{named.Word})...)
		}
		b.source.findFreeBeads(folder, path, bead, settings)
		paths = append(paths, b.source.freeFiles(path, settings)...)
	}
	slices.Sort(paths)
	return slices.Compact(paths)
}

// fileSums are the SHA-256 of files, each made once.
type fileSums struct {
	lock  sync.Mutex
	known map[string]string
}

func (f *fileSums) of(path string) string {
	f.lock.Lock()
	defer f.lock.Unlock()
	sum, ok := f.known[path]
	if !ok {
		if f.known == nil {
			f.known = map[string]string{}
		}
		sum = batch.FileSum(path)
		f.known[path] = sum
	}
	return sum
}

// load reads the beads of one file. One that only the track list knows is told by its line.
func (b *batchWork) load(ctx context.Context, path string) ([]loaded, error) {
	if _, err := os.Stat(path); errors.Is(err, fs.ErrNotExist) {
		if folder, err := b.source.folder(path); err == nil {
			if rows := folder.rows(path); len(rows) > 0 {
				return nil, missingTrack(folder, rows[0])
			}
		}
	}
	return b.source.load(ctx, path)
}

// calibrate reads and calibrates the beads of one file.
func (b *batchWork) calibrate(ctx context.Context, path string) ([]batch.Outcome, error) {
	loaded, err := b.load(ctx, path)
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	if err != nil {
		return []batch.Outcome{{Problem: problemOfFile(path, err)}}, nil
	}
	options := b.options.choices.options()
	options.Program = calib.Program{Name: "beadwell", Version: b.app.Version, Command: b.command(path)}
	var outcomes []batch.Outcome
	for _, one := range loaded {
		result, err := b.app.Calibrate(ctx, one.recording, one.settings, one.options(options))
		switch {
		case ctx.Err() != nil:
			return nil, ctx.Err()
		case err != nil:
			outcomes = append(outcomes, batch.Outcome{Problem: problemOfFile(path, err)})
		default:
			result.Created, result.Input.Name = b.created, path
			outcomes = append(outcomes, batch.Outcome{Result: result})
		}
	}
	return outcomes, nil
}

func problemOfFile(path string, err error) *report.Problem {
	p := problemOf(err)
	p.Input = path
	return &p
}

// outputs makes the files of one result.
func (b *batchWork) outputs(ctx context.Context, r *calib.Result) ([]batch.Output, error) {
	wanted := b.options.drawing
	if !b.options.figures {
		wanted.figures = noFigures
	}
	var texts []string
	switch b.options.reports {
	case reportsAll:
		texts = []string{resultJSON, resultText, resultCSV, reportHTML}
	case reportsHTML:
		texts = []string{resultJSON, reportHTML}
	default:
		texts = []string{resultJSON}
	}
	files, err := wanted.outputs(ctx, r, texts...)
	var all []batch.Output
	for _, f := range files {
		all = append(all, batch.Output{Name: f.name, Content: f.content})
	}
	return all, err
}

// print writes one line to standard output; a failed write shows when it is flushed.
func (a *app) print(format string, values ...any) {
	fmt.Fprintln(a.Out, report.Plain(fmt.Sprintf(format, values...)))
}
