package track

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"reflect"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/klauspost/compress/gzip"
)

func readString(t *testing.T, text string, opt Options) ([]*Recording, error) {
	t.Helper()
	if opt.Name == "" {
		opt.Name = "run7.csv"
	}
	return Read(t.Context(), strings.NewReader(text), opt)
}

// code returns the code of a refusal.
func code(err error) string {
	var e *Error
	if errors.As(err, &e) {
		return e.Code
	}
	return ""
}

func TestResultDoesNotDependOnWorkers(t *testing.T) {
	text := ordinary(40_000)
	lines := strings.SplitAfter(text, "\n")
	for i := 1000; i < len(lines); i += 3001 {
		lines[i] = "# a remark\n"
	}
	lines[20_000] = strings.Replace(lines[20_000], ",", ",nan ,", 1)[:strings.IndexByte(lines[20_000], ',')+4] + ",,\n"
	text = strings.Join(lines, "")
	var first []*Recording
	for _, workers := range []int{1, 2, 3, 8} {
		list, err := readString(t, text, Options{Workers: workers})
		if err != nil {
			t.Fatal(err)
		}
		if first == nil {
			first = list
			continue
		}
		// NaN differs from itself, so the values are compared as text.
		if fmt.Sprintf("%+v", *list[0]) != fmt.Sprintf("%+v", *first[0]) {
			t.Errorf("%d workers give another recording than one", workers)
		}
	}
	if rec := first[0]; rec.Samples != 40_000 || rec.Missing != 14 {
		t.Errorf("%d samples, %d missing, want 40000 and 13 remarks' gaps with one empty row", rec.Samples, rec.Missing)
	}
}

// Errors of a large file name the same lines for any number of workers: the
// first ten, in order, and a count of the rest.
func TestFirstTenBadPlaces(t *testing.T) {
	lines := strings.SplitAfter(ordinary(30_000), "\n")
	bad := 0
	for i := 500; i < 30_000; i += 997 {
		lines[i] = strings.Replace(lines[i], "0.", "0.o", 1)
		bad++
	}
	for _, workers := range []int{1, 4} {
		_, err := readString(t, strings.Join(lines, ""), Options{Workers: workers})
		var all *Errors
		if !errors.As(err, &all) || len(all.Places) != 10 || all.More != bad-10 {
			t.Fatalf("got %v, want ten places and %d more", err, bad-10)
		}
		for i, place := range all.Places {
			if place.Line != 501+i*997 || place.Column != 1 {
				t.Errorf("place %d is %d:%d, want line %d, column 1", i, place.Line, place.Column, 501+i*997)
			}
		}
		if text := err.Error(); strings.Count(text, "hint:") != 1 || !strings.Contains(text, fmt.Sprintf("and %d more", bad-10)) {
			t.Errorf("message:\n%s", text)
		}
	}
}

func TestSizeAndHash(t *testing.T) {
	text := ordinary(20_000)
	var packed bytes.Buffer
	z := gzip.NewWriter(&packed)
	_, _ = z.Write([]byte(text))
	_ = z.Close()
	for _, data := range [][]byte{[]byte(text), packed.Bytes()} {
		list, err := Read(t.Context(), bytes.NewReader(data), Options{Name: "run7.csv"})
		if err != nil {
			t.Fatal(err)
		}
		sum := sha256.Sum256(data)
		if rec := list[0]; rec.Size != int64(len(data)) || rec.SHA256 != hex.EncodeToString(sum[:]) {
			t.Errorf("size %d and hash %s, want %d and %x", rec.Size, rec.SHA256, len(data), sum)
		}
	}
}

func TestOnlyRegularFiles(t *testing.T) {
	dir := t.TempDir()
	pipe := filepath.Join(dir, "pipe")
	if err := syscall.Mkfifo(pipe, 0o600); err != nil {
		t.Fatal(err)
	}
	for _, path := range []string{dir, pipe, os.DevNull} {
		if _, err := ReadFile(t.Context(), path, Options{}); code(err) != CodeFileKind {
			t.Errorf("%s: %v, want a refusal", path, err)
		}
	}
	if _, err := ReadFile(t.Context(), filepath.Join(dir, "ab\x1b[31msent"), Options{}); err == nil || !errors.Is(err, os.ErrNotExist) || strings.Contains(err.Error(), "\x1b") {
		t.Errorf("absent file: %q", err)
	}
}

