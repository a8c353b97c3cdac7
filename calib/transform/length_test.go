package transform

import (
	"strings"
	"testing"
)

// smooth tells from the definition whether n is even with no prime factor above 5.
func smooth(n int) bool {
	if n < 2 || n%2 != 0 {
		return false
	}
	for _, f := range []int{2, 3, 5} {
		for n%f == 0 {
			n /= f
		}
	}
	return n == 1
}

func TestGoodLength(t *testing.T) {
	below := 0
	for n := -1; n <= 5000; n++ {
		if smooth(n) {
			below = n
		}
		if got := GoodLength(n); got != below {
			t.Fatalf("GoodLength(%d) = %d, want %d", n, got, below)
		}
	}
	above := 0
	for n := 5000; n >= -1; n-- {
		if smooth(n) {
			above = n
		}
		if above == 0 {
			continue
		}
		if got := GoodLengthAbove(n); got != max(above, 2) {
			t.Fatalf("GoodLengthAbove(%d) = %d, want %d", n, got, above)
		}
	}
	if got := GoodLengthAbove(maxLength); got != maxLength {
		t.Errorf("GoodLengthAbove(2^36) = %d", got)
	}
	if got := GoodLengthAbove(maxLength + 1); got != 0 {
		t.Errorf("GoodLengthAbove(2^36+1) = %d, want 0", got)
	}
	if got := GoodLength(maxLength + 5); got != maxLength {
		t.Errorf("GoodLength(2^36+5) = %d, want 2^36", got)
	}
}

// The package documentation states how far apart good lengths are.
func TestGoodLengthGaps(t *testing.T) {
	for n := 128; n < 100_000_000; {
		promised := 0.13
		switch {
		case n >= 100_000:
			promised = 0.03
		case n >= 1000:
			promised = 0.07
		}
		next := GoodLengthAbove(n + 1)
		if gap := float64(next)/float64(n) - 1; gap >= promised {
			t.Errorf("good lengths %d and %d are %.1f %% apart, want less than %.0f %%", n, next, 100*gap, 100*promised)
		}
		n = next
	}
}

func TestNewPlanRefuses(t *testing.T) {
	for n, want := range map[int]string{
		-4:                "shortest length is 2",
		0:                 "shortest length is 2",
		1:                 "shortest length is 2",
		3:                 "nearest good lengths are 2 and 4",
		14:                "nearest good lengths are 12 and 16",
		100_003:           "nearest good lengths are 100000 and 101250",
		maxLength + 2:     "longest length is 68719476736",
		2 * maxLength:     "longest length is 68719476736",
		2 * 3 * 5 * 7:     "nearest good lengths are 200 and 216",
		3 * 3 * 3 * 5 * 5: "nearest good lengths are 648 and 720",
	} {
		p, err := NewPlan(n)
		if err == nil || p != nil {
			t.Errorf("NewPlan(%d) = %v, %v, want an error alone", n, p, err)
		} else if !strings.Contains(err.Error(), want) {
			t.Errorf("NewPlan(%d): %q does not say %q", n, err, want)
		}
		if n >= 0 && n < maxLength {
			if _, _, err := PowerAndAutocovariance(make([]float64, n)); err == nil {
				t.Errorf("PowerAndAutocovariance of %d points gives no error", n)
			}
		}
	}
}

// Plans are kept, the most recent ones, and no more than the limit.
func TestPlansAreKept(t *testing.T) {
	var c planCache
	first := c.get(4)
	lengths := 0
	for n := 6; lengths < recentLimit-1; n = GoodLengthAbove(n + 1) {
		c.get(n)
		lengths++
	}
	if c.get(4) != first {
		t.Error("a plan within the limit was made anew")
	}
	c.get(10_000)
	if c.get(4) != first {
		t.Error("the plan used last but one was dropped")
	}
	if len(c.plans) != recentLimit {
		t.Errorf("%d plans are kept, want %d", len(c.plans), recentLimit)
	}
	for _, p := range c.plans {
		if p.n == 6 {
			t.Error("the plan used longest ago is still there")
		}
	}
}

func TestCallersErrorsPanic(t *testing.T) {
	p := plan(t, 4)
	for name, call := range map[string]func(){
		"Power of 5 points":   func() { p.Power(nil, make([]float64, 5)) },
		"Forward of 5 points": func() { p.Forward(nil, make([]float64, 5)) },
		"Inverse of 4 bins":   func() { p.Inverse(nil, make([]complex128, 4)) },
	} {
		func() {
			defer func() {
				if text, _ := recover().(string); !strings.HasPrefix(text, "transform: ") {
					t.Errorf("%s on a plan of 4: panic %q, want one that begins with transform:", name, text)
				}
			}()
			call()
		}()
	}
}
