package track

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

// longText is a table of some more rows than the least that are held, and its exact values.
func longText(rows int, stamps bool) (text []byte, x []float64) {
	random := rand.New(rand.NewPCG(4, 2))
	var b bytes.Buffer
	if stamps {
		b.WriteString("t (s),x (um)\n")
	} else {
		b.WriteString("# rate: 1000 Hz\nx (um)\n")
	}
	for i := range rows {
		v := math.Round(random.NormFloat64()*1e5) / 1e6
		if stamps {
			fmt.Fprintf(&b, "%d.%03d,", i/1000, i%1000)
		}
		fmt.Fprintf(&b, "%.6f\n", v)
		x = append(x, v)
	}
	return b.Bytes(), x
}

// collected reads a text in parts, and puts the stretches together again, NaN in the gaps.
func collected(text []byte, opt Options) (rec *Recording, x []float64, stretches int, err error) {
	opt.Name, opt.MaxMemory = "long.csv", 1
	opt.Part = func(s *Recording, gap int) error {
		stretches++
		for range gap {
			x = append(x, math.NaN())
		}
		x = append(x, s.Axes[0].Values...)
		return nil
	}
	list, err := Read(context.Background(), bytes.NewReader(text), opt)
	if err != nil {
		return nil, nil, stretches, err
	}
	return list[0], x, stretches, nil
}

// A text that exceeds the rows that may be held comes in stretches, which together hold the same values, with
// the same facts, for any number of workers.
func TestReadInParts(t *testing.T) {
	for _, stamps := range []bool{true, false} {
		text, _ := longText(2*leastRows+5000, stamps)
		whole, err := Read(context.Background(), bytes.NewReader(text), Options{Name: "long.csv"})
		if err != nil {
			t.Fatal(err)
		}
		for _, workers := range []int{1, 3} {
			rec, x, stretches, err := collected(text, Options{Workers: workers})
			if err != nil {
				t.Fatal(err)
			}
			if stretches != 3 || !rec.InParts || rec.Axes[0].Values != nil {
				t.Fatalf("%d stretches, want 3; in parts %v", stretches, rec.InParts)
			}
			if !slices.Equal(x, whole[0].Axes[0].Values) {
				t.Error("the stretches do not hold the values of the whole")
			}
			if w := whole[0]; rec.Rate != w.Rate || rec.Samples != w.Samples || rec.Missing != 0 || rec.Start != w.Start || rec.SHA256 != w.SHA256 || rec.ReadAs.Rows != w.ReadAs.Rows {
				t.Errorf("rate %g, %d samples, start %g, %d rows; as a whole %g, %d, %g, %d", rec.Rate, rec.Samples, rec.Start, rec.ReadAs.Rows, w.Rate, w.Samples, w.Start, w.ReadAs.Rows)
			}
		}
	}
}

// A text that fits is read as a whole, and nothing is handed out.
func TestFittingIsWhole(t *testing.T) {
	text, x := longText(leastRows-10, false)
	rec, got, stretches, err := collected(text, Options{})
	if err != nil || stretches != 0 || got != nil || rec.InParts || len(rec.Axes[0].Values) != len(x) {
		t.Errorf("%d stretches, error %v", stretches, err)
	}
}

// A gap between two stretches is counted, also at their border; rows that are none are left out where they are.
func TestPartsGapsAndComments(t *testing.T) {
	text, x := longText(2*leastRows+5000, true)
	lines := bytes.SplitAfter(text, []byte("\n"))
	cut := append([][]byte{}, lines[:leastRows+1]...) // the first stretch ends near here
	cut = append(cut, []byte("# a remark\n"))
	cut = append(cut, lines[leastRows+1+7:]...) // 7 rows are missing
	rec, got, _, err := collected(bytes.Join(cut, nil), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if rec.Samples != len(x) || rec.Missing != 7 || len(got) != len(x) {
		t.Fatalf("%d samples, %d missing, %d collected; want %d and 7", rec.Samples, rec.Missing, len(got), len(x))
	}
	for i, v := range got {
		missing := i >= leastRows && i < leastRows+7
		if missing != math.IsNaN(v) || !missing && math.Abs(v-x[i]*1e-6) > 1e-21 { // one rounding of 1e-6
			t.Fatalf("sample %d is %g, want %g", i, v, x[i]*1e-6)
		}
	}
}

// What is wrong with a long file is refused with its place, as in a short one.
func TestPartsRefuse(t *testing.T) {
	text, _ := longText(2*leastRows+5000, true)
	lines := bytes.SplitAfter(text, []byte("\n"))
	with := func(at int, line string) []byte {
		out := slices.Clone(lines)
		out[at] = []byte(line)
		return bytes.Join(out, nil)
	}
	for name, c := range map[string]struct {
		text []byte
		want string
	}{
		"a bad cell in the second stretch": {with(leastRows+70_000, "700.0,abc\n"), fmt.Sprintf("long.csv:%d:", leastRows+70_001)},
		"a bad cell in the first":          {with(1000, "1.0,abc\n"), "long.csv:1001:"},
		"time that runs backwards later":   {with(leastRows+70_000, "1.0,0.5\n"), "time runs backwards"},
	} {
		if _, _, _, err := collected(c.text, Options{}); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: error %v, want %q", name, err, c.want)
		}
	}
	stop := errors.New("stop")
	_, err := Read(context.Background(), bytes.NewReader(text), Options{Name: "long.csv", MaxMemory: 1, Part: func(*Recording, int) error { return stop }})
	if !errors.Is(err, stop) {
		t.Errorf("an error of Part is returned as %v", err)
	}
	footer := append(slices.Clone(text), []byte("end of the recording\n")...)
	rec, _, _, err := collected(footer, Options{})
	if err != nil || !slices.ContainsFunc(rec.Notes, func(n Note) bool { return n.Code == "footer" }) {
		t.Errorf("a footer: error %v", err)
	}
}
