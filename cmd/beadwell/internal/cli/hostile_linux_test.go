package cli

import (
	"bytes"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"unicode/utf8"

	"beadwell/cmd/beadwell/internal/batch"
)

// hostileNames steer terminals, end lines, begin formulas and elements of HTML, look like flags, turn the writing direction, or
// are no UTF-8: two that JSON alone could not tell apart.
var hostileNames = []string{"=1+1", "-dash", "@a", "+p", "<script>alert(1)<b>", "a\x1b[2J", "n\nl", "bidi\u202e", "inv\xff", "inv\xfe",
	"c1\u009b2J", "q\"'`$x", "semi;colon, comma", "%s%20#?", "tab\t"}

// harmless fails when a text would act on a terminal, or on a browser that shows it.
func harmless(t *testing.T, what, text string, page bool) {
	t.Helper()
	bad := []string{"\x1b", "\u202e", "\u009b", "\xff", "\xfe"}
	if page {
		bad = append(bad, "<script>alert")
	}
	for _, b := range bad {
		if strings.Contains(text, b) {
			t.Errorf("%s holds %q", what, b)
		}
	}
}

func harmlessFiles(t *testing.T, folder string) {
	t.Helper()
	for name, content := range tree(t, folder) {
		switch filepath.Ext(name) {
		case ".html", ".svg":
			harmless(t, folder+"/"+name, content, true)
		case ".txt", ".csv", ".json":
			harmless(t, folder+"/"+name, content, false)
		}
	}
}

// Names of files and folders that attack go through every command that prints, stores or joins them, and do nothing; none is lost.
func TestHostileNames(t *testing.T) {
	t.Chdir(t.TempDir())
	runReal(t, StatusDone, "simulate", "--out", "run.csv", "--diameter", "1.03 um", "--height", "6 um", "--rate", "10 kHz", "--axes", "x",
		"--noise", "1 nm", "--stiffness", "31 pN/um", "--duration", "0.2 s", "--seed", "1")
	track := mustRead(t, "run.csv")
	if err := os.Mkdir("raw", 0o777); err != nil {
		t.Fatal(err)
	}
	for _, name := range hostileNames {
		put(t, "raw/"+name+".csv", track)
	}
	put(t, "raw/session.toml", []byte("bead.diameter = \"1.03(1) um\"\nchamber.height = \"6.0(2) um\"\nrecording.noise = \"1 nm\"\nlaser.power = \"10 mW\"\n"))
	quietly := func(want int, args ...string) string {
		t.Helper()
		out, errs := runReal(t, want, args...)
		harmless(t, strings.Join(args, " "), out+errs, false)
		return out
	}

	for _, format := range formats {
		quietly(StatusDone, "batch", "raw", "--out", "whole", "--format", format)
	}
	if out := quietly(StatusDone, "batch", "raw", "--out", "whole", "--dry-run"); !strings.Contains(out, fmt.Sprintf("0 to calibrate, %d unchanged", len(hostileNames))) {
		t.Errorf("a second run: %s", out)
	}
	for _, shard := range []string{"1/2", "2/2"} {
		quietly(StatusDone, "batch", "raw", "--out", "part-"+shard[:1], "--shard", shard)
	}
	quietly(StatusDone, "collect", "--out", "joined", "part-2", "part-1")
	sameTree(t, "shards", "whole", "joined")
	harmlessFiles(t, "whole")
	var s batch.Summary
	if err := json.Unmarshal(mustRead(t, "whole/summary.json"), &s); err != nil {
		t.Fatal(err)
	}
	bytesOf := map[string]bool{}
	for _, row := range s.Rows {
		bytesOf[row.FileBytes] = true
	}
	if len(s.Rows) != len(hostileNames) || !bytesOf[fmt.Sprintf("%x", "raw/inv\xff.csv")] || !bytesOf[fmt.Sprintf("%x", "raw/inv\xfe.csv")] {
		t.Errorf("summary.json loses names: %d rows", len(s.Rows))
	}

	for _, one := range s.Series {
		for _, p := range one.Points {
			delete(bytesOf, p.FileBytes)
		}
	}
	if len(s.Series) == 0 || len(bytesOf) > 0 {
		t.Errorf("the %d series of summary.json lose the names %v", len(s.Series), bytesOf)
	}

	trend := []string{"trend", "--html", "trend.html"}
	for i, name := range hostileNames {
		path, out := "raw/"+name+".csv", fmt.Sprintf("one-%d", i)
		quietly(StatusDone, "check", path)
		quietly(StatusDone, "calibrate", path, "--out", out, "--figures", "svg")
		results, err := filepath.Glob(out + "/*/result.json")
		if err != nil || len(results) != 1 {
			t.Fatalf("%q: results %q, %v", name, results, err)
		}
		quietly(StatusDone, "report", results[0], "--out", out+"-report", "--figures", "svg")
		remade, _ := filepath.Glob(out + "-report/*/result.json")
		if len(remade) != 1 || !bytes.Equal(mustRead(t, results[0]), mustRead(t, remade[0])) {
			t.Errorf("%q: report makes another result", name)
		}
		quietly(StatusDone, "force", path, "--with", results[0], "--centre", "mean", "--out", out+"-force")
		if forces, _ := filepath.Glob(out + "-force/*/force.json"); len(forces) != 1 ||
			!utf8.ValidString(name) && strings.Count(string(mustRead(t, forces[0])), fmt.Sprintf(`"name_bytes": "%x"`, path)) != 2 {
			t.Errorf("%q: forces %q lose the name", name, forces)
		}
		quietly(StatusDone, "rerun", results[0])
		quietly(StatusDone, "plan", "--stiffness", "31 pN/um", "--diameter", "1.03 um", "--rate", "10 kHz", "--out", "plan/"+name)
		for _, folder := range []string{out, out + "-report", out + "-force"} {
			harmlessFiles(t, folder)
		}
		if err := os.MkdirAll("sessions/"+name, 0o777); err != nil {
			t.Fatal(err)
		}
		put(t, "sessions/"+name+"/summary.json", mustRead(t, "whole/summary.json"))
		trend = append(trend, "sessions/"+name)
	}
	for _, format := range formats {
		quietly(StatusDone, append(trend, "--format", format)...)
	}
	harmless(t, "trend.html", string(mustRead(t, "trend.html")), true)
	var joined struct {
		Sessions     []string
		SessionBytes []string `json:"session_bytes"`
		Charts       []struct {
			Points []struct {
				Bytes string `json:"session_bytes"`
			}
		}
	}
	if err := json.Unmarshal([]byte(quietly(StatusDone, append(trend, "--format", "json")...)), &joined); err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{"sessions/inv\xff", "sessions/inv\xfe"} {
		i := slices.Index(joined.SessionBytes, fmt.Sprintf("%x", name))
		if len(joined.SessionBytes) != len(joined.Sessions) || i < 0 || joined.Charts[0].Points[i].Bytes != joined.SessionBytes[i] {
			t.Errorf("the trend loses %q: %q", name, joined.SessionBytes)
		}
	}
}

