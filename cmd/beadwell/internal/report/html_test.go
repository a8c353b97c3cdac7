package report

import (
	"bytes"
	"encoding/xml"
	"errors"
	"io"
	"regexp"
	"strings"
	"testing"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/figure/specimen"

	"github.com/google/go-cmp/cmp"
)

func htmlOf(t *testing.T, r *calib.Result) string {
	t.Helper()
	var b bytes.Buffer
	if err := HTML(&b, r); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// htmlTokens reads a page with the tolerance that XML readers have for HTML.
func htmlTokens(t *testing.T, page string) []xml.Token {
	t.Helper()
	d := xml.NewDecoder(strings.NewReader(page))
	d.Strict, d.AutoClose, d.Entity = false, xml.HTMLAutoClose, xml.HTMLEntity
	var tokens []xml.Token
	for {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			return tokens
		}
		if err != nil {
			t.Fatalf("page is not well-formed: %v", err)
		}
		tokens = append(tokens, xml.CopyToken(token))
	}
}

// elements returns the start tags of a page.
func elements(t *testing.T, page string) []xml.StartElement {
	t.Helper()
	var found []xml.StartElement
	for _, token := range htmlTokens(t, page) {
		if e, ok := token.(xml.StartElement); ok {
			found = append(found, e)
		}
	}
	return found
}

func attribute(e xml.StartElement, name string) string {
	for _, a := range e.Attr {
		if a.Name.Local == name {
			return a.Value
		}
	}
	return ""
}

func TestHTMLSameBytes(t *testing.T) {
	one, again := htmlOf(t, specimen.Result()), htmlOf(t, specimen.Result())
	if one != again {
		t.Error("the page differs from one time to the next")
	}
}

func TestHTMLAnswersFirst(t *testing.T) {
	page := htmlOf(t, storedSample())
	last := -1
	for _, part := range []string{"<h1>tonight/run7.csv</h1>", "No: inconsistent", "do not use z before its cause is known",
		"52.3(11)\u00a0pN/µm", "48.1 [47.5, 49.6]\u00a0pN/µm", ">withheld</dd>", "the drag route is 31(6)\u00a0% above",
		`id="findings"`, "slow-drift", "let the stage settle", `id="figures"`, `id="figure-estimates"`, `id="estimates"`, `id="drag"`, `id="budget"`,
		`id="fits"`, `id="reading"`, `id="settings"`, `id="provenance"`, `id="result"`} {
		at := strings.Index(page, part)
		if at <= last {
			t.Errorf("%q stands at %d, want it behind %d", part, at, last)
		}
		last = max(last, at)
	}
}

func TestHTMLIsSelfContained(t *testing.T) {
	page := htmlOf(t, specimen.Result())
	for _, e := range elements(t, page) {
		for _, a := range e.Attr {
			if a.Name.Local == "style" || strings.HasPrefix(a.Name.Local, "on") {
				t.Errorf("element %s has the attribute %s, which the policy forbids", e.Name.Local, a.Name.Local)
			}
			if a.Name.Local == "src" || (a.Name.Local == "href" && !strings.HasPrefix(a.Value, "#") && a.Value != "data:,") {
				t.Errorf("element %s points to %q", e.Name.Local, a.Value)
			}
		}
		if e.Name.Local == "script" && attribute(e, "type") != "application/json" {
			t.Error("the page has a script")
		}
	}
	start, end := strings.Index(page, "<style>")+len("<style>"), strings.Index(page, "</style>")
	want, policies := policy(page[start:end]), 0
	for _, e := range elements(t, page) {
		if attribute(e, "http-equiv") != "Content-Security-Policy" {
			continue
		}
		policies++
		if got := attribute(e, "content"); got != want {
			t.Errorf("policy %s, want %s with the hash of the style sheet", got, want)
		}
	}
	if policies != 1 {
		t.Errorf("%d policies, want 1", policies)
	}
	if strings.Contains(page, "ZgotmplZ") {
		t.Error("the template refused a value")
	}
}

