package cli

import (
	"errors"
	"fmt"
	"strings"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"

	"beadwell/calib/session"
)

const rootLong = `beadwell calibrates the stiffness of an optical trap from a recording of the
position of a trapped bead, on every axis, with an uncertainty, and checks the
estimates against each other and the recording for faults.

Results go to standard output, all else to standard error.

Exit status, the same for every command:
    0    done, and consistent
    1    something failed inside, or could not be written
    2    the command line or the settings are wrong
    3    calibrated, but the cross-check or a health check says not to trust it
    4    the input data are bad
    5    several recordings, and some failed
    130  stopped by Ctrl-C or SIGTERM`

// root builds the command tree.
func (a *app) root() *cobra.Command {
	root := &cobra.Command{
		Use:           "beadwell",
		Short:         "Stiffness of an optical trap, cross-checked",
		Long:          rootLong,
		Version:       a.Version,
		SilenceUsage:  true,
		SilenceErrors: true,
		Args:          cobra.ArbitraryArgs,
		RunE: func(cmd *cobra.Command, args []string) error {
			if len(args) > 0 {
				return unknownCommand(cmd, args[0])
			}
			return usageError("see beadwell --help; to start: beadwell calibrate TRACK", "no command was given")
		},
	}
	root.SetIn(a.In)
	root.SetOut(a.Out)
	root.SetErr(a.Err)
	root.SetVersionTemplate("beadwell {{.Version}}\n")
	root.SetFlagErrorFunc(a.flagError)
	root.SetUsageFunc(usage)
	root.SetHelpCommand(helpCommand(root))
	root.PersistentPreRun = func(*cobra.Command, []string) { a.started = true }
	root.CompletionOptions.HiddenDefaultCmd = false
	root.AddCommand(
		a.calibrateCommand(runCalibrate),
		a.batchCommand(runBatch),
		a.checkCommand(runCheck),
		a.initCommand(runInit),
		a.reportCommand(runReport),
		a.collectCommand(runCollect),
		a.trendCommand(runTrend),
		a.dragCommand(runDrag),
		a.planCommand(runPlan),
		a.forceCommand(runForce),
		a.rerunCommand(runRerun),
		a.simulateCommand(runSimulate),
		a.explainCommand(),
		a.schemaCommand(),
		a.manCommand(),
	)
	completionCommand(root)
	return root
}

// helpCommand is help COMMAND, the same as COMMAND --help.
func helpCommand(root *cobra.Command) *cobra.Command {
	return &cobra.Command{
		Use:   "help [COMMAND]",
		Short: "How a command is called, and what it prints",
		RunE: func(_ *cobra.Command, args []string) error {
			if len(args) == 0 {
				return root.Help()
			}
			cmd, rest, err := root.Find(args)
			if err != nil || cmd == root || len(rest) > 0 {
				return unknownCommand(root, args[0])
			}
			cmd.InitDefaultHelpFlag()
			return cmd.Help()
		},
	}
}

// unknownCommand suggests the commands that the word is near to.
func unknownCommand(root *cobra.Command, name string) error {
	var names []string
	for _, c := range root.Commands() {
		if c.IsAvailableCommand() {
			names = append(names, c.Name())
		}
	}
	remedy := "the commands are listed by beadwell --help"
	if near := nearest(name, append(names, "version")); near == "version" {
		remedy = "write beadwell --version"
	} else if near != "" {
		remedy = "did you mean beadwell " + near + "?"
	}
	return usageError(remedy, "%q is not a command", name)
}

// flagError turns an error of the flag parser into one with a next step.
func (a *app) flagError(cmd *cobra.Command, err error) error {
	if errors.Is(err, pflag.ErrHelp) {
		return err
	}
	if !cmd.HasParent() && len(a.args) > 0 && !strings.HasPrefix(a.args[0], "-") {
		return unknownCommand(cmd, a.args[0]) // whose flags the parser took for those of the root
	}
	var setting *session.Error
	if errors.As(err, &setting) {
		return settingsError(setting) // without what the flag parser puts in front
	}
	remedy := fmt.Sprintf("see %s --help", cmd.CommandPath())
	var (
		missing  *pflag.NotExistError
		valued   *pflag.ValueRequiredError
		invalid  *pflag.InvalidValueError
		unformed *pflag.InvalidSyntaxError
	)
	switch {
	case errors.As(err, &missing):
		return unknownFlag(cmd, missing, remedy)
	case errors.As(err, &valued):
		return usageError(formOf(valued.GetFlag()), "--%s needs a value", valued.GetFlag().Name)
	case errors.As(err, &invalid):
		return usageError(formOf(invalid.GetFlag()), "--%s %q is not %s", invalid.GetFlag().Name, invalid.GetValue(), kindOf(invalid.GetFlag()))
	case errors.As(err, &unformed):
		return usageError(remedy, "%q is not written like a flag", unformed.GetSpecifiedFlag())
	}
	return usageError(remedy, "%w", err)
}

