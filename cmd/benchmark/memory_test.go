package main

import (
	"path/filepath"
	"testing"
)

// The memory of a calibration as a process of its own: 8 bytes x rows x axes x 2 plus 120 MB as a whole, and what
// --max-memory says in parts. One more copy of the samples, 53 MB, would exceed the first.
func TestMemoryOfCalibration(t *testing.T) {
	const rows = 2_200_000
	b := &bench{settings: settings{folder: t.TempDir()}, ctx: t.Context()}
	b.beadwell = filepath.Join(b.folder, "beadwell")
	if _, _, err := measure(t.Context(), "go", "build", "-o", b.beadwell, "../beadwell"); err != nil {
		t.Fatal(err)
	}
	path, err := b.recording(rows, "x,y,z", 1, nameOf(rows))
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		more  []string
		bound float64 // bytes
	}{
		{[]string{path}, 8*rows*3*2 + 120e6},
		{[]string{"--max-memory", "200 MB", path}, 200e6},
	} {
		u, _, err := measure(t.Context(), b.calibrate("none", c.more...)...)
		if err != nil {
			t.Fatal(err)
		}
		if u.memory > c.bound {
			t.Errorf("%v: %.0f MB at the peak, want at most %.0f MB", c.more[:len(c.more)-1], u.memory/1e6, c.bound/1e6)
		}
		t.Logf("%.0f MB of %.0f MB", u.memory/1e6, c.bound/1e6)
	}
}
