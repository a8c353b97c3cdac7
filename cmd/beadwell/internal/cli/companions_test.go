package cli

import (
	"context"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"beadwell/calib"
)

// calibrated runs a command that calibrates indeed; what it says comes with single spaces.
func calibrated(args ...string) (int, string) {
	w, text, errs := testWorld("")
	w.Calibrate = calib.Calibrate
	status := run(context.Background(), args, w)
	return status, strings.Join(strings.Fields(text.String()+errs.String()), " ")
}

// A trap that the laser heats by 10 K, which nobody stated. Alone the recording cannot tell it from a wrong
// scale; with that of the free bead, which the session file or a flag names, it can, also in a batch and in a rerun.
func TestCompanions(t *testing.T) {
	t.Chdir(t.TempDir())
	bead := []string{"--diameter", "1.03 um", "--height", "6 um", "--rate", "10 kHz", "--axes", "x", "--noise", "1 nm"}
	for name, args := range map[string][]string{
		"day/trapped.csv": {"--stiffness", "31 pN/um", "--temperature", "35 C", "--duration", "20 s", "--seed", "11"},
		"day/free.csv":    {"--role", "free", "--temperature", "25 C", "--duration", "1 s", "--seed", "12"},
	} {
		if status, text := calibrated(flat([][]string{{"simulate", "--out", name}, bead, args})...); status != StatusDone {
			t.Fatalf("simulate %s: status %d, %s", name, status, text)
		}
	}
	const session = `bead.diameter = "1.030(15) um"
medium.temperature = "25.0(5) C"
chamber.height = "6.0(2) um"
recording.noise = "1 nm"
`
	write := func(name, text string) {
		if err := os.WriteFile(filepath.Join("day", name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	write("tracks.csv", "file,role\ntrapped.csv,trapped\nfree.csv,free\n")
	write("session.toml", session)
	const alone = "One cause alone would reconcile the routes: a temperature at the trap alone"
	for _, c := range []struct {
		args   []string
		status int
		want   []string
	}{
		{[]string{"calibrate", "--free-bead", "none", "day/trapped.csv"}, StatusDistrust, []string{"this recording cannot tell them apart"}},
		{[]string{"calibrate", "day/trapped.csv"}, StatusDistrust, []string{alone}}, // a free bead in the track list joins by itself
		{[]string{"calibrate", "--free-bead", "none", "--companions", "day/free.csv", "day/trapped.csv"}, StatusDistrust, []string{alone, "Weighed together with day/free.csv", "eyewear"}},
		{[]string{"calibrate", "--companions", "nowhere.csv", "day/trapped.csv"}, StatusInput, []string{"nowhere.csv: no such file or directory"}},
	} {
		check(t, calibrated, c.args, c.status, c.want)
	}
	write("session.toml", session+`recording.companions = "trapped.csv; free.csv"`+"\n") // for the whole folder: each passes itself over
	for _, c := range []struct {
		args   []string
		status int
		want   []string
	}{
		{[]string{"calibrate", "--out", "results", "day/trapped.csv"}, StatusDistrust, []string{alone}},
		{[]string{"rerun", "results/trapped/result.json"}, StatusDone, []string{"same"}},
		{[]string{"batch", "--out", "all", "day"}, StatusDistrust, nil},
	} {
		check(t, calibrated, c.args, c.status, c.want)
	}
	stored, err := os.ReadFile("all/trapped/result.json")
	if err != nil || !strings.Contains(string(stored), `"companions": [`) {
		t.Errorf("the batch's result names no companion: %v", err)
	}
}

// Flags that hold for the recording in question do not make another bead the same one, nor move the free bead to its height; a free
// bead that only a flag names needs no track list.
func TestFreeBeadAndFlags(t *testing.T) {
	t.Chdir(t.TempDir())
	common := []string{"--rate", "10 kHz", "--axes", "x", "--noise", "1 nm"}
	for name, args := range map[string][]string{
		"day/trapped.csv": {"--stiffness", "31 pN/um", "--diameter", "1.03 um", "--height", "2 um", "--duration", "5 s", "--seed", "1"},
		"day/free.csv":    {"--role", "free", "--diameter", "1.03 um", "--height", "9 um", "--duration", "1 s", "--seed", "2"},
	} {
		if status, text := calibrated(flat([][]string{{"simulate", "--out", name}, common, args})...); status != StatusDone {
			t.Fatalf("simulate %s: status %d, %s", name, status, text)
		}
	}
	write := func(name, text string) {
		if err := os.WriteFile(filepath.Join("day", name), []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	write("session.toml", "medium.temperature = \"22(1) C\"\nrecording.noise = \"1 nm\"\n")
	list := func(diameter string) {
		write("tracks.csv", "file,role,diameter,height\ntrapped.csv,trapped,1.03(1) um,4 um\nfree.csv,free,"+diameter+",9 um\n")
	}
	const used = "stiffness by the free bead's drag"
	for _, c := range []struct {
		diameter string
		flags    []string
		status   int
		joined   bool
	}{
		{"1.50(1) um", []string{"--height", "2 um", "--diameter", "1.03(1) um"}, StatusDone, false},
		{"1.03(1) um", []string{"--height", "2 um", "--diameter", "1.02(1) um"}, StatusDone, true}, // at the height of the free bead it would be 18 % off
	} {
		list(c.diameter)
		args := append([]string{"calibrate", "day/trapped.csv"}, c.flags...)
		if status, text := calibrated(args...); status != c.status || strings.Contains(text, used) != c.joined {
			t.Errorf("free bead of %s, %q: status %d: %s", c.diameter, args, status, text)
		}
	}
	if err := os.Remove("day/tracks.csv"); err != nil {
		t.Fatal(err)
	}
	check(t, calibrated, []string{"calibrate", "day/trapped.csv", "--height", "2 um", "--diameter", "1.03(1) um", "--free-bead", "day/free.csv"}, StatusDistrust, []string{used})
}

// check runs a command and looks for its status and texts.
func check(t *testing.T, real func(...string) (int, string), args []string, want int, texts []string) {
	t.Helper()
	status, text := calibrated(args...)
	if status != want {
		t.Errorf("%v: status %d, want %d: %s", args, status, want, text)
	}
	for _, w := range texts {
		if !strings.Contains(text, w) {
			t.Errorf("%v: no %q in %s", args, w, text)
		}
	}
}
