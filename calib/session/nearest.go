package session

import "slices"

// nearest returns the candidate with the smallest edit distance to the word,
// or "" when none is near: more than a third of the word would have to change.
func nearest(word string, candidates []string) string {
	best, least := "", 1+max(len(word)/3, 1)
	if len(word) > 60 {
		return ""
	}
	for _, candidate := range candidates {
		if d := distance(word, candidate); d < least {
			best, least = candidate, d
		}
	}
	return best
}

// distance is the number of single-letter changes, insertions, deletions and
// swaps of neighbours between two words (optimal string alignment).
func distance(a, b string) int {
	before, last := []int(nil), make([]int, len(b)+1)
	for j := range last {
		last[j] = j
	}
	for i := range len(a) {
		row := make([]int, len(b)+1)
		row[0] = i + 1
		for j := range len(b) {
			cost := 1
			if a[i] == b[j] {
				cost = 0
			}
			row[j+1] = min(last[j]+cost, last[j+1]+1, row[j]+1)
			if i > 0 && j > 0 && a[i] == b[j-1] && a[i-1] == b[j] {
				row[j+1] = min(row[j+1], before[j-1]+1)
			}
		}
		before, last = last, row
	}
	return last[len(b)]
}

// knownNames lists the full names of all settings.
func knownNames() []string {
	names := make([]string, len(registry))
	for i, key := range registry {
		names[i] = key.Name
	}
	return names
}

// sections lists the tables of the session file, in order.
func sections() []string {
	var all []string
	for _, key := range registry {
		if !key.TrackOnly && !slices.Contains(all, key.Section()) {
			all = append(all, key.Section())
		}
	}
	return all
}
