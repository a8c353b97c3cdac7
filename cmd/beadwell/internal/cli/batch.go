package cli

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"runtime"
	"slices"
	"strconv"

	"github.com/spf13/cobra"

	"beadwell/cmd/beadwell/internal/batch"
	"beadwell/cmd/beadwell/internal/report"
)

// batchOptions is what the command line of batch says.
type batchOptions struct {
	arguments []string
	filesFrom string
	below     bool
	session   string
	format    string
	out       string
	unasked   bool // out is the default
	reports   string
	choices   choices
	drawing   drawing
	figures   bool // the figures were asked for
	jobs      int
	shard     string
	dryRun    bool
	quiet     bool
	series    seriesFlags
	flags     settingFlags
}

// defaultOut is where results go unless --out says otherwise.
const defaultOut = "beadwell-results"

// The words of --reports.
const (
	reportsNone = "none"
	reportsHTML = "html"
	reportsAll  = "all"
)

const batchLong = `batch calibrates every recording of a folder, as calibrate does, and writes what
they say together. It goes on after a recording that fails.

FOLDER is a folder, a recording, or a pattern such as 'tonight/*.csv'. In a
folder, files that end in csv, tsv, txt, dat, asc or npy, compressed or not, are
recordings; session.toml and tracks.csv beside them hold their settings.
Recordings that tracks.csv names belong to the folder whatever their ending.
A recording of the role free (laser off) gives the measured drag of the bead, which
the trapped recordings of the same bead use beside the computed one.

Into the folder of --out go, besides a folder for each recording:

    summary.csv    a row for each recording, failed ones too, with the reason
    summary.json   the same, with the series
    index.html     table, series with their figures, and links to the reports
    journal.jsonl  what was done, from which the next run goes on

A run that was stopped, even by kill -9, goes on where it was when the same
command is given again: a recording is done again when its content, its
settings, or the program have changed, or its outputs are not as they were
written. The outputs are the same bytes for any number of --jobs.

Series are fitted from three recordings on: stiffness against power, measured
drag against height (where the surface is), repeats, and the ratio of the axes.

With --shard 2/8 the second of eight parts of the list is done; collect joins them.`

func (a *app) batchCommand(run func(context.Context, *app, batchOptions) error) *cobra.Command {
	var o batchOptions
	cmd := &cobra.Command{
		Use:   "batch FOLDER...",
		Short: "Every recording of a folder: results, summary, series, one index page",
		Long:  batchLong,
		Example: `  beadwell batch tonight
  beadwell batch --diameter '1.02(3) um' --out results 'tonight/*.csv'
  beadwell batch --shard 2/8 --out shard-2 tonight
  find /data -name '*.csv' | beadwell batch --files-from - --out results`,
		RunE: func(cmd *cobra.Command, args []string) error {
			o.arguments = args
			if err := notEmpty(cmd, "out", "session", "adopt", "use", "files-from", "shard", "stiffness-slope"); err != nil {
				return err
			}
			if err := o.validate(); err != nil {
				return err
			}
			if err := errors.Join(o.choices.check(cmd), o.drawing.check(cmd, o.out)); err != nil {
				return err
			}
			o.unasked = !cmd.Flags().Changed("out")
			o.figures = o.reports == reportsAll || cmd.Flags().Changed("figures") || o.drawing.data
			return run(cmd.Context(), a, o)
		},
	}
	flags := cmd.Flags()
	flags.StringVar(&o.filesFrom, "files-from", "", "take recordings or folders from the lines of `FILE`, or with NUL between them; - is standard input")
	flags.BoolVar(&o.below, "below", false, "look into the folders of a folder too")
	flags.StringVar(&o.session, "session", "", "settings `FILE` in place of session.toml beside each track")
	flags.StringVar(&o.format, "format", "text", "form of the summary on standard output: `text|json|csv`")
	flags.StringVar(&o.out, "out", defaultOut, "write results into `FOLDER`")
	flags.StringVar(&o.reports, "reports", reportsHTML, "beside result.json, for each recording: `none|html|all`; all adds text, CSV and figures, which --figures adds alone")
	o.choices.add(cmd)
	flags.IntVar(&o.jobs, "jobs", 0, "recordings at the same time, a `number`; 0 is SLURM_CPUS_PER_TASK, else the processors")
	flags.StringVar(&o.shard, "shard", "", "do one part of the list alone, as `i/n`")
	flags.BoolVar(&o.dryRun, "dry-run", false, "say what would be done, and do nothing")
	flags.BoolVarP(&o.quiet, "quiet", "q", false, "no progress and no warnings on standard error")
	o.series.add(flags)
	addDrawingFlags(cmd, &o.drawing)
	addSettingFlags(flags, &o.flags)
	completeSettings(cmd)
	completeWords(cmd, "format", formats...)
	completeWords(cmd, "reports", reportsNone, reportsHTML, reportsAll)
	return cmd
}

