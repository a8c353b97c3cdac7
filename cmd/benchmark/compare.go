package main

import (
	"bufio"
	"context"
	_ "embed"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"time"

	"beadwell/calib/track"
)

//go:embed practitioner.py
var practitioner []byte

// readPandas prints the seconds that the Python reader takes for a file, the start of the interpreter left out.
const readPandas = `import sys, time
import pandas
begin = time.perf_counter()
pandas.read_csv(sys.argv[1])
print(time.perf_counter() - begin)`

// readDuckDB does the same with the reader of DuckDB, into a table in memory.
const readDuckDB = `const { DuckDBInstance } = require("@duckdb/node-api");
(async () => {
  const connection = await (await DuckDBInstance.create(":memory:")).connect();
  const begin = performance.now();
  await connection.run("CREATE TABLE t AS SELECT * FROM read_csv('" + process.argv[2] + "')");
  console.log((performance.now() - begin) / 1000);
  process.exit(0);
})();`

// readSelf is the first argument with which this program reads a file and prints the seconds.
const readSelf = "read-only"

// The bounds that the comparison is held against.
const (
	boundSingle, boundLong, boundLongMemory = 12.0, 6.5, 0.35
	boundPandas, boundColumns               = 8.0, 1.5
	boundFigures, boundBatch                = 20.0, 4.0
	boundStart                              = 0.020 // s
)

// bench holds the sides and what was measured.
type bench struct {
	settings
	ctx context.Context

	beadwell, self, script string
	hasPython              bool
	columns                []side // further readers
	missing                []string
	begin                  time.Time

	start          outcome
	one, ten       []outcome // 1e6 and 1e7 rows, with figures
	reads          []outcome
	figures, plain []outcome
	sizes          []size
	limited        *outcome
	limitedRows    int
	limitedSize    string
}

// size is one length of a recording.
type size struct {
	rows int
	self outcome
	read float64 // s
}

// build makes the program and finds out what else there is.
func (b *bench) build() error {
	b.begin = time.Now()
	var err error
	if b.self, err = os.Executable(); err != nil {
		return err
	}
	b.beadwell = filepath.Join(b.folder, "beadwell")
	if _, _, err := measure(b.ctx, "go", "build", "-o", b.beadwell, "./cmd/beadwell"); err != nil {
		return err
	}
	b.script = filepath.Join(b.folder, "practitioner.py")
	if err := os.WriteFile(b.script, practitioner, 0o644); err != nil {
		return err
	}
	b.findPython()
	b.findColumns()
	return b.ctx.Err()
}

// findPython looks for an interpreter that has what the script needs.
func (b *bench) findPython() {
	candidates := []string{b.python}
	if b.python == "" {
		candidates = []string{"python3", "/usr/bin/python3"}
	}
	for _, python := range candidates {
		if _, _, err := measure(b.ctx, python, "-c", "import pandas, scipy, matplotlib"); err == nil {
			b.python, b.hasPython = python, true
			return
		}
	}
	b.missing = append(b.missing, "Python with pandas, scipy and matplotlib")
}

// findColumns looks for readers of column stores.
func (b *bench) findColumns() {
	reader := filepath.Join(b.folder, "columns")
	if _, _, err := measure(b.ctx, "go", "build", "-C", "cmd/benchmark/columns", "-o", reader, "."); err == nil {
		b.columns = append(b.columns, side{name: "Apache Arrow for Go", command: []string{reader}, printed: true})
	} else {
		b.missing = append(b.missing, "the reader of Apache Arrow for Go (cmd/benchmark/columns)")
	}
	script := filepath.Join(b.folder, "read.js")
	_, err := exec.LookPath("node")
	if b.duckdb == "" || err != nil || os.WriteFile(script, []byte(readDuckDB), 0o644) != nil {
		b.missing = append(b.missing, "the reader of DuckDB (-duckdb FOLDER, after npm install @duckdb/node-api in it)")
		return
	}
	modules, err := filepath.Abs(filepath.Join(b.duckdb, "node_modules"))
	if err != nil {
		return
	}
	b.columns = append(b.columns, side{name: "DuckDB", command: []string{"env", "NODE_PATH=" + modules, "node", script}, printed: true})
}

// calibrate is the command line of a calibration; figures are "none" or "svg".
func (b *bench) calibrate(figures string, more ...string) []string {
	command := []string{b.beadwell, "calibrate", "--diameter", "1.02 um", "--temperature", "24.5(5) C", "--height", "8.0(5) um", "--quiet",
		"--out", filepath.Join(b.folder, "out"), "--force", "--figures", figures}
	return append(command, more...)
}

func (b *bench) practise(figures int, jobs int, path string) []string {
	return []string{b.python, b.script, path, "--out", filepath.Join(b.folder, "out-python"), "--figs", strconv.Itoa(figures), "--jobs", strconv.Itoa(jobs)}
}

