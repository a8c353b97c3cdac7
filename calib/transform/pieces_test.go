package transform

import (
	"math/rand/v2"
	"slices"
	"sync/atomic"
	"testing"
)

// The power of a series that is made as it is needed is that of the series, to the last bit, in one piece and in rows.
func TestPowerOf(t *testing.T) {
	random := rand.New(rand.NewPCG(8, 1))
	for _, n := range []int{2, 30, 4096, 2 * wholeLimit, 300_000} {
		x := make([]float64, n)
		for i := range x {
			x[i] = random.NormFloat64()
		}
		p, err := NewPlan(n)
		if err != nil {
			t.Fatal(err)
		}
		got := p.PowerOf(nil, make([]float64, n), func(dst []float64, from int) { copy(dst, x[from:]) })
		if !slices.Equal(got, p.Power(nil, x)) {
			t.Errorf("n = %d: PowerOf is not Power", n)
		}
		if !slices.Equal(p.PowerOf(nil, nil, func(dst []float64, from int) { copy(dst, x[from:]) }), got) {
			t.Errorf("n = %d: PowerOf depends on the room it is given", n)
		}
	}
}

// Pieces cover a series once, in whatever order.
func TestInPieces(t *testing.T) {
	for _, n := range []int{0, 1, pieceLength, 3*pieceLength + 1, 9*pieceLength + 77} {
		var covered atomic.Int64
		seen := make([]bool, Pieces(n))
		InPieces(n, func(piece, from, to int) {
			covered.Add(int64(to - from))
			if from != piece*pieceLength || seen[piece] {
				t.Errorf("n = %d: piece %d begins at %d, or came twice", n, piece, from)
			}
			seen[piece] = true
		})
		if covered.Load() != int64(n) || slices.Contains(seen, false) {
			t.Errorf("n = %d: %d samples in %d pieces", n, covered.Load(), len(seen))
		}
	}
}
