package report

import (
	"bytes"
	"encoding/json"
	"errors"
	"strings"
	"testing"
	"unicode"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"beadwell/calib"
	"beadwell/calib/bound"
)

func encoded(t *testing.T, r *calib.Result) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := JSON(&b, r); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// What is stored is read back without loss, and written again to the same bytes.
func TestJSONRoundTrip(t *testing.T) {
	for name, r := range map[string]*calib.Result{"full": storedSample(), "hostile": hostileSample(), "no axis": {Schema: calib.SchemaVersion}} {
		stored := encoded(t, r)
		back, err := ReadJSON(bytes.NewReader(stored))
		if err != nil {
			t.Fatalf("%s: ReadJSON = %v", name, err)
		}
		if diff := cmp.Diff(r, back, sameFloat, cmpopts.EquateEmpty()); diff != "" {
			t.Errorf("%s: read back differs (-stored +read):\n%s", name, diff)
		}
		if again := encoded(t, back); !bytes.Equal(stored, again) {
			t.Errorf("%s: written again differs:\n%s", name, cmp.Diff(string(stored), string(again)))
		}
	}
}

// Nothing in JSON that is shown on a terminal steers it.
func TestJSONIsPlain(t *testing.T) {
	for _, r := range string(encoded(t, hostileSample())) {
		if r != '\n' && !unicode.IsPrint(r) {
			t.Errorf("JSON holds %U", r)
		}
	}
}

// Writing must not change the result it was given.
func TestJSONLeavesResult(t *testing.T) {
	r, want := hostileSample(), hostileSample()
	r.Axes[0].Trace.Low, want.Axes[0].Trace.Low = nil, nil
	encoded(t, r)
	if diff := cmp.Diff(want, r, sameFloat); diff != "" {
		t.Errorf("JSON changed its argument (-want +got):\n%s", diff)
	}
}

func TestReadJSONErrors(t *testing.T) {
	good := string(encoded(t, storedSample()))
	change := func(old, new string) string {
		changed := strings.Replace(good, old, new, 1)
		if changed == good {
			t.Fatalf("%q does not stand in the sample", old)
		}
		return changed
	}
	for _, test := range []struct{ name, text, want string }{
		{"empty", " \n", "is empty"},
		{"a recording", "t (s),x (um)\n1,2\n", `is not a stored result: it begins with "t (s),x (um)"`},
		{"a list", "[1]", `is not a stored result: it begins with "[1]"`},
		{"a long line", strings.Repeat("0.1,", 100), `it begins with "0.1,0.1,0.1,0.1,0.1,0.1,..."`},
		{"byte order mark", "\ufeff" + good, "begins with a byte order mark"},
		{"cut", good[:len(good)/2], "is cut: it ends before the result does"},
		{"more behind", good + "{}", `has more behind the result: "{}"`},
		{"broken", change(`"verdict": {`, `"verdict" oops {`), `is not JSON from here on: "oops {"`},
		{"no schema", `{"a": 1}`, `has no key "schema"`},
		{"another schema", change(calib.SchemaVersion, "beadwell-result/9"), `schema is "beadwell-result/9", not "beadwell-result/1": another version`},
		{"of another program", `{"schema": "x"}`, `schema is "x", not "beadwell-result/1"`},
		{"forces", `{"schema": "` + ForceVersion + `"}`, "holds forces (beadwell-force/1), not the result of one recording"},
		{"a plan", `{"schema": "` + calib.PlanVersion + `"}`, "holds a plan"},
		{"a schema that is no text", `{"schema": 1}`, "schema holds a number where the program writes a text"},
		{"a set", `{"schema": "` + SetVersion + `"}`, "several recordings"},
		{"unknown key", change(`"verdict": {`, `"verdict": {"mood": 1,`), `unknown field "mood"`},
		{"key in another case", change(`"verdict": {`, `"Verdict": {`), "is not a key of a result"},
		{"key twice", change(`"verdict": {`, `"verdict": {"status": "consistent",`), `the key "status" stands twice`},
		{"missing key", change(`"route": "drag",`, ``), "axes[0].estimates[0].route is missing"},
		{"wrong type", change(`"samples": 100000`, `"samples": "many"`), "recording.samples holds a text where the program writes a number"},
		{"short interval", change(`"band_hz": [`+"\n", `"band_hz": [0,`+"\n"), "is a list of 3"},
		{"infinite", change(`"mean_m": 1e-9`, `"mean_m": 1e999`), "mean_m holds the number 1e999 where the program writes a number"},
		{"not UTF-8", change("tonight", "\xff"), "is not UTF-8"},
		{"name bytes", change(`"sha256"`, `"name_bytes": "zz", "sha256"`), "name_bytes"},
	} {
		_, err := ReadJSON(strings.NewReader(test.text))
		var at *ReadError
		if !errors.As(err, &at) || !strings.Contains(err.Error(), test.want) {
			t.Errorf("%s: ReadJSON = %v, want an error with %q", test.name, err, test.want)
		}
	}
}

