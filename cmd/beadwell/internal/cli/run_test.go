package cli

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"
	"github.com/spf13/cobra"

	"beadwell/calib"
	"beadwell/calib/session"
	"beadwell/calib/track"
	"beadwell/cmd/beadwell/internal/report"
)

// testWorld is a world in memory.
func testWorld(in string) (World, *bytes.Buffer, *bytes.Buffer) {
	out, errs := &bytes.Buffer{}, &bytes.Buffer{}
	w := inventedWorld()
	w.In, w.Out, w.Err, w.Colour = strings.NewReader(in), out, errs, false
	w.Getenv = func(string) string { return "" }
	return w, out, errs
}

// writeTrack writes a recording of a few samples, and returns its path.
func writeTrack(t *testing.T, folder, name string) string {
	t.Helper()
	text := "t (s),x (um)\n"
	for i := range 30 {
		text += fmt.Sprintf("%.3f,%.4f\n", float64(i)/1000, float64(i*7919%31)/1000)
	}
	path := filepath.Join(folder, name)
	if err := os.MkdirAll(filepath.Dir(path), 0o777); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, []byte(text), 0o666); err != nil {
		t.Fatal(err)
	}
	return path
}

// Ctrl-C ends a run with 130 within a second, also when the calibration does
// not look at the context, and leaves no file behind.
func TestInterrupted(t *testing.T) {
	for _, name := range []string{"slow.csv", "deaf.csv"} {
		folder := t.TempDir()
		path := writeTrack(t, folder, name)
		w, out, errs := testWorld("")
		ctx, cancel := context.WithCancel(context.Background())
		time.AfterFunc(50*time.Millisecond, cancel)
		start := time.Now()
		got := run(ctx, []string{"calibrate", "--diameter", "1 um", "--out", filepath.Join(folder, "out"), path}, w)
		if took := time.Since(start); got != StatusInterrupted || took > 2*time.Second {
			t.Errorf("%s: status %d after %v, want %d within a second", name, got, took, StatusInterrupted)
		}
		if out.Len() > 0 || !strings.HasPrefix(errs.String(), "beadwell: stopped before the end") {
			t.Errorf("%s: stdout %q, stderr %q", name, out, errs)
		}
		if left, _ := os.ReadDir(filepath.Join(folder, "out")); len(left) > 0 {
			t.Errorf("%s: left %v", name, left)
		}
	}
}

// Each error gets the exit status that is documented for its kind.
func TestProblemOf(t *testing.T) {
	for _, test := range []struct {
		err  error
		want report.Problem
	}{
		{usageError("do", "what %d", 1), report.Problem{Code: "usage", Status: 2, Message: "what 1", Remedy: "do"}},
		{outputError("f", &os.PathError{Op: "open", Path: "/x/f", Err: os.ErrPermission}), report.Problem{Code: "output", Status: 1,
			File: "f", Message: "cannot be written: permission denied", Remedy: "make room or choose another place, then run the same command again"}},
		{&session.Error{Where: "a:b.toml:4:1", Key: "k", Problem: "is odd", Hint: "even it"},
			report.Problem{Code: "settings", Status: 2, File: "a:b.toml", Line: 4, Column: 1, Message: "k is odd", Remedy: "even it"}},
		{fmt.Errorf("reading: %w", context.Canceled), report.Problem{Code: "interrupted", Status: 130, Message: errInterrupted.Error()}},
		{&report.ReadError{File: "r.json", Line: 2, Column: 3, What: "is cut"}, report.Problem{Code: "input", Status: 4, File: "r.json", Line: 2, Column: 3, Message: "is cut"}},
		{&track.Error{File: "f", Code: track.CodeSetting, What: "no", Remedy: "yes"}, report.Problem{Code: "settings", Status: 2, File: "f", Message: "no", Remedy: "yes"}},
		{&track.Errors{Places: []*track.Error{{File: "f", Line: 1, What: "a"}, {File: "f", Line: 2, What: "b"}}, More: 3}, report.Problem{Code: "input", Status: 4, File: "f", Line: 1, Message: "a",
			Others: []report.Problem{{Code: "input", Status: 4, File: "f", Line: 2, Message: "b"}, {Code: "input", Status: 4, Message: "and 3 more"}}}},
		{&calib.SettingError{Key: "k", Axis: "x", Where: "s:1:2", Problem: "is not", Remedy: "be"},
			report.Problem{Code: "settings", Status: 2, File: "s", Line: 1, Column: 2, Message: "k.x is not", Remedy: "be"}},
		{&calib.DataError{Name: "f", Axis: "x", Problem: "is short", Remedy: "more"}, report.Problem{Code: "input", Status: 4, File: "f", Message: "axis x: is short", Remedy: "more"}},
		{errors.New("odd\n  hint: even"), report.Problem{Code: "internal", Status: 1, Message: "odd", Remedy: "even"}},
		{partial([]error{errors.New("a")}, 3), report.Problem{Code: "partial", Status: 5, Message: "1 of 3 recordings failed",
			Others: []report.Problem{{Code: "internal", Status: 1, Message: "a"}}}},
	} {
		if diff := cmp.Diff(test.want, problemOf(test.err), cmpopts.EquateEmpty()); diff != "" {
			t.Errorf("problemOf(%v) (-want +got):\n%s", test.err, diff)
		}
	}
}

