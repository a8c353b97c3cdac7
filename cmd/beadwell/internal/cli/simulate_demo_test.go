package cli

import (
	"bytes"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"testing"
)

const demoFolder = "../../../../testdata/demo"

// Every recording of the demo session has its command line beside it, and that
// command line makes it again byte for byte; on other processors than amd64 to one unit of
// the last digit. The truth beside it has all digits of its numbers, and agrees to 1e-12.
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
			difference := compareText(mustRead(t, filepath.Base(want)), mustRead(t, want))
			if difference == "" && want == track && runtime.GOARCH == "amd64" && !bytes.Equal(mustRead(t, filepath.Base(want)), mustRead(t, want)) {
				difference = "other bytes"
			}
			if difference != "" {
				t.Errorf("%s is not what its command line makes: %s", want, difference)
			}
		}
	}
}

// compareText returns what differs between two texts by more than one unit of the last digit of a
// number, or 1e-12 of it; else "".
func compareText(got, want []byte) string {
	if bytes.Equal(got, want) {
		return ""
	}
	number := regexp.MustCompile(`-?[0-9]+\.?[0-9]*(e-?[0-9]+)?`)
	if !bytes.Equal(number.ReplaceAll(got, nil), number.ReplaceAll(want, nil)) {
		return "other words"
	}
	made, stored := number.FindAllString(string(got), -1), number.FindAllString(string(want), -1)
	for i := range made {
		a, errA := strconv.ParseFloat(made[i], 64)
		b, errB := strconv.ParseFloat(stored[i], 64)
		_, decimals, _ := strings.Cut(stored[i], ".")
		unit := math.Max(1.001*math.Pow10(-len(decimals)), 1e-12*math.Abs(b))
		if errA != nil || errB != nil || math.Abs(a-b) > unit {
			return made[i] + " instead of " + stored[i]
		}
	}
	return ""
}

// Each track of the demo is marked as simulated, and together with all else
// they stay below the 15 MB that a clone may cost.
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
	if size > 15e6 {
		t.Errorf("the demo has %d bytes, more than 15 MB", size)
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
