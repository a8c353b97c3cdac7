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
		want := StatusDone
		if recording.Name() == "escaped" {
			want = StatusDistrust
		}
		compareRemade(t, filepath.Join(out, recording.Name()), first, want)
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

// compareRemade holds what report makes of the stored result, with the same flags of figures, to
// what calibrate wrote; report ends with want, as calibrate did. No figure has more than 150 kB.
func compareRemade(t *testing.T, folder string, first map[string]string, want int, flags ...string) {
	t.Helper()
	again := t.TempDir()
	w, _, errs := testWorld("")
	if got := run(context.Background(), append([]string{"report", "--out", again, filepath.Join(folder, resultJSON)}, flags...), w); got != want {
		t.Fatalf("report: status %d, want %d, %s", got, want, errs)
	}
	remade := contents(t, filepath.Join(again, filepath.Base(folder)))
	for name, text := range remade {
		if first[name] != text {
			t.Errorf("%s of %s is remade with other bytes", name, filepath.Base(folder))
		}
		const most = 150_000
		if ending := filepath.Ext(name); len(text) > most && (ending == ".svg" || ending == ".png" || ending == ".pdf") {
			t.Errorf("%s of %s has %d bytes, more than %d", name, filepath.Base(folder), len(text), most)
		}
	}
	for name := range first {
		if _, has := remade[name]; !has {
			t.Errorf("%s of %s is not remade", name, filepath.Base(folder))
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
