package report

import (
	"encoding/csv"
	"encoding/json"
	"fmt"
	"io"
	"strings"
	"text/tabwriter"
)

// shownChanges is how many changes the text lists; JSON and CSV have all.
const shownChanges = 40

// ComparisonJSON writes a comparison as indented JSON.
func ComparisonJSON(w io.Writer, c Comparison) error { return WriteJSON(w, c) }

// ComparisonCSV writes one row for each change, those in words too.
func ComparisonCSV(w io.Writer, c Comparison) error {
	out := csv.NewWriter(w)
	out.Write([]string{"key", "stored", "now", "relative_difference"}) // errors stay in the writer until Flush
	for _, one := range append(append([]Change{}, c.Changes...), c.Wording...) {
		out.Write([]string{one.Key, valueCell(one.Stored), valueCell(one.Now), exactCell(one.Relative)})
	}
	out.Flush()
	return out.Error()
}

// ComparisonText writes "same", or a table of what differs.
func ComparisonText(w io.Writer, c Comparison) error {
	var b strings.Builder
	name := Plain(c.Input)
	if c.Same {
		fmt.Fprintf(&b, "%s: same, to the last bit\n", name)
	} else {
		fmt.Fprintf(&b, "%s: %s\n", name, countText(len(c.Changes), "value differs", "values differ"))
	}
	if c.Stored != c.Now {
		fmt.Fprintf(&b, "  the stored result is of beadwell %s, this is beadwell %s\n", Plain(c.Stored), Plain(c.Now))
	}
	if c.Largest != nil {
		fmt.Fprintf(&b, "  largest relative difference: %.2g, of %s\n", float64(c.Largest.Relative), Plain(c.Largest.Key))
	}
	if len(c.Wording) > 0 {
		fmt.Fprintf(&b, "  %s; --format json shows them\n", countText(len(c.Wording), "sentence is worded otherwise", "sentences are worded otherwise"))
	}
	if err := changeTable(&b, c.Changes); err != nil {
		return err
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func changeTable(w io.Writer, changes []Change) error {
	if len(changes) == 0 {
		return nil
	}
	table := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(table, "\n  key\tstored\tnow\trelative difference")
	for _, one := range changes[:min(len(changes), shownChanges)] {
		size := "-"
		if one.Relative.Known() {
			size = fmt.Sprintf("%.2g", float64(one.Relative))
		}
		fmt.Fprintf(table, "  %s\t%s\t%s\t%s\n", Plain(one.Key), Plain(shown(one.Stored)), Plain(shown(one.Now)), size)
	}
	if more := len(changes) - shownChanges; more > 0 {
		fmt.Fprintf(table, "  and %d more; --format json or csv shows all\n", more)
	}
	return table.Flush()
}

func countText(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}

// valueText is a value of JSON as a cell; an unknown number is empty.
func valueText(value any) string {
	if value == nil {
		return ""
	}
	if number, ok := value.(json.Number); ok {
		return number.String()
	}
	return fmt.Sprint(value)
}

// valueCell is a value of JSON as a cell of CSV.
func valueCell(value any) string {
	if _, number := value.(json.Number); number {
		return valueText(value)
	}
	return cell(valueText(value))
}

// shown is a value as a cell of the table for eyes.
func shown(value any) string {
	const widest = 40
	text := valueText(value)
	if value == nil {
		return "none"
	}
	if r := []rune(text); len(r) > widest {
		return string(r[:widest-3]) + "..."
	}
	return text
}
