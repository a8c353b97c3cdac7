package cli

import (
	"bytes"
	"context"
	"encoding/json"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/batch"
)

// runReal runs a command with the real calibration.
func runReal(t *testing.T, want int, args ...string) (out, errs string) {
	t.Helper()
	w, stdout, stderr := testWorld("")
	w.Calibrate = calib.Calibrate
	if got := run(context.Background(), args, w); got != want {
		t.Fatalf("beadwell %s: status %d, want %d\n%s%s", strings.Join(args, " "), got, want, stdout, stderr)
	}
	return stdout.String(), stderr.String()
}

// demoCopy copies recordings of the demo session into a folder, with the lists.
func demoCopy(t *testing.T, from string, names ...string) {
	t.Helper()
	if err := os.Mkdir("demo", 0o777); err != nil {
		t.Fatal(err)
	}
	var list strings.Builder
	for line := range strings.Lines(string(mustRead(t, filepath.Join(from, "tracks.csv")))) {
		file, _, _ := strings.Cut(line, ",")
		for _, name := range append([]string{"file"}, names...) {
			if file == name {
				list.WriteString(line)
			}
		}
	}
	put(t, "demo/tracks.csv", []byte(list.String()))
	for _, name := range append(names, "session.toml") {
		put(t, filepath.Join("demo", name), mustRead(t, filepath.Join(from, name)))
	}
}

func put(t *testing.T, path string, content []byte) {
	t.Helper()
	if err := os.WriteFile(path, content, 0o666); err != nil {
		t.Fatal(err)
	}
}

