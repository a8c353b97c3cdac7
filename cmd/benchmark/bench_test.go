package main

import (
	"context"
	"path/filepath"
	"strings"
	"testing"
)

func TestMedian(t *testing.T) {
	for want, list := range map[float64][]float64{0: nil, 2: {3, 1, 2}, 2.5: {4, 1, 3, 2}} {
		if got := medianOf(list); got != want {
			t.Errorf("medianOf(%v) = %g, want %g", list, got, want)
		}
	}
}

// Sides run in turn; times that they print count; memory is that of the child.
func TestAlternate(t *testing.T) {
	log := filepath.Join(t.TempDir(), "log")
	b := &bench{ctx: context.Background()}
	sides := []side{
		{name: "a", command: []string{"sh", "-c", "echo a >> " + log + "; echo 2 seconds"}, printed: true},
		{name: "b", command: []string{"sh", "-c", "echo b >> " + log + "; echo 5"}, printed: true},
	}
	found, err := b.alternate(3, sides...)
	if err != nil {
		t.Fatal(err)
	}
	if found[0].median.wall != 2 || found[1].median.wall != 5 || found[1].ratio != 2.5 || found[0].ratio != 1 {
		t.Errorf("outcomes %+v, want 2 s and 5 s, in the ratio 2.5", found)
	}
	if m := found[0].median.memory; m < 1e5 || m > 1e8 {
		t.Errorf("a shell takes %g bytes", m)
	}
	_, order, err := measure(context.Background(), "cat", log)
	if err != nil || strings.Join(strings.Fields(order), "") != "ababab" {
		t.Errorf("the order is %q, error %v, want ababab", order, err)
	}
	if _, err := b.alternate(1, side{name: "c", command: []string{"sh", "-c", "exit 4"}}); err == nil {
		t.Error("a command that fails is taken as measured")
	}
	if _, err := b.alternate(1, side{name: "d", command: []string{"sh", "-c", "exit 3"}}); err != nil {
		t.Errorf("a calibration that is not to be trusted: %v", err)
	}
}

// The page holds the ratios with the bounds they are held against, and says what is missing.
func TestPage(t *testing.T) {
	one := []outcome{{side: side{name: "beadwell"}, median: usage{wall: 1, cpu: 2, memory: 3e8}}, {side: side{name: "script"}, median: usage{wall: 9, cpu: 9, memory: 1e9}, ratio: 9.1}}
	b := &bench{settings: settings{rounds: 5, tracks: 200}, ten: one, reads: one[:1], figures: one, plain: one, missing: []string{"a reader"},
		sizes: []size{{rows: 1000000, self: one[0], read: 0.4}}, limited: &one[0], limitedRows: 1000000, limitedSize: "400 MB"}
	page := b.page()
	for _, want := range []string{
		"| 1e7 | script | 9.00 | 9.00 | 1000 | 9.1 | at least 6.5 | 0.30 | at most 0.35 |",
		"| four each | script | 9.00 | 9.00 | 1000 | 9.1 | at least 20 | 0.30 |  |",
		"| 1e+06 | 1.00 | 0.40 | 1.000 | 300 | 168 |", "Not installed here, and left out: a reader.", "this run is 1.4 times that",
	} {
		if !strings.Contains(page, want) {
			t.Errorf("the page lacks %q:\n%s", want, page)
		}
	}
}
