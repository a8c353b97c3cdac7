package track

import (
	"bytes"
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"
)

// forms are rows as programs write them, of a time and three positions; wide rows have more cells, not all of which are kept.
var forms = []struct {
	name            string
	delimiter, mark byte
	format          string
	scale           float64
	wide            int
}{
	{"fixed", ',', '.', "%.5f,%.8f,%.8f,%.8f\n", 0.007, 0},
	{"nanometres", ',', '.', "%.6f,%.3f,%.3f,%.3f\n", 30, 0},
	{"metres", ',', '.', "%.6f,%.12f,%.12f,%.12f\n", 3e-8, 0},
	{"shortest", ',', '.', "%v,%v,%v,%v\n", 30, 0},
	{"six digits", ',', '.', "%.6g,%.6g,%.6g,%.6g\n", 30, 0},
	{"exponents", ' ', '.', "%.18e %.18e %.18e %.18e\n", 30, 0},
	{"exponents of six digits", '\t', '.', "%.6e\t%.6e\t%.6e\t%.6e\r\n", 30, 0},
	{"counts", '\t', '.', "%.0f\t%.0f\t%.0f\t%.0f\n", 3000, 0},
	{"decimal commas", ';', ',', "%.5f;%.6f;%.6f;%.6f\r\n", 0.05, 0},
	{"quoted", ',', '.', "\"%.5f\",\"%.6f\",\"%.6f\",\"%.6f\"\n", 0.05, 0},
	{"wide", ',', '.', "%.5f,%.4f,%.4f,%.4f\n", 5, 16},
}

// formOf returns a block of rows in one form and the layout of which it is.
func formOf(k, size int) (text []byte, lay *layout) {
	rng := rand.New(rand.NewPCG(3, 4))
	form := forms[k]
	format := strings.TrimSuffix(form.format, "\n") + strings.Repeat(",%.4f", form.wide) + "\n"
	cells := make([]any, 4+form.wide)
	for i := 1000; len(text) < size; i++ {
		cells[0] = float64(i) * 1e-5
		for k := range cells[1:] {
			cells[1+k] = rng.NormFloat64() * form.scale
		}
		row := fmt.Sprintf(format, cells...)
		if form.mark == ',' {
			row = strings.ReplaceAll(row, ".", ",")
		}
		text = append(text, row...)
	}
	lay = &layout{delimiter: form.delimiter, mark: form.mark, padded: form.delimiter == ' ', fields: make([]field, len(cells)), kept: 4}
	for k := range 4 {
		lay.fields[k] = field{kind: numberField, out: k, shift: -6}
	}
	return text, lay
}

// BenchmarkRows parses one block of rows in each form, without reading.
func BenchmarkRows(b *testing.B) {
	for k, form := range forms {
		b.Run(form.name, func(b *testing.B) {
			text, lay := formOf(k, blockSize)
			rows := bytes.Count(text, []byte{'\n'})
			p := &parser{lay: lay}
			data := append(text, make([]byte, pad)...)[:len(text)]
			columns := newStore(lay.kept, rows).columns
			b.SetBytes(int64(len(text)))
			for b.Loop() {
				p.setColumns(columns)
				p.block(block{data: data, line: 1})
			}
			if p.total > 0 {
				b.Fatal(p.bad[0].err)
			}
			b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(4*rows), "ns/number")
		})
	}
}
