package cli

import (
	"bytes"
	"encoding/xml"
	"errors"
	"io"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"beadwell/cmd/beadwell/internal/report"
)

// program starts the command line as a process of its own.
func program(t *testing.T, args ...string) (*exec.Cmd, *bytes.Buffer) {
	t.Helper()
	cmd := exec.Command(os.Args[0], args...)
	cmd.Env = append(os.Environ(), asProgram+"=1")
	var errs bytes.Buffer
	cmd.Stderr = &errs
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	return cmd, &errs
}

// SIGINT and SIGTERM end the process with status 130 and one message.
func TestSignals(t *testing.T) {
	track := writeTrack(t, t.TempDir(), "slow.csv")
	for _, signal := range []os.Signal{os.Interrupt, syscall.SIGTERM} {
		cmd, errs := program(t, "calibrate", "--diameter", "1 um", track)
		time.Sleep(200 * time.Millisecond) // until it waits in the calibration
		if err := cmd.Process.Signal(signal); err != nil {
			t.Fatal(err)
		}
		var exit *exec.ExitError
		if err := cmd.Wait(); !errors.As(err, &exit) || exit.ExitCode() != StatusInterrupted {
			t.Errorf("%v: %v, want exit status %d", signal, err, StatusInterrupted)
		}
		if !strings.HasPrefix(errs.String(), "beadwell: stopped before the end") {
			t.Errorf("%v: stderr %q", signal, errs)
		}
	}
}

// Killed at any moment, the program leaves no file that is torn: each has its
// name only when it is whole. What is left over is hidden by a dot in front.
func TestKillLoop(t *testing.T) {
	folder := t.TempDir()
	track, out := writeTrack(t, folder, "run.csv"), filepath.Join(folder, "out")
	rng := rand.New(rand.NewPCG(1, 1))
	const rounds = 12
	for range rounds {
		cmd, _ := program(t, "calibrate", "--diameter", "1 um", "--out", out, track)
		time.Sleep(time.Duration(50+rng.IntN(400)) * time.Millisecond)
		cmd.Process.Kill()
		cmd.Wait()
		entries, err := os.ReadDir(filepath.Join(out, "run"))
		if err != nil && !errors.Is(err, os.ErrNotExist) {
			t.Fatal(err)
		}
		for _, entry := range entries {
			if !strings.HasPrefix(entry.Name(), ".") {
				checkWhole(t, filepath.Join(out, "run", entry.Name()))
			}
		}
	}
}

// checkWhole looks for the end of a file, by its kind.
func checkWhole(t *testing.T, path string) {
	t.Helper()
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	whole := bytes.HasSuffix(text, []byte("\n"))
	switch filepath.Ext(path) {
	case ".json":
		_, err := report.ReadJSON(bytes.NewReader(text))
		whole = err == nil
	case ".html":
		whole = strings.HasSuffix(strings.TrimSpace(string(text)), "</html>")
	case ".png":
		whole = bytes.Contains(text, []byte("IEND"))
	case ".svg":
		decoder := xml.NewDecoder(bytes.NewReader(text))
		for err = nil; err == nil; {
			_, err = decoder.Token()
		}
		whole = err == io.EOF
	}
	if !whole {
		t.Errorf("%s is torn (%d bytes)", filepath.Base(path), len(text))
	}
}