// slowFile appends to the file it reads.
type growing struct {
	io.Reader
	path string
}

func (g *growing) Read(p []byte) (int, error) {
	n, err := g.Reader.Read(p)
	if err == io.EOF {
		file, openErr := os.OpenFile(g.path, os.O_APPEND|os.O_WRONLY, 0)
		if openErr == nil {
			_, _ = file.WriteString("9,9,9,9\n")
			_ = file.Close()
		}
	}
	return n, err
}

func TestFileThatChanges(t *testing.T) {
	path := filepath.Join(t.TempDir(), "run7.csv")
	if err := os.WriteFile(path, []byte(ordinary(3000)), 0o600); err != nil {
		t.Fatal(err)
	}
	before, _ := os.Stat(path)
	if err := unchanged("run7.csv", path, before, before.Size()); err != nil {
		t.Errorf("an unchanged file: %v", err)
	}
	if err := unchanged("run7.csv", path, before, before.Size()-1); code(err) != CodeChanged {
		t.Errorf("fewer bytes read than the file has: %v", err)
	}
	file, _ := os.Open(path)
	defer file.Close()
	if _, err := io.Copy(io.Discard, &growing{file, path}); err != nil {
		t.Fatal(err)
	}
	if err := unchanged("run7.csv", path, before, before.Size()); code(err) != CodeChanged {
		t.Errorf("a file that grew: %v", err)
	}
}

