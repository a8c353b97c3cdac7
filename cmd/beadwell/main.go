// Command beadwell calibrates the stiffness of optical traps from recordings of
// a bead's position.
package main

import (
	"os"

	"beadwell/cmd/beadwell/internal/cli"
)

func main() { os.Exit(cli.Main(os.Args[1:], cli.Process())) }