// A free bead whose name is no UTF-8 has its bytes in the summary, and a batch that goes on ends with the bytes of one run.
func TestHostileFreeBead(t *testing.T) {
	from, err := filepath.Abs(demoFolder)
	if err != nil {
		t.Fatal(err)
	}
	t.Chdir(t.TempDir())
	demoCopy(t, from, "power-80mW.csv", "free.csv", "stuck.csv")
	if err := os.Rename("demo", "night\xff"); err != nil {
		t.Fatal(err)
	}
	runReal(t, StatusDone, "batch", "night\xff", "--out", "whole", "--reports", "none")
	runReal(t, StatusDone, "batch", "night\xff/free.csv", "night\xff/power-80mW.csv", "--out", "again", "--reports", "none")
	// The journal alone is left of all but one recording.
	if err := os.RemoveAll("again/free"); err != nil {
		t.Fatal(err)
	}
	runReal(t, StatusDone, "batch", "night\xff", "--out", "again", "--reports", "none")
	sameTree(t, "gone on", "whole", "again")
	var s batch.Summary
	if err := json.Unmarshal(mustRead(t, "whole/summary.json"), &s); err != nil {
		t.Fatal(err)
	}
	want := fmt.Sprintf("%x", "night\xff/free.csv")
	if len(s.Rows) != 3 || !slices.Equal(s.Rows[1].FreeBeadBytes, []string{want}) {
		t.Errorf("the free bead of %+v, want the bytes %s", s.Rows, want)
	}
}
