package track

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// ordinary writes n rows of time, x, y, z with fixed decimals.
func ordinary(n int) string {
	rng := rand.New(rand.NewPCG(3, 4))
	var b strings.Builder
	b.WriteString("t (s),x (um),y (um),z (um)\n")
	for i := range n {
		fmt.Fprintf(&b, "%.5f,%.6f,%.6f,%.6f\n", float64(i)*1e-4, rng.NormFloat64()*0.05, rng.NormFloat64()*0.05, rng.NormFloat64()*0.1)
	}
	return b.String()
}

func TestOrdinaryFile(t *testing.T) {
	text := ordinary(30_000)
	path := filepath.Join(t.TempDir(), "run7.csv")
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	list, err := ReadFile(context.Background(), path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	rec := list[0]
	if len(list) != 1 || len(rec.Axes) != 3 || rec.Samples != 30_000 || rec.Missing != 0 || rec.Rate != 10_000 {
		t.Fatalf("got %d recordings, %d axes, %d samples, %v Hz", len(list), len(rec.Axes), rec.Samples, rec.Rate)
	}
	rng := rand.New(rand.NewPCG(3, 4))
	for i := range rec.Samples {
		for k, scale := range []float64{0.05, 0.05, 0.1} {
			// The text holds six decimals of a micrometre: half a picometre.
			if want := rng.NormFloat64() * scale * 1e-6; math.Abs(rec.Axes[k].Values[i]-want) > 0.51e-12 {
				t.Fatalf("axis %d sample %d = %g m, want %g m", k, i, rec.Axes[k].Values[i], want)
			}
		}
	}
}

func BenchmarkReadFile(b *testing.B) {
	text := ordinary(1_000_000)
	path := filepath.Join(b.TempDir(), "run7.csv")
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		b.Fatal(err)
	}
	for _, noHash := range []bool{true, false} {
		b.Run(fmt.Sprintf("nohash=%t", noHash), func(b *testing.B) {
			b.SetBytes(int64(len(text)))
			b.ReportAllocs()
			for b.Loop() {
				if _, err := ReadFile(context.Background(), path, Options{NoHash: noHash}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
