package cli

import (
	"context"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/rogpeppe/go-internal/testscript"

	"beadwell/calib"
	"beadwell/calib/session"
	"beadwell/calib/track"
)

// In scripts the program is this test binary with a calibration that is
// invented, so that they test the command line and not the estimates.
//
// With asProgram in the environment the binary is the program too, for tests
// that send it signals.
func TestMain(m *testing.M) {
	if os.Getenv(asProgram) != "" {
		limitFiles(os.Getenv(fileLimit))
		os.Exit(Main(os.Args[1:], inventedWorld()))
	}
	testscript.Main(m, map[string]func(){"beadwell": func() { os.Exit(Main(os.Args[1:], inventedWorld())) }})
}

const asProgram = "BEADWELL_TEST_AS_PROGRAM"

// fileLimit in the environment is the size in bytes beyond which the program cannot write
// a file, as on a disk that is full.
const fileLimit = "BEADWELL_TEST_FILE_LIMIT"

func limitFiles(text string) {
	if text == "" {
		return
	}
	size, err := strconv.ParseUint(text, 10, 64)
	if err == nil {
		err = syscall.Setrlimit(syscall.RLIMIT_FSIZE, &syscall.Rlimit{Cur: size, Max: size})
	}
	if err != nil {
		panic(err)
	}
}

func inventedWorld() World {
	w := Process()
	w.Version, w.Calibrate = "test", invented
	w.Now = func() time.Time { return time.Date(2026, 1, 2, 3, 4, 5, 0, time.UTC) }
	return w
}

// invented is a calibration that depends on the name of the recording alone:
// "doubt" in it makes the routes disagree, "panic" panics, "slow" waits for the
// end of ctx, "deaf" does not even look at it.
func invented(ctx context.Context, r *track.Recording, set *session.Settings, opt calib.Options) (*calib.Result, error) {
	switch {
	case strings.Contains(r.Name, "panic"):
		panic("an index out of range\x1b[2J")
	case strings.Contains(r.Name, "deaf"):
		time.Sleep(time.Hour)
	case strings.Contains(r.Name, "slow"):
		<-ctx.Done()
		return nil, ctx.Err()
	}
	diameter, ok := set.Lookup("bead.diameter", "")
	if !ok {
		return nil, &session.Error{Key: "bead.diameter", Problem: "is not given, and has no default", Hint: "state it: --diameter '1.02(3) um'"}
	}
	result := &calib.Result{
		Schema: calib.SchemaVersion, Program: opt.Program, Settings: calib.ListSettings(set),
		Input:  calib.Input{Name: r.Name, Bead: r.Bead, Size: r.Size, SHA256: r.SHA256},
		ReadAs: calib.ReadAs{Line: r.ReadAs.String()},
		Bead:   calib.Bead{Diameter: calib.Exact(diameter.Value.SI, "m"), Height: calib.Withheld("m", "far")},
		Recording: calib.Recording{Rate: calib.Float(r.Rate), RateOrigin: r.RateOrigin, Samples: r.Samples,
			Duration: calib.Float(float64(r.Samples) / r.Rate), Jitter: calib.Float(math.NaN())},
		Verdict: calib.Verdict{Status: calib.Consistent, Text: "both routes agree", FamilyWiseP: 0.4},
	}
	if role, ok := set.Lookup("role", ""); ok {
		result.Role = role.Word
	}
	if strings.Contains(r.Name, "doubt") {
		result.Verdict = calib.Verdict{Status: calib.Inconsistent, Text: "the routes disagree", FamilyWiseP: 1e-4}
		result.Findings = []calib.Finding{{Code: "routes-differ", Severity: calib.Bad, Text: "by 30 %", Remedy: "look at the bead"}}
	}
	if opt.Adopt != "" || opt.Use != "" {
		result.Choices = &calib.Choices{Adopt: opt.Adopt, Use: opt.Use}
	}
	for _, axis := range r.Axes {
		result.Axes = append(result.Axes, inventedAxis(axis.Name, opt.Adopt))
	}
	return result, nil
}

func inventedAxis(name, adopt string) calib.Axis {
	q := calib.Quantity{Value: 5e-5, Unit: "N/m", Combined: &calib.Uncertainty{Standard: 1e-6,
		Interval68: [2]calib.Float{4.9e-5, 5.1e-5}, Interval95: [2]calib.Float{4.8e-5, 5.2e-5}}}
	basis := "drag and amplitude"
	if adopt != "" {
		basis = adopt
	}
	return calib.Axis{Name: name, Adopted: calib.Adopted{Stiffness: q, Basis: basis},
		Estimates: []calib.Estimate{{Leg: calib.LegSpectrum, Route: calib.RouteDrag, Stiffness: q}}}
}

func TestScripts(t *testing.T) {
	pipelines, err := filepath.Abs("../../../../docs/pipelines")
	if err != nil {
		t.Fatal(err)
	}
	testscript.Run(t, testscript.Params{
		Dir:                 "../../../../testdata/script",
		RequireExplicitExec: true,
		UpdateScripts:       *update,
		Setup: func(e *testscript.Env) error {
			e.Setenv("PIPELINES", pipelines)
			return nil
		},
		Cmds: map[string]func(*testscript.TestScript, bool, []string){"status": status},
	})
}

// status runs a program and requires the exit status that stands in front:
// status 2 beadwell calibrate.
func status(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: status N program arguments")
	}
	want, err := strconv.Atoi(args[0])
	if err != nil {
		ts.Fatalf("status: %v", err)
	}
	got := 0
	if err := ts.Exec(args[1], args[2:]...); err != nil {
		exit, ok := err.(*exec.ExitError)
		if !ok {
			ts.Fatalf("%v", err)
		}
		got = exit.ExitCode()
	}
	if got != want {
		ts.Fatalf("exit status %d, want %d", got, want)
	}
}
