//go:build unix

package batch

import (
	"io/fs"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"
)

// Pipes, folders with the name of a file, links that lead nowhere or in a circle, and folders that cannot be read have a failed row each,
// for every run, and the others are done. A pipe without a writer would keep a reader for ever.
func TestNoFiles(t *testing.T) {
	job, calls := invented(t, 1)
	folder := filepath.Dir(job.Files[0])
	at := func(name string) string { return filepath.Join(folder, name) }
	for name, err := range map[string]error{
		"pipe":    syscall.Mkfifo(at("pipe.csv"), 0o666),
		"folder":  os.Mkdir(at("folder.csv"), 0o777),
		"circle":  os.Symlink("circle.csv", at("circle.csv")),
		"to here": os.Symlink(".", at("here.csv")),
		"locked":  os.Mkdir(at("locked"), 0),
		"below":   os.Symlink(".", at("loop")),
	} {
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
	}
	locked := false // whoever may read everything meets an empty folder
	if _, err := os.ReadDir(at("locked")); err != nil {
		locked = true
	}
	found, err := Find([]string{folder}, true)
	if err != nil {
		t.Fatal(err)
	}
	job.Files = append(found.Paths, at("folder.csv"))
	for range 2 {
		done := make(chan *Summary)
		go func() { done <- run(t, job) }()
		var s *Summary
		select {
		case s = <-done:
		case <-time.After(time.Minute):
			t.Fatal("the run waits for a pipe")
		}
		reasons := map[string]string{}
		for _, row := range s.Rows {
			if row.Status == Failed {
				reasons[filepath.Base(row.File)] = row.Reason
			}
		}
		want := map[string]string{"pipe.csv": "is a pipe, not a file", "folder.csv": "is a folder, not a file", "here.csv": "is a folder, not a file"}
		if locked {
			want["locked"] = "is a folder that cannot be read: permission denied"
		}
		for name, reason := range want {
			if reasons[name] != reason {
				t.Errorf("%s: %q, want %q", name, reasons[name], reason)
			}
		}
		if len(s.Rows) != len(job.Files) {
			t.Errorf("%d rows for %d files", len(s.Rows), len(job.Files))
		}
	}
	if calls.Load() != 3 { // run1.csv once; circle.csv, which cannot be looked at, is left to the reader in both runs
		t.Errorf("%d recordings were read, want 3", calls.Load())
	}
}

// What stands in the place of a file is named, with what to do.
func TestNoFileIsNamed(t *testing.T) {
	for mode, want := range map[fs.FileMode]string{fs.ModeNamedPipe: "a pipe", fs.ModeSocket: "a socket", fs.ModeDevice: "a device", fs.ModeDir: "cannot be read: no such"} {
		if p := noFile("gone", mode); !strings.Contains(p.Message, want) || p.Remedy == "" || p.File != "gone" || p.Status != 4 {
			t.Errorf("%v: %+v, want %q", mode, p, want)
		}
	}
}