// tree is every file of a folder with its content.
func tree(t *testing.T, folder string) map[string]string {
	t.Helper()
	files := map[string]string{}
	err := filepath.WalkDir(folder, func(path string, entry fs.DirEntry, err error) error {
		if err == nil && !entry.IsDir() {
			name, _ := filepath.Rel(folder, path)
			files[filepath.ToSlash(name)] = string(mustRead(t, path))
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	return files
}

func sameTree(t *testing.T, what, one, two string) {
	t.Helper()
	a, b := tree(t, one), tree(t, two)
	for name, content := range a {
		if b[name] != content {
			t.Errorf("%s: %s differs", what, name)
		}
	}
	if len(a) != len(b) {
		t.Errorf("%s: %d files, want %d", what, len(b), len(a))
	}
}

// A batch of the demo session finds what its README says is true: stiffness per power, the surface and the bead that was lost. The
// trapped recordings of the second bead use the free one's drag, those of the first do not.
func TestDemoBatch(t *testing.T) {
	folder, err := filepath.Abs(demoFolder)
	if err != nil {
		t.Fatal(err)
	}
	t.Chdir(t.TempDir())
	out, errs := runReal(t, StatusDistrust, "batch", folder, "--out", "results", "--format", "json")
	if strings.Contains(errs, ".truth.json") {
		t.Errorf("truths are taken for recordings: %s", errs)
	}
	var s batch.Summary
	if err := json.Unmarshal([]byte(out), &s); err != nil {
		t.Fatal(err)
	}
	if good, bad, failed, aside := s.Counts(); good != 13 || bad != 1 || failed+aside != 0 {
		t.Errorf("%d consistent, %d not to be trusted, %d failed, %d set aside", good, bad, failed, aside)
	}
	for _, row := range s.Rows {
		name := filepath.Base(row.File)
		trapped := strings.HasPrefix(name, "power") || strings.HasPrefix(name, "height") || name == "escaped.csv"
		if got := len(row.FreeBead) == 1 && filepath.Base(row.FreeBead[0]) == "free.csv"; got != trapped {
			t.Errorf("%s uses free beads %q", name, row.FreeBead)
		}
		if name == "escaped.csv" && !strings.Contains(row.Reason, "left the trap at about 7.4") {
			t.Errorf("%s: %s", name, row.Reason)
		}
	}
	// The index names the free bead in the row of each of the ten that use it.
	if page := string(mustRead(t, "results/index.html")); strings.Count(page, "Free bead used") != 1 || strings.Count(page, `free.csv</td>`) != 10 {
		t.Error("the index does not say which recordings use the free bead")
	}
	want := map[string]float64{ // README of the demo
		"stiffness against power x stiffness per power, through the origin": 0.25e-3,
		"stiffness against power y stiffness per power, through the origin": 0.232e-3,
		"measured drag against height x reading at the surface":             -0.2e-6,
		"measured drag against height y reading at the surface":             -0.2e-6,
		"ratio of the stiffnesses of two axes x/y weighted mean":            0.25 / 0.232,
	}
	for _, one := range s.Series {
		for _, v := range one.Values {
			key := one.Kind + " " + one.Axis + " " + v.Name
			if truth, ok := want[key]; ok {
				delete(want, key)
				// one fixed recording of each: four standard uncertainties bound it
				if d := math.Abs(float64(v.Value) - truth); d > 4*float64(v.Combined) || float64(v.Combined) > 0.15e-6+0.02*math.Abs(truth) {
					t.Errorf("%s = %g(%g), want %g", key, float64(v.Value), float64(v.Combined), truth)
				}
			}
		}
	}
	if len(want) > 0 {
		t.Errorf("not in the summary: %v", want)
	}
}

// Shards, single files and any number of workers see the same free bead; a free bead, a background or a row of theirs that
// changes has the recordings done again that use it, and no others; results of a batch are those of calibrate, and of rerun.
func TestFreeBeadInABatch(t *testing.T) {
	from, err := filepath.Abs(demoFolder)
	if err != nil {
		t.Fatal(err)
	}
	t.Chdir(t.TempDir())
	demoCopy(t, from, "power-20mW.csv", "power-80mW.csv", "free.csv", "stuck.csv", "camera.csv")
	runReal(t, StatusDone, "batch", "demo", "--out", "whole", "--jobs", "1", "--reports", "none")
	for _, shard := range []string{"1/2", "2/2"} {
		runReal(t, StatusDone, "batch", "demo", "--out", "parts", "--jobs", "2", "--reports", "none", "--shard", shard)
	}
	runReal(t, StatusDone, "collect", "--out", "parts", "parts")
	sameTree(t, "shards", "whole", "parts")
	runReal(t, StatusDone, "calibrate", "demo/power-80mW.csv", "--out", "single", "--figures", "none")
	single, inBatch := mustRead(t, "single/power-80mW/result.json"), mustRead(t, "whole/power-80mW/result.json")
	if a, b := withoutCommand(t, single), withoutCommand(t, inBatch); !bytes.Equal(a, b) {
		t.Error("calibrate and batch give other results")
	}
	if out, _ := runReal(t, StatusDone, "rerun", "whole/power-80mW/result.json"); !strings.Contains(out, "same") {
		t.Errorf("rerun says %s", out)
	}
	plan := func(want ...string) {
		t.Helper()
		out, _ := runReal(t, StatusDone, "batch", "demo", "--out", "whole", "--jobs", "2", "--reports", "none", "--dry-run")
		for _, name := range []string{"camera.csv", "free.csv", "power-20mW.csv", "power-80mW.csv", "stuck.csv"} {
			if redone := strings.Contains(out, "calibrate  demo/"+name); redone != strings.Contains(strings.Join(want, " "), name) {
				t.Errorf("%s done again: %v; want %q", name, redone, want)
			}
		}
	}
	plan()
	free := mustRead(t, filepath.Join(from, "free.csv"))
	put(t, "demo/free.csv", free[:len(free)/2+bytes.IndexByte(free[len(free)/2:], '\n')+1])
	plan("free.csv", "power-20mW.csv", "power-80mW.csv")
	put(t, "demo/free.csv", free)
	plan()
	stuck := mustRead(t, "demo/stuck.csv")
	put(t, "demo/stuck.csv", stuck[:len(stuck)/2+bytes.IndexByte(stuck[len(stuck)/2:], '\n')+1])
	plan("stuck.csv", "free.csv", "power-20mW.csv", "power-80mW.csv")
	put(t, "demo/stuck.csv", stuck)
	list := mustRead(t, "demo/tracks.csv")
	put(t, "demo/tracks.csv", bytes.Replace(list, []byte("free.csv,free,1.50(3) um,1.05 g/cm3,6.0(3) um"), []byte("free.csv,free,1.50(3) um,1.05 g/cm3,7.0(3) um"), 1))
	plan("free.csv", "power-20mW.csv", "power-80mW.csv")
	put(t, "demo/tracks.csv", list)
	// Without it: another value, and nothing is said of a free bead.
	runReal(t, StatusDone, "batch", "demo", "--out", "without", "--free-bead", "none", "--reports", "none")
	if text := string(mustRead(t, "without/power-80mW/result.json")); strings.Contains(text, `"free_drag"`) {
		t.Error("--free-bead none uses one")
	}
	// A free bead that cannot be used is told, and the trapped recordings go on by the computed drag.
	put(t, "demo/free.csv", []byte("t (s),x (nm),y (nm)\n0,oops,1\n"))
	runReal(t, StatusPartial, "batch", "demo", "--out", "whole", "--reports", "none")
	if text := string(mustRead(t, "whole/power-80mW/result.json")); !strings.Contains(text, calib.CodeFreeUnused) || !strings.Contains(text, "oops") {
		t.Error("a free bead that cannot be read is not told")
	}
}

// withoutCommand is a result without its command line.
func withoutCommand(t *testing.T, text []byte) []byte {
	t.Helper()
	var r map[string]any
	if err := json.Unmarshal(text, &r); err != nil {
		t.Fatal(err)
	}
	delete(r["program"].(map[string]any), "command")
	delete(r, "created")
	out, err := json.Marshal(r)
	if err != nil {
		t.Fatal(err)
	}
	return out
}