// With --format json every way to fail, of every command, is one JSON object on standard error
// that names the file where there is one, and the next step.
func TestEveryErrorAsJSON(t *testing.T) {
	folder := t.TempDir()
	t.Chdir(folder)
	writeTrack(t, folder, "run7.csv")
	writeTrack(t, folder, "doubt.csv")
	prepare(t, "calibrate --diameter 1um --out results run7.csv")
	w, _, _ := testWorld("")
	if got := run(context.Background(), []string{"calibrate", "--diameter", "1um", "--out", "results", "doubt.csv"}, w); got != StatusDistrust {
		t.Fatalf("status %d of a recording in doubt, want %d", got, StatusDistrust)
	}
	for name, text := range map[string]string{
		"bad.csv": "t (s),x (um)\n0,1\n0.1,oops\n", "wrong.toml": "[bead]\ndiametre = \"1 um\"\n", "table.csv": "a,b\n", "other.json": "{}",
		"mixed/run1.csv": "t (s),x (um)\n0,oops\n", "shard/journal-1-of-2.jsonl": `{"schema":"beadwell-journal/1","files":2,"shard":"1/2"}` + "\n",
	} {
		if err := errors.Join(os.MkdirAll(filepath.Dir(name), 0o777), os.WriteFile(name, []byte(text), 0o666)); err != nil {
			t.Fatal(err)
		}
	}
	for _, test := range []struct {
		line   string
		status int
		code   string
		file   string
		at     int // line
	}{
		{"", 2, "usage", "", 0},
		{"calibrat run7.csv", 2, "usage", "", 0},
		{"calibrate", 2, "usage", "", 0},
		{"calibrate run7.csv", 2, "settings", "", 0}, // no diameter
		{"calibrate --diametr 1um run7.csv", 2, "usage", "", 0},
		{"calibrate --diameter 1 run7.csv", 2, "settings", "", 0},
		{"calibrate --session wrong.toml run7.csv", 2, "settings", "wrong.toml", 2},
		{"calibrate --session gone.toml run7.csv", 2, "settings", "gone.toml", 0},
		{"calibrate --diameter 1um gone.csv", 4, "input", "gone.csv", 0},
		{"calibrate --diameter 1um bad.csv", 4, "input", "bad.csv", 3},
		{"calibrate --diameter 1um .", 4, "input", ".", 0},
		{"calibrate --diameter 1um bad.csv run7.csv", 5, "partial", "", 0},
		{"calibrate --diameter 1um --out run7.csv run7.csv", 1, "output", "run7.csv", 0},
		{"calibrate --diameter 1um --out results --use best run7.csv", 2, "usage", "", 0},
		{"check", 2, "usage", "", 0},
		{"check gone.csv", 4, "input", "gone.csv", 0},
		{"check bad.csv", 4, "input", "bad.csv", 3},
		{"batch", 2, "usage", "", 0},
		{"batch gone", 4, "input", "gone", 0},
		{"batch --jobs two .", 2, "usage", "", 0},
		{"batch --shard 3/2 .", 2, "usage", "", 0},
		{"batch --files-from gone", 4, "input", "gone", 0},
		{"batch --out run7.csv mixed", 1, "output", "run7.csv", 0},
		{"batch --diameter 1um mixed", 5, "partial", "", 0},
		{"batch shard", 4, "input", "shard", 0},
		{"collect", 2, "usage", "", 0},
		{"collect gone", 4, "input", "gone", 0},
		{"collect mixed", 4, "input", "mixed", 0},
		{"collect shard", 4, "input", "", 0},
		{"trend", 2, "usage", "", 0},
		{"trend gone", 4, "input", "gone", 0},
		{"drag", 2, "usage", "", 0},
		{"drag --diameter 1um --fluid beer", 2, "settings", "", 0},
		{"drag --diameter 1um --height 0.2um", 2, "usage", "", 0},
		{"plan", 2, "usage", "", 0},
		{"plan --corner 200Hz --diameter 1um", 2, "settings", "", 0},
		{"force run7.csv", 2, "usage", "", 0},
		{"force run7.csv --with gone.json --centre mean", 4, "input", "gone.json", 0},
		{"force run7.csv --with table.csv --centre mean", 4, "input", "table.csv", 0},
		{"force run7.csv --with results/doubt/result.json --centre mean", 3, "distrust", "", 0},
		{"force gone.csv --with results/run7/result.json --centre mean", 4, "input", "gone.csv", 0},
		{"report", 2, "usage", "", 0},
		{"report gone.json", 4, "input", "gone.json", 0},
		{"report table.csv", 4, "input", "table.csv", 0},
		{"report other.json", 4, "input", "other.json", 0},
		{"report --force results/run7/result.json", 2, "usage", "", 0},
		{"rerun", 2, "usage", "", 0},
		{"rerun table.csv", 4, "input", "table.csv", 0},
		{"rerun results/run7/result.json bad.csv", 4, "input", "bad.csv", 0},
		{"rerun results/run7/result.json gone.csv", 4, "input", "gone.csv", 0},
		{"init gone", 2, "usage", "", 0}, // init has no --format, nor have those below
		{"simulate", 2, "usage", "", 0},
		{"explain", 2, "usage", "", 0},
		{"schema", 2, "usage", "", 0},
		{"man", 2, "usage", "", 0},
		{"completion", 2, "usage", "", 0},
	} {
		w, _, errs := testWorld("")
		got := run(context.Background(), append(strings.Fields(test.line), "--format", "json"), w)
		var p report.Problem
		decoder := json.NewDecoder(strings.NewReader(errs.String()))
		decoder.DisallowUnknownFields()
		if err := decoder.Decode(&p); err != nil || strings.Count(errs.String(), "\n") != 1 {
			t.Errorf("beadwell %s: standard error %q is not one object on one line: %v", test.line, errs, err)
			continue
		}
		if got != test.status || p.Status != got || p.Code != test.code || p.File != test.file || p.Line != test.at {
			t.Errorf("beadwell %s: status %d, %+v; want status %d, code %s, file %q, line %d", test.line, got, p, test.status, test.code, test.file, test.at)
		}
		if p.Message == "" || p.Remedy == "" && len(p.Others) == 0 {
			t.Errorf("beadwell %s: %+v has no message or no remedy", test.line, p)
		}
		if p.File != "" && strings.HasPrefix(p.Message, p.File) {
			t.Errorf("beadwell %s: the message %q repeats the file", test.line, p.Message)
		}
	}
}

