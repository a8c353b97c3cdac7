package track

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/klauspost/compress/gzip"
)

// sameValues compares the axes of two readings bit by bit.
func sameValues(t *testing.T, what string, got, want []*Recording) {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("%s: %d recordings, want %d", what, len(got), len(want))
	}
	for i := range got {
		for k, axis := range got[i].Axes {
			for j, v := range axis.Values {
				if math.Float64bits(v) != math.Float64bits(want[i].Axes[k].Values[j]) {
					t.Fatalf("%s: sample %d of %s is %v, want %v", what, j, axis.Name, v, want[i].Axes[k].Values[j])
				}
			}
		}
		if got[i].Samples != want[i].Samples || got[i].Rate != want[i].Rate {
			t.Fatalf("%s: %d samples at %v Hz, want %d at %v", what, got[i].Samples, got[i].Rate, want[i].Samples, want[i].Rate)
		}
	}
}

// Lines may end in LF, CR LF, CR, or all of them, wherever in the file that begins.
func TestLineEndsAnywhere(t *testing.T) {
	text := ordinary(90_000)
	want, err := readString(t, text, Options{})
	if err != nil {
		t.Fatal(err)
	}
	late := strings.Index(text[5*sampleSize/4:], "\n") + 5*sampleSize/4
	lines := strings.SplitAfter(text, "\n")
	cycle := make([]string, len(lines))
	for i, line := range lines {
		cycle[i] = strings.Replace(line, "\n", []string{"\n", "\r\n", "\r"}[i%3], 1)
	}
	for name, changed := range map[string]string{
		"CR LF":                strings.ReplaceAll(text, "\n", "\r\n"),
		"CR":                   strings.ReplaceAll(text, "\n", "\r"),
		"CR CR LF":             strings.ReplaceAll(text, "\n", "\r\r\n"),
		"one CR, late":         text[:late] + "\r" + text[late+1:],
		"CR from then on":      text[:late] + strings.ReplaceAll(text[late:], "\n", "\r"),
		"CR LF, one CR, late":  strings.ReplaceAll(text[:late], "\n", "\r\n") + "\r" + strings.ReplaceAll(text[late+1:], "\n", "\r\n"),
		"all three in turn":    strings.Join(cycle, ""),
		"all three, but later": strings.Join(lines[:60_000], "") + strings.Join(cycle[60_000:], ""),
	} {
		got, err := readString(t, changed, Options{})
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		sameValues(t, name, got, want)
		bad := strings.Replace(changed, lines[80_000][:8], "oops"+lines[80_000][:8], 1)
		if _, err := readString(t, bad, Options{}); placeOf(err) != "80001:0" {
			t.Errorf("%s: the bad cell is at %s, want 80001:0", name, placeOf(err))
		}
	}
}

// A quoted cell may run on over some lines, in any part of the file and across the
// blocks in which it is parsed.
func TestQuotedCellsRunOn(t *testing.T) {
	const rows = 30_000
	table := func(remark func(i int) string) string {
		return "t (s),x (um),remark,y (um)\n" + positions(rows, func(i int, x float64) string {
			return fmt.Sprintf("%.3f,%g,%s,%g\n", float64(i)/1000, x, remark(i), -x)
		})
	}
	want, err := readString(t, table(func(int) string { return `""` }), Options{})
	if err != nil {
		t.Fatal(err)
	}
	for every := range 7 {
		text := table(func(i int) string {
			return `"` + strings.Repeat("the lamp, switched\r\noff \"\"again\"\"\n", i%(5+every)/(4+every)*(1+every)/2) + `"`
		})
		for _, workers := range []int{1, 2} {
			got, err := readString(t, text, Options{Workers: workers})
			if err != nil {
				t.Fatalf("every %d: %v", every, err)
			}
			sameValues(t, fmt.Sprint("every ", every), got, want)
		}
	}
	late := table(func(i int) string {
		if i == 20_000 {
			return "\"one\ntwo\nthree\""
		}
		return "no"
	})
	late = strings.Replace(late, "\n29.000,", "\n29.000,oops", 1)
	if _, err := readString(t, late, Options{}); placeOf(err) != "29004:8" {
		t.Errorf("a bad cell behind a quoted cell of three lines: %v, want line 29004", err)
	}
}