func unknownFlag(cmd *cobra.Command, missing *pflag.NotExistError, remedy string) error {
	name := missing.GetSpecifiedName()
	if missing.GetSpecifiedShortnames() != "" {
		return usageError(remedy, "-%s is not a flag of %s", missing.GetSpecifiedShortnames(), cmd.CommandPath())
	}
	if near := nearest(name, flagNames(cmd)); near != "" {
		remedy = "did you mean --" + near + "?"
	}
	return usageError(remedy, "--%s is not a flag of %s", name, cmd.CommandPath())
}

// formOf shows how the value of a flag is written, as the help does.
func formOf(f *pflag.Flag) string {
	form, _ := pflag.UnquoteUsage(f)
	if strings.Contains(form, " ") {
		form = "'" + form + "'"
	}
	if form == "" { // true or false
		return "write --" + f.Name + " without a value"
	}
	return "write --" + f.Name + " " + form
}

func kindOf(f *pflag.Flag) string {
	switch f.Value.Type() {
	case "int":
		return "a whole number"
	case "uint64":
		return "a whole number from 0 to 18446744073709551615"
	case "bool":
		return "true or false"
	}
	return "a number"
}

func flagNames(cmd *cobra.Command) []string {
	var names []string
	cmd.Flags().VisitAll(func(f *pflag.Flag) { names = append(names, f.Name) })
	return names
}

// noArguments refuses positional arguments.
func noArguments(cmd *cobra.Command, args []string) error {
	if len(args) == 0 {
		return nil
	}
	return usageError("see "+cmd.CommandPath()+" --help", "%s takes no argument, but was given %q", cmd.CommandPath(), args[0])
}

// someArguments refuses an empty list; what names the arguments.
func someArguments(what string) cobra.PositionalArgs {
	return func(cmd *cobra.Command, args []string) error {
		if len(args) == 0 {
			return usageError("write: "+cmd.UseLine(), "%s needs %s", cmd.CommandPath(), what)
		}
		return nil
	}
}

// oneArgument refuses any number but one.
func oneArgument(what string) cobra.PositionalArgs {
	return func(cmd *cobra.Command, args []string) error {
		if len(args) != 1 {
			return usageError("write: "+cmd.UseLine(), "%s needs %s, but was given %d arguments", cmd.CommandPath(), what, len(args))
		}
		return nil
	}
}

// atMostOneArgument refuses more than one.
func atMostOneArgument(what string) cobra.PositionalArgs {
	return func(cmd *cobra.Command, args []string) error {
		if len(args) > 1 {
			return usageError("write: "+cmd.UseLine(), "%s takes one %s, but was given %d arguments", cmd.CommandPath(), what, len(args))
		}
		return nil
	}
}

// completionCommand gives the completion command of the command library errors like those of
// the other commands.
func completionCommand(root *cobra.Command) {
	root.InitDefaultCompletionCmd()
	for _, cmd := range root.Commands() {
		if cmd.Name() != "completion" {
			continue
		}
		cmd.Args = cobra.ArbitraryArgs
		cmd.RunE = func(cmd *cobra.Command, args []string) error {
			if len(args) == 0 {
				return usageError("write: beadwell completion bash, or zsh, fish, powershell", "beadwell completion needs the name of a shell")
			}
			return usageError("write: beadwell completion bash, or zsh, fish, powershell", "%q is not a shell that completion is made for", args[0])
		}
		for _, shell := range cmd.Commands() {
			shell.Args = noArguments
		}
	}
}

// notEmpty refuses an empty text for flags that take a name, which would be as
// if they were not there: the mistake of a variable without a value.
func notEmpty(cmd *cobra.Command, flags ...string) error {
	for _, name := range flags {
		if f := cmd.Flags().Lookup(name); f != nil && f.Changed && f.Value.String() == "" {
			return usageError("give a value, or leave it out", "--%s is empty", name)
		}
	}
	return nil
}

// oneOf checks the value of a flag that takes a word.
func oneOf(flag, value string, words ...string) error {
	for _, word := range words {
		if value == word {
			return nil
		}
	}
	return usageError("write --"+flag+" "+strings.Join(words, " or --"+flag+" "), "--%s %q is not known", flag, value)
}
