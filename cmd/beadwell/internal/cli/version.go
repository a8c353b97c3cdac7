package cli

import "runtime/debug"

// version is the version of the module, with the commit it was built from
// when the build knows it.
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "unknown"
	}
	return versionOf(info)
}

func versionOf(info *debug.BuildInfo) string {
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

// command is the command line as results keep it.
func (a *app) command() []string { return utf8Words(append([]string{"beadwell"}, a.args...)) }

// utf8Words are words of a command line as JSON can carry them: each byte that is no UTF-8 is U+FFFD, so that what
// is made from a result and what is made from its stored form are the same.
func utf8Words(words []string) []string {
	for i, word := range words {
		words[i] = string([]rune(word))
	}
	return words
}