func TestCancel(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	reader, writer := io.Pipe() // nothing ever comes
	defer writer.Close()
	time.AfterFunc(20*time.Millisecond, cancel)
	start := time.Now()
	if _, err := Read(ctx, reader, Options{Name: "-"}); !errors.Is(err, context.Canceled) || time.Since(start) > time.Second {
		t.Errorf("blocked stream: %v after %v", err, time.Since(start))
	}
	path := filepath.Join(t.TempDir(), "run7.csv")
	if err := os.WriteFile(path, []byte(ordinary(30_000)), 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := ReadFile(ctx, path, Options{}); !errors.Is(err, context.Canceled) {
		t.Errorf("file after cancelling: %v", err)
	}
}

func TestLimits(t *testing.T) {
	var bomb bytes.Buffer
	z := gzip.NewWriter(&bomb)
	_, _ = z.Write([]byte("t (s),x (um)\n"))
	_, _ = z.Write(bytes.Repeat([]byte("0,0\n"), 3<<20))
	_ = z.Close()
	wide := "t (s),x (um)" + strings.Repeat(",a", 5000) + "\n"
	for i := range 20 {
		wide += fmt.Sprintf("0.%02d,%d", i, i*i%7) + strings.Repeat(",1", 5000) + "\n"
	}
	long := "t (s),x (um)\n0.001,0.5\n0.002,0.4\n" + strings.Repeat("7", 3<<20) + "\n"
	for name, c := range map[string]struct {
		data string
		opt  Options
	}{
		"bomb":     {bomb.String(), Options{MaxBytes: 1 << 20}},
		"wide":     {wide, Options{}},
		"long":     {long, Options{}},
		"one line": {strings.Repeat("7,", 2<<20), Options{}},
	} {
		if _, err := readString(t, c.data, c.opt); code(err) != CodeLimit {
			t.Errorf("%s: %v, want a refusal by a limit", name, err)
		}
	}
}

// Padding, a lost tail, and whatever else comes late in a file larger than the
// sample and larger than a block.
func TestLateInTheFile(t *testing.T) {
	text := ordinary(60_000)
	for name, c := range map[string]struct{ data, code string }{
		"padded":             {text + strings.Repeat("\x00", 2<<20), ""},
		"padded in a row":    {text[:len(text)-1] + strings.Repeat("\x00", 2<<20), ""},
		"padded, then text":  {text + strings.Repeat("\x00", 1<<20) + "1,2,3,4\n", CodeFormat},
		"control Z":          {text + "\x1a", ""},
		"footer":             {text + "\nend of recording\n", ""},
		"cut in a row":       {text[:len(text)-15], CodeCut},
		"cut in a number":    {text[:len(text)-4], CodeCut},
		"another header":     {text + "t (s),x (nm),y (nm),z (nm)\n6,1,2,3\n", CodeRow},
		"the header again":   {text + "t (s),x (um),y (um),z (um)\n6.00000,1,2,3\n", ""},
		"time starts again":  {text + ordinary(100), CodeTime},
		"narrower rows":      {text + "6.00000,1,2\n", CodeRow},
		"a quote":            {text + "6.00000,\"1,2,3\n", CodeRow},
		"a quoted number":    {text + "6.00000,\"1\",2,3\n", ""},
		"Unicode minus late": {text + "6.00000,−1,2,3\n", ""},
	} {
		list, err := readString(t, c.data, Options{})
		if code(err) != c.code || err == nil && len(list) != 1 {
			t.Errorf("%s: %v, want code %q", name, err, c.code)
		}
	}
}

// What the error says and what the notes say cannot steer a terminal.
func TestHostileText(t *testing.T) {
	text := "t (s),x\x1b[31m (um),y\u202e (um)\n0.1,1,5\n0.2,2,6\n0.3,\x1b]0;owned\x07,7\n"
	_, err := readString(t, text, Options{Name: "bad\x1b[2Jname\n.csv"})
	if err == nil || strings.ContainsAny(strings.ReplaceAll(err.Error(), "\n  hint", ""), "\x1b\x07\u202e\n") {
		t.Errorf("message %q", err)
	}
	for s, want := range map[string]string{"plain µ": "plain µ", "a\x1bb": `a\x1bb`, "x\ny": `x\ny`, "\u202e": `\u202e`, "\xff": `\xff`, `q"\`: `q"\`} {
		if have := Printable(s); have != want {
			t.Errorf("Printable(%q) = %q, want %q", s, have, want)
		}
	}
}

func TestSettingsReplaceInference(t *testing.T) {
	whole := "t (s),x,y\n"
	for i := range 12 {
		whole += fmt.Sprintf("%d,%d,%d\n", i, i*i%7, i*i%5)
	}
	for name, c := range map[string]struct {
		text string
		opt  Options
		code string
		axes string
	}{
		"columns by name":      {"a,b,c\n1,2,3\n2,3,5\n3,5,1\n", Options{Columns: map[string]string{"x": "b", "z": "3"}, Unit: "nm", Rate: 10}, "", "xz"},
		"column absent":        {"a,b,c\n1,2,3\n2,3,5\n3,5,1\n", Options{Columns: map[string]string{"x": "d"}, Unit: "nm", Rate: 10}, CodeColumns, ""},
		"column twice":         {"a,b,c\n1,2,3\n2,3,5\n3,5,1\n", Options{Columns: map[string]string{"x": "a", "y": "1"}, Unit: "nm", Rate: 10}, CodeSetting, ""},
		"unknown role":         {"a,b,c\n1,2,3\n2,3,5\n3,5,1\n", Options{Columns: map[string]string{"w": "a"}, Unit: "nm", Rate: 10}, CodeSetting, ""},
		"named constant":       {"t (s),x (um),y (um)\n0.01,2,3\n0.02,2,5\n0.03,2,1\n", Options{Columns: map[string]string{"x": "x", "y": "y"}}, CodeEmpty, ""},
		"unit by force":        {"t (s),x (um)\n0.01,2\n0.02,4\n0.03,2\n", Options{Unit: "nm", UnitForced: true}, "", "x"},
		"rate by force":        {"t (s),x (um)\n0.01,2\n0.02,4\n0.03,2\n", Options{Rate: 50, RateForced: true}, "", "x"},
		"rate within a part":   {"t (s),x (um)\n0.01,2\n0.02,4\n0.03,2\n", Options{Rate: 100.05}, "", "x"},
		"rate negative":        {"x (um)\n2\n4\n3\n", Options{Rate: -1}, CodeSetting, ""},
		"unit unknown":         {"t (s),x\n0.01,2\n0.02,4\n0.03,2\n", Options{Unit: "ell"}, CodeSetting, ""},
		"time unit":            {"t,x (um)\n1,2\n2,4\n3,2\n", Options{TimeUnit: "ms"}, "", "x"},
		"time unit contra":     {"t (s),x (um)\n1,2\n2,4\n3,2\n", Options{TimeUnit: "ms"}, CodeUnit, ""},
		"no header":            {"1,2,3\n2,3,5\n3,5,1\n", Options{Header: "none", Columns: map[string]string{"x": "2"}, Unit: "um", Rate: 5}, "", "x"},
		"header lines":         {"1,2,3\nt (s),x (um),y (um)\n0.01,3,5\n0.02,5,1\n0.03,3,3\n", Options{Header: "2"}, "", "xy"},
		"bad header":           {"1,2,3\n", Options{Header: "many"}, CodeSetting, ""},
		"delimiter":            {"t (s);x (um)\n0,01;2\n0,02;4\n0,03;2\n", Options{Delimiter: "semicolon", Decimal: "comma"}, "", "x"},
		"bad delimiter":        {"1,2\n", Options{Delimiter: "star"}, CodeSetting, ""},
		"bad mark":             {"1,2\n", Options{Decimal: "star"}, CodeSetting, ""},
		"no such bead":         {"t (s),x (um)\n0.01,2\n0.02,4\n0.03,2\n", Options{Bead: "4"}, CodeSetting, ""},
		"keep":                 {"t (s),x (um),stage\n0.01,2,1\n0.02,4,2\n0.03,2,3\n", Options{Keep: []string{"stage"}}, "", "x"},
		"keep absent":          {"t (s),x (um),stage\n0.01,2,1\n0.02,4,2\n0.03,2,3\n", Options{Keep: []string{"stages"}}, CodeColumns, ""},
		"keep in use":          {"t (s),x (um),stage\n0.01,2,1\n0.02,4,2\n0.03,2,3\n", Options{Keep: []string{"t"}}, CodeSetting, ""},
		"inspect without unit": {"x,y\n1,2\n2,3\n3,1\n", Options{Inspect: true}, "", "xy"},
		"frames by rate":       {strings.Replace(whole, "t (s)", "t", 1), Options{Rate: 500, Unit: "um"}, "", "xy"},
	} {
		list, err := readString(t, c.text, c.opt)
		if code(err) != c.code || (err == nil) != (c.code == "") {
			t.Errorf("%s: %v, want code %q", name, err, c.code)
			continue
		}
		axes := ""
		for _, rec := range list {
			for _, a := range rec.Axes {
				axes += a.Name
			}
		}
		if axes != c.axes {
			t.Errorf("%s: axes %q, want %q", name, axes, c.axes)
		}
	}
}

func TestForcedSettingsAreNoted(t *testing.T) {
	list, err := readString(t, "t (s),x (um),stage\n0.01,2,7\n0.02,4,8\n0.03,2,9\n", Options{Unit: "nm", UnitForced: true, Rate: 50, RateForced: true, Keep: []string{"stage"}})
	if err != nil {
		t.Fatal(err)
	}
	rec := list[0]
	var codes []string
	for _, n := range rec.Notes {
		codes = append(codes, n.Code)
	}
	if !reflect.DeepEqual(codes, []string{"unit-overridden", "rate-overridden"}) || rec.Rate != 50 || rec.RateOrigin != "setting" || rec.Axes[0].Values[0] != 2e-9 {
		t.Errorf("notes %v, rate %v (%s), value %v", codes, rec.Rate, rec.RateOrigin, rec.Axes[0].Values[0])
	}
	if len(rec.Extra) != 1 || rec.Extra[0].Values[2] != 9 {
		t.Errorf("kept %+v", rec.Extra)
	}
}
