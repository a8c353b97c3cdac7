package main

import (
	"os"
	"strings"
	"testing"
)

// The pages say what the files of results hold.
func TestPagesAreOfTheResults(t *testing.T) {
	for page, write := range map[string]func(*strings.Builder) error{
		"accuracy.md": func(w *strings.Builder) error {
			known, err := load[Outcome]("results/accuracy.json")
			list, _ := cells()
			writeTables(w, inOrder(list, known))
			return err
		},
		"accuracy-kinds.md": func(w *strings.Builder) error {
			known, err := load[KindScore]("results/kinds.json")
			writeKinds(w, kindCells(), known)
			return err
		},
		"accuracy-folders.md": func(w *strings.Builder) error {
			known, err := load[FolderScore]("results/folders.json")
			writeFolders(w, known)
			return err
		},
		"detection.md": func(w *strings.Builder) error {
			known, err := load[Detection]("results/detection.json")
			writeDetection(w, detectionCells(), known)
			return err
		},
	} {
		var want strings.Builder
		if err := write(&want); err != nil {
			t.Fatal(err)
		}
		got, err := os.ReadFile("../../docs/" + page)
		if err != nil {
			t.Fatal(err)
		}
		if string(got) != want.String() {
			t.Errorf("docs/%s is not what its file of results gives: write it again with the command that it names", page)
		}
	}
}
