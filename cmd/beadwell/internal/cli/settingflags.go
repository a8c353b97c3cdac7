package cli

import (
	"slices"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"

	"beadwell/calib/session"
)

// settingFlags collects the settings of the command line.
type settingFlags struct {
	settings session.Settings
	given    []string // keys that were given, in the order of the command line
}

// settingFlag is the flag of one key; its text is read when it is parsed.
type settingFlag struct {
	key  session.Key
	into *settingFlags
	text string
}

// addSettingFlags adds a flag for each key of the session file. Without keys
// it adds all.
func addSettingFlags(flags *pflag.FlagSet, into *settingFlags, keys ...string) {
	for _, key := range session.Keys() {
		if len(keys) > 0 && !slices.Contains(keys, key.Name) {
			continue
		}
		meaning := key.Meaning
		if key.PerAxis {
			meaning += "; by axis as x=... or y=..."
		}
		if key.Default != "" {
			meaning += " (default " + key.Default + ")"
		}
		flags.Var(&settingFlag{key: key, into: into}, key.Flag, meaning)
		flags.Lookup(key.Flag).Annotations = map[string][]string{settingGroup: {key.Section()}}
	}
}

// settingGroup marks the flags that are settings, for the help.
const settingGroup = "beadwell_setting"

// Set reads the text as the setting.
func (f *settingFlag) Set(text string) error {
	if err := f.into.settings.Set(f.key.Name, "", text, session.FromFlag, "--"+f.key.Flag); err != nil {
		return err
	}
	f.text = text
	f.into.given = append(f.into.given, f.key.Name)
	return nil
}

func (f *settingFlag) String() string { return f.text }

// Type is shown in the help as the form of the value.
func (f *settingFlag) Type() string { return f.key.Placeholder }

// inRegistryOrder returns the flags of a command that are settings, in the
// order of the session file.
func inRegistryOrder(cmd *cobra.Command) []*pflag.Flag {
	var flags []*pflag.Flag
	for _, key := range session.Keys() {
		if f := cmd.LocalFlags().Lookup(key.Flag); f != nil && f.Annotations[settingGroup] != nil {
			flags = append(flags, f)
		}
	}
	return flags
}
