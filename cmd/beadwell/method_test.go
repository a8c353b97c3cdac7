package main

import (
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// numbered finds the number of an equation at the end of a line in docs/method.md, cited the
// numbers that a comment gives; a comment may be broken between the page and the number.
var (
	numbered = regexp.MustCompile(`(?m) {2,}\((\d+)\)$`)
	cited    = regexp.MustCompile(`docs/method\.md,(?:\s|//)+Eqs?\.? (\d+)(?:(?: to | and )(\d+))?`)
)

// The equations of docs/method.md are numbered from 1 without a gap, and every number that a
// comment cites is there.
func TestEquationsAreNumbered(t *testing.T) {
	page, err := os.ReadFile("../../docs/method.md")
	if err != nil {
		t.Fatal(err)
	}
	last := 0
	for _, m := range numbered.FindAllStringSubmatch(string(page), -1) {
		n, _ := strconv.Atoi(m[1])
		if n != last+1 {
			t.Errorf("equation %d follows equation %d", n, last)
		}
		last = n
	}
	found := 0
	err = filepath.WalkDir("../..", func(path string, entry fs.DirEntry, err error) error {
		if err != nil || entry.IsDir() || !strings.HasSuffix(path, ".go") {
			return err
		}
		text, err := os.ReadFile(path)
		if err != nil {
			return err
		}
		for _, m := range cited.FindAllStringSubmatch(string(text), -1) {
			found++
			for _, number := range m[1:] {
				if n, err := strconv.Atoi(number); err == nil && (n < 1 || n > last) {
					t.Errorf("%s cites equation %d, the last is %d", path, n, last)
				}
			}
		}
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if found == 0 {
		t.Error("no comment cites an equation")
	}
}