// TestHTMLForScreenReaders checks what a reader that hears the page needs; a
// browser run of axe-core found no violation on the same page.
func TestHTMLForScreenReaders(t *testing.T) {
	ids, level, captions, tables := map[string]bool{}, 0, 0, 0
	var wanted []string
	landmarks := map[string]int{}
	for _, e := range elements(t, htmlOf(t, specimen.Result())) {
		name := e.Name.Local
		if id := attribute(e, "id"); id != "" {
			if ids[id] {
				t.Errorf("two elements have the id %s", id)
			}
			ids[id] = true
		}
		if href := attribute(e, "href"); strings.HasPrefix(href, "#") {
			wanted = append(wanted, href[1:])
		}
		wanted = append(wanted, strings.Fields(attribute(e, "aria-labelledby"))...)
		switch name {
		case "html":
			if attribute(e, "lang") != "en" {
				t.Error("the page has no language")
			}
		case "h1", "h2", "h3", "h4":
			if next := int(name[1] - '0'); next > level+1 {
				t.Errorf("heading %s follows level %d", name, level)
			} else {
				level = next
			}
		case "table":
			tables++
		case "caption":
			captions++
		case "th":
			if attribute(e, "scope") == "" {
				t.Error("a header cell has no scope")
			}
		case "header", "main", "nav", "footer":
			landmarks[name]++
		}
	}
	if captions != tables || tables < 6 {
		t.Errorf("%d captions for %d tables", captions, tables)
	}
	for _, id := range wanted {
		if !ids[id] {
			t.Errorf("nothing has the id %s", id)
		}
	}
	if diff := cmp.Diff(map[string]int{"header": 1, "main": 1, "nav": 1, "footer": 1}, landmarks); diff != "" {
		t.Error(diff)
	}
}

var embedded = regexp.MustCompile(`(?s)<script type="application/json" id="result">(.*?)</script>`)

func TestHTMLHoldsTheResult(t *testing.T) {
	r := storedSample()
	r.Input.Name = "</script><script>alert(1)</script><!--\u2028"
	page := htmlOf(t, r)
	match := embedded.FindAllStringSubmatch(page, -1)
	if len(match) != 1 {
		t.Fatalf("%d results in the page, want 1", len(match))
	}
	got, err := ReadJSON(strings.NewReader(match[0][1]))
	if err != nil {
		t.Fatal(err)
	}
	var want, again bytes.Buffer
	if err := JSON(&want, r); err != nil {
		t.Fatal(err)
	}
	if err := JSON(&again, got); err != nil {
		t.Fatal(err)
	}
	if want.String() != again.String() {
		t.Error(cmp.Diff(want.String(), again.String()))
	}
}

func TestHTMLHostileNames(t *testing.T) {
	const name = "<img src=x onerror=alert(1)>\x1b[31m\u202e\x00\"'`{{.}}"
	r := storedSample()
	clean := len(elements(t, htmlOf(t, r)))
	r.Input.Name, r.Input.Bead = name, name
	r.Findings[0].Text, r.Findings[0].Code, r.Findings[0].Remedy = name, name, name
	r.Settings[0].Text, r.Settings[0].Key, r.Settings[0].Where = name, name, name
	r.ReadAs.Line, r.ReadAs.Columns[0].Header = name, name
	r.Program.Command = []string{"beadwell", name}
	r.Verdict.Text = name
	page := htmlOf(t, r)
	if got := len(elements(t, page)); got != clean {
		t.Errorf("%d elements, want %d: a name became markup", got, clean)
	}
	for _, bad := range []string{"<img", "\x1b", "\u202e", "\x00"} {
		if strings.Contains(page, bad) {
			t.Errorf("the page holds %q", bad)
		}
	}
}

func TestHTMLOfLittle(t *testing.T) {
	for name, r := range map[string]*calib.Result{
		"nothing": {}, "one empty axis": {Axes: []calib.Axis{{Name: "x"}}}, "no findings": {Verdict: calib.Verdict{Status: calib.Unfit}},
	} {
		if page := htmlOf(t, r); !strings.Contains(page, "Nothing was found that you need to know.") {
			t.Errorf("%s: the page does not say that there is nothing to know", name)
		}
	}
}

// fullDevice is a writer to a full device.
type fullDevice struct{}

var errFull = errors.New("no space left")

func (fullDevice) Write([]byte) (int, error) { return 0, errFull }

func TestHTMLTellsWhenItCannotWrite(t *testing.T) {
	if err := HTML(fullDevice{}, storedSample()); !errors.Is(err, errFull) {
		t.Errorf("error %v, want %v", err, errFull)
	}
}