func (o batchOptions) validate() error {
	if len(o.arguments) == 0 && o.filesFrom == "" {
		return usageError("write: beadwell batch FOLDER", "beadwell batch needs a folder, a recording or --files-from")
	}
	if err := oneOf("format", o.format, formats...); err != nil {
		return err
	}
	if err := oneOf("reports", o.reports, reportsNone, reportsHTML, reportsAll); err != nil {
		return err
	}
	if o.jobs < 0 {
		return usageError("give 1 or more, or leave it out", "--jobs %d is no number of recordings at the same time", o.jobs)
	}
	if _, err := parseShard(o.shard); err != nil {
		return err
	}
	_, err := o.series.options()
	return err
}

// parseShard reads i/n.
func parseShard(text string) (batch.Shard, error) {
	if text == "" {
		return batch.Shard{}, nil
	}
	var s batch.Shard
	if n, err := fmt.Sscanf(text, "%d/%d", &s.Number, &s.Of); n != 2 || err != nil || fmt.Sprintf("%d/%d", s.Number, s.Of) != text ||
		s.Number < 1 || s.Number > s.Of {
		return s, usageError("write it like --shard 2/8, from 1/8 to 8/8", "--shard %q is no part of a whole", text)
	}
	return s, nil
}

// workers is the number of recordings at the same time.
func (a *app) workers(jobs int) (int, error) {
	if jobs > 0 {
		return jobs, nil
	}
	text := a.Getenv("SLURM_CPUS_PER_TASK")
	if text == "" {
		return runtime.GOMAXPROCS(0), nil
	}
	n, err := strconv.Atoi(text)
	if err != nil || n < 1 {
		return 0, usageError("set it to a number from 1, unset it, or give --jobs", "SLURM_CPUS_PER_TASK %q is no number of processors", text)
	}
	return n, nil
}

func runBatch(ctx context.Context, a *app, o batchOptions) error {
	job, aside, err := a.batchJob(o)
	if err != nil {
		return err
	}
	if o.format == "json" && !a.Watched {
		o.quiet = true // standard error is for a program, which expects an error there or nothing
	}
	for _, path := range aside {
		if !o.quiet {
			a.say("beadwell: %s: does not look like a recording, left out", path)
		}
	}
	for _, g := range job.Growing {
		if !o.quiet {
			a.say("beadwell: %s: %s", g.Path, g.Note)
		}
	}
	if o.dryRun {
		return a.printPlan(ctx, job)
	}
	if !o.quiet && o.unasked && slices.ContainsFunc(job.Files, func(path string) bool { return filepath.Dir(path) == "." }) {
		a.say("beadwell: results go into %s, in the folder of the recordings; --out takes another place", o.out)
	}
	var bar *progress
	job.Plan = func(all int) { bar = a.newProgress(all, o.quiet) }
	job.Step = func() { bar.step() }
	summary, err := batch.Run(ctx, job)
	if bar != nil {
		bar.end()
	}
	if err != nil {
		return batchError(o.out, err)
	}
	written, reasons := filepath.Join(o.out, batch.IndexName), seeReasons(o.out)
	if o.shard != "" { // the summary is made when the shards are joined
		written, reasons = o.out+"; beadwell collect joins the shards", "see --format csv, or the column reason when the shards are joined"
	}
	if err := a.printSummary(summary, o.format, written); err != nil {
		return err
	}
	return concludeBatch(summary, reasons)
}

// batchError gives an error of a batch its status.
func batchError(out string, err error) error {
	if batch.IsOutput(err) {
		return outputError(out, err)
	}
	return err
}

func seeReasons(out string) string {
	return "see the column reason of " + filepath.Join(out, batch.SummaryCSV)
}

// concludeBatch turns the rows into the error of the whole run; reasons says where those
// of the failed recordings stand.
func concludeBatch(s *batch.Summary, reasons string) error {
	_, distrusted, failed, _ := s.Counts()
	switch {
	case failed > 0:
		var told []report.Problem
		for _, row := range s.Rows {
			if row.Problem != nil {
				told = append(told, *row.Problem)
			}
		}
		return &failure{status: StatusPartial, code: codePartial, err: fmt.Errorf("%d of %d recordings failed", failed, len(s.Rows)),
			remedy: reasons, told: told}
	case distrusted > 0:
		return quiet{StatusDistrust}
	}
	return nil
}

func (a *app) printPlan(ctx context.Context, job batch.Job) error {
	tasks, err := batch.Plan(ctx, job)
	if err != nil {
		return batchError(job.Out, err)
	}
	open := 0
	for _, t := range tasks {
		word := "unchanged"
		if !t.Done {
			word = "calibrate"
			open++
		}
		a.print("%s  %s -> %s", word, t.Path, filepath.Join(job.Out, t.Folder))
	}
	a.print("%d to calibrate, %d unchanged", open, len(tasks)-open)
	return nil
}
