package track

import (
	"math"
	"runtime"
	"sync"
	"sync/atomic"
)

// sums are running totals over a stretch of samples.
type sums struct{ a, b, max, min float64 }

// blockLength is the stretch over which sums run before they are added up; it
// keeps rounding at the level of one stretch.
const blockLength = 8192

// blockSums adds the totals of f over 0 to n-1, block by block and in the order
// of the blocks whatever the number of processors.
func blockSums(n int, f func(lo, hi int) sums) sums {
	parts := make([]sums, (n+blockLength-1)/blockLength)
	one := func(i int) { parts[i] = f(i*blockLength, min((i+1)*blockLength, n)) }
	if len(parts) < 16 {
		for i := range parts {
			one(i)
		}
	} else {
		var next atomic.Int64
		var wait sync.WaitGroup
		for range runtime.GOMAXPROCS(0) {
			wait.Go(func() {
				for {
					i := int(next.Add(1)) - 1
					if i >= len(parts) {
						return
					}
					one(i)
				}
			})
		}
		wait.Wait()
	}
	total := sums{max: math.Inf(-1), min: math.Inf(1)}
	for _, p := range parts {
		total.a += p.a
		total.b += p.b
		total.max = max(total.max, p.max)
		total.min = min(total.min, p.min)
	}
	return total
}