// recording returns the path of a simulated recording of so many rows, which is made if it is not there.
func (b *bench) recording(rows int, axes string, seed int, path string) (string, error) {
	path = filepath.Join(b.folder, path)
	if _, err := os.Stat(path); err == nil {
		return path, nil
	}
	fmt.Fprintf(os.Stderr, "making %s\n", path)
	stiffness := "x=52 pN/um, y=47 pN/um"
	if axes == "x,y,z" {
		stiffness += ", z=12 pN/um"
	}
	cmd := exec.CommandContext(b.ctx, b.beadwell, "simulate", "--stiffness", stiffness, "--diameter", "1.02 um", "--temperature", "24.5 C", "--height", "8 um",
		"--noise", "2 nm", "--rate", "100 kHz", "--duration", fmt.Sprintf("%d us", 10*rows), "--axes", axes, "--seed", strconv.Itoa(seed))
	text, err := cmd.StdoutPipe()
	if err != nil {
		return "", err
	}
	file, err := os.Create(path)
	if err != nil {
		return "", err
	}
	defer file.Close()
	if err := cmd.Start(); err != nil {
		return "", err
	}
	// the remark above the header is dropped: the script does not expect it
	in, out := bufio.NewReaderSize(text, 1<<20), bufio.NewWriterSize(file, 1<<20)
	if line, err := in.ReadString('\n'); err == nil && !strings.HasPrefix(line, "#") {
		fmt.Fprint(out, line)
	}
	if _, err := in.WriteTo(out); err != nil {
		return "", err
	}
	if err := out.Flush(); err != nil {
		return "", err
	}
	return path, cmd.Wait()
}

func nameOf(rows int) string { return fmt.Sprintf("rows-%d.csv", rows) }

// startUp measures --help.
func (b *bench) startUp() error {
	found, err := b.alternate(4*b.rounds, side{name: "beadwell --help", command: []string{b.beadwell, "--help"}})
	if err == nil {
		b.start = found[0]
	}
	return err
}

// single compares whole calibrations of one recording, with four figures and the report.
func (b *bench) single() error {
	for _, c := range []struct {
		rows int
		into *[]outcome
	}{{1_000_000, &b.one}, {10_000_000, &b.ten}} {
		rows, into := c.rows, c.into
		path, err := b.recording(rows, "x,y,z", 1, nameOf(rows))
		if err != nil {
			return err
		}
		sides := []side{{name: "beadwell", command: b.calibrate("svg", path)}}
		if b.hasPython {
			sides = append(sides, side{name: "script", command: b.practise(4, 1, path)})
		}
		if *into, err = b.alternate(b.rounds, sides...); err != nil {
			return err
		}
	}
	return nil
}

// reading compares readers alone, on 1e7 rows.
func (b *bench) reading() error {
	path, err := b.recording(10_000_000, "x,y,z", 1, nameOf(10_000_000))
	if err != nil {
		return err
	}
	sides := []side{{name: "beadwell", command: []string{b.self, readSelf, path}, printed: true}}
	if b.hasPython {
		sides = append(sides, side{name: "pandas", command: []string{b.python, "-c", readPandas, path}, printed: true})
	}
	for _, c := range b.columns {
		c.command = append(c.command[:len(c.command):len(c.command)], path)
		sides = append(sides, c)
	}
	b.reads, err = b.alternate(b.rounds, sides...)
	return err
}

// batch compares a folder of recordings, with and without figures.
func (b *bench) batch() error {
	folder := filepath.Join(b.folder, "tracks")
	if err := os.MkdirAll(folder, 0o755); err != nil {
		return err
	}
	for i := range b.tracks {
		if _, err := b.recording(100_000, "x,y", 100+i, filepath.Join("tracks", fmt.Sprintf("run%03d.csv", i))); err != nil {
			return err
		}
	}
	rounds := max(3, b.rounds/2)
	for _, figures := range []string{"svg", "none"} {
		into := &b.figures
		if figures == "none" {
			into = &b.plain
		}
		out, reports := filepath.Join(b.folder, "out-batch"), "html"
		if figures == "none" {
			reports = "none"
		}
		command := []string{b.beadwell, "batch", folder, "--diameter", "1.02 um", "--temperature", "24.5(5) C", "--height", "8.0(5) um", "--quiet",
			"--out", out, "--reports", reports, "--figures", figures}
		sides := []side{{name: "beadwell", command: command, fresh: out}}
		count := 0
		if figures == "svg" {
			count = 4
		}
		if b.hasPython {
			sides = append(sides, side{name: "script", command: b.practise(count, runtime.NumCPU(), folder)})
		}
		found, err := b.alternate(rounds, sides...)
		if err != nil {
			return err
		}
		*into = found
	}
	return nil
}

// scaling measures beadwell alone over the lengths of recordings.
func (b *bench) scaling() error {
	for rows := 100_000; rows <= b.largest; rows *= 10 {
		path, err := b.recording(rows, "x,y,z", 1, nameOf(rows))
		if err != nil {
			return err
		}
		rounds := b.rounds
		if rows > 10_000_000 {
			rounds = min(3, rounds)
		}
		found, err := b.alternate(rounds, side{name: fmt.Sprintf("%d rows", rows), command: b.calibrate("svg", path)},
			side{name: "reading them", command: []string{b.self, readSelf, path}, printed: true})
		if err != nil {
			return err
		}
		b.sizes = append(b.sizes, size{rows: rows, self: found[0], read: found[1].median.wall})
	}
	return nil
}

// bounded measures a recording that exceeds the memory it may take.
func (b *bench) bounded() error {
	b.limitedRows, b.limitedSize = b.largest, "400 MB"
	path, err := b.recording(b.limitedRows, "x,y,z", 1, nameOf(b.limitedRows))
	if err != nil {
		return err
	}
	found, err := b.alternate(1, side{name: "in parts", command: b.calibrate("svg", "--max-memory", b.limitedSize, path)})
	if err == nil {
		b.limited = &found[0]
	}
	return err
}

// readOnly reads a file as a calibration does, and prints the seconds.
func readOnly(path string) error {
	begin := time.Now()
	if _, err := track.ReadFile(context.Background(), path, track.Options{}); err != nil {
		return err
	}
	fmt.Println(time.Since(begin).Seconds())
	return nil
}
