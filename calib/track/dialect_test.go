package track

import (
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

const dialects = "testdata/dialects"

// settings reads "unit=um rate=2000" from the table of expectations.
func settings(t *testing.T, text string) Options {
	t.Helper()
	opt := Options{}
	for _, pair := range strings.Fields(text) {
		key, value, _ := strings.Cut(pair, "=")
		switch key {
		case "unit":
			opt.Unit = value
		case "timeunit":
			opt.TimeUnit = value
		case "rate":
			opt.Rate, _ = strconv.ParseFloat(value, 64)
		case "bead":
			opt.Bead = value
		default:
			t.Fatalf("unknown setting %q", pair)
		}
	}
	return opt
}

// expectations reads expected.tsv: the lines of each file in their order.
func expectations(t *testing.T) map[string][][]string {
	t.Helper()
	text, err := os.ReadFile(filepath.Join(dialects, "expected.tsv"))
	if err != nil {
		t.Fatal(err)
	}
	all := map[string][][]string{}
	for line := range strings.Lines(string(text)) {
		if cells := strings.Split(strings.TrimSuffix(line, "\n"), "\t"); !strings.HasPrefix(line, "#") {
			all[cells[0]] = append(all[cells[0]], cells)
		}
	}
	return all
}

// Every sample file reads to exactly the numbers that were written into it, or
// is refused at the place of what is wrong with it.
func TestDialects(t *testing.T) {
	all := expectations(t)
	files, err := os.ReadDir(dialects)
	if err != nil {
		t.Fatal(err)
	}
	for _, file := range files {
		name := file.Name()
		if name == "expected.tsv" || name == "README.md" {
			continue
		}
		want, ok := all[name]
		if !ok {
			t.Errorf("%s: no line in expected.tsv", name)
			continue
		}
		t.Run(name, func(t *testing.T) {
			list, err := ReadFile(context.Background(), filepath.Join(dialects, name), settings(t, want[0][1]))
			if want[0][2] == "refused" {
				checkRefusal(t, err, want[0])
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			if len(list) != len(want) {
				t.Fatalf("%d recordings, want %d", len(list), len(want))
			}
			for i, rec := range list {
				checkRecording(t, rec, want[i])
			}
		})
	}
}

func checkRefusal(t *testing.T, err error, want []string) {
	t.Helper()
	var place *Error
	if !errors.As(err, &place) {
		t.Fatalf("got error %v, want a refusal", err)
	}
	for i, have := range []string{place.Code, strconv.Itoa(place.Line), strconv.Itoa(place.Column)} {
		if want[3+i] != have && want[3+i] != "0" {
			t.Errorf("%s = %s, want %s, in: %v", []string{"code", "line", "column"}[i], have, want[3+i], err)
		}
	}
	if !strings.Contains(place.What, want[6]) || place.Remedy == "" {
		t.Errorf("message %q, hint %q; want the words %q", place.What, place.Remedy, want[6])
	}
}

func checkRecording(t *testing.T, rec *Recording, want []string) {
	t.Helper()
	number := func(s string) float64 {
		v, err := strconv.ParseFloat(s, 64)
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
	if rec.Bead != want[3] {
		t.Errorf("bead %q, want %q", rec.Bead, want[3])
	}
	tolerance := 1e-9
	switch want[11] {
	case "jitter": // twelve stamps with a tenth of a step of jitter fix the rate to 1 %
		tolerance = 0.01
	case "time-rounded": // 0.29 ms of rounding over 3000 stamps: 0.43/3000^1.5, three times
		tolerance = 1e-5
	}
	if r := number(want[4]); math.Abs(rec.Rate-r) > tolerance*r {
		t.Errorf("rate %v Hz, want %v", rec.Rate, r)
	}
	if s := number(want[5]); math.Abs(rec.Start-s) > 1e-9*math.Abs(s)+max(1e-9, tolerance) {
		t.Errorf("start %v s, want %v", rec.Start, s)
	}
	if have := fmt.Sprintf("%d %d", rec.Samples, rec.Missing); have != want[6]+" "+want[7] {
		t.Errorf("samples and missing %s, want %s %s", have, want[6], want[7])
	}
	var axes, first, last []string
	for _, a := range rec.Axes {
		axes = append(axes, a.Name+" "+a.Unit)
		first = append(first, strconv.FormatFloat(a.Values[0], 'g', -1, 64))
		last = append(last, strconv.FormatFloat(a.Values[len(a.Values)-1], 'g', -1, 64))
	}
	if have := strings.Join(axes, ", "); have != want[8] {
		t.Errorf("axes %q, want %q", have, want[8])
	}
	for i, have := range [][]string{first, last} {
		for k, w := range strings.Fields(want[9+i]) {
			if k < len(have) && number(have[k]) != number(w) {
				t.Errorf("value %s, want %s", have[k], w)
			}
		}
	}
	if want[11] != "" && !slices.ContainsFunc(rec.Notes, func(n Note) bool { return n.Code == want[11] }) {
		t.Errorf("no note %q in %v", want[11], rec.Notes)
	}
	if rec.ReadAs.String() == "" || rec.SHA256 == "" {
		t.Error("no description of the reading, or no hash")
	}
}
