package cli

import "runtime/debug"

// version is the version of the module, with the commit it was built from
// when the build knows it.
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "unknown"
	}
	text := info.Main.Version
	if text == "" {
		text = "(devel)"
	}
	commit, changed := "", ""
	for _, s := range info.Settings {
		switch {
		case s.Key == "vcs.revision":
			commit = s.Value
		case s.Key == "vcs.modified" && s.Value == "true":
			changed = ", with local changes"
		}
	}
	if commit == "" {
		return text
	}
	return text + " (commit " + commit + changed + ")"
}
