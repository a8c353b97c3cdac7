package figure

import (
	"os"
	"testing"
	"time"

	"beadwell/cmd/beadwell/internal/figure/specimen"
)

func TestLook(t *testing.T) {
	dir := os.Getenv("LOOK")
	if dir == "" {
		t.Skip()
	}
	r := specimen.Result()
	for _, format := range []Format{SVG, PNG, PDF} {
		start := time.Now()
		figures := All(r)
		out, err := RenderAll(t.Context(), figures, format, Theme(os.Getenv("THEME")))
		if err != nil {
			t.Fatal(err)
		}
		t.Log(format, time.Since(start))
		for i, f := range figures {
			t.Log(f.Name, len(out[i]))
			os.WriteFile(dir+"/"+f.Name+"."+string(format), out[i], 0o644)
		}
	}
}
