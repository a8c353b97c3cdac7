package cli

import (
	"os"

	"golang.org/x/term"
)

// showsColour tells whether coloured text may be written to the file: a
// terminal, unless NO_COLOR is set (no-color.org) or the terminal is dumb.
func showsColour(f *os.File, getenv func(string) string) bool {
	return getenv("NO_COLOR") == "" && getenv("TERM") != "dumb" && isTerminal(f)
}

func isTerminal(f *os.File) bool { return term.IsTerminal(int(f.Fd())) }
