package cli

import (
	"bytes"
	"encoding/json"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

const demoFolder = "../../../../testdata/demo"

// Every recording of the demo session has its command line beside it, and that
// command line makes it again byte for byte, truth included.
func TestDemoIsRemade(t *testing.T) {
	folder, err := filepath.Abs(demoFolder)
	if err != nil {
		t.Fatal(err)
	}
	truths, err := filepath.Glob(filepath.Join(folder, "*"+truthEnding))
	if err != nil || len(truths) < 2 {
		t.Fatalf("%d truths in %s, want at least 2 (%v)", len(truths), folder, err)
	}
	for _, path := range truths {
		var stored simulation
		if err := json.Unmarshal(mustRead(t, path), &stored); err != nil {
			t.Fatalf("%s: %v", path, err)
		}
		track := strings.TrimSuffix(path, truthEnding) + ".csv"
		args := stored.Command[1:]
		if at := slices.Index(args, "--out"); at < 0 || args[at+1] != filepath.Base(track) {
			t.Fatalf("%s: the command line writes another file: %q", path, args)
		}
		t.Chdir(t.TempDir())
		var out, problems bytes.Buffer
		w := inventedWorld()
		w.Out, w.Err = &out, &problems
		if status := Main(args, w); status != StatusDone || out.Len()+problems.Len() > 0 {
			t.Fatalf("%s: exit status %d, wrote %q and %q", path, status, out.String(), problems.String())
		}
		for _, want := range []string{track, path} {
			if !bytes.Equal(mustRead(t, filepath.Base(want)), mustRead(t, want)) {
				t.Errorf("%s is not what its command line makes", want)
			}
		}
	}
}

// Each track of the demo is marked as simulated, and together with all else
// they stay below the 6 MB that a clone may cost.
func TestDemoIsSmallAndMarked(t *testing.T) {
	entries, err := os.ReadDir(demoFolder)
	if err != nil {
		t.Fatal(err)
	}
	size := 0
	for _, entry := range entries {
		content := mustRead(t, filepath.Join(demoFolder, entry.Name()))
		size += len(content)
		if entry.Name() != "tracks.csv" && !bytes.Contains(bytes.ToLower(content[:min(len(content), 200)]), []byte("simulated")) {
			t.Errorf("%s does not say that it is simulated", entry.Name())
		}
	}
	if size > 6e6 {
		t.Errorf("the demo has %d bytes, more than 6 MB", size)
	}
}

func mustRead(t *testing.T, path string) []byte {
	t.Helper()
	content, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return content
}
