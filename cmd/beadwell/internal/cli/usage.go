package cli

import (
	"fmt"
	"strings"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"
)

// usage writes how a command is called: its examples, its own flags, and the
// flags of the settings apart.
func usage(cmd *cobra.Command) error {
	var b strings.Builder
	fmt.Fprintf(&b, "Usage:\n  %s\n", cmd.UseLine())
	if cmd.HasExample() {
		fmt.Fprintf(&b, "\nExamples:\n%s\n", cmd.Example)
	}
	if cmd.HasAvailableSubCommands() {
		b.WriteString("\nCommands:\n")
		for _, sub := range cmd.Commands() {
			if sub.IsAvailableCommand() || sub.Name() == "help" {
				fmt.Fprintf(&b, "  %-*s  %s\n", cmd.NamePadding(), sub.Name(), sub.Short)
			}
		}
	}
	own, settings := pflag.NewFlagSet("", pflag.ContinueOnError), pflag.NewFlagSet("", pflag.ContinueOnError)
	settings.SortFlags = false
	cmd.LocalFlags().VisitAll(func(f *pflag.Flag) {
		if f.Annotations[settingGroup] == nil {
			own.AddFlag(f)
		}
	})
	for _, f := range inRegistryOrder(cmd) {
		settings.AddFlag(f)
	}
	if own.HasAvailableFlags() {
		fmt.Fprintf(&b, "\nFlags:\n%s", own.FlagUsages())
	}
	if settings.HasAvailableFlags() {
		fmt.Fprintf(&b, "\nSettings (they go before tracks.csv and session.toml):\n%s", settings.FlagUsages())
	}
	_, err := fmt.Fprint(cmd.OutOrStdout(), b.String())
	return err
}