// An error as JSON is one object on one line, whatever is in it.
func TestErrorAsJSON(t *testing.T) {
	w, out, errs := testWorld("")
	if got := run(context.Background(), []string{"calibrate", "--format=json", "\x1b[2J\u202e\xff.csv"}, w); got != StatusInput {
		t.Errorf("status %d, want %d", got, StatusInput)
	}
	var p report.Problem
	if err := json.Unmarshal(errs.Bytes(), &p); err != nil || p.Status != StatusInput || strings.Count(errs.String(), "\n") != 1 || out.Len() > 0 {
		t.Errorf("stderr %q, stdout %q, %v", errs, out, err)
	}
	if strings.ContainsAny(strings.TrimSuffix(errs.String(), "\n"), "\x1b\u202e\n") {
		t.Errorf("stderr steers the terminal: %q", errs)
	}
}

// The flags reach the command as they are written.
func TestCalibrateFlags(t *testing.T) {
	var got calibrateOptions
	a := &app{}
	cmd := a.calibrateCommand(func(_ context.Context, _ *app, o calibrateOptions) error { got = o; return nil })
	cmd.SetArgs([]string{"--format", "csv", "--out", "o", "--force", "--adopt", "drag", "--use", "good", "-q", "--session", "s", "--diameter", "1.02(3) um", "--noise", "x=4 nm", "a", "b"})
	if err := cmd.Execute(); err != nil {
		t.Fatal(err)
	}
	if got.format != "csv" || got.out != "o" || !got.force || got.choices.adopt != "drag" || got.choices.use != "good" || !got.quiet || got.session != "s" || !cmp.Equal(got.tracks, []string{"a", "b"}) {
		t.Errorf("options %+v", got)
	}
	noise, ok := got.flags.settings.Lookup("recording.noise", "x")
	if !ok || noise.Value.SI != 4e-9 || noise.Origin != session.FromFlag || noise.Where != "--noise" {
		t.Errorf("--noise x=4 nm gives %+v", noise)
	}
}

