package cli

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"maps"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"syscall"
	"testing"

	"github.com/google/renameio/v2"

	"beadwell/calib"
)

// Each file of --out in turn cannot be replaced: the status is not 0, the file
// that is in the way is untouched, and every other file is whole, old or new.
func TestFaultWalk(t *testing.T) {
	folder := t.TempDir()
	track := writeTrack(t, folder, "run.csv")
	out := filepath.Join(folder, "out")
	calibrate := func() (int, string) {
		w, _, errs := testWorld("")
		return run(context.Background(), []string{"calibrate", "--diameter", "1 um", "--out", out, track}, w), errs.String()
	}
	if got, message := calibrate(); got != StatusDone {
		t.Fatalf("status %d: %s", got, message)
	}
	before := contents(t, filepath.Join(out, "run"))
	for _, name := range slices.Sorted(maps.Keys(before)) {
		blocked := filepath.Join(out, "run", name)
		os.Remove(blocked)
		if err := os.MkdirAll(filepath.Join(blocked, "inside"), 0o777); err != nil {
			t.Fatal(err)
		}
		got, message := calibrate()
		if got == StatusDone || !strings.Contains(message, name) {
			t.Errorf("%s is a folder: status %d, %q", name, got, message)
		}
		if err := os.RemoveAll(blocked); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(blocked, []byte(before[name]), 0o666); err != nil {
			t.Fatal(err)
		}
		after := contents(t, filepath.Join(out, "run"))
		if len(after) != len(before) {
			t.Errorf("%s is a folder: %d files are left, want %d", name, len(after), len(before))
		}
		for other, text := range after {
			if text != before[other] {
				t.Errorf("%s is a folder: %s is torn", name, other)
			}
		}
	}
}

// A write of each file of --out in turn meets a full disk: the status is not 0, the message
// names a file, and every file is whole, old or new.
func TestFullDiskWalk(t *testing.T) {
	folder := t.TempDir()
	track := writeTrack(t, folder, "run.csv")
	out := filepath.Join(folder, "out")
	calibrate := func(diameter string, limit int) (int, string) {
		cmd := exec.Command(os.Args[0], "calibrate", "--diameter", diameter, "--out", out, track)
		cmd.Env = append(os.Environ(), asProgram+"=1")
		if limit >= 0 {
			cmd.Env = append(cmd.Env, fmt.Sprintf("%s=%d", fileLimit, limit))
		}
		var errs bytes.Buffer
		cmd.Stderr = &errs
		var exit *exec.ExitError
		if err := cmd.Run(); err != nil && !errors.As(err, &exit) {
			t.Fatal(err)
		}
		return cmd.ProcessState.ExitCode(), errs.String()
	}
	restore := func(files map[string]string) {
		for name, text := range files {
			if err := os.WriteFile(filepath.Join(out, "run", name), []byte(text), 0o666); err != nil {
				t.Fatal(err)
			}
		}
	}
	if got, message := calibrate("2 um", -1); got != StatusDone {
		t.Fatalf("status %d: %s", got, message)
	}
	renewed := contents(t, filepath.Join(out, "run"))
	if got, message := calibrate("1 um", -1); got != StatusDone {
		t.Fatalf("status %d: %s", got, message)
	}
	old := contents(t, filepath.Join(out, "run"))
	for name, text := range renewed {
		restore(old)
		got, message := calibrate("2 um", len(text)-1)
		if got != StatusFailed || !strings.Contains(message, filepath.Join(out, "run")) {
			t.Errorf("no room for %s: status %d, %q", name, got, message)
		}
		after := contents(t, filepath.Join(out, "run"))
		if len(after) != len(old) || after[name] != old[name] {
			t.Errorf("no room for %s: %d files, want %d, and the old one of its name", name, len(after), len(old))
		}
		for other, text := range after {
			if text != old[other] && text != renewed[other] {
				t.Errorf("no room for %s: %s is torn", name, other)
			}
		}
	}
}

// failing is a file of which one step fails, as on a disk that goes away.
type failing struct {
	pendingFile
	step string
}

func (f failing) Write(p []byte) (int, error) {
	if f.step == "write" {
		n, _ := f.pendingFile.Write(p[:len(p)/2])
		return n, syscall.EIO
	}
	return f.pendingFile.Write(p)
}

func (f failing) CloseAtomicallyReplace() error {
	switch f.step {
	case "sync":
		return &os.PathError{Op: "sync", Path: "tmp", Err: syscall.EIO}
	case "close": // a network disk tells here that it lost what it took
		return &os.PathError{Op: "close", Path: "tmp", Err: syscall.EDQUOT}
	case "rename":
		return &os.LinkError{Op: "rename", Old: "tmp", New: "file", Err: syscall.EROFS}
	}
	return f.pendingFile.CloseAtomicallyReplace()
}

