package cli

import (
	"context"
	"strings"
	"testing"

	"beadwell/calib"
)

// The number of draws and the seed reach the calibration; without draws none are asked for.
func TestMonteCarloFlags(t *testing.T) {
	for _, test := range []struct {
		args []string
		want calib.MonteCarloOptions
	}{
		{[]string{"--monte-carlo", "5000", "--seed", "18446744073709551615", "a"}, calib.MonteCarloOptions{Draws: 5000, Seed: 1<<64 - 1}},
		{[]string{"--monte-carlo", "1000", "a"}, calib.MonteCarloOptions{Draws: 1000, Seed: 1}},
		{[]string{"a"}, calib.MonteCarloOptions{}},
	} {
		var got calibrateOptions
		cmd := (&app{}).calibrateCommand(func(_ context.Context, _ *app, o calibrateOptions) error { got = o; return nil })
		cmd.SetArgs(test.args)
		if err := cmd.Execute(); err != nil {
			t.Fatal(err)
		}
		if m := got.choices.options().MonteCarlo; m != test.want {
			t.Errorf("%v asks for %+v, want %+v", test.args, m, test.want)
		}
	}
}

// What has no effect, and what cannot be, is refused before the recording is read.
func TestMonteCarloRefusals(t *testing.T) {
	for _, test := range []struct{ args, want string }{
		{"calibrate --seed 3 a.csv", "--seed has no effect without --monte-carlo"},
		{"calibrate --monte-carlo 10 a.csv", "--monte-carlo 10 is not between 1000 and 10000000"},
		{"calibrate --monte-carlo -5000 a.csv", "--monte-carlo -5000 is not between"},
	} {
		w, out, errs := testWorld("")
		if got := run(context.Background(), strings.Fields(test.args), w); got != StatusUsage || out.Len() > 0 || !strings.Contains(errs.String(), test.want) {
			t.Errorf("%s: status %d, %q, want %q", test.args, got, errs, test.want)
		}
	}
}

// The choices of a stored result make the same options again.
func TestStoredDraws(t *testing.T) {
	got, err := (&calib.Choices{Adopt: calib.RouteDrag, Draws: 5000, Seed: "18446744073709551615"}).Options()
	want := calib.Options{Adopt: calib.RouteDrag, MonteCarlo: calib.MonteCarloOptions{Draws: 5000, Seed: 1<<64 - 1}}
	if err != nil || got.Adopt != want.Adopt || got.MonteCarlo != want.MonteCarlo {
		t.Errorf("options %+v, %v, want %+v", got, err, want)
	}
	if _, err := (&calib.Choices{Draws: 5000, Seed: "x"}).Options(); err == nil {
		t.Error("a seed that is no number made options")
	}
}
