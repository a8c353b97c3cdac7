package report

import (
	"bytes"
	"os"
	"testing"

	"beadwell/cmd/beadwell/internal/figure/specimen"
)

func TestLookHTML(t *testing.T) {
	var b bytes.Buffer
	if err := HTML(&b, specimen.Result()); err != nil {
		t.Fatal(err)
	}
	if dir := os.Getenv("LOOK"); dir != "" {
		os.WriteFile(dir+"/page.html", b.Bytes(), 0o644)
		b.Reset()
		HTML(&b, storedSample())
		os.WriteFile(dir+"/bad.html", b.Bytes(), 0o644)
	}
}
