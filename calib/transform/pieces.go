package transform

// pieceLength is the number of samples of a piece: its sums stay in a first-level cache, and a
// long series has enough pieces for any number of processors.
const pieceLength = 1 << 14

// Pieces returns the number of pieces into which InPieces cuts a series of n samples.
func Pieces(n int) int { return (n + pieceLength - 1) / pieceLength }

// InPieces calls do for consecutive pieces of a series of n samples, from inclusive, to
// exclusive, several at a time. Sums over a long series are made of the sums of
// its pieces, which do not depend on the number of processors when they are added up in
// the order of the pieces.
func InPieces(n int, do func(piece, from, to int)) {
	count := Pieces(n)
	if n < 4*pieceLength { // waking others would cost more than it saves
		for i := range count {
			do(i, i*pieceLength, min((i+1)*pieceLength, n))
		}
		return
	}
	spread(count, count, func(next func() (int, bool)) {
		for i, ok := next(); ok; i, ok = next() {
			do(i, i*pieceLength, min((i+1)*pieceLength, n))
		}
	})
}

// Each calls work from several goroutines when that pays. Each call takes numbers from next until that gives
// false; the numbers 0 .. count-1 are given once each. What is done for one number must not depend on the
// others, and results must be put together in the order of the numbers: then they are the same to the
// last bit for any number of processors.
func Each(count int, work func(next func() (int, bool))) { spread(count, count, work) }

// Some is Each with no more than limit goroutines.
func Some(count, limit int, work func(next func() (int, bool))) { spread(count, limit, work) }