// A quote that nothing closes is named where it opens, and takes no row with it.
func TestQuoteThatStaysOpen(t *testing.T) {
	rows := func(change func(i int, row string) string) string {
		return "t (s),x (um),remark\n" + positions(40_000, func(i int, x float64) string {
			return change(i, fmt.Sprintf("%.3f,%g,", float64(i)/1000, x)) + "\n"
		})
	}
	for name, test := range map[string]struct {
		change func(i int, row string) string
		want   string
	}{
		"to the end": {func(i int, row string) string {
			return row + map[bool]string{true: `"left open`, false: "ok"}[i == 30_000]
		}, "30002:"},
		"closed in a row":   {func(i int, row string) string { return row + map[int]string{30_000: `"one`, 30_001: `two"`}[i] }, "30002:"},
		"on the last line":  {func(i int, row string) string { return row + map[int]string{39_999: `"one`}[i] }, "40001:"},
		"in the first row":  {func(i int, row string) string { return row + map[int]string{0: `"one`}[i] }, "2:"},
		"before more cells": {func(i int, row string) string { return row + map[int]string{30_000: "\"one\n,\",2"}[i] }, "30002:"},
	} {
		if _, err := readString(t, rows(test.change), Options{Unit: "um"}); !strings.HasPrefix(firstPlace(err), test.want) {
			t.Errorf("%s: %v, want line %s", name, err, test.want)
		}
	}
}

// firstPlace is the first place of a refusal.
func firstPlace(err error) string {
	if several, ok := err.(*Errors); ok {
		err = several.Places[0]
	}
	return placeOf(err)
}

// The column of a bad stamp is found again in any encoding and packing.
func TestColumnOfBadStamp(t *testing.T) {
	text := "x (µm);t (s)\n" + positions(3000, func(i int, x float64) string { return fmt.Sprintf("%g;%.3f\n", x, float64(i)/1000) }) + "1.25;2.000\n"
	wide := make([]byte, 0, 2*len(text))
	for _, c := range text {
		wide = append(wide, byte(c), byte(c>>8))
	}
	var packed strings.Builder
	z := gzip.NewWriter(&packed)
	if _, err := z.Write([]byte(text)); err != nil {
		t.Fatal(err)
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	for name, content := range map[string]string{
		"plain":   text,
		"CR":      strings.ReplaceAll(text, "\n", "\r"),
		"CR LF":   strings.ReplaceAll(text, "\n", "\r\n"),
		"gzip":    packed.String(),
		"UTF-16":  "\xff\xfe" + string(wide),
		"Latin-1": strings.ReplaceAll(text, "µ", "\xb5"),
	} {
		path := filepath.Join(t.TempDir(), "run7.csv")
		if err := os.WriteFile(path, []byte(content), 0o600); err != nil {
			t.Fatal(err)
		}
		if _, err := ReadFile(t.Context(), path, Options{}); placeOf(err) != "3002:6" {
			t.Errorf("%s: %v, at %s, want 3002:6", name, err, placeOf(err))
		}
	}
}

func TestLongLines(t *testing.T) {
	text := ordinary(100_000)
	for _, size := range []int{lineLimit - 4096, lineLimit + lineLimit/2, 3 * lineLimit} {
		_, err := readString(t, text+"# "+strings.Repeat("x", size)+"\n", Options{})
		if long := size > lineLimit; long != (code(err) == CodeLimit) || !long && err != nil {
			t.Errorf("a line of %d bytes: %v", size, err)
		}
	}
}
