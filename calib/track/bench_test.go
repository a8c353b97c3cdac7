package track

import (
	"bytes"
	"testing"
)

// BenchmarkRows parses one block of ordinary rows, without reading.
func BenchmarkRows(b *testing.B) {
	text := []byte(ordinary(6000))
	text = text[bytes.IndexByte(text, '\n')+1:]
	lay := &layout{delimiter: ',', mark: '.', fields: make([]field, 4), kept: 4}
	for k := range lay.fields {
		lay.fields[k] = field{kind: numberField, out: k, shift: -6}
	}
	rows := bytes.Count(text, []byte{'\n'})
	p := &parser{lay: lay}
	p.setColumns(newStore(4, rows).columns)
	data := append(text, make([]byte, pad)...)[:len(text)]
	b.SetBytes(int64(len(text)))
	for b.Loop() {
		p.block(block{data: data, line: 1})
	}
	if p.total > 0 {
		b.Fatal(p.bad[0].err)
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(4*rows), "ns/number")
}
