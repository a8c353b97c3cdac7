package cli

import "github.com/spf13/cobra"

// nearest returns the name that the word was probably meant to be, or "". It
// asks the command library, which measures the Levenshtein distance without
// case, with the same limit for flags as for commands.
func nearest(word string, names []string) string {
	parent := &cobra.Command{Use: "names", SuggestionsMinimumDistance: suggestWithin}
	for _, name := range names {
		parent.AddCommand(&cobra.Command{Use: name, Run: func(*cobra.Command, []string) {}})
	}
	for _, suggestion := range parent.SuggestionsFor(word) {
		return suggestion
	}
	return ""
}

// suggestWithin is the largest Levenshtein distance of a suggestion: two
// neighbouring letters that changed places.
const suggestWithin = 2
