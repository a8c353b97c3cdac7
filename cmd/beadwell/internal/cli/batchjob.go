package cli

import (
	"bufio"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"

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

// readLines reads names from a file or standard input, one on each line.
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
	var lines []string
	scanner := bufio.NewScanner(from)
	for scanner.Scan() {
		if line := strings.TrimSuffix(scanner.Text(), "\r"); line != "" {
			lines = append(lines, line)
		}
	}
	if err := scanner.Err(); err != nil {
		return nil, fileError(path, "give one name on each line", err)
	}
	return lines, nil
}

// batchWork reads and calibrates the recordings of a batch.
type batchWork struct {
	app     *app
	options batchOptions
	created string
	source  *source
}

// command is the command line that gives the result of one recording: the same
// whatever the batch that it was in.
func (b *batchWork) command(path string) []string {
	command := []string{"beadwell", "calibrate"}
	if b.options.session != "" {
		command = append(command, "--session", b.options.session)
	}
	if b.options.adopt != "" {
		command = append(command, "--adopt", b.options.adopt)
	}
	for _, s := range b.options.flags.settings.All() {
		key, _ := session.Find(s.Key)
		text := s.Text
		if s.Axis != "" {
			text = s.Axis + "=" + text
		}
		command = append(command, "--"+key.Flag, text)
	}
	return append(command, path)
}

// fingerprint is a hash of all that the result depends on besides the recording: the
// program, the settings with their places, and which outputs are made.
func (b *batchWork) fingerprint(path string) string {
	all := []any{calib.SchemaVersion, b.app.Version, b.created, b.options.reports, b.command(path)}
	folder, _ := b.source.folder(path) // known by now
	settings, err := b.source.merged(folder, path, "", nil)
	if err != nil {
		all = append(all, err.Error())
	}
	layers := []*session.Settings{settings}
	if folder.tracks != nil {
		for _, row := range folder.tracks.Rows {
			if row.File == filepath.Base(path) {
				layers = append(layers, row.Settings)
			}
		}
	}
	for _, layer := range layers {
		for _, s := range layer.All() {
			all = append(all, []string{s.Key, s.Axis, s.Text, s.Origin.String(), s.Where})
		}
	}
	text, err := json.Marshal(all)
	if err != nil {
		return "" // texts alone always have a form
	}
	sum := sha256.Sum256(text)
	return hex.EncodeToString(sum[:])
}

// calibrate reads and calibrates the beads of one file.
func (b *batchWork) calibrate(ctx context.Context, path string) ([]batch.Outcome, error) {
	loaded, err := b.source.load(ctx, path)
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	if err != nil {
		return []batch.Outcome{{Problem: problemOfFile(path, err)}}, nil
	}
	options := calib.Options{Adopt: b.options.adopt, Program: calib.Program{Name: "beadwell", Version: b.app.Version, Command: b.command(path)}}
	var outcomes []batch.Outcome
	for _, one := range loaded {
		if role, ok := one.settings.Lookup("role", ""); ok && (role.Word == "free" || role.Word == "background") {
			outcomes = append(outcomes, batch.Outcome{Aside: "role " + role.Word + ": a recording that is not calibrated on its own"})
			continue
		}
		options.Background = one.background
		result, err := b.app.Calibrate(ctx, one.recording, one.settings, options)
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
	if b.options.reports == reportsAll {
		files, err := outputs(ctx, r)
		var all []batch.Output
		for _, f := range files {
			all = append(all, batch.Output{Name: f.name, Content: f.content})
		}
		return all, err
	}
	var stored, page strings.Builder
	if err := report.JSON(&stored, r); err != nil {
		return nil, err
	}
	all := []batch.Output{{Name: resultJSON, Content: []byte(stored.String())}}
	if b.options.reports == reportsHTML {
		if err := report.HTML(&page, r); err != nil {
			return nil, err
		}
		all = append(all, batch.Output{Name: reportHTML, Content: []byte(page.String())})
	}
	return all, ctx.Err()
}

// print writes to standard output; a failed write shows when it is flushed.
func (a *app) print(format string, values ...any) {
	fmt.Fprint(a.Out, report.PlainLines(fmt.Sprintf(format, values...)))
}
