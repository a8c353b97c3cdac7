package cli

import (
	"github.com/spf13/cobra"

	"beadwell/calib/session"
)

// completeWords makes the shell offer the words of a flag.
func completeWords(cmd *cobra.Command, flag string, words ...string) {
	// The error is that of a flag that is not there, or that has a completion: a slip
	// in this program that TestCompletion finds.
	_ = cmd.RegisterFlagCompletionFunc(flag, cobra.FixedCompletions(words, cobra.ShellCompDirectiveNoFileComp))
}

// completeSettings makes the shell offer the words of settings that are a choice.
func completeSettings(cmd *cobra.Command) {
	for _, key := range session.Keys() {
		if f := cmd.Flags().Lookup(key.Flag); f != nil && f.Annotations[settingGroup] != nil && len(key.Words) > 0 {
			completeWords(cmd, key.Flag, key.Words...)
		}
	}
}

// completeEndings makes the shell offer files with these endings as arguments.
func completeEndings(cmd *cobra.Command, endings ...string) {
	cmd.ValidArgsFunction = func(*cobra.Command, []string, string) ([]string, cobra.ShellCompDirective) {
		return endings, cobra.ShellCompDirectiveFilterFileExt
	}
}
