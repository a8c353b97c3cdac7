package batch

import (
	"os"
	"path/filepath"
	"testing"
)

// A file is written whole, what a killed run left of it goes, and what belongs to another file stays.
func TestWriteFile(t *testing.T) {
	folder := t.TempDir()
	for _, name := range []string{".a.csv.0123456789abcdef.part", ".b.csv.0123456789abcdef.part"} {
		if err := os.WriteFile(filepath.Join(folder, name), []byte("torn"), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	root, err := os.OpenRoot(folder)
	if err != nil {
		t.Fatal(err)
	}
	defer root.Close()
	if err := writeFile(root, "a.csv", []byte("whole")); err != nil {
		t.Fatal(err)
	}
	entries, err := os.ReadDir(folder)
	if err != nil {
		t.Fatal(err)
	}
	var got []string
	for _, e := range entries {
		got = append(got, e.Name())
	}
	if len(got) != 2 || got[0] != ".b.csv.0123456789abcdef.part" || got[1] != "a.csv" {
		t.Errorf("the folder holds %q", got)
	}
	if text, err := root.ReadFile("a.csv"); err != nil || string(text) != "whole" {
		t.Errorf("a.csv holds %q, %v", text, err)
	}
}