func TestSetJSON(t *testing.T) {
	var b bytes.Buffer
	if err := SetJSON(&b, Set{Failures: []Problem{{Code: "input", Status: 4, Input: "a.csv", Message: "is empty"}}}); err != nil {
		t.Fatal(err)
	}
	var set map[string]any
	if err := json.Unmarshal(b.Bytes(), &set); err != nil {
		t.Fatal(err)
	}
	want := map[string]any{"schema": SetVersion, "results": []any{},
		"failures": []any{map[string]any{"code": "input", "exit_status": 4.0, "input": "a.csv", "message": "is empty"}}}
	if diff := cmp.Diff(want, set); diff != "" {
		t.Errorf("SetJSON (-want +got):\n%s", diff)
	}
}

// The invariant of the reader: an error, or a result that is written to what was read.
func FuzzReadJSON(f *testing.F) {
	var b bytes.Buffer
	if err := JSON(&b, storedSample()); err != nil {
		f.Fatal(err)
	}
	f.Add(b.Bytes())
	f.Add([]byte(`{"schema":"beadwell-result/1"}`))
	f.Add([]byte(`{"schema":"beadwell-result/1","Schema":null,"axes":[{}]}`))
	f.Fuzz(func(t *testing.T, text []byte) {
		if len(text) > bound.Input {
			return
		}
		var r *calib.Result
		var err error
		bound.Effort(t, func() { r, err = ReadJSON(bytes.NewReader(text)) })
		if err != nil {
			return
		}
		first := encoded(t, r)
		back, err := ReadJSON(bytes.NewReader(first))
		if err != nil {
			t.Fatalf("what was read cannot be read again: %v", err)
		}
		if !bytes.Equal(first, encoded(t, back)) {
			t.Fatal("written twice, two texts")
		}
	})
}

// sameFloat takes two unknown numbers as equal.
var sameFloat = cmp.Comparer(func(a, b calib.Float) bool { return a == b || !a.Known() && !b.Known() })

// Text in JSON can be read by eye: no character is escaped that needs not be.
func TestJSONIsReadable(t *testing.T) {
	r := storedSample()
	r.Input.Name = "a<b>&\u00b5.csv"
	if text := string(encoded(t, r)); !strings.Contains(text, `"name": "a<b>&µ.csv"`) {
		t.Errorf("JSON writes the name otherwise than it is: %.300s", text)
	}
}

// zeros is an endless file.
type zeros struct{}

func (zeros) Read(p []byte) (int, error) { return len(p), nil }

func TestReadJSONIsBounded(t *testing.T) {
	if _, err := ReadJSON(zeros{}); err == nil || !strings.Contains(err.Error(), "is larger than") {
		t.Errorf("ReadJSON of an endless file = %v", err)
	}
}
