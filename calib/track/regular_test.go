package track

import (
	"bytes"
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
)

// Rows are bit-equal to strconv.ParseFloat whatever a column was led to expect: cells of one form, then of another, in every
// combination of neighbours, whole or broken.
func TestRowsEqualParseFloat(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 1))
	blocks := 600
	if testing.Short() {
		blocks = 60
	}
	for range blocks {
		ends := []string{"\n", "\r\n"}[rng.IntN(2)]
		lay := &layout{delimiter: ",;\t "[rng.IntN(4)], mark: '.', fields: make([]field, 1+rng.IntN(7)), kept: 0}
		lay.padded = lay.delimiter == ' '
		verbs := make([]string, len(lay.fields))
		scales := make([]float64, len(lay.fields))
		for k := range lay.fields {
			lay.fields[k].name = "x"
			if k == 0 || rng.IntN(4) > 0 {
				lay.fields[k] = field{kind: numberField, out: lay.kept, shift: []int{0, -3, -6, -9, 2}[rng.IntN(5)], name: "x"}
				lay.kept++
			}
		}
		var text strings.Builder
		var want [][]float64
		for row := range 200 {
			numbers := make([]float64, lay.kept)
			for k, f := range lay.fields {
				if row == 0 || rng.IntN(100) == 0 {
					verbs[k] = []string{"%.5f", "%.8f", "%.0f", "%.9f", "%.12f", "%v", "%.3e", "%+.3f", "\"%.4f\"", "%.17g"}[rng.IntN(10)]
					scales[k] = math.Pow(10, float64(rng.IntN(9)-3))
				}
				cell := fmt.Sprintf(verbs[k], rng.NormFloat64()*scales[k])
				if rng.IntN(200) == 0 {
					cell = []string{"nan", "-.5", "5.", ".25", "-0", "12345678", "-1234567", "1234567.", "0.000000001", "9007199254740993", "-7.e2"}[rng.IntN(11)]
				}
				if f.kind == numberField {
					mantissa, power, _ := strings.Cut(strings.Trim(cell, "\""), "e")
					e, _ := strconv.Atoi(power)
					v, err := strconv.ParseFloat(fmt.Sprintf("%se%d", mantissa, e+f.shift), 64)
					if cell == "nan" {
						v, err = math.NaN(), nil
					}
					if err != nil {
						t.Fatal(err)
					}
					numbers[f.out] = v
				}
				text.WriteString(cell)
				if k+1 < len(lay.fields) {
					text.WriteByte(lay.delimiter)
				}
			}
			text.WriteString(ends)
			want = append(want, numbers)
		}
		p := &parser{lay: lay}
		columns := newStore(lay.kept, len(want)).columns
		p.setColumns(columns)
		p.block(block{data: []byte(text.String() + string(make([]byte, pad)))[:text.Len()], line: 1})
		if p.total > 0 {
			t.Fatalf("%v", p.bad[0].err)
		}
		for row, numbers := range want {
			for k, v := range numbers {
				if got := columns[k][row]; math.Float64bits(got) != math.Float64bits(v) && !(got != got && v != v) {
					t.Fatalf("row %d, kept column %d reads as %v, want %v:\n%s", row, k, got, v, bytes.Split([]byte(text.String()), []byte("\n"))[row])
				}
			}
		}
	}
}

// Cells that are no numbers stay none where a column expects a form that they resemble.
func TestExpectationsRefuse(t *testing.T) {
	for _, form := range []string{"1.25", "12", "-12", "1.12345678"} {
		for _, cell := range []string{"-", ".", "-.", "", "1.2.5", "1..25", "1.2-5", "--1.25", "1,25", "+-1.25", "1.2/", "1.:5", ",.25", "/.25", "1.25e", "1 .25", "-+12", "1-2", "0x12", "1.1234567:"} {
			lay := &layout{delimiter: ';', mark: '.', fields: []field{{kind: numberField}, {kind: numberField, out: 1}}, kept: 2}
			p := &parser{lay: lay}
			columns := newStore(2, 4).columns
			p.setColumns(columns)
			row := form + ";" + form + "\n"
			for _, broken := range []string{cell + ";" + form + "\n", form + ";" + cell + "\n"} {
				text := []byte(row + row + broken + strings.Repeat("\x00", pad))
				at := 0
				for i := range 2 {
					next, ok := p.fastRow(text, at, i)
					if !ok {
						t.Fatalf("%q is refused", row)
					}
					at = next
				}
				if _, ok := p.fastRow(text, at, 2); ok && columns[0][2] == columns[0][2] && columns[1][2] == columns[1][2] {
					t.Errorf("after %q, %q reads as %v and %v", row, broken, columns[0][2], columns[1][2])
				}
			}
		}
	}
}
