package main

import (
	"bytes"
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
	"time"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/cli"
)

// fenced finds the blocks of a page, with their kind.
var fenced = regexp.MustCompile("(?ms)^```(sh|toml|csv|text|json)\n(.*?)^```")

// TestGuide does what docs/guide.md says, in its order, in an empty folder that holds the
// demo recordings as the folder tonight.
func TestGuide(t *testing.T) {
	followPage(t, "../../docs/guide.md", "camera.csv", "quadrant.csv")
}

// TestPipelinesPage does what docs/pipelines/README.md says, with the demo session as the
// folder tonight. Its commands of Snakemake and Slurm are those of docs/pipelines/try.sh.
func TestPipelinesPage(t *testing.T) {
	followPage(t, "../../docs/pipelines/README.md", "camera.csv", "quadrant.csv", "session.toml", "tracks.csv")
}

// TestBatchPage does what docs/batch.md says, with the demo session as the folder tonight.
func TestBatchPage(t *testing.T) {
	paths, err := filepath.Glob("../../testdata/demo/*.csv")
	if err != nil {
		t.Fatal(err)
	}
	names := []string{"session.toml"}
	for _, path := range paths {
		names = append(names, filepath.Base(path))
	}
	followPage(t, "../../docs/batch.md", names...)
}

// followPage does what a page says in an empty folder in which tonight holds some files of the
// demo: commands run, files are written, and what the page shows as output (as JSON: on
// standard error) is compared. A line [...] stands for any lines.
func followPage(t *testing.T, path string, demo ...string) {
	page, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	folder := t.TempDir()
	for _, name := range demo {
		copyFile(t, filepath.Join("../../testdata/demo", name), filepath.Join(folder, "tonight", name))
	}
	if list := filepath.Join(folder, "tonight", "tracks.csv"); slices.Contains(demo, "tracks.csv") {
		keepRows(t, list, demo)
	}
	t.Chdir(folder)
	var out, errs string
	ran := 0
	for _, block := range fenced.FindAllStringSubmatch(string(page), -1) {
		kind, text := block[1], block[2]
		switch kind {
		case "toml":
			writeFile(t, "tonight/session.toml", text)
		case "csv":
			writeFile(t, "tonight/tracks.csv", text)
		case "text":
			if !shows(text, out) {
				t.Errorf("the page shows\n%s\nbut the command before it prints\n%s", text, out)
			}
		case "json":
			if !shows(text, errs) {
				t.Errorf("the page shows\n%s\nbut the command before it prints, as an error,\n%s", text, errs)
			}
		default:
			out, errs = follow(t, text, &ran)
		}
	}
	if ran == 0 {
		t.Errorf("%s has no command", path)
	}
}

// keepRows leaves in a track list the rows of the files that are there.
func keepRows(t *testing.T, list string, files []string) {
	t.Helper()
	text, err := os.ReadFile(list)
	if err != nil {
		t.Fatal(err)
	}
	var kept strings.Builder
	for line := range strings.Lines(string(text)) {
		if file, _, _ := strings.Cut(line, ","); file == "file" || slices.Contains(files, file) {
			kept.WriteString(line)
		}
	}
	writeFile(t, list, kept.String())
}

// follow runs the commands of a block and returns what the last prints, as output and as
// errors. A line "# exit status 3" below it says how that ends; 0 else.
func follow(t *testing.T, block string, ran *int) (output, problems string) {
	t.Helper()
	var commands []string
	last := 0
	for line := range strings.Lines(block) {
		if arguments, found := strings.CutPrefix(strings.TrimSpace(line), "beadwell "); found {
			commands = append(commands, arguments)
		} else if rest, found := strings.CutPrefix(line, "# exit status "); found {
			if _, err := fmt.Sscan(rest, &last); err != nil {
				t.Errorf("%q is no exit status", rest)
			}
		}
	}
	var out, errs bytes.Buffer
	for i, arguments := range commands {
		*ran++
		want := 0
		if i == len(commands)-1 {
			want = last
		}
		out.Reset()
		errs.Reset()
		world := cli.World{In: strings.NewReader(""), Out: &out, Err: &errs, Getenv: func(string) string { return "" },
			Now: func() time.Time { return time.Unix(0, 0) }, Version: "test", Calibrate: calib.Calibrate}
		if status := cli.Main(words(arguments), world); status != want {
			t.Errorf("beadwell %s ends with %d, want %d: %s", arguments, status, want, errs.String())
		}
	}
	return out.String(), errs.String()
}

// words splits a command line at blanks outside of single quotes.
func words(line string) []string {
	var list []string
	for i, part := range strings.Split(line, "'") {
		if i%2 == 1 {
			list = append(list, part)
			continue
		}
		list = append(list, strings.Fields(part)...)
	}
	return list
}

// shows tells whether a text is an output, where lines of [...] stand for any lines.
func shows(text, output string) bool {
	var pattern strings.Builder
	pattern.WriteString(`(?s)\A`)
	for line := range strings.Lines(text) {
		if strings.TrimSpace(line) == "[...]" {
			pattern.WriteString(`.*`)
			continue
		}
		pattern.WriteString(regexp.QuoteMeta(line))
	}
	pattern.WriteString(`\z`)
	return regexp.MustCompile(pattern.String()).MatchString(output)
}

func copyFile(t *testing.T, from, to string) {
	t.Helper()
	data, err := os.ReadFile(from)
	if err != nil {
		t.Fatal(err)
	}
	writeFile(t, to, string(data))
}

func writeFile(t *testing.T, path, text string) {
	t.Helper()
	if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
}
