// Package bound holds tests of untrusted input to limits of time and memory.
package bound

import (
	"runtime/metrics"
	"testing"
	"time"
)

const (
	// Duration is what reading an input of up to Input bytes may take.
	Duration = time.Second
	// Memory is what may be allocated meanwhile, in bytes. What is allocated in all is never
	// less than what is held at any moment.
	Memory = 256 << 20
	// Input is the size in bytes up to which the two hold.
	Input = 1 << 20
	// attempts is how often slow work is tried again: a busy machine is not slow work.
	attempts = 3
)

// Effort does work, and fails the test if it takes longer than Duration each time or
// allocates more than Memory.
func Effort(t testing.TB, work func()) {
	t.Helper()
	var took time.Duration
	for range attempts {
		before, start := allocated(), time.Now()
		work()
		took = time.Since(start)
		if used := allocated() - before; used > Memory {
			t.Fatalf("%d bytes were allocated, more than %d", used, Memory)
		}
		if took <= Duration {
			return
		}
	}
	t.Fatalf("%v, longer than %v, %d times", took, Duration, attempts)
}

// allocated is the number of bytes that the process has ever allocated.
func allocated() uint64 {
	sample := []metrics.Sample{{Name: "/gc/heap/allocs:bytes"}}
	metrics.Read(sample)
	return sample[0].Value.Uint64()
}