// The shell is offered the words of flags that take one.
func TestCompletion(t *testing.T) {
	for _, test := range []struct{ args, want string }{
		{"calibrate --format ", "text\njson\ncsv\n"},
		{"calibrate --adopt ", "drag\namplitude\n"},
		{"calibrate --decimal ", "point\ncomma\n"},
		{"report ", "json\n:8\n"}, // files that end so
		{"drag --format ", "text\njson\ncsv\n"},
		{"calib", "calibrate\t"},
	} {
		w, out, _ := testWorld("")
		if got := run(context.Background(), append([]string{"__complete"}, strings.Split(test.args, " ")...), w); got != StatusDone || !strings.HasPrefix(out.String(), test.want) {
			t.Errorf("completion of %q: status %d, %q, want %q", test.args, got, out, test.want)
		}
	}
}

// Every setting is a flag of calibrate, and no flag of a setting hides one of the command.
func TestEverySettingIsAFlag(t *testing.T) {
	cmd := (&app{}).calibrateCommand(nil)
	for _, key := range session.Keys() {
		if f := cmd.Flags().Lookup(key.Flag); f == nil || f.Annotations[settingGroup] == nil {
			t.Errorf("%s has no flag --%s", key.Name, key.Flag)
		}
	}
}

// The examples in the help do what they say.
func TestExamples(t *testing.T) {
	for _, cmd := range (&app{World: inventedWorld()}).root().Commands() {
		if cmd.Name() == "help" || cmd.Name() == "completion" {
			continue
		}
		if !cmd.HasExample() || cmd.Short == "" {
			t.Errorf("%s has no example or no purpose", cmd.Name())
		}
		for line := range strings.Lines(cmd.Example) {
			t.Run(strings.TrimSpace(line), func(t *testing.T) { runExample(t, strings.TrimSpace(line)) })
		}
	}
}

func runExample(t *testing.T, line string) {
	folder := t.TempDir()
	t.Chdir(folder)
	for _, name := range []string{"run7.csv", "run8.csv", "tonight/run7.csv"} {
		writeTrack(t, folder, name)
	}
	if err := os.WriteFile("session.toml", []byte("[bead]\ndiameter = \"1 um\"\n"), 0o666); err != nil {
		t.Fatal(err)
	}
	if strings.HasPrefix(line, "beadwell init") {
		os.Remove("session.toml")
	} else if err := os.WriteFile("tonight/session.toml", []byte("[bead]\ndiameter = \"1 um\"\n"), 0o666); err != nil {
		t.Fatal(err)
	}
	input, line := pipedInto(line)
	args := words(line)[1:]
	switch args[0] {
	case "collect":
		prepare(t, "batch --out monday tonight", "batch --out tuesday run8.csv", "batch --out results tonight", "batch --shard 1/3 --out shard-1 tonight", "batch --shard 2/3 --out shard-2 tonight", "batch --shard 3/3 --out shard-3 tonight")
	case "trend":
		prepare(t, "batch --out results/2026-03 tonight", "batch --out results/2026-04 tonight", "batch --out results/2026-05 tonight")
		found, err := filepath.Glob(args[len(args)-1]) // as a shell does
		if err != nil || len(found) != 3 {
			t.Fatal(found, err)
		}
		args = append(args[:len(args)-1], found...)
	}
	if strings.Contains(line, "results/run7/result.json") {
		w, _, _ := testWorld("")
		if run(context.Background(), []string{"calibrate", "--out", "results", "run7.csv"}, w) != StatusDone {
			t.Fatal("the result that the example starts from cannot be made")
		}
	}
	w, _, errs := testWorld(input)
	if got := run(context.Background(), args, w); got != StatusDone {
		t.Errorf("%s: status %d, %s", line, got, errs)
	}
}

