package cli

import (
	"fmt"
	"strings"

	"github.com/spf13/cobra"

	"beadwell/calib"
	"beadwell/cmd/beadwell/internal/report"
)

func (a *app) explainCommand() *cobra.Command {
	cmd := &cobra.Command{
		Use:   "explain [CODE]",
		Short: "The long form of a finding",
		Long: `explain tells what a finding means, what causes it and what to do. CODE stands in
front of the finding in the text, and under "code" in JSON. Without a code it
lists all.`,
		Example: "  beadwell explain\n  beadwell explain dropped-samples",
		Args:    atMostOneArgument("code of a finding"),
		RunE: func(_ *cobra.Command, args []string) error {
			if len(args) == 0 {
				return report.ExplanationList(a.Out, calib.Explanations())
			}
			return a.explain(args[0])
		},
	}
	cmd.ValidArgsFunction = func(*cobra.Command, []string, string) ([]string, cobra.ShellCompDirective) {
		return codes(), cobra.ShellCompDirectiveNoFileComp
	}
	return cmd
}

// codes lists the codes of all findings.
func codes() []string {
	var all []string
	for _, e := range calib.Explanations() {
		all = append(all, e.Code)
	}
	return all
}

func (a *app) explain(code string) error {
	for _, e := range calib.Explanations() {
		if strings.EqualFold(e.Code, code) {
			_, err := fmt.Fprint(a.Out, report.Explanation(e))
			return err
		}
	}
	remedy := "the codes are listed by beadwell explain"
	if near := nearest(code, codes()); near != "" {
		remedy = "did you mean beadwell explain " + near + "?"
	}
	return usageError(remedy, "%q is not the code of a finding", code)
}
