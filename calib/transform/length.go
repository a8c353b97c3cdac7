package transform

import "fmt"

// maxLength bounds the lengths that are searched and planned, to 2^36 (2^27 where int has 32
// bits): products with small numbers then fit an int.
const maxLength = 1 << (27 + 9*(^uint(0)>>63))

// GoodLength returns the largest even length not above n that has no prime factor
// above 5. It returns 0 when there is none, which is when n < 2.
func GoodLength(n int) int {
	if n > maxLength {
		n = maxLength
	}
	best := 0
	for five := 2; five <= n; five *= 5 {
		for three := five; three <= n; three *= 3 {
			length := three
			for length <= n/2 {
				length *= 2
			}
			best = max(best, length)
		}
	}
	return best
}

// GoodLengthAbove returns the smallest even length not below n that has no prime
// factor above 5. It is 2 for n < 2, and 0 when n is above 2^36.
func GoodLengthAbove(n int) int {
	if n > maxLength {
		return 0
	}
	best := maxLength
	for five := 2; five <= best; five *= 5 {
		for three := five; three <= best; three *= 3 {
			length := three
			for length < n {
				length *= 2
			}
			best = min(best, length)
		}
	}
	return best
}

// checkLength returns an error unless n is a length that can be planned.
func checkLength(n int) error {
	if n >= 2 && GoodLength(n) == n {
		return nil
	}
	if n < 2 {
		return fmt.Errorf("transform of length %d is not possible; the shortest length is 2", n)
	}
	if n > maxLength {
		return fmt.Errorf("transform of length %d is not possible; the longest length is %d", n, maxLength)
	}
	return fmt.Errorf("transform length %d is odd or has a prime factor above 5; the nearest good lengths are %d and %d",
		n, GoodLength(n), GoodLengthAbove(n))
}

// factors splits a 5-smooth length into the radices of a transform, fours first:
// the early stages have the shortest inner loops, and the radix-4 stage is the one
// with a version for them.
func factors(n int) []int {
	var radices []int
	for _, radix := range []int{4, 5, 3, 2} {
		for n%radix == 0 {
			radices = append(radices, radix)
			n /= radix
		}
	}
	return radices
}
