package bound

import (
	"fmt"
	"runtime"
	"strings"
	"testing"
	"time"
)

// failure takes the place of a test that may fail.
type failure struct {
	testing.TB
	text string
}

func (f *failure) Helper() {}

func (f *failure) Fatalf(format string, args ...any) {
	f.text = fmt.Sprintf(format, args...)
	runtime.Goexit()
}

// outcome is what Effort says of some work, and how often the work was done.
func outcome(work func()) (string, int) {
	f, count, done := &failure{}, 0, make(chan struct{})
	go func() {
		defer close(done)
		Effort(f, func() { count++; work() })
	}()
	<-done
	return f.text, count
}

var held []byte

func TestEffort(t *testing.T) {
	tests := map[string]struct {
		work  func()
		want  string
		times int
	}{
		"little work": {func() { held = make([]byte, 1<<20) }, "", 1},
		"memory":      {func() { held = make([]byte, Memory+1) }, "allocated", 1},
		"time":        {func() { time.Sleep(Duration + time.Millisecond) }, "longer than 1s, 3 times", attempts},
	}
	for name, test := range tests {
		t.Run(name, func(t *testing.T) {
			got, times := outcome(test.work)
			if (got == "") != (test.want == "") || !strings.Contains(got, test.want) || times != test.times {
				t.Errorf("Effort says %q after %d times, want %q after %d", got, times, test.want, test.times)
			}
		})
	}
	held = nil
}
