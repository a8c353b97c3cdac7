package track

import (
	"bytes"
	"context"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"beadwell/calib/bound"
)

// checkOutcome verifies what holds for every input: either recordings or an
// error, and recordings that are whole.
func checkOutcome(t *testing.T, list []*Recording, err error) {
	t.Helper()
	if (err == nil) != (len(list) > 0) {
		t.Fatalf("%d recordings and error %v", len(list), err)
	}
	for _, rec := range list {
		if rec.Samples < 2 || len(rec.Axes) == 0 || !(rec.Rate > 0) {
			t.Fatalf("recording with %d samples, %d axes, %v Hz", rec.Samples, len(rec.Axes), rec.Rate)
		}
		for _, a := range rec.Axes {
			missing := 0
			for _, v := range a.Values {
				if math.IsInf(v, 0) {
					t.Fatalf("axis %s holds an infinity", a.Name)
				}
				if v != v {
					missing++
				}
			}
			if len(a.Values) != rec.Samples || missing != a.Missing {
				t.Fatalf("axis %s: %d values for %d samples, %d missing, counted %d", a.Name, len(a.Values), rec.Samples, missing, a.Missing)
			}
		}
		if rec.ReadAs.String() == "" {
			t.Fatal("no description of the reading")
		}
	}
}

// FuzzRead reads any bytes with settings that let most tables through.
func FuzzRead(f *testing.F) {
	files, err := filepath.Glob(filepath.Join(dialects, "*"))
	if err != nil {
		f.Fatal(err)
	}
	for _, file := range files {
		data, err := os.ReadFile(file)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(data)
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		if len(data) > bound.Input {
			return // the bounds hold for inputs under 1 MiB
		}
		for _, opt := range []Options{{MaxBytes: 1 << 22}, {Unit: "um", UnitForced: true, Rate: 1000, RateForced: true, TimeUnit: "", MaxBytes: 1 << 22}} {
			opt.Name, opt.Workers, opt.NoHash = "fuzz", 2, true
			var list []*Recording
			var err error
			bound.Effort(t, func() { list, err = Read(context.Background(), bytes.NewReader(data), opt) })
			checkOutcome(t, list, err)
		}
	})
}

// FuzzNumber holds the fast ways against strconv.ParseFloat.
func FuzzNumber(f *testing.F) {
	for _, s := range []string{"1", "-0.5", "1e5", ".5", "5.", "1e-400", "123456789012345678", "0.000000000000000000000001", "9007199254740993", "1.7976931348623157e308", "2.2250738585072011e-308", "0x1p-3", "1_000", "-", "inf"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		b := padded(s)
		for _, read := range []func([]byte, int, byte, int) (float64, int, bool){plainNumber, fastNumber} {
			v, next, ok := read(b, 0, '.', 0)
			if !ok {
				continue
			}
			want, err := strconv.ParseFloat(string(b[:next]), 64)
			if err != nil || math.Float64bits(v) != math.Float64bits(want) {
				t.Fatalf("%q reads as %v, ParseFloat(%q) says %v, %v", s, v, b[:next], want, err)
			}
		}
		for decimals := range mostDecimals + 1 { // and a column that expects so many decimals
			p := &parser{lay: &layout{delimiter: ';', mark: '.', fields: []field{{kind: numberField}}}}
			p.setColumns([][]float64{{0}})
			first := padded(strconv.FormatFloat(1.5, 'f', decimals, 64))
			if _, ok := p.fastRow(first, 0, 0); !ok || !p.columns[0].expects {
				t.Fatalf("nothing is expected after %q", first)
			}
			next, ok := p.fastRow(b, 0, 0)
			if text := strings.TrimSuffix(string(b[:max(next-1, 0)]), "\r"); ok && text != "" && text[0] != '"' && text[0]|0x20 != 'n' {
				want, err := strconv.ParseFloat(text, 64)
				if got := p.out[0][0]; err != nil || math.Float64bits(got) != math.Float64bits(want) {
					t.Fatalf("after %d decimals %q reads as %v, ParseFloat says %v, %v", decimals, text, got, want, err)
				}
			}
		}
		v, err := generalNumber(s, '.', 0, 0)
		if want, wantErr := strconv.ParseFloat(s, 64); err == nil && wantErr == nil && v == v && math.Float64bits(v) != math.Float64bits(want) {
			t.Fatalf("generalNumber(%q) = %v, ParseFloat says %v", s, v, want)
		}
	})
}

// FuzzClock reads any text as a date or a time of day.
func FuzzClock(f *testing.F) {
	for _, s := range []string{"12:30:00.125", "2024-05-31T12:30:00Z", "31.05.2024 12:30:00,5", "05/31/2024 23:59:60", "2024-05-31", "1:2:3:004"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, s string) {
		if stamp, ok := parseClock(s); ok && (!(stamp.second >= 0) || math.IsInf(stamp.second, 0) || !stamp.dated && !stamp.clocked) {
			t.Fatalf("parseClock(%q) = %+v", s, stamp)
		}
	})
}
