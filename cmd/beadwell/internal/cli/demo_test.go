package cli

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"runtime"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/report"
)

const demo = "../../../../testdata/demo"

// The whole way with the real calibration, for a recording of each kind in the demo session: the bead that escapes
// makes it one not to be trusted, results fit the schema, and every output is remade from the stored result.
func TestDemo(t *testing.T) {
	var tracks []string
	for _, name := range []string{"camera", "quadrant", "power-60mW", "free", "stuck", "escaped"} {
		tracks = append(tracks, filepath.Join(demo, name+".csv"))
	}
	out := t.TempDir()
	w, text, errs := testWorld("")
	w.Calibrate = calib.Calibrate
	if got := run(context.Background(), append([]string{"calibrate", "--out", out}, tracks...), w); got != StatusDistrust {
		t.Fatalf("status %d, %s%s", got, text, errs)
	}
	recordings, err := os.ReadDir(out)
	if err != nil {
		t.Fatal(err)
	}
	schema := resultSchema(t)
	for _, recording := range recordings {
		first := contents(t, filepath.Join(out, recording.Name()))
		document, err := jsonschema.UnmarshalJSON(bytes.NewReader([]byte(first[resultJSON])))
		if err != nil {
			t.Fatal(err)
		}
		if err := schema.Validate(document); err != nil {
			t.Errorf("%s: %v", recording.Name(), err)
		}
		compareRemade(t, filepath.Join(out, recording.Name()), first)
	}
}

func resultSchema(t *testing.T) *jsonschema.Schema {
	t.Helper()
	document, err := jsonschema.UnmarshalJSON(bytes.NewReader(report.Schema()))
	if err != nil {
		t.Fatal(err)
	}
	compiler := jsonschema.NewCompiler()
	if err := compiler.AddResource("result", document); err != nil {
		t.Fatal(err)
	}
	return compiler.MustCompile("result")
}

// compareRemade holds what report makes of the stored result to what calibrate wrote.
func compareRemade(t *testing.T, folder string, first map[string]string) {
	t.Helper()
	again := t.TempDir()
	w, _, errs := testWorld("")
	if got := run(context.Background(), []string{"report", "--out", again, filepath.Join(folder, resultJSON)}, w); got != StatusDone && (got != StatusDistrust || filepath.Base(folder) != "escaped") {
		t.Fatalf("report: status %d, %s", got, errs)
	}
	for name, text := range contents(t, filepath.Join(again, filepath.Base(folder))) {
		if first[name] != text {
			t.Errorf("%s of %s is remade with other bytes", name, filepath.Base(folder))
		}
	}
}

// The same input gives the same bytes, whatever the number of workers.
func TestSameBytes(t *testing.T) {
	track := filepath.Join(demo, "camera.csv")
	var texts []string
	for _, workers := range []int{1, 2, 7} {
		before := runtime.GOMAXPROCS(workers)
		w, text, errs := testWorld("")
		w.Calibrate = calib.Calibrate
		got := run(context.Background(), []string{"calibrate", "--format", "json", track}, w)
		runtime.GOMAXPROCS(before)
		if got != StatusDone {
			t.Fatalf("status %d, %s", got, errs)
		}
		texts = append(texts, text.String())
	}
	if texts[0] != texts[1] || texts[0] != texts[2] {
		t.Error("1, 2 and 7 workers give different bytes")
	}
}
