package cli

import (
	"context"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"beadwell/calib"
)

// real runs a command with real calibrations.
func real(args ...string) (int, string, string) {
	w, text, errs := testWorld("")
	w.Calibrate = calib.Calibrate
	status := run(context.Background(), args, w)
	return status, text.String(), errs.String()
}

// Recordings other than a trapped bead in a stage at rest: each is simulated, read back and calibrated for
// real, its stored result fits the schema, and all of its outputs are made from that again, byte for byte.
func TestKinds(t *testing.T) {
	t.Chdir(t.TempDir())
	bead := []string{"--diameter", "1.02(2) um", "--temperature", "24.5(5) C", "--height", "8.0(5) um"}
	fast := []string{"--axes", "x", "--rate", "5 kHz", "--duration", "6 s"}
	volts := []string{"--unit", "V", "--sensitivity", "1.3 um/V"}
	trap := []string{"--stiffness", "x=30 pN/um"}
	drive := []string{"--role", "driven", "--drive-waveform", "sine", "--drive-frequency", "28.3 Hz"}
	amplitude := []string{"--drive-amplitude", "250 nm"}
	for name, args := range map[string][][]string{
		"driven.csv":  {bead, fast, volts, trap, drive, amplitude},
		"volts.csv":   {bead, fast, volts, trap},
		"free.csv":    {bead, {"--role", "free", "--axes", "x", "--rate", "1 kHz", "--exposure", "0.4 ms", "--noise", "8 nm", "--duration", "6 s"}},
		"empty.csv":   {bead, fast, {"--role", "background", "--noise", "5 nm"}},
		"trapped.csv": {bead, fast, trap, {"--noise", "5 nm"}},
	} {
		if status, _, errs := real(flat([][]string{{"simulate", "--out", name}}, args)...); status != StatusDone {
			t.Fatalf("simulate %s: status %d, %s", name, status, errs)
		}
	}
	detector := []string{"--exposure", "0 s"}
	figures := []string{"--figures", "svg,png,pdf", "--figure-data"}
	for name, c := range map[string]struct {
		file   string
		args   [][]string
		status int
		want   []string // expressions in the text
	}{
		"driven, its own column": {"driven.csv", [][]string{bead, detector, drive}, StatusDone,
			[]string{`x +sensitivity +1\.[23]\d*\(\d+\) um/V +by the driven stage`, `stiffness by the driven stage`, `by its column`}},
		"volts": {"volts.csv", [][]string{bead, detector}, StatusDone, []string{`Nothing to cross-check`, `by the computed drag`}},
		"volts, amplitude asked for": {"volts.csv", [][]string{bead, detector, {"--adopt", "amplitude"}}, StatusUsage,
			[]string{`no sensitivity is stated`}},
		"free":         {"free.csv", [][]string{bead, {"--exposure", "0.4 ms", "--role", "free"}}, StatusDone, []string{`diffusion coefficient`, `there is no trap`}},
		"free, larger": {"free.csv", [][]string{{"--diameter", "1.50(2) um"}, bead[2:], {"--exposure", "0.4 ms", "--role", "free"}}, StatusDistrust, []string{calib.CodeFreeDrag}},
		"background":   {"empty.csv", [][]string{{"--role", "background"}}, StatusDone, []string{`noise of the background +(4\.9|5\.0)`}},
		"with a background": {"trapped.csv", [][]string{bead, detector, {"--background", "empty.csv"}}, StatusDone,
			[]string{`noise of the background .* from empty.csv`}},
		"with another's": {"trapped.csv", [][]string{bead, detector, {"--background", "free.csv"}}, StatusUsage,
			[]string{`recording.background.x \(free.csv\) was sampled at 1000 Hz`}},
	} {
		out := strings.ReplaceAll(name, " ", "-")
		status, text, errs := real(flat([][]string{{"calibrate", "--out", out}, figures}, c.args, [][]string{{c.file}})...)
		if status != c.status {
			t.Errorf("%s: status %d, want %d: %s%s", name, status, c.status, text, errs)
			continue
		}
		for _, want := range c.want {
			if !regexp.MustCompile(want).MatchString(text + errs) {
				t.Errorf("%s: no %q in\n%s%s", name, want, text, errs)
			}
		}
		if status == StatusUsage {
			continue
		}
		folder := filepath.Join(out, strings.TrimSuffix(c.file, ".csv"))
		first := contents(t, folder)
		compareRemade(t, folder, first, c.status, figures...)
		document, err := jsonschema.UnmarshalJSON(strings.NewReader(first[resultJSON]))
		if err != nil {
			t.Fatal(err)
		}
		if err := resultSchema(t).Validate(document); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// Recordings of one trap whose stage moves at constant speed make one line of displacement against speed; one alone has
// nothing to be joined with.
func TestJoined(t *testing.T) {
	t.Chdir(t.TempDir())
	bead := []string{"--diameter", "1.02(2) um", "--temperature", "25.0(3) C", "--height", "8.0(3) um", "--role", "driven", "--drive-waveform", "triangle"}
	for name, amplitude := range map[string]string{"a.csv": "4 um", "b.csv": "8 um"} {
		args := flat([][]string{{"simulate", "--out", name}, bead, {"--drive-amplitude", amplitude, "--drive-frequency", "4 Hz",
			"--stiffness", "30 pN/um", "--axes", "x", "--rate", "10 kHz", "--duration", "2 s", "--seed", amplitude[:1]}})
		if status, _, errs := real(args...); status != StatusDone {
			t.Fatalf("simulate %s: status %d, %s", name, status, errs)
		}
	}
	for _, c := range []struct {
		args []string
		want string
		not  bool
	}{
		{[]string{"a.csv", "b.csv"}, `2 recordings with 34 strokes from 64 to 128 um/s`, false},
		{[]string{"--format", "json", "a.csv", "b.csv"}, `"joined_flow": \[`, false},
		{[]string{"a.csv"}, `in one line`, true},
		{[]string{"a.csv"}, `slope of displacement against speed +(29|30)\d`, false},
	} {
		status, text, errs := real(flat([][]string{{"calibrate", "--exposure", "0 s"}, bead, c.args})...)
		if status != StatusDone || regexp.MustCompile(c.want).MatchString(text) == c.not {
			t.Errorf("%v: status %d, %q expected %t in\n%s%s", c.args, status, c.want, !c.not, text, errs)
		}
	}
}

func flat(lists ...[][]string) (all []string) {
	for _, list := range lists {
		for _, part := range list {
			all = append(all, part...)
		}
	}
	return all
}
