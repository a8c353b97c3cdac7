package figure

import (
	"testing"

	"gonum.org/v1/plot/vg"
)

// Widths from the remembered pairs are those of the typeface, to the bit, the first time and later.
func TestTextWidth(t *testing.T) {
	for _, text := range []string{"", "1", "AVAToTe.", "frequency (Hz)", "10", "−3", "pN/µm", "рус", "A\u0301", "日本", "To\x00x"} {
		for _, size := range []vg.Length{smallSize, labelSize, smallSize * raisedSize} {
			f := fonts.Lookup(face, size)
			for range 2 {
				if got, want := textWidth(f, text), f.Width(text); got != want {
					t.Errorf("textWidth(%q at %g) = %v, want %v", text, float64(size), got, want)
				}
			}
		}
	}
	advances.RLock()
	defer advances.RUnlock()
	if _, kept := advances.of[[2]rune{'日', '本'}]; kept || len(advances.of) == 0 {
		t.Errorf("of %d pairs, one of letters that are not common is kept: %v", len(advances.of), kept)
	}
}
