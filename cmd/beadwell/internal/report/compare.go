package report

import (
	"bytes"
	"encoding/json"
	"fmt"
	"math"
	"regexp"
	"slices"

	"beadwell/calib"
)

// Comparison tells how a result that was computed again differs from the stored one.
type Comparison struct {
	Schema  string   `json:"schema"`
	Input   string   `json:"input"`            // recording, as the stored result names it
	Same    bool     `json:"same"`             // every number, code and setting is the same to the last bit
	Stored  string   `json:"stored_version"`   // of the program that made the stored result
	Now     string   `json:"program_version"`  // of this one
	Largest *Change  `json:"largest_change"`   // the number that changed most, relatively; null when no number changed
	Changes []Change `json:"changes"`          // numbers, codes and settings, in the order of their keys; never null
	Wording []Change `json:"changes_in_words"` // sentences for people, which are no results; never null
}

// ComparisonVersion names the layout of a Comparison.
const ComparisonVersion = "beadwell-comparison/1"

// Change is one value of a result that is not the same any more.
type Change struct {
	Key      string      `json:"key"`                 // path in the JSON of a result, such as axes[0].mean_m
	Stored   any         `json:"stored"`              // null when it was unknown, or is not in the stored result
	Now      any         `json:"now"`                 // null when it is unknown, or is not in the new one
	Relative calib.Float `json:"relative_difference"` // (now - stored)/|stored|; null unless both are numbers and the stored one is not zero
}

// Compare compares all that two results of the same recording hold, but for the
// clock, the program's version and command line, and the name of the input.
func Compare(stored, now *calib.Result) (Comparison, error) {
	c := Comparison{Schema: ComparisonVersion, Input: stored.Input.Name, Stored: stored.Program.Version, Now: now.Program.Version,
		Changes: []Change{}, Wording: []Change{}}
	level := *now
	level.Created, level.Program, level.Input.Name = stored.Created, stored.Program, stored.Input.Name
	before, err := tree(stored)
	if err != nil {
		return c, err
	}
	after, err := tree(&level)
	if err != nil {
		return c, err
	}
	c.walk("", before, after)
	c.Same = len(c.Changes) == 0
	return c, nil
}

// tree returns a result as its JSON has it.
func tree(r *calib.Result) (any, error) {
	text, err := json.Marshal(storable(r))
	if err != nil {
		return nil, fmt.Errorf("the result cannot be compared: %w", err)
	}
	decoder := json.NewDecoder(bytes.NewReader(text))
	decoder.UseNumber() // compares to the last digit, -0 and 0 apart
	var value any
	return value, decoder.Decode(&value)
}

// walk compares two values, and the values in them.
func (c *Comparison) walk(key string, before, after any) {
	switch b := before.(type) {
	case map[string]any:
		if a, ok := after.(map[string]any); ok {
			c.walkKeys(key, b, a)
			return
		}
	case []any:
		if a, ok := after.([]any); ok && len(a) == len(b) {
			for i := range b {
				c.walk(fmt.Sprintf("%s[%d]", key, i), b[i], a[i])
			}
			return
		}
	default:
		if !composite(after) && before == after {
			return
		}
	}
	c.add(Change{Key: key, Stored: single(before), Now: single(after), Relative: relativeChange(before, after)})
}

func (c *Comparison) walkKeys(key string, before, after map[string]any) {
	keys := sortedKeys(before)
	for name := range after {
		if _, ok := before[name]; !ok {
			keys = append(keys, name)
		}
	}
	slices.Sort(keys)
	for _, name := range keys {
		c.walk(join(key, name), before[name], after[name])
	}
}

func composite(value any) bool {
	switch value.(type) {
	case map[string]any, []any:
		return true
	}
	return false
}

// single keeps a single value and only counts what is in a list or an object.
func single(value any) any {
	switch v := value.(type) {
	case map[string]any:
		return fmt.Sprintf("an object of %d", len(v))
	case []any:
		return fmt.Sprintf("a list of %d", len(v))
	}
	return value
}

// relativeChange returns (after - before)/|before|, NaN when it has no meaning.
func relativeChange(before, after any) calib.Float {
	b, isB := before.(json.Number)
	a, isA := after.(json.Number)
	if !isA || !isB {
		return calib.Float(math.NaN())
	}
	x, errX := b.Float64()
	y, errY := a.Float64()
	if errX != nil || errY != nil || x == 0 {
		return calib.Float(math.NaN())
	}
	return calib.Float((y - x) / math.Abs(x))
}

// wording are the keys whose texts are sentences for people. The text of a setting is
// no sentence.
var wording = regexp.MustCompile(`^(read_as\.(line|notes.*)|(.*\.)?(reason|remedy|basis|withheld)|(verdict|findings\[\d+\]|checks\[\d+\]|axes\[\d+\]\.cross_check)\.text|checks\[\d+\]\.name)$`)

func (c *Comparison) add(change Change) {
	if wording.MatchString(change.Key) {
		c.Wording = append(c.Wording, change)
		return
	}
	c.Changes = append(c.Changes, change)
	if size := math.Abs(float64(change.Relative)); change.Relative.Known() && (c.Largest == nil || size > math.Abs(float64(c.Largest.Relative))) {
		c.Largest = &change
	}
}
