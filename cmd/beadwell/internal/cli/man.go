package cli

import (
	"github.com/spf13/cobra"
	"github.com/spf13/cobra/doc"
)

func (a *app) manCommand() *cobra.Command {
	return &cobra.Command{
		Use:   "man FOLDER",
		Short: "Write the manual pages of all commands",
		Long: `man writes one manual page in roff for each command into a folder that is
there: beadwell.1, beadwell-calibrate.1 and so on.`,
		Example: "  beadwell man .",
		Args:    oneArgument("one folder"),
		RunE: func(cmd *cobra.Command, args []string) error {
			root := cmd.Root()
			root.DisableAutoGenTag = true // it carries the date of today
			date, err := a.clock()
			if err != nil {
				return err
			}
			header := &doc.GenManHeader{Section: "1", Source: "beadwell", Manual: "beadwell", Date: &date}
			if err := doc.GenManTree(root, header, args[0]); err != nil {
				return outputError(args[0], err)
			}
			return nil
		},
	}
}