// pipedInto takes a pipe off the front of a command line; what comes through it here are
// the names of two tracks.
func pipedInto(line string) (input, command string) {
	if _, after, found := strings.Cut(line, " | "); found {
		return "run7.csv\nrun8.csv\n", after
	}
	return "", line
}

// prepare runs command lines that an example starts from.
func prepare(t *testing.T, lines ...string) {
	t.Helper()
	for _, line := range lines {
		w, _, errs := testWorld("")
		if got := run(context.Background(), strings.Fields(line), w); got != StatusDone {
			t.Fatalf("beadwell %s: status %d, %s", line, got, errs)
		}
	}
}

// words splits a command line as a shell does, as far as the examples need it,
// and drops a redirection of the output.
func words(line string) []string {
	line, _, _ = strings.Cut(line, " > ")
	var all []string
	for i, part := range strings.Split(line, "'") {
		if i%2 == 1 {
			all = append(all, part)
		} else {
			all = append(all, strings.Fields(part)...)
		}
	}
	return all
}

// Commands say what they are given, not how they are made: no placeholder of
// the flag library remains in a help text.
func TestHelpPlaceholders(t *testing.T) {
	root := (&app{World: inventedWorld()}).root()
	for _, cmd := range append(root.Commands(), root) {
		var out bytes.Buffer
		cmd.SetOut(&out)
		if err := cmd.Help(); err != nil {
			t.Fatal(err)
		}
		for _, bad := range []string{"stringArray", "--format string", "`"} {
			if strings.Contains(out.String(), bad) && cmd.Name() != "completion" {
				t.Errorf("help of %s holds %q", cmd.Name(), bad)
			}
		}
		checkWidth(t, cmd, out.String())
	}
}

// checkWidth holds the written part of a help text to a terminal's width.
func checkWidth(t *testing.T, cmd *cobra.Command, text string) {
	t.Helper()
	text, _, _ = strings.Cut(text, "Usage:")
	for line := range strings.Lines(text) {
		if n := len([]rune(line)); n > 100 && cmd.Name() != "completion" {
			t.Errorf("help of %s has a line of %d characters: %s", cmd.Name(), n, line)
		}
	}
}

// Several recordings tell their progress: a bar on a terminal, a line every
// quarter of a minute elsewhere, nothing with --quiet or for one recording.
func TestProgress(t *testing.T) {
	for _, test := range []struct {
		all            int
		watched, quiet bool
		want           string
	}{
		{4, false, false, "beadwell: 2 of 4 recordings done, about 27s left\n"},
		{1, false, false, ""},
		{1, true, false, ""},
		{4, false, true, ""},
		{4, true, true, ""},
		{4, true, false, "recordings"},
	} {
		w, _, errs := testWorld("")
		now := time.Unix(0, 0)
		w.Now, w.Watched = func() time.Time { now = now.Add(9 * time.Second); return now }, test.watched
		p := (&app{World: w}).newProgress(test.all, test.quiet)
		for range test.all {
			p.step()
		}
		p.end()
		if got := errs.String(); test.want == "" && got != "" || !strings.Contains(got, test.want) {
			t.Errorf("%+v: %q", test, got)
		}
	}
}

// A hint that several places share stands once, behind the last of them.
func TestProblemText(t *testing.T) {
	err := &track.Errors{Places: []*track.Error{{File: "f", Line: 1, What: "a", Remedy: "do"}, {File: "f", Line: 2, Column: 3, What: "b", Remedy: "do"}, {File: "f", What: "c", Remedy: "else"}}}
	want := "beadwell: f:1: a\nbeadwell: f:2:3: b\n  hint: do\nbeadwell: f: c\n  hint: else\n"
	if got := problemText(problemOf(err)); got != want {
		t.Errorf("problemText = %q, want %q", got, want)
	}
}

// Every code is explained, and explained once.
func TestCodes(t *testing.T) {
	seen := map[string]bool{}
	for _, e := range calib.Explanations() {
		if seen[e.Code] || e.Title == "" || e.Long == "" {
			t.Errorf("the code %q is explained twice or not at all", e.Code)
		}
		seen[e.Code] = true
	}
}