// Making, writing, syncing, closing and renaming each file of a recording in turn fail: there is an error that names the file, the files before it
// are new, it and those behind it are old, and nothing else is left.
func TestEachStepOfEachFileFails(t *testing.T) {
	names := []string{resultJSON, resultText, reportHTML}
	for _, step := range []string{"make", "write", "sync", "close", "rename"} {
		for at, bad := range names {
			out := t.TempDir()
			w, err := newResultWriter(out, true, []string{"run.csv"})
			if err != nil {
				t.Fatal(err)
			}
			content := "old"
			w.files = func(context.Context, *calib.Result) (files []file, err error) {
				for _, name := range names {
					files = append(files, file{name, []byte(content + " " + name)})
				}
				return files, nil
			}
			write := func() error {
				return w.writeAll(context.Background(), []outcome{{path: "run.csv", result: &calib.Result{}}})
			}
			if err := write(); err != nil {
				t.Fatal(err)
			}
			content = "new"
			w.pending = func(name string, opts ...renameio.Option) (pendingFile, error) {
				whole, err := newPendingFile(name, opts...)
				if filepath.Base(name) != bad {
					return whole, err
				}
				if step == "make" {
					return nil, errors.Join(syscall.EMFILE, err, whole.Cleanup())
				}
				return failing{whole, step}, err
			}
			var told *failure
			if err := write(); !errors.As(err, &told) || told.status != StatusFailed || !strings.Contains(err.Error(), bad) {
				t.Errorf("%s of %s: %v", step, bad, err)
			}
			w.close()
			got := contents(t, filepath.Join(out, "run"))
			for i, name := range names {
				want := "new " + name
				if i >= at {
					want = "old " + name
				}
				if got[name] != want {
					t.Errorf("%s of %s: %s is %q, want %q", step, bad, name, got[name], want)
				}
			}
			beside, err := os.ReadDir(out) // temporary names stand in the folder of --out
			if len(got) != len(names) || len(beside) != 1 || err != nil {
				t.Errorf("%s of %s: %d files are left, want %d; beside them %v, %v", step, bad, len(got), len(names), beside, err)
			}
		}
	}
}

func contents(t *testing.T, folder string) map[string]string {
	t.Helper()
	entries, err := os.ReadDir(folder)
	if err != nil {
		t.Fatal(err)
	}
	files := map[string]string{}
	for _, entry := range entries {
		text, err := os.ReadFile(filepath.Join(folder, entry.Name()))
		if err != nil {
			t.Fatal(err)
		}
		files[entry.Name()] = string(text)
	}
	return files
}

// brokenWriter takes a number of bytes, then fails.
type brokenWriter struct{ left int }

func (w *brokenWriter) Write(p []byte) (int, error) {
	if len(p) > w.left {
		n := w.left
		w.left = 0
		return n, errors.New("no space left on device")
	}
	w.left -= len(p)
	return len(p), nil
}

// Standard output that fails anywhere is a message and exit status 1.
func TestBrokenOutput(t *testing.T) {
	track := writeTrack(t, t.TempDir(), "run.csv")
	for _, format := range []string{"text", "json", "csv"} {
		w, whole, _ := testWorld("")
		args := []string{"calibrate", "--diameter", "1 um", "--format", format, track}
		if got := run(context.Background(), args, w); got != StatusDone {
			t.Fatalf("%s: status %d", format, got)
		}
		for _, left := range []int{0, 1, whole.Len() / 2, whole.Len() - 1} {
			w, _, errs := testWorld("")
			w.Out = &brokenWriter{left}
			if got := run(context.Background(), args, w); got != StatusFailed || !strings.Contains(errs.String(), "cannot be written: no space left") {
				t.Errorf("%s after %d bytes: status %d, %q", format, left, got, errs)
			}
		}
	}
}

func TestFolderNames(t *testing.T) {
	for _, test := range []struct{ path, want string }{
		{"run7.csv", "run7"},
		{"tonight/run7.csv.gz", "run7"},
		{"run.7.txt", "run.7"},
		{"-", "stdin"},
		{".csv", "_.csv"},
		{"-rf.csv", "_-rf"},
		{"a b/\x1b[2J\xff.csv", "__2J_"},
		{"Messung µ.csv", "Messung_µ"},
	} {
		if got, err := folderNames([]string{test.path}); err != nil || got[0] != test.want {
			t.Errorf("folderNames(%q) = %q, %v, want %q", test.path, got, err, test.want)
		}
	}
}

func TestSourceDateEpoch(t *testing.T) {
	for text, want := range map[string]string{"": "2026-01-02T03:04:05Z", "0": "1970-01-01T00:00:00Z", "253402300799": "9999-12-31T23:59:59Z",
		"-1": "", "1e3": "", "253402300800": "", "now": ""} {
		w, _, _ := testWorld("")
		w.Getenv = func(string) string { return text }
		got, err := (&app{World: w}).created()
		if (err == nil) != (want != "") || err == nil && got != want {
			t.Errorf("SOURCE_DATE_EPOCH=%q: %q, %v, want %q", text, got, err, want)
		}
	}
}
