package transform

import (
	"runtime"
	"sync"
	"sync/atomic"
)

// spread calls work from as many goroutines as there are processors, up to limit. Each
// call takes numbers from next until that gives false; the numbers 0 .. count-1 are given
// once each. What is done for one number must not depend on the others, and results must
// be put together in the order of the numbers: then they are the same to the last bit for
// any number of processors.
func spread(count, limit int, work func(next func() (int, bool))) {
	var given atomic.Int64
	next := func() (int, bool) {
		i := int(given.Add(1)) - 1
		return i, i < count
	}
	var group sync.WaitGroup
	for range min(runtime.GOMAXPROCS(0), count, limit) - 1 {
		group.Go(func() { work(next) })
	}
	work(next)
	group.Wait()
}
